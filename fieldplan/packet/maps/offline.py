"""A map page with everything inside: no script, style or image from anywhere else."""

from html import escape
from typing import Any

import folium
from branca.element import Element, Figure, MacroElement
from jinja2 import Template

from fieldplan.packet.assets import LEAFLET, leaflet_script, leaflet_styles, read_asset

TILES = "https://tile.openstreetmap.org"
OWN_SCRIPTS = ("map_grid.js", "map_tools.js", "screen_map.js")

# folium's popups and maps call jQuery in two places only; this stands in for both.
_JQUERY_STAND_IN = """function $(what) {
  if (what === document) { return {ready: (call) => call()}; }
  const holder = document.createElement("template");
  holder.innerHTML = what.trim();
  return [holder.content.firstChild];
}"""

# Above 84 degrees the web's usual projection tears the map apart or ends (85.06 degrees).
_POLAR_CRS = """L.CRS.Fieldplan%(name)s = L.extend({}, L.CRS.EPSG4326, {code: "local",
  transformation: new L.Transformation(%(scale).10f / 180, 1, -1 / 180, 0.5)});"""


# A character of private use that stands for "{" while folium renders, see ``inert``.
_BRACE = "\ue000"


def inert(value: Any) -> Any:
    """Take the meaning from braces in data that goes through folium.

    folium renders a layer and then reads the result as a template once more, so that typed
    ``{{ … }}`` would be run while the page is written. ``render_offline`` puts the braces back.

    Parameters
    ----------
    value : str, list, dict or anything else
        Data of a layer; keys of dicts are ours and stay.

    Examples
    --------
    >>> inert({"name": ["{{ 7 * 7 }}", 1]})
    {'name': ['\ue000\ue000 7 * 7 }}', 1]}
    """
    if isinstance(value, str):
        return value.replace(_BRACE, "\ufffd").replace("{", _BRACE)
    if isinstance(value, dict):
        return {key: inert(held) for key, held in value.items()}
    if isinstance(value, list):
        return [inert(held) for held in value]
    return value


class OfflineMap(folium.Map):
    """A folium map whose lists of remote scripts and styles are empty."""

    def __init__(self, **options: Any) -> None:
        super().__init__(**options)
        self.default_js = []
        self.default_css = []


class Raw(Element):
    """Text that goes into the page as it stands; braces in it mean nothing to the template."""

    _template = Template("{{ this.text }}")

    def __init__(self, text: str) -> None:
        super().__init__()
        self.text = text


class Call(MacroElement):
    """A call of one of our own functions after the map and its layers exist.

    Parameters
    ----------
    function : str
    facts : dict
        Passed as data: written so that nothing in it can end the script.
    layers : str
        A JavaScript object literal of layer names, without braces.
    """

    _template = Template(
        "{% macro script(this, kwargs) %}"
        "{{ this.function }}({{ this._parent.get_name() }}, {{ this.facts|tojson }}, "
        "{ {{ this.layers() }} });"
        "{% endmacro %}"
    )

    def __init__(self, function: str, facts: dict[str, Any], layers: dict[str, Any]) -> None:
        super().__init__()  # type: ignore[no-untyped-call]
        self._name = "Call"
        self.function = function
        self.facts = inert(facts)
        self._layers = layers

    def layers(self) -> str:
        """Write the layers by the names that they have when the page is rendered."""
        return ", ".join(f"{key}: {_names(value)}" for key, value in self._layers.items())


def _names(value: Any) -> str:
    if isinstance(value, list):
        return "[" + ", ".join(one.get_name() for one in value) + "]"
    return str(value.get_name())


def figure_of(page: OfflineMap) -> Figure:
    """Give the page that a map stands on."""
    figure = page.get_root()
    assert isinstance(figure, Figure)
    return figure


def add_head(page: OfflineMap, *, title: str, scripts: str = "") -> None:
    """Put the map library, our own scripts and styles, and a policy against requests in the head.

    Parameters
    ----------
    page : OfflineMap
    title : str
        Of the window; escaped here.
    scripts : str
        Further script text, run after the map library.
    """
    root = figure_of(page)
    root.title = escape(title)
    policy = (
        f"default-src 'none'; script-src 'unsafe-inline'; style-src 'unsafe-inline'; "
        f"img-src data: {TILES}"
    )
    licence = read_asset(f"{LEAFLET}/LICENSE").replace("*/", "")
    script = "\n".join([f"/* {licence}*/", leaflet_script(), _JQUERY_STAND_IN, scripts])
    own = "\n".join(read_asset(name) for name in OWN_SCRIPTS)
    parts = {
        "policy": f'<meta http-equiv="Content-Security-Policy" content="{policy}">',
        "leaflet_css": f"<style>{leaflet_styles()}</style>",
        "leaflet_js": f"<script>{_inside_script(script)}</script>",
        "own_js": f"<script>{_inside_script(own)}</script>",
    }
    for place, (name, text) in enumerate(parts.items(), start=1):
        root.header.add_child(Raw(text), name=name, index=place)
    # folium adds its own styles when it renders the map; ours come last and win.
    root.header.add_child(Raw(f"<style>{read_asset('screen_map.css')}</style>"), name="own_css")


def polar_crs(latitude: float) -> tuple[str, str]:
    """Give the name and the script of a projection for one polar site."""
    from math import cos, radians

    scale = cos(radians(latitude))
    return "FieldplanLocal", _POLAR_CRS % {"name": "Local", "scale": scale}


def render_offline(page: OfflineMap) -> str:
    """Render the page; the same map gives the same text.

    Parameters
    ----------
    page : OfflineMap

    Returns
    -------
    str
        HTML.
    """
    root = figure_of(page)
    _number_elements(root)
    html = str(root.render()).replace("\\ue000", "\\u007b").replace(_BRACE, "{")
    return html.replace("<html>", '<html lang="en">', 1)


def _number_elements(root: Element) -> None:
    """Name elements by their position, where folium draws 32 random digits each."""
    waiting, number = [root], 0
    while waiting:
        element = waiting.pop(0)
        element._id = f"{number:04d}"
        number += 1
        inner = [getattr(element, part, None) for part in ("header", "html", "script")]
        waiting += [one for one in inner if isinstance(one, Element)]
        waiting += list(element._children.values())


def _inside_script(text: str) -> str:
    return text.replace("</script", "<\\/script")
