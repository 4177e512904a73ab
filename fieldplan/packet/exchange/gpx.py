"""GPX 1.1 for receivers: locations as waypoints, outlines as tracks (GPX has no polygons)."""

from datetime import UTC, datetime, time
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from fieldplan.packet.exchange.outlines import outlines, rings, within_180
from fieldplan.packet.exchange.plain_text import plain
from fieldplan.packet.exchange.read_points import ReadPoint
from fieldplan.packet.exchange.rows import DATUM, PointRow, along_words, point_rows
from fieldplan.plan.model import Plan

if TYPE_CHECKING:
    from gpxpy.gpx import GPXTrack, GPXWaypoint

SYMBOLS = {"random": "Waypoint", "alternate": "Dot", "targeted": "Flag"}


def write_gpx(plan: Plan) -> bytes:
    """Write waypoints named by their short names, then boundary, strata and exclusions.

    ``cmt`` is what reaches a receiver: the long id and the jars; ``desc`` is for people.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    bytes
    """
    from gpxpy.gpx import GPX

    document = GPX()
    document.creator = "fieldplan"
    document.name = plain(f"{plan.revision_name} {plan.status}")
    document.description = plain(f"{plan.campaign.plan.title}. Datum {DATUM}.")
    document.time = datetime.combine(plan.made_on, time(), UTC)
    document.waypoints.extend(_waypoint(row) for row in point_rows(plan))
    for outline in outlines(plan):
        found = rings(within_180(outline.geometry))
        for number, ring in enumerate(found, start=1):
            title = outline.title if len(found) == 1 else f"{outline.title} ({number})"
            document.tracks.append(_track(title, ring))
    return str(document.to_xml(version="1.1")).encode("utf-8")


def _waypoint(row: PointRow) -> "GPXWaypoint":
    from gpxpy.gpx import GPXWaypoint

    cells = row.cells()
    jars = f"Samples: {cells['sample_ids']}" if cells["sample_ids"] else "No sample ids"
    told = [str(cells["location_id"]), f"stratum {cells['stratum']}", str(cells["class"])]
    told += [along_words(row.location)] if row.location.branch else []
    told += [f"alternate for {cells['alternate_for']}"] if cells["alternate_for"] else []
    told += [str(cells["reason"])] if cells["reason"] else []
    told += [jars, f"{row.utm_zone} {row.easting:.1f} {row.northing:.1f} {DATUM}", row.revision]
    return GPXWaypoint(
        latitude=row.location.latitude,
        longitude=row.location.longitude,
        name=str(cells["short_name"]),
        comment=f"{cells['location_id']}. {jars}",
        description="; ".join(told),
        symbol=SYMBOLS[row.location.location_class],
        type=row.location.location_class,
    )


def _track(title: str, ring: np.ndarray) -> "GPXTrack":
    from gpxpy.gpx import GPXTrack, GPXTrackPoint, GPXTrackSegment

    track = GPXTrack(name=title)
    corners = [GPXTrackPoint(float(latitude), float(longitude)) for longitude, latitude in ring]
    track.segments.append(GPXTrackSegment(corners))
    return track


def read_gpx(path: Path) -> list[ReadPoint]:
    """Read waypoints with GDAL.

    Parameters
    ----------
    path : Path

    Returns
    -------
    list of ReadPoint
        The long id is what stands before the first full stop and blank of the comment's end.
    """
    from pyogrio import read_dataframe

    table = read_dataframe(path, layer="waypoints", columns=["name", "cmt"])
    return [
        ReadPoint(name, comment.rpartition(". ")[0], point.y, point.x)
        for name, comment, point in zip(table["name"], table["cmt"], table.geometry, strict=True)
    ]
