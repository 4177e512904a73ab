"""What the return says of each location, its samples taken together, and how far it moved."""

from collections.abc import Sequence
from contextlib import suppress
from dataclasses import dataclass
from datetime import date

from fieldplan.base.errors import LabError
from fieldplan.base.units import significant
from fieldplan.design.model import Location
from fieldplan.plan.model import Plan
from fieldplan.returns.model import FieldRow

FAR_M = 1000.0
"""A place further off than this, and than twice the site, is a slip of the pen."""


@dataclass(frozen=True)
class FieldFacts:
    """One location as the crew left it; ``taken`` is None where nothing was written."""

    taken: bool | None = None
    reason: str = ""
    replaced_by: str = ""
    note: str = ""
    latitude: float | None = None
    longitude: float | None = None
    moved_m: float | None = None

    @property
    def outside(self) -> bool:
        """Whether the crew found that the place does not belong to the population."""
        return self.reason == "outside"


def field_facts(
    plan: Plan, rows: Sequence[FieldRow], file_name: str
) -> tuple[dict[str, FieldFacts], list[str]]:
    """Bring the lines of each location together and measure how far it moved.

    Parameters
    ----------
    plan : Plan
    rows : sequence of FieldRow
    file_name : str
        For messages.

    Returns
    -------
    facts : dict of str to FieldFacts
        By location id; locations without a line are absent.
    notes : list of str
        Moves beyond the offset rule, out of the stratum or out of the population.

    Raises
    ------
    LabError
        An actual position lies absurdly far from its plan.
    """
    places = {place.location_id: place for place in plan.locations.places}
    lines: dict[str, list[FieldRow]] = {}
    for row in rows:
        if row.location_id in places:
            lines.setdefault(row.location_id, []).append(row)
    facts, notes, problems = {}, [], []
    for name, group in lines.items():
        fact = _joined(places[name], group)
        facts[name] = fact
        if fact.moved_m is not None and fact.moved_m > max(FAR_M, 2 * _site_size(plan)):
            problems.append(
                f"{file_name} row {group[0].row}: the actual position of {name} "
                f"({fact.latitude}, {fact.longitude}) lies {fact.moved_m / 1000:,.0f} km from the "
                "planned one. Check signs, and that latitude and longitude are not swapped."
            )
        elif fact.moved_m is not None:
            notes += _move_notes(plan, places[name], fact)
    if problems:
        raise LabError(*problems)
    return facts, notes


def first_collected(rows: Sequence[FieldRow]) -> str:
    """Give the earliest date of collection, as ISO text.

    Parameters
    ----------
    rows : sequence of FieldRow

    Returns
    -------
    str
        Empty where no line opens with year, month and day; other ways to write a date may be
        read in two ways and are not read.

    Examples
    --------
    >>> late = FieldRow(2, "A", "A-1", True, collected_at="2026-10-14 08:30")
    >>> first_collected([late, FieldRow(3, "B", "B-1", True, collected_at="3/4/26")])
    '2026-10-14'
    """
    days = []
    for row in rows:
        with suppress(ValueError):
            days.append(date.fromisoformat(row.collected_at[:10]).isoformat())
    return min(days, default="")


def _joined(place: Location, rows: Sequence[FieldRow]) -> FieldFacts:
    answers = [row.taken for row in rows if row.taken is not None]
    placed = next((row for row in rows if row.actual_latitude is not None), None)
    latitude = placed.actual_latitude if placed else None
    longitude = placed.actual_longitude if placed else None
    moved = None
    if latitude is not None and longitude is not None:
        moved = _distance(place, latitude, longitude)
    return FieldFacts(
        taken=any(answers) if answers else None,
        reason=next((row.reason for row in rows if row.reason), ""),
        replaced_by=next((row.replaced_by for row in rows if row.replaced_by), ""),
        note=next((row.note for row in rows if row.note), ""),
        latitude=latitude,
        longitude=longitude,
        moved_m=moved,
    )


def _distance(place: Location, latitude: float, longitude: float) -> float:
    """Metres on the ellipsoid, so that a slip to the other side of the Earth is measured too."""
    from pyproj import Geod

    _, _, metres = Geod(ellps="WGS84").inv(place.longitude, place.latitude, longitude, latitude)
    return float(metres)


def _site_size(plan: Plan) -> float:
    left, bottom, right, top = plan.frame.boundary.bounds
    return float(((right - left) ** 2 + (top - bottom) ** 2) ** 0.5)


def _move_notes(plan: Plan, place: Location, fact: FieldFacts) -> list[str]:
    rules = plan.campaign.field
    allowed = rules.offset_within_m + (rules.position_accuracy_m or 0.0)
    notes = []
    moved = fact.moved_m or 0.0
    if moved > max(allowed, 0.5):
        notes.append(
            f"{place.location_id} was taken {significant(moved)} m from its planned place; the "
            f"offset rule and the position accuracy allow {significant(allowed)} m."
        )
    there = _stratum_at(plan, fact)
    if place.location_class != "targeted" and there is not None and there != place.stratum:
        where = f"lies in stratum {there}" if there else "lies outside the population as mapped"
        notes.append(
            f"{place.location_id} as taken {where}. It was drawn in {place.stratum} and stays "
            "there with the weight it was drawn with."
        )
    return notes


def _stratum_at(plan: Plan, fact: FieldFacts) -> str | None:
    """Name the stratum at the actual position; empty outside all, None for a list.

    A position within its own accuracy of a stratum counts as inside it; of a line also one within
    the distance that a location may be moved.
    """
    import shapely

    from fieldplan.frame.projection import to_site

    if plan.frame.kind == "list" or fact.latitude is None or fact.longitude is None:
        return None
    easting, northing = to_site(plan.frame.projection, fact.latitude, fact.longitude)
    point = shapely.Point(float(easting), float(northing))
    accuracy = plan.campaign.field.position_accuracy_m or 0.0
    if plan.frame.kind == "line":
        accuracy += plan.campaign.field.offset_within_m
    near = [
        (float(shapely.distance(stratum.geometry, point)), stratum.name)
        for stratum in plan.frame.strata
    ]
    distance, name = min(near)
    return name if distance <= accuracy else ""
