"""GeoJSON by RFC 7946: locations as points, longitude first, 7 decimals, no ``crs`` member."""

import json
from pathlib import Path

from fieldplan.packet.exchange.read_points import ReadPoint
from fieldplan.packet.exchange.rows import OFFICE_COLUMNS, columns_of, point_rows
from fieldplan.plan.model import Plan


def write_geojson(plan: Plan) -> bytes:
    """Write all locations with the office's columns, one feature a line.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    bytes
    """
    lines = []
    for row in point_rows(plan):
        cells = row.cells()
        feature = {
            "type": "Feature",
            "id": cells["short_name"],
            "geometry": {
                "type": "Point",
                "coordinates": [row.location.longitude, row.location.latitude],
            },
            "properties": {name: cells[name] for name in columns_of(plan, OFFICE_COLUMNS)},
        }
        lines.append(json.dumps(feature, ensure_ascii=False, allow_nan=False))
    body = ",\n".join(lines)
    return f'{{"type": "FeatureCollection", "features": [\n{body}\n]}}\n'.encode()


def read_geojson(path: Path) -> list[ReadPoint]:
    """Read locations with GDAL.

    Parameters
    ----------
    path : Path

    Returns
    -------
    list of ReadPoint
    """
    from pyogrio import read_dataframe

    table = read_dataframe(path, columns=["short_name", "location_id"], DATE_AS_STRING="YES")
    columns = (table["short_name"], table["location_id"], table.geometry)
    return [
        ReadPoint(name, location, point.y, point.x)
        for name, location, point in zip(*columns, strict=True)
    ]
