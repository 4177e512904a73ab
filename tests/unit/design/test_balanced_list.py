"""Balanced lists: spread over the ground, equally likely everywhere, first parts like the whole."""

from collections import Counter

import numpy as np
import pytest
import shapely
from scipy.spatial import KDTree

from fieldplan.base.draws import Stream
from fieldplan.base.errors import DesignError
from fieldplan.design.area import Ground, draw_places
from fieldplan.design.balanced_list import (
    BalancedList,
    balanced_places,
    balanced_units,
    list_length,
)
from fieldplan.design.model import DrawnPlace, StratumCount
from fieldplan.frame.model import Frame, ListUnit
from tests.factories import make_list_frame
from tests.unit.design.sites import MEADOW_POLYGON, YARD_POLYGON, area_frame, list_frame

COUNTS = [StratumCount("meadow", 12, 4), StratumCount("yard", 7, 3)]
BOTH = area_frame(meadow=MEADOW_POLYGON, yard=YARD_POLYGON)


def drawn(frame: Frame, *counts: StratumCount, **changes: float) -> tuple[DrawnPlace, ...]:
    """Draw a balanced list with a fixed seed."""
    return BalancedList().draw(frame, counts, seed=5, design="main", **changes).places  # type: ignore[arg-type]


def wells(*spots: tuple[float, float]) -> list[ListUnit]:
    """Units of a list at these places."""
    return [ListUnit(f"W{i}", "site", e, n, 0.0, 0.0) for i, (e, n) in enumerate(spots)]


def test_every_place_lies_inside_a_site_with_holes() -> None:
    """Raster spots outside, or in a hole, must not survive."""
    for place in drawn(BOTH, *COUNTS):
        polygon = {"meadow": MEADOW_POLYGON, "yard": YARD_POLYGON}[place.stratum]
        assert polygon.contains(shapely.Point(place.easting, place.northing))


def test_alternates_and_other_strata_move_nobody() -> None:
    """What a crew holds stays, whatever is asked for besides."""
    few, many = drawn(BOTH, *COUNTS), drawn(BOTH, COUNTS[0], StratumCount("yard", 7, 40))
    assert many[: len(few)] == few
    alone = drawn(area_frame(yard=YARD_POLYGON), COUNTS[1])
    assert alone == tuple(place for place in few if place.stratum == "yard")
    assert [p.list_order for p in alone] == list(range(1, 11))
    assert [p.location_class for p in alone] == ["random"] * 7 + ["alternate"] * 3


def shares_near_edges(geometry: shapely.Geometry, planned: int, draws: int) -> tuple[float, float]:
    """Give the share of listed places, and of planned ones, within 4 m of any edge."""
    ground = Ground("meadow", geometry)
    inner = geometry.buffer(-4.0)
    shapely.prepare(inner)
    listed, first = [], []
    for seed in range(draws):
        places = balanced_places(ground, planned, (seed, "main", "meadow")) / 100
        near = ~shapely.contains_xy(inner, places[:, 0], places[:, 1])
        listed.append(near.mean())
        first.append(near[:planned].mean())
    return float(np.mean(listed)), float(np.mean(first))


@pytest.mark.slow
@pytest.mark.parametrize("inset_m", [0.0, 6.0])
def test_edges_and_holes_are_as_likely_as_the_middle(inset_m: float) -> None:
    """2,000 lists of 64: the edge gets its share within 2 %, with an inset and without.

    One standard error of so many is 0.6 %. The planned places get theirs within 4 binomial ones.
    """
    geometry = MEADOW_POLYGON.buffer(-inset_m)
    share = 1 - geometry.buffer(-4.0).area / geometry.area
    draws = 2000
    listed, first = shares_near_edges(geometry, 4, draws)
    assert listed == pytest.approx(share, rel=0.02)
    assert abs(first - share) <= 4 * (share * (1 - share) / (4 * draws)) ** 0.5


@pytest.mark.slow
def test_no_part_of_a_site_is_favoured() -> None:
    """Lists of a site in 12 parts, cut by a coarse lattice: each within 4 standard errors."""
    ground = Ground("meadow", MEADOW_POLYGON)
    places = np.concatenate(
        [balanced_places(ground, 5, (seed, "main", "meadow"))[:5] for seed in range(250)]
    )
    east, north = (places[:, 0] // 5000, places[:, 1] // 5000)
    seen = Counter(zip(east.tolist(), north.tolist(), strict=True))
    for (i, j), count in seen.items():
        part = shapely.box(50 * i, 50 * j, 50 * i + 50, 50 * j + 50).intersection(MEADOW_POLYGON)
        p = part.area / MEADOW_POLYGON.area
        assert abs(count / len(places) - p) <= 4 * (p * (1 - p) / len(places)) ** 0.5


@pytest.mark.parametrize("planned", [1, 4, 5, 9])
def test_every_unit_of_a_list_is_drawn_equally_often(planned: int) -> None:
    """n/N each over 400 seeds, within 4 binomial standard errors, crowded wells and lone ones."""
    units = wells(*((float(k * k), 3.0 * k) for k in range(11)))
    seeds = 400
    seen = Counter(
        unit.unit_id
        for seed in range(seeds)
        for unit in balanced_units(units, planned, (seed, "main", "site"))[:planned]
    )
    p = planned / 11
    for unit in units:
        assert abs(seen[unit.unit_id] / seeds - p) <= 4 * (p * (1 - p) / seeds) ** 0.5


def test_the_order_of_the_file_plays_no_part() -> None:
    """A sorted export and an unsorted one are the same list."""
    units = wells(*((float(k * k), 3.0 * k) for k in range(11)))
    key = (9, "main", "site")
    assert balanced_units(units, 4, key) == balanced_units(units[::-1], 4, key)


def unevenness(ground: Ground, places: np.ndarray) -> float:
    """Variance of the shares of the ground nearest to each place, over the square of their mean."""
    box = ground.geometry.bounds
    east, north = np.meshgrid(np.arange(box[0], box[2], 3.0), np.arange(box[1], box[3], 3.0))
    inside = shapely.contains_xy(ground.geometry, east, north)
    near = KDTree(places / 100).query(np.column_stack([east[inside], north[inside]]))[1]
    shares = np.bincount(near, minlength=len(places))
    return float(shares.var() / shares.mean() ** 2)


@pytest.mark.parametrize("first", [6, 12, 20, 30, 36])
def test_any_first_part_of_a_list_is_spread(first: int) -> None:
    """Shares of ground per place vary less than 60 % as much as under random places.

    A list for 20; alternates continue it to 36. Common practice: Voronoi shares, Stevens & Olsen
    (2004), Journal of the American Statistical Association 99:262 (from memory).
    """
    ground = Ground("meadow", MEADOW_POLYGON)
    lists = [balanced_places(ground, 20, (seed, "main", "meadow"))[:first] for seed in range(12)]
    chance = [draw_places(ground, first, Stream(s, "main", "meadow", "p")) for s in range(12)]
    spread = np.mean([unevenness(ground, places) for places in lists])
    assert spread < 0.6 * np.mean([unevenness(ground, places) for places in chance])


def test_a_minimum_spacing_is_kept_and_told() -> None:
    """A place of the list too close to an earlier one gives way to the next."""
    found = BalancedList().draw(BOTH, COUNTS, seed=5, design="main", minimum_spacing_m=15.0)
    for name in ("meadow", "yard"):
        spots = [(p.easting, p.northing) for p in found.places if p.stratum == name]
        assert KDTree(spots).query(spots, k=2)[0][:, 1].min() >= 15.0
        assert any("15 m was kept within" in note and name in note for note in found.notes)


@pytest.mark.parametrize(
    ("frame", "count", "spacing", "told"),
    [
        (BOTH, StratumCount("yard", 7, 0), 40.0, "that stand 40 m apart. Lower minimum_spacing_m"),
        (BOTH, StratumCount("yard", 0, 0), 0.0, "would get 0 places of a list"),
        (BOTH, StratumCount("yard", 2001, 0), 0.0, "from 1 to 2,000 a stratum"),
        (BOTH, StratumCount("yard", 2, 63), 0.0, "62 alternates, and 63 were asked for"),
        (list_frame(yard=5), StratumCount("yard", 2, 0), 1.0, "whose places are given"),
        (list_frame(yard=5), StratumCount("yard", 6, 0), 0.0, "ask for 5 at most"),
    ],
)
def test_what_cannot_be_drawn_is_refused_in_one_line(
    frame: Frame, count: StratumCount, spacing: float, told: str
) -> None:
    """One stratum, one reason, one remedy."""
    counts = [count] if frame is not BOTH else [COUNTS[0], count]
    if spacing > 15:
        counts[0] = StratumCount("meadow", 2, 0)
    with pytest.raises(DesignError, match=told):
        BalancedList().draw(frame, counts, seed=5, design="main", minimum_spacing_m=spacing)


def test_a_ragged_stratum_is_refused_before_it_takes_all_memory() -> None:
    """Two specks a hundred kilometres apart fill nothing of their box."""
    specks = shapely.MultiPolygon(
        [shapely.box(0, 0, 1, 1), shapely.box(1e5, 1e5, 1e5 + 1, 1e5 + 1)]
    )
    with pytest.raises(DesignError, match="fills too little of its box"):
        balanced_places(Ground("specks", specks), 5, (1, "main", "specks"))


def test_alternates_of_a_list_end_where_its_units_end() -> None:
    """Every unit is on the list once; more alternates than that cannot be."""
    found = BalancedList().draw(
        make_list_frame(), [StratumCount("site", 9, 8)], seed=1, design="main"
    )
    assert sorted(p.unit_id for p in found.places) == sorted(
        unit.unit_id for unit in make_list_frame().strata[0].units
    )
    assert found.notes == ("'site' has 14 units: 5 of 8 alternates are left after the draw.",)


@pytest.mark.parametrize("planned", [1, 2, 7, 8, 9, 200, 2000])
def test_a_list_is_the_planned_number_doubled(planned: int) -> None:
    """Only then does halving come back to it exactly."""
    times = list_length(planned) / planned
    assert times in {2.0**k for k in range(3, 8)}
    assert list_length(planned) >= 64
