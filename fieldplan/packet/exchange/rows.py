"""What every point file says of a location: one row, made once from the plan."""

from collections.abc import Sequence
from dataclasses import dataclass
from decimal import Decimal

from fieldplan.design.model import Location
from fieldplan.frame.projection import dms, site_zone, utm
from fieldplan.packet.exchange.plain_text import plain
from fieldplan.plan.model import Plan

DATUM = "WGS 84"
CREW_COLUMNS = (
    "location_id", "short_name", "class", "stratum", "list_order", "alternate_for",
    "latitude", "longitude", "latitude_dms", "longitude_dms",
    "utm_zone", "easting", "northing", "datum",
    "sample_ids", "depth_top_m", "depth_bottom_m", "reason", "revision", "status",
)  # fmt: skip
"""Columns that the crew needs; nothing here tells a duplicate from its parent."""

LINE_COLUMNS = ("branch", "along_m")
"""Where a place on a line lies; in the files of such plans alone, behind the stratum."""

OFFICE_COLUMNS = (*CREW_COLUMNS, "inclusion_probability", "weight")
"""The crew's columns and what the estimate needs."""

DECIMALS = {"latitude": 7, "longitude": 7, "easting": 1, "northing": 1, "along_m": 2}

Cell = str | int | float | None


@dataclass(frozen=True)
class PointRow:
    """One location with all its coordinate forms and jars.

    Parameters
    ----------
    location : Location
    latitude_dms, longitude_dms : str
        To 0.001″.
    utm_zone : str
        One zone for the whole site, e.g. ``30N``.
    easting, northing : float
        UTM metres, to 0.1.
    sample_ids : tuple of str
        As many as jars, in alphabetical order, which says nothing of their roles.
    depth_top_m, depth_bottom_m : float or None
    reason : str
        Why a targeted place was chosen; empty for others.
    revision, status : str
    """

    location: Location
    latitude_dms: str
    longitude_dms: str
    utm_zone: str
    easting: float
    northing: float
    sample_ids: tuple[str, ...]
    depth_top_m: float | None
    depth_bottom_m: float | None
    reason: str
    revision: str
    status: str

    def cells(self) -> dict[str, Cell]:
        """Give the row by column name, texts plain, numbers as numbers, nothing as None."""
        place = self.location
        return {
            "location_id": plain(place.location_id),
            "short_name": plain(place.short_name),
            "class": place.location_class,
            "stratum": plain(place.stratum),
            "branch": plain(place.branch),
            "along_m": place.along_m,
            "list_order": place.list_order,
            "alternate_for": plain(place.alternate_for),
            "latitude": place.latitude,
            "longitude": place.longitude,
            "latitude_dms": self.latitude_dms,
            "longitude_dms": self.longitude_dms,
            "utm_zone": self.utm_zone,
            "easting": self.easting,
            "northing": self.northing,
            "datum": DATUM,
            "sample_ids": " ".join(plain(name) for name in self.sample_ids),
            "depth_top_m": self.depth_top_m,
            "depth_bottom_m": self.depth_bottom_m,
            "reason": plain(self.reason),
            "revision": plain(self.revision),
            "status": plain(self.status),
            "inclusion_probability": place.inclusion_probability,
            "weight": place.weight,
        }

    def values(self, columns: Sequence[str]) -> list[Cell]:
        """Give the cells of some columns, in their order."""
        cells = self.cells()
        return [cells[name] for name in columns]


def point_rows(plan: Plan) -> tuple[PointRow, ...]:
    """Make one row per location, in the plan's order.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    tuple of PointRow
    """
    zone = site_zone(plan.frame.projection)
    reasons = {place.place_id: place.reason for place in plan.frame.targeted}
    jars: dict[str, list[str]] = {}
    depths: dict[str, tuple[float | None, float | None]] = {}
    for sample in plan.samples.samples:
        jars.setdefault(sample.location_id, []).append(sample.sample_id)
        depths.setdefault(sample.location_id, (sample.depth_top_m, sample.depth_bottom_m))
    rows = []
    for place in plan.locations.places:
        grid = utm(place.latitude, place.longitude, zone=zone)
        north, east = dms(place.latitude, place.longitude).split(", ")
        top, bottom = depths.get(place.location_id, (None, None))
        targeted = place.location_class == "targeted"
        rows.append(
            PointRow(
                location=place,
                latitude_dms=north,
                longitude_dms=east,
                utm_zone=grid.zone_name,
                easting=round(grid.easting, 1),
                northing=round(grid.northing, 1),
                sample_ids=tuple(sorted(jars.get(place.location_id, ()))),
                depth_top_m=top,
                depth_bottom_m=bottom,
                reason=reasons.get(place.location_id, "") if targeted else "",
                revision=plan.revision_name,
                status=plan.status,
            )
        )
    return tuple(rows)


def columns_of(plan: Plan, columns: Sequence[str]) -> tuple[str, ...]:
    """Put branch and distance behind the stratum where places lie on lines."""
    if plan.frame.kind != "line":
        return tuple(columns)
    at = list(columns).index("stratum") + 1
    return (*columns[:at], *LINE_COLUMNS, *columns[at:])


def along_words(place: Location) -> str:
    """Say how far along which branch a place lies; empty off lines.

    Examples
    --------
    >>> from tests.factories import make_plan
    >>> along_words(make_plan().locations.places[0])
    ''
    """
    return "" if place.along_m is None else f"{place.branch}, {place.along_m:.2f} m from its start"


def text_of(column: str, value: Cell) -> str:
    """Write a cell as text: coordinates with fixed decimals, no exponents, nothing as empty.

    Examples
    --------
    >>> text_of("latitude", 52.1), text_of("easting", 575365.8), text_of("reason", None)
    ('52.1000000', '575365.8', '')
    >>> text_of("list_order", 3), text_of("depth_top_m", 0.0), text_of("weight", 1.23e-05)
    ('3', '0', '0.0000123')
    """
    if value is None:
        return ""
    if column in DECIMALS:
        return f"{value:.{DECIMALS[column]}f}"
    if isinstance(value, float):
        digits = f"{Decimal(repr(value)):f}"
        return digits.removesuffix(".0")
    return str(value)
