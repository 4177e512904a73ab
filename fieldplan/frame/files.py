"""One door for all vector files: what a file is is seen from its first bytes, not its name."""

from pathlib import Path

from fieldplan.base.errors import FrameError
from fieldplan.base.files import NOT_ORDINARY, is_ordinary
from fieldplan.campaign.text import near_names
from fieldplan.frame.columns import ColumnMap
from fieldplan.frame.geojson import read_geojson
from fieldplan.frame.layer import Layer, check_layer
from fieldplan.frame.markup import read_gpx, read_kml, read_kmz, root_name
from fieldplan.frame.packed import (
    GEOPACKAGE_MAGIC,
    SHAPEFILE_MAGIC,
    read_geopackage,
    read_shapefile,
)
from fieldplan.frame.rows import read_rows

LARGEST_FILE = 100_000_000
_ACCEPTED = "export it as GeoJSON, GeoPackage, Shapefile, KML, GPX or CSV."


def read_layer(
    folder: Path, typed: str, *, wanted: str = "polygon", named: ColumnMap | None = None
) -> Layer:
    """Read the file that a campaign names.

    Parameters
    ----------
    folder : Path
        Where relative paths start.
    typed : str
        As in the campaign file: a path, with ``#layer`` behind it for one layer of a GeoPackage.
    wanted : str
        ``polygon``, ``point``, ``line`` or ``any``: which layer of several is meant.
    named : ColumnMap, optional
        Columns as the campaign file names them.

    Returns
    -------
    Layer
        Not empty; all coordinates finite.

    Raises
    ------
    FrameError
        Missing, unreadable, too large, of another kind, damaged, or empty.
    """
    path, layer = split_layer(folder, typed)
    content = read_bytes(path, typed)
    if content.startswith(GEOPACKAGE_MAGIC):
        found = read_geopackage(path, typed, layer=layer, wanted=wanted)
    elif layer:
        message = f"{typed}: only a GeoPackage has layers to name with '#'; take it out."
        raise FrameError(message)
    elif content.startswith(SHAPEFILE_MAGIC):
        found = read_shapefile(path, typed)
    else:
        found = _read_text(content, path, typed, named)
    _refuse_coordinates(found, named)
    return check_layer(found)


def _refuse_coordinates(layer: Layer, named: ColumnMap | None) -> None:
    """Refuse names for columns with coordinates where a file has its coordinates otherwise."""
    needless = [ours for ours in named.columns if ours != "location_id"] if named else []
    if needless and layer.format != "CSV":
        message = (
            f"{layer.name} is no table, its places need no columns; take {', '.join(needless)} "
            f"out of columns in {named.table if named else ''}."
        )
        raise FrameError(message)


def _read_text(content: bytes, path: Path, typed: str, named: ColumnMap | None) -> Layer:
    """Read a format that is text, or KML in a zip archive."""
    root = root_name(content)
    if content.startswith(b"PK"):
        return read_kmz(content, typed)
    if root == "kml":
        return read_kml(content, typed)
    if root == "gpx":
        return read_gpx(content, typed)
    if root:
        message = f"{typed} is XML of another kind (<{root}>); {_ACCEPTED}"
        raise FrameError(message)
    if content.lstrip(b"\xef\xbb\xbf \t\r\n").startswith((b"{", b"[")):
        return read_geojson(content, typed)
    if path.suffix.lower() in (".csv", ".txt", ".tsv"):
        return read_rows(content, typed, named=named)
    message = f"{typed} is not a map file that can be read, whatever its name says; {_ACCEPTED}"
    raise FrameError(message)


def split_layer(folder: Path, typed: str) -> tuple[Path, str]:
    """Part ``site.gpkg#parcels`` into the path and the layer; a file so named goes first."""
    whole = folder / typed
    if "#" not in typed or whole.exists():
        return whole, ""
    path, _, layer = typed.rpartition("#")
    return folder / path, layer


def read_bytes(path: Path, typed: str) -> bytes:
    """Read a file whole, or say why it cannot be read."""
    try:
        if path.is_dir():
            message = f"{typed} is a folder; name the file in it."
            raise FrameError(message)
        if not is_ordinary(path):
            message = f"{typed} {NOT_ORDINARY}; save it as a file and name that."
            raise FrameError(message)
        size = path.stat().st_size
        if size > LARGEST_FILE:
            most = LARGEST_FILE / 1e6
            message = f"{typed} has {size / 1e6:,.0f} MB, more than {most:.0f} MB; simplify it."
            raise FrameError(message)
        content = path.read_bytes()
    except FileNotFoundError as fault:
        near = " or ".join(near_names(path))
        hint = f"did you mean {near}?" if near else f"looked for it in {path.parent.name or '.'}/."
        message = f"{typed} is not there; {hint}"
        raise FrameError(message) from fault
    except (OSError, ValueError) as fault:
        message = f"{typed} cannot be read ({getattr(fault, 'strerror', None) or fault})."
        raise FrameError(message) from fault
    if not content.strip():
        message = f"{typed} is empty; export it again."
        raise FrameError(message)
    return content
