"""Frames along lines built by hand: two branches, one with a gap, in whole millimetres."""

import shapely

from fieldplan.frame.model import Branch, Frame, Population, Reach, Stratum
from tests.factories import PROJECTION

MAIN = shapely.LineString([(0, 0), (300, 400), (300, 1000)])
"""1100 m: an edge of 500 m, then one of 600 m due north."""
ARM = shapely.LineString([(900, 1000), (300, 1000)])
"""600 m due west, into the end of the main branch."""

UPPER = (
    Reach("main", 0.0, 400.0, shapely.LineString([(0, 0), (240, 320)])),
    Reach("main", 450.0, 500.0, shapely.LineString([(270, 360), (300, 400)])),
)
"""450 m with a gap of 50 m."""
LOWER = (
    Reach("main", 500.0, 1100.0, shapely.LineString([(300, 400), (300, 1000)])),
    Reach("arm", 0.0, 600.0, ARM),
)
"""1200 m on two branches."""


def line_frame(*, strata: bool = True) -> Frame:
    """A frame of 1650 m in one stratum or two."""
    parts = {"upper": UPPER, "lower": LOWER} if strata else {"site": UPPER + LOWER}
    net = 1650.0
    found = tuple(
        Stratum(
            name,
            sum(reach.length_m for reach in reaches),
            sum(reach.length_m for reach in reaches) / net,
            shapely.MultiLineString([reach.geometry for reach in reaches]),
            (),
            reaches,
        )
        for name, reaches in sorted(parts.items())
    )
    return Frame(
        kind="line",
        projection=PROJECTION,
        strata=found,
        boundary=shapely.MultiLineString([MAIN, ARM]),
        population=Population("m", 1700.0, 50.0, net, net / 1700.0, ("Half a sentence.",)),
        branches=(Branch("main", 1100.0, MAIN), Branch("arm", 600.0, ARM)),
    )
