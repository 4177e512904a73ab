"""Every point file is read again by another parser before a packet is accepted."""

from collections.abc import Callable, Iterable
from html import escape
from pathlib import Path

from pyproj import Geod

from fieldplan.base.errors import RecordError
from fieldplan.design.model import Location
from fieldplan.packet.exchange.geojson import read_geojson
from fieldplan.packet.exchange.geopackage import read_geopackage
from fieldplan.packet.exchange.gpx import read_gpx
from fieldplan.packet.exchange.kml import read_kml
from fieldplan.packet.exchange.plain_text import plain, spreadsheet_cell
from fieldplan.packet.exchange.points_csv import read_points_csv, read_samples_key
from fieldplan.packet.exchange.read_points import ReadPoint
from fieldplan.packet.exchange.workbook import read_workbook
from fieldplan.plan.model import Plan

TOLERANCE_M = 0.2
_ELLIPSOID = Geod(ellps="WGS84")
SAMPLES_KEY = "samples_key.csv"

Reader = Callable[[Path], list[ReadPoint]]
Spelling = Callable[[str], str]

READERS: dict[str, tuple[Reader, Spelling]] = {
    ".csv": (read_points_csv, spreadsheet_cell),
    ".gpx": (read_gpx, plain),
    ".kml": (read_kml, lambda text: escape(plain(text))),
    ".gpkg": (read_geopackage, plain),
    ".geojson": (read_geojson, plain),
    ".xlsx": (read_workbook, plain),
}
"""For each kind of file its independent reader, and how a typed id is spelled there."""


def read_back(plan: Plan, paths: Iterable[Path]) -> None:
    """Compare every location in every file with the plan.

    Parameters
    ----------
    plan : Plan
    paths : iterable of Path
        Point files and the key to samples.

    Raises
    ------
    RecordError
        A file cannot be read, a location is missing, extra or under another id, or one lies
        more than 0.2 m from where it was planned.
    """
    for path in paths:
        if path.name == SAMPLES_KEY:
            problems = _key_problems(plan, path)
        else:
            reader, spelling = READERS[path.suffix]
            problems = _point_problems(plan, path, _read(reader, path), spelling)
        if problems:
            raise RecordError(*problems)


def _read(reader: Reader, path: Path) -> list[ReadPoint]:
    try:
        return reader(path)
    except Exception as fault:
        message = (
            f"{path.name} cannot be read back ({type(fault).__name__}: {fault}); "
            "nothing was kept. Pack again, and report it if it stays."
        )
        raise RecordError(message) from fault


def _point_problems(
    plan: Plan, path: Path, found: list[ReadPoint], spelling: Spelling
) -> list[str]:
    planned = {plain(place.short_name): place for place in plan.locations.places}
    problems = [
        f"{path.name}: location {planned[name].location_id!r} ({name}) is missing; "
        "nothing was kept."
        for name in sorted(set(planned) - {point.short_name for point in found})
    ]
    for point in found:
        place = planned.get(point.short_name)
        if place is None:
            problems.append(
                f"{path.name}: {point.short_name!r} is no location of {plan.revision_name}; "
                "nothing was kept."
            )
        else:
            problems += _place_problems(path, point, place, spelling)
    return problems


def _place_problems(path: Path, point: ReadPoint, place: Location, spelling: Spelling) -> list[str]:
    named = f"{path.name}: location {place.location_id!r} ({place.short_name})"
    if point.location_id != spelling(place.location_id):
        return [f"{named} reads back as {point.location_id!r}; nothing was kept."]
    apart = distance_m(point.latitude, point.longitude, place.latitude, place.longitude)
    if not apart <= TOLERANCE_M:
        return [
            f"{named} reads back {apart:.2f} m from where it was planned, "
            f"more than {TOLERANCE_M} m; nothing was kept."
        ]
    return []


def _key_problems(plan: Plan, path: Path) -> list[str]:
    wanted = [
        tuple(spreadsheet_cell(text) for text in (s.sample_id, s.location_id, s.qc_of))
        for s in plan.samples.samples
    ]
    found = read_samples_key(path)
    return [
        f"{path.name}: sample {one[0]!r} does not read back as written; nothing was kept."
        for one in sorted(set(wanted).symmetric_difference(found))
    ]


def distance_m(
    latitude: float, longitude: float, other_latitude: float, other_longitude: float
) -> float:
    """Measure metres between two places on the WGS 84 ellipsoid.

    Examples
    --------
    >>> round(distance_m(52.1, -1.9, 52.1, -1.899))
    69
    """
    return float(_ELLIPSOID.inv(longitude, latitude, other_longitude, other_latitude)[2])
