"""Files that travel with the package: the map library, unchanged, with licence and sums."""

import base64
import re
from importlib.resources import files

LEAFLET = "leaflet-1.9.4"


def read_asset(name: str) -> str:
    """Read one text file of this folder, e.g. ``screen_map.js``."""
    return files(__package__).joinpath(*name.split("/")).read_text(encoding="utf-8")


def leaflet_script() -> str:
    """Give the map library's script, its reference to a debugging file taken out.

    Examples
    --------
    >>> "sourceMappingURL" in leaflet_script()
    False
    """
    script = read_asset(f"{LEAFLET}/leaflet.js")
    return re.sub(r"\n//# sourceMappingURL=.*", "", script)


def leaflet_styles() -> str:
    """Give the map library's styles with every image as data inside.

    Examples
    --------
    >>> "url(images/" in leaflet_styles()
    False
    """
    folder = files(__package__) / LEAFLET

    def carry(found: re.Match[str]) -> str:
        image = folder.joinpath("images", found[1]).read_bytes()
        return f"url(data:image/png;base64,{base64.b64encode(image).decode()})"

    styles = read_asset(f"{LEAFLET}/leaflet.css")
    return re.sub(r"url\(images/([\w-]+\.png)\)", carry, styles)
