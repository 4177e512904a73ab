"""Places on lines: uniform by length, drawn again, and refused where they cannot be."""

import math
from collections import Counter

import numpy as np
import pytest
import shapely
from scipy.stats import chi2

from fieldplan.base.draws import Stream
from fieldplan.base.errors import DesignError
from fieldplan.campaign.model import DesignTable, Draw, FrameTable
from fieldplan.design.along_lines import Course, course_of, draw_along
from fieldplan.design.even_spacing import EvenSpacing
from fieldplan.design.layouts import layout_of
from fieldplan.design.locating import locate
from fieldplan.design.model import StratumCount, StratumValues
from fieldplan.design.procedure import procedure_in_words, procedure_pseudocode
from fieldplan.design.simple_random import SimpleRandom
from fieldplan.design.stratified import Stratified
from fieldplan.frame.model import Reach
from tests.factories import make_campaign, make_frame, make_list_frame
from tests.unit.design.by_hand import Numbers
from tests.unit.design.line_sites import ARM, LOWER, MAIN, UPPER, line_frame

WHOLE = Course("site", UPPER + LOWER)
COUNTS = (StratumCount("lower", 8, 3), StratumCount("upper", 5, 2))
BARE = (StratumCount("lower", 8, 0), StratumCount("upper", 5, 0))


def line_campaign(layout="stratified", **design):
    """A campaign whose frame runs along lines."""
    return make_campaign(
        frame=(FrameTable(kind="line", line_file="river.geojson"),),
        design=(DesignTable(layout=layout, **design),),
        draw=Draw(seed=11),
    )


def test_every_place_stands_where_its_distance_says():
    """Coordinates, branch and distance are three ways to say one place."""
    branches = {"main": MAIN, "arm": ARM}
    for millimetre in range(0, WHOLE.total, 7919):
        place = WHOLE.place(millimetre)
        there = branches[place.branch].interpolate(place.along_cm / 100)
        # Two roundings to half a centimetre: at most √0.5 cm for the place and 0.5 cm along.
        assert math.hypot(there.x - place.east_cm / 100, there.y - place.north_cm / 100) < 0.0125
        assert not (place.branch == "main" and 400.01 < place.along_cm / 100 < 449.99)


def test_simple_random_places_are_uniform_by_length():
    """Over 4,000 draws each 50 m of the 1650 m is hit equally often: chi-square, 32 degrees."""
    counts = Counter()
    for seed in range(400):
        for place in draw_along(WHOLE, 10, Stream(seed, "main", "site", "places")):
            along = place.along_cm / 100
            at = along if along <= 400 else along - 50
            at = 1050 + along if place.branch == "arm" else at
            counts[min(int(at // 50), 32)] += 1
    expected = 4000 / 33
    statistic = sum((counts[cell] - expected) ** 2 / expected for cell in range(33))
    assert statistic < chi2.ppf(0.9999, 32)


@pytest.mark.parametrize("starts", [1, 3])
def test_even_spacing_includes_every_metre_alike(starts):
    """The chance of a place within any 10 m is n/L·10 (n = 7, L = 1200 m), whatever the starts."""
    frame, draws = line_frame(), 1500
    hits = np.zeros(120)
    for seed in range(draws):
        drawn = EvenSpacing(starts).draw(
            frame,
            (StratumCount("lower", 7, 0), StratumCount("upper", 3, 0)),
            seed=seed,
            design="main",
        )
        for place in drawn.places:
            if place.stratum == "lower":
                at = place.along_m - 500 if place.branch == "main" else place.along_m + 600
                hits[min(int(at // 10), 119)] += 1
    expected = draws * 7 / 120
    # Each cell is hit by at most one place of each start: a binomial of chance 7/120 at the widest.
    assert np.abs(hits - expected).max() < 4.5 * math.sqrt(expected)


def test_one_start_is_evenly_spaced_over_the_gap():
    """Reaches left out take no room: 450 m in 5 places stand 90 m apart along what is left."""
    drawn = EvenSpacing().draw(line_frame(), COUNTS, seed=3, design="main")
    along = sorted(
        p.along_m for p in drawn.places if p.stratum == "upper" and p.location_class == "random"
    )
    laid = [metres if metres <= 400 else metres - 50 for metres in along]
    assert np.diff(laid) == pytest.approx([90.0] * 4, abs=0.02)


def test_places_are_drawn_again_from_the_words_alone():
    """The pseudo-code followed with a hash and whole numbers gives the same centimetres."""
    text = procedure_pseudocode()
    assert "LINE(stratum, count, purpose, taken)" in text
    corners = [[(0, 0), (240_000, 320_000)], [(270_000, 360_000), (300_000, 400_000)]]
    starts, lengths = [0, 450_000], [400_000, 50_000]

    def place(t):
        number = 0 if t < lengths[0] else 1
        o = t - sum(lengths[:number])
        (x, y), (x2, y2) = corners[number]
        f = min(o / math.sqrt((x2 - x) * (x2 - x) + (y2 - y) * (y2 - y)), 1)
        e, n = round((x + f * (x2 - x)) / 10), round((y + f * (y2 - y)) / 10)
        return e, n, round((starts[number] + o) / 10)

    numbers = Numbers(11, "main", "upper", "places")
    by_hand = [place(int(numbers.uniform() * 450_000)) for _ in range(7)]
    drawn = Stratified().draw(line_frame(), COUNTS, seed=11, design="main").places
    found = [
        (round(100 * p.easting), round(100 * p.northing), round(100 * p.along_m))
        for p in drawn
        if p.stratum == "upper"
    ]
    assert found == by_hand

    numbers = Numbers(11, "main", "upper", "starts")
    spaced = []
    for share in (3, 2):
        u = numbers.uniform()
        spaced += [place(min(int((i + u) * 450_000 / share), 449_999)) for i in range(share)]
    order = Numbers(11, "main", "upper", "even order").order(5)
    even = EvenSpacing(2).draw(line_frame(), COUNTS, seed=11, design="main").places
    found = [
        (round(100 * p.easting), round(100 * p.northing), round(100 * p.along_m), p.start)
        for p in even
        if p.stratum == "upper" and p.location_class == "random"
    ]
    assert found == [(*spaced[k], 1 if k < 3 else 2) for k in order]


def test_more_alternates_and_another_stratum_keep_the_rest():
    """A revision must not move a place that it can keep."""
    few = Stratified().draw(line_frame(), COUNTS, seed=5, design="main").places
    more = (
        Stratified()
        .draw(
            line_frame(),
            (StratumCount("lower", 8, 6), StratumCount("upper", 9, 0)),
            seed=5,
            design="main",
        )
        .places
    )
    place = {(p.stratum, p.list_order): (p.branch, p.along_m) for p in more}
    assert all(place[p.stratum, p.list_order] == (p.branch, p.along_m) for p in few)
    even = EvenSpacing(2).draw(line_frame(), COUNTS, seed=5, design="main").places
    again = (
        EvenSpacing(2)
        .draw(
            line_frame(),
            (StratumCount("lower", 8, 9), StratumCount("upper", 4, 2)),
            seed=5,
            design="main",
        )
        .places
    )
    kept = {(p.stratum, p.list_order): (p.branch, p.along_m) for p in again}
    lower = [p for p in even if p.stratum == "lower"]
    assert all(kept["lower", p.list_order] == (p.branch, p.along_m) for p in lower)


def test_located_places_carry_branch_distance_start_and_weights():
    """Weights of a stratum sum to its share of the length; the density is n over its metres."""
    found = locate(line_campaign("even-spacing", starts=2), line_frame(), COUNTS)
    for name, planned, length in (("lower", 8, 1200.0), ("upper", 5, 450.0)):
        own = [p for p in found.of_class("random") if p.stratum == name]
        assert sum(p.weight for p in own) == pytest.approx(length / 1650, rel=1e-12)
        assert {p.inclusion_probability for p in own} == {planned / length}
        assert {p.start for p in own} == {1, 2}
        assert all(p.branch and p.along_m is not None for p in own)
    assert len({p.location_id for p in found.places}) == 18


def test_minimum_spacing_is_kept_and_said():
    """The straight distance between any two places, alternates among them."""
    drawn = SimpleRandom().draw(
        line_frame(strata=False),
        (StratumCount("site", 20, 5),),
        seed=2,
        design="main",
        minimum_spacing_m=25.0,
    )
    places = np.array([(p.easting, p.northing) for p in drawn.places])
    apart = np.hypot(*(places[:, None] - places[None]).transpose(2, 0, 1))
    assert apart[~np.eye(25, dtype=bool)].min() >= 25.0
    assert "the ends of reaches" in drawn.notes[0]


def test_bound_on_what_fits_is_the_packing_of_each_reach():
    """A reach of 400 m holds 5 places 100 m apart, one of 50 m a single one."""
    course = Course("upper", UPPER)
    assert course.fit(100.0) == 6
    with pytest.raises(DesignError, match=r"\(450\.0 m\) has room for 6 places at most"):
        draw_along(course, 7, Stream(1, "main", "upper", "places"), spacing_m=100.0)


@pytest.mark.parametrize(
    ("layout", "counts", "spacing", "words"),
    [
        (EvenSpacing(), BARE, 100.0, r"5 places on the 450\.0 m of 'upper' stand 90 m apart"),
        (EvenSpacing(3), COUNTS, 5.0, "3 starts are independent"),
        (
            EvenSpacing(6),
            COUNTS,
            0.0,
            "stratum 'upper' gets 5 locations for 6 starts; each start needs one",
        ),
    ],
)
def test_what_cannot_be_spaced_is_refused_in_one_line(layout, counts, spacing, words):
    """Which stratum, how many, what to do."""
    with pytest.raises(DesignError, match=words) as refused:
        layout.draw(line_frame(), counts, seed=1, design="main", minimum_spacing_m=spacing)
    assert len(str(refused.value).splitlines()) == 1


def test_crowded_line_is_refused_after_many_tries():
    """Below the bound, but not to be found by chance."""
    straight = Reach("ditch", 0.0, 100.0, shapely.LineString([(0, 0), (100, 0)]))
    with pytest.raises(DesignError, match=r"were placed\. Lower minimum_spacing_m"):
        draw_along(Course("d", (straight,)), 10, Stream(1, "m", "d", "places"), spacing_m=10.9)


def test_lines_and_areas_do_not_take_each_others_layouts():
    """A grid has no meaning on a line, nor even spacing in an area or a list."""
    counts = (StratumCount("meadow", 3, 0), StratumCount("yard", 3, 0))
    with pytest.raises(DesignError, match="runs along lines, and stratum 'meadow' is an area"):
        EvenSpacing().draw(make_frame(), counts, seed=1, design="main")
    with pytest.raises(DesignError, match="is a list of 14 units"):
        EvenSpacing().draw(make_list_frame(), (StratumCount("site", 3, 0),), seed=1, design="main")
    grid = layout_of(DesignTable(layout="square-grid"))
    with pytest.raises(DesignError, match="needs an area, and stratum 'lower' is 1200 m of lines"):
        grid.draw(line_frame(), COUNTS, seed=1, design="main")
    with pytest.raises(DesignError, match="has no length"):
        Course("nothing", ())
    assert course_of(line_frame().strata[0], "even-spacing").total == 1_200_000


def test_mean_and_variance_of_independent_starts_are_unbiased_by_brute_force():
    """All 12 × 12 pairs of starts on 12 slots, 3 results a start: the expectation is exact.

    A line of 12 equal slots with any results; start s takes slots s, s + 4, s + 8. Over all pairs
    of starts the mean of the means is that of the line, and the mean of the estimated variances is
    the variance of the estimated mean.
    """
    line = np.array([3.0, 9.0, 1.0, 4.0, 14.0, 2.0, 8.0, 5.0, 0.5, 11.0, 7.0, 6.0])
    systematic = [line[start::4] for start in range(4)]
    means, variances = [], []
    for first in systematic:
        for second in systematic:
            values = StratumValues(
                "site",
                1.0,
                np.concatenate([first, second]),
                starts=np.array([1, 1, 1, 2, 2, 2]),
            )
            found = EvenSpacing(2).estimate([values])
            means.append(found.mean)
            variances.append(found.standard_error**2)
            assert found.degrees_of_freedom == 1
    assert np.mean(means) == pytest.approx(line.mean(), rel=1e-12)
    assert np.mean(variances) == pytest.approx(np.var(means), rel=1e-12)


def test_one_start_gets_no_credit_and_says_so():
    """s²/n, with the caution; nothing else can be had from one start."""
    values = np.array([1.0, 2.0, 4.0, 9.0])
    found = EvenSpacing().estimate([StratumValues("site", 1.0, values, starts=np.ones(4, int))])
    assert found.standard_error == pytest.approx(values.std(ddof=1) / 2)
    assert "no credit" in found.caution
    assert found.start_variances == ()


def test_starts_of_several_strata_are_weighed():
    """Σ W²·V and Satterthwaite's degrees of freedom, worked by hand.

    Upper: starts of means 2 and 6 from 2 results each: 2·(2² + 2²)/(4·1) = 4. Lower: means 1, 4, 7
    from 1 result each: (9 + 0 + 9)/(3·2) = 3. W = 0.25 and 0.75: 0.25 + 1.6875 = 1.9375; df =
    1.9375² / (0.25²/1 + 1.6875²/2) = 2.5288.
    """
    upper = StratumValues(
        "upper", 0.25, np.array([1.0, 3.0, 5.0, 7.0]), starts=np.array([1, 1, 2, 2])
    )
    lower = StratumValues("lower", 0.75, np.array([1.0, 4.0, 7.0]), starts=np.array([1, 2, 3]))
    found = EvenSpacing(3).estimate([upper, lower])
    assert found.mean == pytest.approx(0.25 * 4 + 0.75 * 4)
    assert found.standard_error == pytest.approx(math.sqrt(1.9375))
    assert found.degrees_of_freedom == pytest.approx(1.9375**2 / (0.0625 + 1.6875**2 / 2))
    assert "so that the interval is wide" in found.caution
    assert [entry.variance for entry in found.start_variances] == pytest.approx([4.0, 3.0])


def test_stratum_left_with_one_result_or_one_start_takes_no_credit():
    """A variance between starts needs two; the fallback is said."""
    two = StratumValues("upper", 0.5, np.array([1.0, 3.0]), starts=np.array([1, 2]))
    one = StratumValues("lower", 0.5, np.array([4.0]), starts=np.array([1]))
    found = EvenSpacing(2).estimate([two, one], single_result="borrow-spread")
    assert "kept a single result" in found.caution
    same = StratumValues("lower", 0.5, np.array([4.0, 6.0]), starts=np.array([2, 2]))
    assert EvenSpacing(2).estimate([two, same]).start_variances == ()


@pytest.mark.parametrize(
    ("layout", "words"),
    [
        ("stratified", "One random number times that length is a distance"),
        ("even-spacing", "parted into as many equal pieces as there are locations"),
    ],
)
def test_procedure_is_said_in_words(layout, words):
    """A reviewer reads what was done on lines, and nothing of boxes and polygons."""
    campaign = line_campaign(layout)
    text = " ".join(procedure_in_words(campaign, locate(campaign, line_frame(), COUNTS)))
    assert words in text
    assert "box" not in text
