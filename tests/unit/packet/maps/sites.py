"""Plans of many shapes and sizes for the printed maps, placed by numpy and not by the tool."""

from itertools import pairwise

import numpy as np
import shapely
from pyproj import Transformer

from fieldplan.campaign.model import Paper
from fieldplan.design.model import Location, Locations
from fieldplan.frame.model import (
    ExcludedArea,
    Frame,
    Population,
    SiteProjection,
    Stratum,
)
from fieldplan.plan.model import Plan
from tests.factories import make_campaign, make_list_frame, make_plan


def make_outline(radius: float) -> shapely.Polygon:
    """An uneven outline about ``radius`` metres from its middle to its edge."""
    turn = np.linspace(0, 2 * np.pi, 80, endpoint=False)
    reach = radius * (1 + 0.25 * np.sin(2 * turn + 1) + 0.15 * np.sin(3 * turn))
    return shapely.Polygon(np.column_stack([reach * np.cos(turn), reach * np.sin(turn)]))


def make_area_plan(
    outline: shapely.Polygon,
    count: int,
    *,
    paper: str = "A4",
    strata: int = 1,
    spread_m: float | None = None,
    centre: tuple[float, float] = (52.10, -1.90),
    assumed: bool = False,
    excluded: tuple[shapely.Polygon, ...] = (),
) -> Plan:
    """A plan with ``count`` places all over an outline, or heaped within ``spread_m``."""
    projection = SiteProjection(*centre)
    to_degrees = Transformer.from_crs(projection.definition, "EPSG:4326", always_xy=True)
    random = np.random.default_rng(7)
    west, south, east, north = outline.bounds
    places = []
    while len(places) < count:
        x, y = random.uniform(west, east), random.uniform(south, north)
        if spread_m is not None:
            x, y = random.normal(0, spread_m, 2)
        if not outline.contains(shapely.Point(x, y)):
            continue
        order = len(places) + 1
        longitude, latitude = to_degrees.transform(x, y)
        kind = "alternate" if order % 5 == 0 else "random"
        places.append(
            Location(
                f"HL-A-{order:03d}",
                f"HLA{order:03d}",
                kind,
                "site",
                round(x, 2),
                round(y, 2),
                round(latitude, 7),
                round(longitude, 7),
                order,
                0.1,
                1 / count,
            )
        )
    edges = np.linspace(west, east, strata + 1)
    parts = [outline.intersection(shapely.box(a, south, b, north)) for a, b in pairwise(edges)]
    frame = Frame(
        kind="area",
        projection=projection,
        strata=tuple(
            Stratum(f"part {number}", part.area, part.area / outline.area, part)
            for number, part in enumerate(parts, start=1)
        ),
        boundary=outline,
        population=Population("m²", outline.area, 0.0, outline.area, 1.0, ("All of it.",)),
        excluded=tuple(
            ExcludedArea(f"reason {number}", "x.geojson", 0.0, part.area, part)
            for number, part in enumerate(excluded, start=1)
        ),
        sources=("boundary.geojson: EPSG:4326, no datum shift needed",),
        boundary_assumed=assumed,
    )
    return make_plan(
        campaign=make_campaign(paper=Paper(size=paper)),
        frame=frame,
        locations=Locations("simple-random", 1, 1, tuple(places), count, count),
    )


def make_list_plan() -> Plan:
    """Every second of fourteen wells."""
    frame = make_list_frame()
    places = tuple(
        Location(
            unit.unit_id,
            f"QF{order:02d}",
            "random",
            "site",
            unit.easting,
            unit.northing,
            unit.latitude,
            unit.longitude,
            order,
            0.5,
            1 / 7,
        )
        for order, unit in enumerate(frame.strata[0].units[::2], start=1)
    )
    locations = Locations("simple-random", 1, 1, places, 7, 7)
    return make_plan(frame=frame, locations=locations)
