"""Invented sites of awkward shape, in whole millimetres and as polygons."""

import shapely

from fieldplan.frame.model import Frame, ListUnit, Population, Stratum
from tests.factories import PROJECTION
from tests.unit.design.by_hand import Ring

# A bent field with a pond and a knoll cut out, west and south of the projection's centre too.
MEADOW: list[Ring] = [
    [
        (-83_127, -41_003),
        (52_411, -63_250),
        (140_009, 12_345),
        (97_600, 88_001),
        (30_030, 41_111),
        (-60_500, 95_777),
    ],
    [(10_000, -20_000), (40_000, -25_000), (35_500, 5_005)],
    [(-40_000, 20_000), (-30_000, 20_000), (-30_000, 30_000), (-40_000, 30_000)],
]
# Two yards apart, one a thin strip.
YARD: list[Ring] = [
    [(150_000, 0), (210_000, 4_000), (205_000, 70_000), (149_000, 66_000)],
    [(160_000, 80_000), (260_000, 140_000), (258_000, 143_000), (158_000, 83_000)],
]


def polygon(rings: list[Ring]) -> shapely.Polygon:
    """Make one polygon of a shell and its holes, in metres."""
    shell, *holes = ([(x / 1000, y / 1000) for x, y in ring] for ring in rings)
    return shapely.Polygon(shell, holes)


MEADOW_POLYGON = polygon(MEADOW)
YARD_POLYGON = shapely.MultiPolygon([polygon([ring]) for ring in YARD])


def area_frame(**geometries: shapely.Geometry) -> Frame:
    """Make a frame of these strata, in the order of their names."""
    total = sum(geometry.area for geometry in geometries.values())
    strata = tuple(
        Stratum(name, geometry.area, geometry.area / total, geometry)
        for name, geometry in sorted(geometries.items())
    )
    return Frame(
        kind="area",
        projection=PROJECTION,
        strata=strata,
        boundary=shapely.union_all(list(geometries.values())),
        population=Population("m²", total, 0.0, total, 1.0, ("All of it.",)),
    )


def list_frame(**sizes: int) -> Frame:
    """Make a list frame with so many wells in each stratum."""
    total = sum(sizes.values())
    strata = []
    for name, size in sorted(sizes.items()):
        wells = tuple(
            ListUnit(f"{name.upper()}-{i}", name, 10.0 * i, 5.0, 52.1 + i / 1000, -1.9)
            for i in range(1, size + 1)
        )
        strata.append(Stratum(name, float(size), size / total, None, wells))
    return Frame(
        kind="list",
        projection=PROJECTION,
        strata=tuple(strata),
        boundary=shapely.box(0, 0, 1000, 10),
        population=Population("units", total, 0.0, total, 1.0, ("All of them.",)),
    )
