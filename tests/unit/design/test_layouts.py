"""Layouts beside each other: what they draw, predict and estimate must agree."""

import csv
import json
import math
from collections import Counter
from collections.abc import Iterator, Sequence
from itertools import combinations, product
from pathlib import Path

import numpy as np
import pytest
import shapely
from scipy.special import stdtrit

from fieldplan.base.errors import DesignError
from fieldplan.design import layout_named
from fieldplan.design.grid import CAUTION
from fieldplan.design.layouts import LAYOUTS
from fieldplan.design.model import MeanEstimate, StratumCount, StratumValues
from tests.factories import make_list_frame
from tests.unit.design.sites import MEADOW_POLYGON, YARD_POLYGON, area_frame, list_frame

REFERENCE = Path(__file__).parents[2] / "reference" / "values.csv"
WELLS = np.array([4.1, 6.8, 2.2, 9.5, 5.0, 3.3, 7.1, 5.9])
POPULATIONS = {"a": np.array([1.0, 4.0, 4.5, 9.0, 2.0]), "b": np.array([30.0, 11.0, 17.0, 25.0])}


def published(name: str) -> tuple[dict[str, list[float]], float]:
    """Inputs and exact value of one row of the reference table."""
    with REFERENCE.open(encoding="utf-8", newline="") as stream:
        row = next(row for row in csv.DictReader(stream) if row["id"] == name)
    return json.loads(row["inputs"]), float(row["exact"])


def one(values: Sequence[float], population: int | None = None) -> list[StratumValues]:
    """Return a single stratum of results."""
    return [StratumValues("site", 1.0, np.asarray(values, dtype=float), population)]


def test_wells_of_a_list_of_14_have_the_interval_of_the_textbook_formula() -> None:
    """Mean 5.49, SE 0.54, 95 % interval 4.21 to 6.77: s²/n (1 − n/N), Cochran (1977), ch. 2."""
    answer = layout_named("simple-random").estimate(one(WELLS, 14))
    margin = stdtrit(answer.degrees_of_freedom, 0.975) * answer.standard_error
    low, high = answer.mean - margin, answer.mean + margin
    assert (round(answer.mean, 2), round(answer.standard_error, 2)) == (5.49, 0.54)
    assert (round(low, 2), round(high, 2)) == (4.21, 6.77)
    assert answer.degrees_of_freedom == 7


def test_population_variance_of_64_cities_gives_the_published_precision() -> None:
    """Cochran (1977), ch. 5, 64 cities: V of the total, n = 24 (A06-002, -005, from memory)."""
    sizes, variance = published("A06-002")[0]["x"], published("A06-002")[1]
    assert np.var(sizes, ddof=1) == pytest.approx(variance)
    predicted = layout_named("simple-random").predict_variance(
        weights=np.ones(1), sigmas=np.sqrt([52448.0]), counts=np.array([24]), populations=[64]
    )
    assert 64**2 * predicted == pytest.approx(published("A06-005")[1])


def test_two_strata_of_64_cities_give_the_published_precision() -> None:
    """Cochran (1977), ch. 5: V of the total for 6 and 18 of 16 and 48 cities (row A06-006)."""
    predicted = layout_named("stratified").predict_variance(
        weights=np.array([0.25, 0.75]),
        sigmas=np.sqrt([53843.0, 5581.0]),
        counts=np.array([6, 18]),
        populations=[16, 48],
    )
    assert 64**2 * predicted == pytest.approx(published("A06-006")[1])


def test_expansion_of_49_of_196_cities_gives_the_published_total() -> None:
    """Cochran (1977), sec. 6.1: N times the mean of 49 cities (row A06-014, from memory)."""
    inputs, total = published("A06-014")
    answer = layout_named("simple-random").estimate(one(inputs["y"], 196))
    assert 196 * answer.mean == pytest.approx(total, abs=0.05)


def test_stratified_variance_is_that_of_the_published_example() -> None:
    """Berthouex and Brown (2002), Example 23.9, p. 209: variance of the mean 1.9 (row A06-016)."""
    inputs, variance = published("A06-016")
    weights, variances, counts = (np.array(inputs[key]) for key in ("w", "s2", "n"))
    strata = []
    for weight, s2, n in zip(weights, variances, counts, strict=True):
        values = np.resize([-1.0, 1.0], n)
        values *= math.sqrt(s2) / values.std(ddof=1)
        strata.append(StratumValues(f"{weight}-{n}", weight, values))
    answer = layout_named("stratified").estimate(strata)
    assert answer.standard_error**2 == pytest.approx(variance)
    assert sum(s.weight**2 * s.variance_of_mean for s in answer.strata) == pytest.approx(variance)


def every_sample(counts: dict[str, int]) -> Iterator[list[StratumValues]]:
    """All samples of the tiny population, each equally likely."""
    total = sum(map(len, POPULATIONS.values()))
    choices = [combinations(POPULATIONS[name], counts[name]) for name in counts]
    for chosen in product(*choices):
        yield [
            StratumValues(name, len(POPULATIONS[name]) / total, np.array(v), len(POPULATIONS[name]))
            for name, v in zip(counts, chosen, strict=True)
        ]


@pytest.mark.parametrize("counts", [{"a": 2, "b": 3}, {"a": 4, "b": 2}, {"a": 5, "b": 2}])
def test_stratified_estimates_are_unbiased_over_all_samples(counts: dict[str, int]) -> None:
    """Brute force: mean of means = population mean, mean of SE² = variance of means = predicted."""
    layout = layout_named("stratified")
    answers = [layout.estimate(sample) for sample in every_sample(counts)]
    everyone = np.concatenate(list(POPULATIONS.values()))
    _assert_unbiased(answers, everyone.mean())
    assert np.mean([a.standard_error**2 for a in answers]) == pytest.approx(
        layout.predict_variance(
            weights=np.array([5 / 9, 4 / 9]),
            sigmas=np.array([POPULATIONS[name].std(ddof=1) for name in counts]),
            counts=np.array(list(counts.values())),
            populations=[5, 4],
        )
    )


@pytest.mark.parametrize("n", [2, 3, 5])
def test_simple_random_estimates_are_unbiased_over_all_samples(n: int) -> None:
    """Brute force over all samples of a list of 9."""
    everyone = np.concatenate(list(POPULATIONS.values()))
    layout = layout_named("simple-random")
    answers = [layout.estimate(one(sample, 9)) for sample in combinations(everyone, n)]
    _assert_unbiased(answers, everyone.mean())


def _assert_unbiased(answers: list[MeanEstimate], truth: float) -> None:
    means = np.array([answer.mean for answer in answers])
    assert means.mean() == pytest.approx(truth)
    assert np.mean([a.standard_error**2 for a in answers]) == pytest.approx(means.var())


def test_every_unit_of_a_list_is_drawn_equally_often() -> None:
    """Over seeds each well, and each pair of wells, within 4 binomial standard errors."""
    frame, seeds, n = make_list_frame(), 3000, 4
    layout = layout_named("simple-random")
    singles: Counter[str] = Counter()
    pairs: Counter[tuple[str, str]] = Counter()
    for seed in range(seeds):
        places = layout.draw(frame, [StratumCount("site", n, 0)], seed=seed, design="main").places
        chosen = sorted(place.unit_id for place in places)
        singles.update(chosen)
        pairs.update(combinations(chosen, 2))
    for counts, chance, cases in ((singles, n / 14, 14), (pairs, n * (n - 1) / (14 * 13), 91)):
        tolerance = 4 * math.sqrt(seeds * chance * (1 - chance))
        assert len(counts) == cases
        assert all(abs(count - seeds * chance) < tolerance for count in counts.values())


def test_a_well_that_joins_the_list_moves_nobody_elses_turn() -> None:
    """A revision with one more well keeps the order of all others."""
    layout = layout_named("simple-random")

    def order(size: int) -> list[str]:
        frame = list_frame(w=size)
        places = layout.draw(frame, [StratumCount("w", size, 0)], seed=8, design="main").places
        return [place.unit_id for place in places]

    longer = order(12)
    longer.remove("W-12")
    assert longer == order(11)


def test_alternates_are_the_next_ones_on_the_list() -> None:
    """Asking for one more location must turn the first alternate into it, and nothing else."""
    frame = area_frame(meadow=MEADOW_POLYGON, yard=YARD_POLYGON)
    draw = layout_named("stratified").draw
    few = draw(
        frame, [StratumCount("meadow", 5, 3), StratumCount("yard", 4, 2)], seed=2, design="m"
    )
    more = draw(
        frame, [StratumCount("meadow", 6, 2), StratumCount("yard", 4, 2)], seed=2, design="m"
    )
    assert [(p.stratum, p.list_order, p.easting, p.northing) for p in few.places] == [
        (p.stratum, p.list_order, p.easting, p.northing) for p in more.places
    ]
    assert few.realised == 9
    assert more.realised == 10


def test_a_list_too_short_for_its_alternates_says_so() -> None:
    """Fourteen wells, twelve chosen: two alternates are left of five."""
    drawn = layout_named("simple-random").draw(
        make_list_frame(), [StratumCount("site", 12, 5)], seed=1, design="main"
    )
    assert len(drawn.places) == 14
    assert drawn.notes == ("'site' has 14 units: 2 of 5 alternates are left after the draw.",)


def test_a_minimum_spacing_says_that_it_bends_equal_probability() -> None:
    """Whoever reads the interval must know."""
    drawn = layout_named("simple-random").draw(
        area_frame(meadow=MEADOW_POLYGON),
        [StratumCount("meadow", 5, 0)],
        seed=1,
        design="main",
        minimum_spacing_m=10.0,
    )
    assert "10 m" in drawn.notes[0]
    assert "no longer exactly equally likely" in drawn.notes[0]


def test_a_grid_estimates_by_the_formula_for_random_places_and_says_so() -> None:
    """No unbiased variance exists for one grid; the caution must not be lost."""
    random, grid = layout_named("simple-random"), layout_named("triangular-grid")
    answer = grid.estimate(one(WELLS))
    assert answer.standard_error == random.estimate(one(WELLS)).standard_error
    assert answer.caution == CAUTION
    assert "no credit" in CAUTION
    assert "usually too wide" in CAUTION


def test_a_census_has_no_error_from_place_and_says_what_remains() -> None:
    """All 14 wells: SE 0, but time and laboratory error remain."""
    values = np.arange(14.0)
    answer = layout_named("census").estimate(one(values, 14))
    assert (answer.mean, answer.standard_error) == (6.5, 0.0)
    assert math.isinf(answer.degrees_of_freedom)
    assert "time of sampling" in answer.caution
    assert "laboratory remains" in answer.caution


def test_a_census_with_units_missing_is_no_census() -> None:
    """Eight of 14 wells: at least the error of a random part, and nobody drew them at random."""
    answer = layout_named("census").estimate(one(WELLS, 14))
    assert (
        answer.standard_error
        == layout_named("simple-random").estimate(one(WELLS, 14)).standard_error
    )
    assert answer.caution.startswith("6 of 14 units gave no result, and no draw decided which.")


def test_a_census_visits_every_unit_in_file_order() -> None:
    """Nothing is drawn, so the crew keeps the list it knows."""
    layout = layout_named("census")
    frame = list_frame(a=3, b=2)
    drawn = layout.draw(
        frame, [StratumCount("a", 3, 0), StratumCount("b", 2, 1)], seed=1, design="m"
    )
    assert [p.unit_id for p in drawn.places] == ["A-1", "A-2", "A-3", "B-1", "B-2"]
    assert drawn.notes == ("A census leaves no alternates: every unit is visited.",)
    assert (
        layout.predict_variance(
            weights=np.array([0.6, 0.4]),
            sigmas=np.ones(2),
            counts=np.array([3, 2]),
            populations=[3, 2],
        )
        == 0
    )


def two(first: Sequence[float], second: Sequence[float]) -> list[StratumValues]:
    """Return two strata of equal weight."""
    return [
        StratumValues("bank", 0.5, np.array(first, dtype=float)),
        StratumValues("ditch", 0.5, np.array(second, dtype=float)),
    ]


@pytest.mark.parametrize("layout", ["stratified", "square-grid", "triangular-grid"])
def test_a_stratum_with_one_result_is_refused_by_name(layout: str) -> None:
    """The rule recorded before results says refuse."""
    with pytest.raises(DesignError, match=r"'ditch' has 1 result \(7\); a variance needs 2"):
        layout_named(layout).estimate(two([1, 2, 3], [7]))


def test_a_stratum_with_one_result_may_borrow_the_spread_of_the_others() -> None:
    """Closed form: variance of both means is s² = 1 of the first, so SE² = ¼ (1/3 + 1), df = 2."""
    answer = layout_named("stratified").estimate(two([1, 2, 3], [7]), single_result="borrow-spread")
    assert answer.standard_error**2 == pytest.approx(0.25 * (1 / 3 + 1))
    assert answer.degrees_of_freedom == pytest.approx(2)
    assert [s.variance_borrowed for s in answer.strata] == [False, True]
    assert answer.strata[1].sd == pytest.approx(1.0)
    assert "'ditch'" in answer.caution


def test_there_must_be_a_spread_to_borrow() -> None:
    """Two strata with one result each know nothing of any spread."""
    with pytest.raises(DesignError, match="no spread to borrow"):
        layout_named("stratified").estimate(two([1], [7]), single_result="borrow-spread")


@pytest.mark.parametrize("rule", ["refuse", "borrow-spread"])
@pytest.mark.parametrize("layout", ["stratified", "square-grid", "census"])
def test_a_stratum_without_results_is_always_refused_by_name(layout: str, rule: str) -> None:
    """No rule can invent a stratum's mean."""
    with pytest.raises(DesignError, match="'ditch' has no result"):
        layout_named(layout).estimate(two([1, 2, 3], []), single_result=rule)


def test_a_stratum_of_one_unit_needs_no_variance() -> None:
    """The only well of its stratum was visited: nothing about it is left to chance."""
    strata = [
        StratumValues("bank", 0.75, np.array([1.0, 3.0]), 3),
        StratumValues("ditch", 0.25, np.array([8.0]), 1),
    ]
    answer = layout_named("stratified").estimate(strata)
    assert answer.mean == pytest.approx(3.5)
    assert answer.standard_error**2 == pytest.approx(0.75**2 * 2 / 2 * (1 - 2 / 3))
    assert answer.degrees_of_freedom == pytest.approx(1)


AREA = area_frame(meadow=MEADOW_POLYGON)
BOTH = area_frame(meadow=MEADOW_POLYGON, yard=YARD_POLYGON)


@pytest.mark.parametrize(
    ("layout", "frame", "counts", "spacing", "message"),
    [
        ("simple-random", BOTH, {"meadow": 4, "yard": 4}, 0, 'Write layout = "stratified"'),
        ("stratified", BOTH, {"meadow": 4}, 0, "'yard' has no number of locations"),
        ("stratified", AREA, {"meadow": 4, "moor": 2}, 0, "given for 'moor', but the frame"),
        ("stratified", list_frame(w=5), {"w": 6}, 0, "'w' has 5 units, 6 were asked for"),
        ("simple-random", list_frame(w=5), {"w": 3}, 9.0, "spacing_m is 9, but 'w' is a list"),
        ("census", list_frame(w=5), {"w": 4}, 0, "visits all 5 units of stratum 'w'; 4 were asked"),
        ("census", AREA, {"meadow": 4}, 0, "a census needs a list of units; stratum 'meadow'"),
        ("census", list_frame(w=5), {"w": 5}, 3.0, "a census cannot keep one"),
    ],
)  # fmt: skip
def test_what_cannot_be_drawn_is_refused_with_the_remedy(
    layout: str, frame: object, counts: dict[str, int], spacing: float, message: str
) -> None:
    """One clear line each, and nothing drawn."""
    wanted = [StratumCount(name, count, 0) for name, count in counts.items()]
    with pytest.raises(DesignError, match=message.replace("(", r"\(")):
        layout_named(layout).draw(
            frame,
            wanted,
            seed=1,
            design="main",
            minimum_spacing_m=spacing,  # type: ignore[arg-type]
        )


def test_an_unknown_layout_gets_a_near_miss() -> None:
    """Typing errors are answered with the nearest name."""
    with pytest.raises(DesignError, match='Did you mean "triangular-grid"'):
        layout_named("triangle-grid")


def test_layouts_have_the_names_that_a_campaign_file_accepts() -> None:
    """The file's model and the layouts must not drift apart."""
    from typing import get_args

    from fieldplan.campaign.model import DesignTable

    accepted = get_args(DesignTable.model_fields["layout"].annotation)
    assert tuple(layout.name for layout in LAYOUTS) == accepted


def test_simple_random_places_have_the_predicted_variance() -> None:
    """Simulation on a smooth field: the mean of 8 places has variance σ²/8, 4 standard errors."""
    geometry, n, seeds = shapely.box(0, 0, 100, 50), 8, 1500
    layout, frame = layout_named("simple-random"), area_frame(field=shapely.box(0, 0, 100, 50))
    means = []
    for seed in range(seeds):
        drawn = layout.draw(frame, [StratumCount("field", n, 0)], seed=seed, design="main").places
        # Value = easting: uniform on 0 … 100, mean 50, variance 100²/12.
        means.append(np.mean([place.easting for place in drawn]))
    variance = 100.0**2 / 12 / n
    assert geometry.area == 5000
    assert abs(np.mean(means) - 50) < 4 * math.sqrt(variance / seeds)
    # The mean of 8 uniforms is near normal, so its sample variance has SE v √(2/(k - 1)).
    assert abs(np.var(means, ddof=1) - variance) < 4 * variance * math.sqrt(2 / (seeds - 1))


def test_a_minimum_spacing_favours_the_edge_as_its_note_says() -> None:
    """The warning must be true: share within 6 m of the edge against its share of the area."""
    site, seeds, n = shapely.box(0, 0, 100, 60), 150, 15
    inner, layout = shapely.box(6, 6, 94, 54), layout_named("simple-random")
    share = 1 - inner.area / site.area
    found = {}
    for spacing in (0.0, 14.0):
        drawn = [
            place
            for seed in range(seeds)
            for place in layout.draw(
                area_frame(field=site), [StratumCount("field", n, 0)], seed=seed, design="main",
                minimum_spacing_m=spacing,
            ).places
        ]  # fmt: skip
        inside = shapely.contains_xy(inner, [p.easting for p in drawn], [p.northing for p in drawn])
        found[spacing] = 1 - inside.mean()
    tolerance = 4 * math.sqrt(share * (1 - share) / (seeds * n))
    assert abs(found[0.0] - share) < tolerance
    assert found[14.0] > share + tolerance
