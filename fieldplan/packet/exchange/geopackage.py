"""GeoPackage for a desktop GIS: locations, boundary, strata, exclusions, and how to draw them."""

import sqlite3
import tempfile
from collections.abc import Iterator
from contextlib import closing, contextmanager
from pathlib import Path
from typing import TYPE_CHECKING

import shapely

from fieldplan.packet.exchange.geopackage_style import style_rows
from fieldplan.packet.exchange.outlines import Outline, outlines, within_180
from fieldplan.packet.exchange.read_points import ReadPoint
from fieldplan.packet.exchange.rows import OFFICE_COLUMNS, columns_of, point_rows
from fieldplan.plan.model import Plan

if TYPE_CHECKING:
    from geopandas import GeoDataFrame

LAYERS = {"boundary": "boundary", "stratum": "strata", "excluded": "exclusions"}
# Older programs warn about files of the current 1.4, which we have no need of.
STANDARD_VERSION = "1.2"
_ENVELOPE_BYTES = (0, 32, 48, 48, 64)


def write_geopackage(plan: Plan) -> bytes:
    """Write four layers in degrees on WGS 84 and the table ``layer_styles``.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    bytes
        The same plan gives the same bytes: the stamp inside is the date of the plan.
    """
    import pandas
    from pyogrio import write_dataframe

    shapes = outlines(plan)
    with tempfile.TemporaryDirectory() as folder, _stamped(plan):
        path = Path(folder) / "locations.gpkg"
        write_dataframe(
            _locations(plan),
            path,
            layer="locations",
            geometry_type="Point",
            dataset_options={"VERSION": STANDARD_VERSION},
        )
        for kind, layer in LAYERS.items():
            chosen = [shape for shape in shapes if shape.kind == kind]
            lines = plan.frame.kind == "line"
            write_dataframe(
                _lines(chosen) if lines else _polygons(chosen),
                path,
                layer=layer,
                geometry_type="MultiLineString" if lines else "MultiPolygon",
                append=True,
            )
        styles = pandas.DataFrame(style_rows(shapes, plan.made_on))
        write_dataframe(styles, path, layer="layer_styles", append=True)
        return path.read_bytes()


def _locations(plan: Plan) -> "GeoDataFrame":
    from geopandas import GeoDataFrame

    rows = point_rows(plan)
    cells = [row.cells() for row in rows]
    columns = {name: [row[name] for row in cells] for name in columns_of(plan, OFFICE_COLUMNS)}
    spots = shapely.points([(r.location.longitude, r.location.latitude) for r in rows])
    return GeoDataFrame(columns, geometry=spots, crs="EPSG:4326")


def _polygons(shapes: list[Outline]) -> "GeoDataFrame":
    from geopandas import GeoDataFrame

    solid = [shapely.MultiPolygon(list(_parts(shape))) for shape in shapes]
    columns = {
        "name": [shape.name for shape in shapes],
        "area_m2": [round(shape.area_m2, 1) for shape in shapes],
    }
    return GeoDataFrame(columns, geometry=solid, crs="EPSG:4326").astype({"name": str})


def _lines(shapes: list[Outline]) -> "GeoDataFrame":
    from geopandas import GeoDataFrame

    drawn = [
        shapely.MultiLineString(
            [shapely.get_coordinates(p) for p in shapely.get_parts(within_180(shape.geometry))]
        )
        for shape in shapes
    ]
    columns = {
        "name": [shape.name for shape in shapes],
        "length_m": [round(shape.length_m, 1) for shape in shapes],
    }
    return GeoDataFrame(columns, geometry=drawn, crs="EPSG:4326").astype({"name": str})


def _parts(shape: Outline) -> Iterator[shapely.Polygon]:
    for part in shapely.get_parts(within_180(shape.geometry)):
        if isinstance(part, shapely.Polygon):
            yield part


@contextmanager
def _stamped(plan: Plan) -> Iterator[None]:
    """Let GDAL write the plan's date instead of the clock's, then give it its clock back."""
    from pyogrio import get_gdal_config_option, set_gdal_config_options

    before = get_gdal_config_option("OGR_CURRENT_DATE")
    set_gdal_config_options({"OGR_CURRENT_DATE": f"{plan.made_on.isoformat()}T00:00:00.000Z"})
    try:
        yield
    finally:
        set_gdal_config_options({"OGR_CURRENT_DATE": before})


def read_geopackage(path: Path) -> list[ReadPoint]:
    """Read the layer of locations with sqlite3 and a few bytes of the standard's own header.

    Parameters
    ----------
    path : Path

    Returns
    -------
    list of ReadPoint

    Notes
    -----
    A geometry is a header of 8 bytes, an envelope whose length stands in bits 1 to 3 of the
    flags, and well-known binary (OGC 12-128, GeoPackage Encoding Standard, clause 2.1.3).
    """
    with closing(sqlite3.connect(f"{path.resolve().as_uri()}?mode=ro", uri=True)) as connection:
        query = "SELECT short_name, location_id, geom FROM locations ORDER BY fid"
        found = connection.execute(query).fetchall()
    points = []
    for short_name, location_id, blob in found:
        start = 8 + _ENVELOPE_BYTES[(blob[3] >> 1) & 0b111]
        spot = shapely.from_wkb(blob[start:])
        points.append(ReadPoint(short_name, location_id, spot.y, spot.x))
    return points
