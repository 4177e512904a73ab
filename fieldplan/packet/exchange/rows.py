"""What every point file says of a location: one row, made once from the plan."""

from dataclasses import dataclass

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

OFFICE_COLUMNS = (*CREW_COLUMNS, "inclusion_probability", "weight")
"""The crew's columns and what the estimate needs."""

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
            "list_order": place.list_order or None,
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


def text_of(value: Cell) -> str:
    """Write a cell as text: degrees, metres and shares without exponents, nothing as empty.

    Examples
    --------
    >>> text_of(None), text_of(3), text_of(0.0000123), text_of("a")
    ('', '3', '0.0000123', 'a')
    """
    if value is None:
        return ""
    if isinstance(value, float):
        return f"{value:.12f}".rstrip("0").rstrip(".")
    return str(value)
