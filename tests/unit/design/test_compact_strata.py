"""Compact strata: what is drawn is uniform, what is estimated is unbiased."""

import math
from itertools import product

import numpy as np
import pytest
import shapely

from fieldplan.base.draws import Stream
from fieldplan.base.errors import DesignError
from fieldplan.campaign.model import DesignTable, Draw
from fieldplan.design import layout_named, layout_of, locate
from fieldplan.design.area import Ground
from fieldplan.design.cell_estimate import BETWEEN, MODELLED, NO_CREDIT
from fieldplan.design.compact_strata import CompactStrata, cut_stratum, fill_cells
from fieldplan.design.model import Locations, PlannedCell, StratumCount, StratumValues
from fieldplan.stats.stratified import predicted_variance
from tests.factories import make_campaign
from tests.unit.design.sites import MEADOW_POLYGON, YARD_POLYGON, area_frame, list_frame

FRAME = area_frame(meadow=MEADOW_POLYGON, yard=YARD_POLYGON)
COUNTS = [StratumCount("meadow", 13, 4), StratumCount("yard", 7, 3)]


def drawn(seed: int = 5, **keys: object) -> Locations:
    """Draw both strata."""
    design = DesignTable(layout="compact-strata", **keys)  # type: ignore[arg-type]
    return locate(make_campaign(design=(design,), draw=Draw(seed=seed)), FRAME, COUNTS)


@pytest.mark.parametrize("per_cell", [1, 2])
def test_every_location_lies_in_its_cell_and_every_cell_has_its_number(per_cell: int) -> None:
    """With an odd number and two a cell, cell 1 has three; nothing else differs from the quota."""
    places = drawn(per_cell=per_cell).places
    for stratum in FRAME.strata:
        assert stratum.geometry is not None
        random = [p for p in places if p.stratum == stratum.name and p.location_class == "random"]
        cut = cut_stratum(Ground(stratum.name, stratum.geometry), len(random), per_cell=per_cell)
        for place in random:
            spot = shapely.Point(place.easting, place.northing)
            assert shapely.distance(spot, cut.polygons[place.cell - 1]) < 1e-6
            assert place.cell_share == pytest.approx(
                cut.polygons[place.cell - 1].area / stratum.geometry.area
            )
        held = np.bincount([place.cell - 1 for place in random])
        odd = per_cell == 2
        assert held.tolist() == [per_cell + odd, *[per_cell] * (len(random) // per_cell - 1)]


def test_the_first_places_of_the_list_lie_in_different_cells() -> None:
    """Work that stops early leaves out cells here and there, not a corner of the site."""
    places = [p for p in drawn(per_cell=2).of_class("random") if p.stratum == "meadow"]
    assert len({place.cell for place in places[:6]}) == 6
    spare = [p for p in drawn().of_class("alternate") if p.stratum == "meadow"]
    assert len({place.cell for place in spare}) == 4
    assert [place.list_order for place in spare] == [14, 15, 16, 17]


def test_probabilities_and_weights_are_those_of_the_cell() -> None:
    """Locations in the cell over its exact area; weights add up to the stratum's share."""
    for per_cell in (1, 2):
        places = drawn(per_cell=per_cell).places
        for stratum in FRAME.strata:
            random = [
                p for p in places if p.stratum == stratum.name and p.location_class == "random"
            ]
            held = np.bincount([place.cell for place in random])
            for place in random:
                area = place.cell_share * stratum.measure
                assert place.inclusion_probability == pytest.approx(held[place.cell] / area)
                assert place.weight == pytest.approx(
                    stratum.weight * place.cell_share / held[place.cell]
                )
            # Density times area, summed over the cells: the number planned.
            expected = sum(p.inclusion_probability * p.cell_share * stratum.measure / held[p.cell]
                           for p in random)  # fmt: skip
            assert expected == pytest.approx(len(random))
            assert sum(place.weight for place in random) == pytest.approx(stratum.weight)


def test_places_are_uniform_in_their_cells() -> None:
    """Simulation over seeds: each quarter of each cell is hit as often as its area says.

    Chi-square over all quarters within 4 standard errors, √(2 df) each.
    """
    ground = Ground("meadow", MEADOW_POLYGON)
    cut, seeds = cut_stratum(ground, 5, per_cell=1), 600
    found, expected = [], []
    spots = [
        fill_cells(ground, cut.cells, cut.quotas, Stream(seed, "m", "meadow", "cell places"))
        for seed in range(seeds)
    ]
    places = np.concatenate(spots)
    for number, polygon in enumerate(cut.polygons):
        own = places[places[:, 2] == number, :2] / 100
        assert len(own) == seeds
        east, north = cut.cells.centres_cm[number] / 100
        right, top = own[:, 0] > east, own[:, 1] > north
        for side, up in product((True, False), repeat=2):
            quarter = shapely.box(
                east if side else -1e4,
                north if up else -1e4,
                1e4 if side else east,
                1e4 if up else north,
            )
            share = shapely.intersection(quarter, polygon).area / polygon.area
            found.append(int(((right == side) & (top == up)).sum()))
            expected.append(seeds * share)
    kept = np.array(expected) > 5
    o, e = np.array(found)[kept], np.array(expected)[kept]
    free = kept.sum() - cut.cells.count
    assert abs(((o - e) ** 2 / e).sum() - free) < 4 * math.sqrt(2 * free)


@pytest.mark.slow
def test_inclusion_is_what_is_recorded_within_2_percent() -> None:
    """Simulation, 4 standard errors or 2 %: density of places along the edge and in the middle."""
    ground = Ground("meadow", MEADOW_POLYGON)
    cut, seeds, n = cut_stratum(ground, 10, per_cell=1), 3000, 10
    inner = MEADOW_POLYGON.buffer(-8.0)
    hits = 0
    for seed in range(seeds):
        spots = fill_cells(ground, cut.cells, cut.quotas, Stream(seed, "m", "meadow", "x"))
        hits += int(shapely.contains_xy(inner, spots[:, 0] / 100, spots[:, 1] / 100).sum())
    inside = sum(
        shapely.intersection(inner, polygon).area / polygon.area for polygon in cut.polygons
    )
    assert hits / seeds == pytest.approx(inside, rel=0.02)
    assert abs(hits / seeds - inside) < 4 * math.sqrt(n / 4 / seeds)
    # And the cells are so equal that recorded densities differ by little from n/A.
    assert np.abs(cut.shares * n - 1).max() < 0.03


def test_a_minimum_spacing_holds_between_all_places_of_a_stratum() -> None:
    """Locations and alternates alike; the note says what it bends."""
    locations = drawn(minimum_spacing_m=8.0)
    for name in ("meadow", "yard"):
        spots = np.array([(p.easting, p.northing) for p in locations.places if p.stratum == name])
        apart = np.hypot(*(spots[:, None] - spots[None]).transpose(2, 0, 1))
        assert apart[np.triu_indices(len(spots), 1)].min() >= 8.0
    assert "less likely than others, the more so the wider" in locations.notes[0]


def test_a_spacing_that_leaves_no_room_is_refused_with_one_that_fits() -> None:
    """One clear line: how many fit, how large a cell is, what to do."""
    with pytest.raises(DesignError, match=r"places in its 13 cells at a minimum spacing of 45 m"):
        drawn(minimum_spacing_m=45.0)


def test_what_cannot_be_cut_is_refused() -> None:
    """Lists have no cells; more than 2000 are not made; tiny strata hold no raster."""
    layout = layout_named("compact-strata")
    with pytest.raises(DesignError, match="layout 'compact-strata' needs an area"):
        layout.draw(list_frame(w=5), [StratumCount("w", 3, 0)], seed=1, design="m")
    with pytest.raises(DesignError, match="cut into 2001 cells; between 1 and 2000"):
        layout.draw(area_frame(m=MEADOW_POLYGON), [StratumCount("m", 2001, 0)], seed=1, design="m")
    with pytest.raises(DesignError, match="too small or too ragged"):
        layout.draw(
            area_frame(m=shapely.box(0, 0, 0.3, 0.3)), [StratumCount("m", 90, 0)],
            seed=1, design="m",
        )  # fmt: skip


def test_alternates_move_nobody_and_other_strata_neither() -> None:
    """Streams are keyed by stratum and purpose."""
    layout = CompactStrata()
    few = layout.draw(FRAME, [StratumCount("meadow", 13, 0), COUNTS[1]], seed=5, design="main")
    many = layout.draw(FRAME, COUNTS, seed=5, design="main")
    kept = [p for p in many.places if p.location_class == "random" or p.stratum == "yard"]
    assert list(few.places) == kept


def test_the_campaign_decides_cells_and_variance() -> None:
    """Keys of the file reach the layout; without them one a cell and pairs."""
    assert layout_of(DesignTable(layout="compact-strata")) == CompactStrata(1, "pairs")
    table = DesignTable(layout="compact-strata", per_cell=2, variance="covariance")
    assert layout_of(table) == CompactStrata(2, "covariance")
    numbers = {
        "weights": np.array([0.4, 0.6]),
        "sigmas": np.array([2.0, 3.0]),
        "counts": np.array([4, 9]),
        "populations": [None, None],
    }
    assert layout_of(table).predict_variance(**numbers) == predicted_variance(*numbers.values())


def values_of(
    results: np.ndarray, cells: list[int], *, shares: list[float] | None = None
) -> StratumValues:
    """Set results in a row of cells, centres 10 m apart."""
    count = max(cells) if shares is None else len(shares)
    shares = shares or [1 / count] * count
    return StratumValues(
        stratum="site",
        weight=1.0,
        values=np.asarray(results, dtype=float),
        coordinates=np.array([(10.0 * c + k % 3, 0.0) for k, c in enumerate(cells)]),
        cells=np.array(cells),
        cut=tuple(PlannedCell(k, s, 10.0 * k, 0.0) for k, s in enumerate(shares, start=1)),
        measure=100.0 * count,
    )


def test_the_mean_weighs_cells_and_the_variance_is_unbiased_over_all_draws() -> None:
    """Brute force: two of three places in cells of unequal area, with replacement."""
    ground = np.array([[1.0, 2.0, 6.0], [0.0, 5.0, 7.0]])
    shares = [0.45, 0.55]
    pairs = list(product(range(3), repeat=2))
    found = [
        CompactStrata(2).estimate(
            [values_of(np.concatenate([ground[0, list(a)], ground[1, list(b)]]), [1, 1, 2, 2],
                       shares=shares)]
        )
        for a, b in product(pairs, repeat=2)
    ]  # fmt: skip
    means = [answer.mean for answer in found]
    assert np.mean(means) == pytest.approx(np.array(shares) @ ground.mean(axis=1))
    assert np.mean([a.standard_error**2 for a in found]) == pytest.approx(np.var(means))


def test_a_lost_cell_goes_with_its_neighbour_and_an_alternate_counts_where_it_lies() -> None:
    """By hand: cell 2 empty joins cell 1, cell 3 has two results: (2·4 + (7 + 9)/2 + 6)/4."""
    answer = CompactStrata().estimate(
        [values_of(np.array([4.0, 7.0, 9.0, 6.0]), [1, 3, 3, 4], shares=[0.25] * 4)]
    )
    assert answer.mean == pytest.approx((2 * 4 + 8 + 6) / 4)
    assert answer.cell_variances[0].joined == ((2, 1),)
    assert "1 cell without a result went with the nearest cell" in answer.caution


def test_each_rule_says_what_it_is_and_gives_the_contrast() -> None:
    """Sentences by rule; the simple random formula stands only as a labelled comparison."""
    rng = np.random.default_rng(1)
    twenty = values_of(np.arange(24.0) + rng.normal(size=24), list(range(1, 25)))
    pairs = CompactStrata().estimate([twenty])
    curves = CompactStrata(variance="covariance").estimate([twenty])
    assert pairs.method != curves.method
    assert BETWEEN in pairs.caution
    assert MODELLED in curves.caution
    assert curves.degrees_of_freedom == 21
    plain = twenty.values.std(ddof=1) / math.sqrt(24)
    for answer in (pairs, curves):
        assert NO_CREDIT.format(times=plain / answer.standard_error) in answer.caution
    # A slope of 1 a cell: spread inside cells is far below that of the whole.
    assert curves.standard_error < plain / 2
    assert pairs.standard_error < plain / 2


def test_a_small_stratum_takes_pairs_where_curves_cannot_be_weighed() -> None:
    """Said, and not silently."""
    few = values_of(np.array([3.0, 5.0, 4.0, 8.0, 7.0, 9.0]), [1, 2, 3, 4, 5, 6])
    answer = CompactStrata(variance="covariance").estimate([few])
    assert answer.cell_variances[0].rule == "pairs"
    assert "'site' took pairs instead" in answer.caution
    assert answer.standard_error == CompactStrata().estimate([few]).standard_error


def test_results_without_a_record_of_cells_are_refused() -> None:
    """An estimate by cells needs to know them."""
    bare = StratumValues("site", 1.0, np.array([1.0, 2.0, 3.0]))
    with pytest.raises(DesignError, match="no record of its cells"):
        CompactStrata().estimate([bare])


def test_a_single_result_takes_all_credit_away_or_is_refused() -> None:
    """The rule recorded before results decides."""
    two = values_of(np.array([1.0, 2.0, 4.0]), [1, 2, 3])
    halves = [
        StratumValues("a", 0.5, two.values, None, two.coordinates, two.cells, two.cut, 300.0),
        StratumValues("b", 0.5, np.array([7.0]), None, np.zeros((1, 2)), np.array([1]),
                      two.cut[:1], 100.0),
    ]  # fmt: skip
    with pytest.raises(DesignError, match="'b' has 1 result"):
        CompactStrata().estimate(halves)
    answer = CompactStrata().estimate(halves, single_result="borrow-spread")
    plain = layout_named("stratified").estimate(halves, single_result="borrow-spread")
    assert answer.standard_error == plain.standard_error
    assert "no stratum gets credit for its cells" in answer.caution


def test_results_all_alike_have_no_error() -> None:
    """Nothing varies, so nothing is divided by."""
    answer = CompactStrata(variance="covariance").estimate(
        [values_of(np.full(24, 3.0), list(range(1, 25)))]
    )
    assert (answer.mean, answer.standard_error) == (3.0, 0.0)
    assert math.isinf(answer.degrees_of_freedom)
