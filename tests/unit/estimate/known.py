"""Plans and returns whose answer is known from elsewhere."""

from collections.abc import Mapping, Sequence
from dataclasses import replace

import shapely

from fieldplan.campaign.model import DesignTable
from fieldplan.design.model import Location, Locations
from fieldplan.frame.model import Stratum
from fieldplan.plan.model import Plan
from fieldplan.returns.model import LocationResult, LostLocation, Returns
from fieldplan.sizing.model import StratumSize
from tests.factories import (
    degrees,
    make_campaign,
    make_frame,
    make_list_frame,
    make_locations,
    make_plan,
    make_size,
)

WELLS = (4.1, 6.8, 2.2, 9.5, 5.0, 3.3, 7.1, 5.9)
"""Eight of fourteen wells, invented; worked by hand to 5.49, 0.54 and 4.21 to 6.77."""


def result(name: str, value: float, *, stratum: str = "site", **changes: object) -> LocationResult:
    """Make one used result; ``low`` and ``high`` may differ for a non-detect."""
    parts: dict[str, object] = {
        "location_id": name,
        "stratum": stratum,
        "location_class": "random",
        "sample_ids": (f"S-{name}",),
        "as_reported": (f"{value:g}",),
        "low": value,
        "half": value,
        "high": value,
        "detected": True,
        "used": True,
        "why_not": "",
        "latitude": 52.1,
        "longitude": -1.9,
    }
    return LocationResult(**{**parts, **changes})  # type: ignore[arg-type]


def non_detect(name: str, limit: float, *, stratum: str = "site") -> LocationResult:
    """Make a result of ``<limit``."""
    return result(
        name, limit / 2, stratum=stratum, low=0.0, high=limit, detected=False,
        as_reported=(f"<{limit:g}",),
    )  # fmt: skip


def returned(
    results: Sequence[LocationResult], lost: Sequence[LostLocation] = (), **changes: object
) -> Returns:
    """Put results together as they come from reconciling."""
    parts: dict[str, object] = {
        "analyte": "lead",
        "results": tuple(results),
        "lost": tuple(lost),
        "matched": len(results),
        "planned_samples": len(results) + len(lost),
        "extra": 0,
        "needs_you": (),
        "lab_file": "labs.csv",
        "lab_sha256": "a" * 64,
    }
    return Returns(**{**parts, **changes})  # type: ignore[arg-type]


def list_plan(*, layout: str = "simple-random", units: int = 14, planned: int = 8) -> Plan:
    """A list of wells, no strata, planned with sigma 3.1 for a standard error of 0.9."""
    frame = make_list_frame()
    unit = frame.strata[0].units[0]
    wells = tuple(replace(unit, unit_id=f"MW-{n + 1}") for n in range(units))
    stratum = Stratum("site", float(units), 1.0, None, wells)
    frame = replace(frame, strata=(stratum,))
    design = DesignTable(layout=layout)  # type: ignore[arg-type]
    sizes = (StratumSize("site", 1.0, 3.1, min(7, planned), planned, 0, population=units),)
    size = replace(
        make_size(), strata=sizes, needed=min(7, planned), planned=planned, standard_error=0.8285,
        target_standard_error=0.9, target="standard error of the mean ≤ 0.9 mg/kg",
    )  # fmt: skip
    return make_plan(
        campaign=make_campaign(design=(design,)),
        frame=frame,
        size=size,
        locations=_places({"site": planned}),
    )


def strata_plan(
    weights: Mapping[str, float],
    sigmas: Mapping[str, float],
    counts: Mapping[str, int],
    *,
    standard_error: float = 9.0,
) -> Plan:
    """A stratified area plan with these weights, sigmas and counts."""
    strata = tuple(
        Stratum(name, weight * 1e4, weight, shapely.box(0, 0, 100, 100 * weight))
        for name, weight in weights.items()
    )
    sizes = tuple(
        StratumSize(name, weights[name], sigmas[name], counts[name], counts[name], 0)
        for name in weights
    )
    total = sum(counts.values())
    size = replace(
        make_size(), strata=sizes, needed=total, planned=total, standard_error=standard_error
    )
    return make_plan(
        frame=replace(make_frame(), strata=strata), size=size, locations=_places(counts)
    )


def _places(counts: Mapping[str, int]) -> Locations:
    latitude, longitude = degrees(10, 10)
    places = tuple(
        Location(
            f"{stratum}-{n}", f"X{n}", "random", stratum, 10, 10, latitude, longitude, n, 1.0, 1.0
        )
        for stratum, count in counts.items()
        for n in range(1, count + 1)
    )
    return replace(make_locations(), places=places, asked=len(places), realised=len(places))
