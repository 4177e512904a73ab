"""The whole answer for questions of every kind."""

import math
from dataclasses import replace
from itertools import pairwise

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from fieldplan.base.errors import DesignError
from fieldplan.sizing.answer import answer
from fieldplan.sizing.question import ControlRate, Part, Prices
from fieldplan.stats.shape import t_coverage
from tests.unit.sizing.asking import SIGMAS, WEIGHTS, ask, three, whole

EUR = Prices("EUR", mobilisation=400.0, per_location=30.0, per_analysis=45.0)


def test_pilot_example() -> None:
    """By hand and scipy: (27.57/6)² = 21.11; P(χ²₇ ≥ 6.717) = 0.459; 31, 39, 53."""
    size = answer(ask(whole(results=8), 6.0))
    assert (size.plain_n, size.needed, size.planned) == (22, 22, 22)
    assert size.unrounded == pytest.approx((27.57 / 6) ** 2)
    assert size.chance_plain == pytest.approx(stats.chi2.sf(7 * 27.57**2 / 22 / 36, 7))
    assert [(entry.assurance, entry.n) for entry in size.assured] == [
        (0.67, 31),
        (0.80, 39),
        (0.90, 53),
    ]


def test_chosen_assurance_decides_and_plain_is_still_said() -> None:
    """39 results at 80 %, and the plain 22 with its 46 % beside them."""
    size = answer(ask(whole(results=8), 6.0, assurance=0.8))
    assert (size.plain_n, size.needed) == (22, 39)
    assert size.chance_needed is not None
    assert size.chance_needed >= 0.8
    assert "the plain formula (22) would be enough in 46 % of campaigns" in size.sentences[1]


def test_typed_sigma_gives_no_chance_and_says_so() -> None:
    """Nobody said how many results stand behind it."""
    size = answer(ask(whole(), 6.0))
    assert size.chance_plain is None
    assert size.chance_needed is None
    assert size.assured == ()
    assert "no chance can be given" in size.sentences[1]
    assert "falls short where the true one is larger" in size.sentences[1]
    assert "half of campaigns" not in " ".join([*size.sentences, *size.conditions])
    assert any("no chance can be given" in line for line in size.conditions)


def test_assurance_has_nothing_to_hold_to_without_a_pilot() -> None:
    """The plain number stays, and the sentence says why."""
    size = answer(ask(whole(), 6.0, assurance=0.8))
    assert size.needed == size.plain_n == 22
    assert "The assurance of 80 % has nothing to hold to" in size.sentences[1]


def test_half_width_with_exact_sigma_still_counts_luck() -> None:
    """Kupper & Hafner 1989, by scipy: smallest n with P(χ² ≤ (n−1) n h²/(t² σ²)) ≥ 0.9."""
    size = answer(ask(whole(58.0), 20.0, target="half_width", assurance=0.9))
    n = 2
    while stats.chi2.cdf((n - 1) * n * (20 / 58 / stats.t.ppf(0.975, n - 1)) ** 2, n - 1) < 0.9:
        n += 1
    assert (size.plain_n, size.needed) == (35, n)
    assert size.chance_needed is None
    assert "only if sigma is exactly right" in size.sentences[1]


def test_strata_share_the_smallest_total() -> None:
    """By hand: 14.29 becomes 5/4/6 with SE 8.80; the floor of 6 costs three more."""
    size = answer(ask(three(), 9.0, allocation="neyman"))
    assert size.unrounded == pytest.approx(14.29, abs=0.005)
    assert [entry.needed for entry in size.strata] == [5, 4, 6]
    assert size.standard_error == pytest.approx(8.80, abs=0.005)
    floored = answer(ask(three(), 9.0, allocation="neyman", floor=6))
    assert [entry.needed for entry in floored.strata] == [6, 6, 6]
    assert floored.standard_error == pytest.approx(8.06, abs=0.005)
    assert [entry.floor_applied for entry in floored.strata] == [False, True, False]
    assert "The floor of 6 in every stratum costs 3 more than 15." in floored.sentences


def test_proportional_total_before_rounding() -> None:
    """By hand: 1786.86 / 81 = 22.06; 14/4/4 meets the target, no 21 does (brute force above)."""
    size = answer(ask(three(), 9.0))
    assert size.unrounded == pytest.approx(22.06, abs=0.005)
    assert size.needed == 22
    assert size.standard_error <= 9.0


def test_list_is_corrected() -> None:
    """By hand: 11.86 becomes 6.42, so 7 of 14."""
    size = answer(ask(whole(3.1, population=14), 0.9))
    assert size.needed == 7
    assert size.standard_error == pytest.approx(3.1 * math.sqrt((1 - 7 / 14) / 7))


def test_relative_half_width_is_a_share_of_the_mean() -> None:
    """20 % of 95 is 19, so both questions have one answer."""
    relative = answer(ask(whole(58.0), 0.2, target="relative_half_width", mean=95.0))
    absolute = answer(ask(whole(58.0), 19.0, target="half_width"))
    assert relative.needed == absolute.needed == 39
    assert relative.target_half_width == pytest.approx(19.0)
    assert "≤ 19 (20 % of an expected mean of 95)" in relative.target


@pytest.mark.parametrize("kind", ["upper-limit", "lower-limit"])
def test_limits_need_fewer_and_say_their_side(kind: str) -> None:
    """Berthouex & Brown's inputs one-sided: smallest n with t(n−1, 0.95) · 58/√n ≤ 20."""
    size = answer(ask(whole(58.0), 20.0, target="half_width", interval=kind))
    n = 2
    while stats.t.ppf(0.95, n - 1) * 58 / math.sqrt(n) > 20:
        n += 1
    assert size.needed == n == 25
    side = "above" if kind == "upper-limit" else "below"
    assert f"95 % {kind.replace('-', ' ')} no more than 20 {side} the mean" in size.target


def test_losses_are_added_by_stratum_and_lists_cap_them() -> None:
    """Rounded up, n / (1 − share): 5/0.9 → 6, 4/0.5 → 8 but the list has 5, 6/1 → 6."""
    parts = tuple(
        Part(name, weight, sigma, loss=loss, population=size)
        for name, weight, sigma, loss, size in zip(
            "abc", WEIGHTS, SIGMAS, (0.1, 0.5, 0.0), (None, 5, None), strict=True
        )
    )
    size = answer(ask(parts, 9.0, allocation="neyman", alternates=3))
    for entry, part in zip(size.strata, parts, strict=True):
        visits = math.ceil(entry.needed / (1 - part.loss) - 1e-9)
        assert entry.planned == min(visits, part.population or visits)
    assert size.strata[1].planned == 5
    assert [entry.alternates for entry in size.strata] == [3, 0, 3]
    assert any(line.startswith("b has only 5 units") for line in size.sentences)


def test_control_samples_are_counted_apart_and_paid() -> None:
    """22 locations: 10 % is 2.2, so 3; with 2 blanks 27 analyses: 400 + 22·30 + 27·45 = 2275."""
    controls = (
        ControlRate("field duplicate", 0.1, None, "own plan"),
        ControlRate("equipment blank", None, 2, "own plan"),
    )
    size = answer(ask(whole(), 6.0, prices=EUR, controls=controls))
    assert [entry.count for entry in size.qc] == [3, 2]
    assert (size.needed, size.cost, size.currency) == (22, 2275.0, "EUR")
    assert "Expected cost: 2275 EUR, control samples included." in size.sentences


def test_exact_multiples_are_not_rounded_up() -> None:
    """20 locations at 5 % are one duplicate, and 9 results at a loss of 10 % are 10 visits."""
    controls = (ControlRate("field duplicate", 0.05, None, "own plan"),)
    size = answer(ask(whole(math.sqrt(720)), 6.0, controls=controls))
    assert (size.needed, size.qc[0].count) == (20, 1)
    assert answer(ask(whole(18.0, loss=0.1), 6.0)).planned == 10


@settings(max_examples=30, deadline=None)
@given(st.floats(700, 6000), st.sampled_from(["neyman", "proportional"]))
def test_budget_buys_all_it_can(budget: float, allocation: str) -> None:
    """Within the budget, and one more result would break it: checked by the prices alone."""
    controls = (ControlRate("field duplicate", 0.1, None, "own plan"),)
    question = ask(
        three(), budget, target="budget", prices=EUR, controls=controls, allocation=allocation
    )
    if budget < 400 + 6 * 75 + 45:
        with pytest.raises(DesignError, match="is too small: the smallest design"):
            answer(question)
        return
    size = answer(question)

    def price(n: int) -> float:
        return 400 + 75 * n + 45 * math.ceil(n / 10 - 1e-9)

    assert size.cost == price(size.planned) <= budget < price(size.planned + 1)
    assert size.target_standard_error is None
    assert size.chance_needed is None


def test_budget_for_a_whole_list_visits_it_all() -> None:
    """A budget beyond the list buys the list, whose mean then has no sampling error."""
    question = ask(whole(3.1, population=14), 9000.0, target="budget", prices=EUR)
    size = answer(question)
    assert (size.needed, size.standard_error) == (14, 0.0)


def test_budget_without_prices_is_refused() -> None:
    """Nothing says what a location costs."""
    with pytest.raises(DesignError, match=r"a budget of 4000 needs prices; add a \[cost\] table"):
        ask(whole(), 4000.0, target="budget")
    free = Prices("EUR", mobilisation=100.0)
    with pytest.raises(DesignError, match="are both 0"):
        answer(ask(whole(), 4000.0, target="budget", prices=free))


def test_typed_locations_fix_n_and_say_what_they_buy() -> None:
    """12 locations at a loss of a quarter leave 9 results: SE = 27.57/3; the target wants 22."""
    size = answer(ask(whole(results=8, loss=0.25), 6.0, locations=12))
    assert (size.plain_n, size.needed, size.planned) == (22, 9, 12)
    assert size.standard_error == pytest.approx(9.19)
    assert size.sentences[0] == (
        "The campaign file fixes 12 locations; after losses about 9 results remain."
    )
    assert any("would take 22 results" in line for line in size.sentences)
    assert size.chance_needed == pytest.approx(stats.chi2.sf(7 * 9.19**2 / 36, 7), abs=1e-9)


def test_typed_locations_below_the_floors_are_refused() -> None:
    """Three strata with 2 each need 6."""
    with pytest.raises(DesignError, match="5 results cannot fill 3 strata with at least 2 each"):
        answer(ask(three(), 9.0, locations=5))


def test_census_visits_all_and_keeps_other_errors_in_sight() -> None:
    """No error from choosing; time and laboratory remain."""
    size = answer(ask(whole(3.1, population=14), 0.9, census=True))
    assert (size.needed, size.planned, size.standard_error, size.half_width) == (14, 14, 0, 0)
    assert size.sentences[0] == "All 14 units of the list are visited."
    assert "from the laboratory remains" in size.conditions[0]
    assert size.curve[-1].n == 14
    with pytest.raises(DesignError, match="a census visits every unit of a list"):
        answer(ask(whole(), 0.9, census=True))


def test_a_target_that_takes_the_whole_list_is_said_in_words() -> None:
    """A chance of 100 % and an interval of ±0 say nothing; that no place is chosen does."""
    size = answer(ask(whole(3.1, population=14, results=8), 0.05, assurance=0.8))
    assert size.needed == 14
    assert size.sentences[0] == (
        "All 14 units of the list are visited: a standard error of the mean ≤ 0.05 takes every one."
    )
    said = " ".join(size.sentences)
    assert "With every unit taken, the mean of the list has no error from choosing units." in said
    assert "100 %" not in said
    assert "±0" not in said
    assert size.assured == ()
    assert "from the laboratory remains" in size.conditions[0]


def test_one_more_allows_and_two_more_allow_for_losses() -> None:
    """Grammar, since this is the first sentence that anybody reads."""
    said = {
        count: answer(ask(whole(results=8, loss=loss), 6.0)).sentences[0]
        for count, loss in ((1, 0.02), (2, 0.06))
    }
    assert "; 1 more allows for losses." in said[1]
    assert "; 2 more allow for losses." in said[2]


def test_grid_gets_no_credit() -> None:
    """Sized as simple random, and said."""
    grid = answer(ask(whole(), 6.0, grid=True))
    assert grid.needed == answer(ask(whole(), 6.0)).needed
    assert any("the grid gets no credit" in line for line in grid.conditions)


@pytest.mark.parametrize("interval", ["two-sided", "upper-limit"])
def test_conditions_name_what_skewness_asks_for(interval: str) -> None:
    """G1 = 1.8: 25·3.24 = 81 and 121·3.24 = 392.04, so 393; 8 results can show 2.27 at most."""
    parts = whole(results=8, skewness=1.8, pilot="pilot.csv")
    text = " ".join(answer(ask(parts, 6.0, interval=interval)).conditions)
    assert "needs about 81 results (n > 25·G1², Cochran 1977)" in text
    assert "an upper limit alone needs several times that, about 393, while a lower" in text
    assert "against 22 here" in text
    assert "8 results can show a skewness of 2.27 at most" in text
    assert "common practice for data that are not normal (no source)" in text
    assert "30 serve a two-sided 95 % interval up to a skewness of about 1, a limit" in text
    assert "a normal population needs no minimum" in text
    name = "interval" if interval == "two-sided" else "upper limit"
    assert f"a nominal 95 % {name} from 22 results holds the true mean depends on" in text
    share = t_coverage(22, 1.8, confidence=0.95, kind=interval)
    assert f"about {100 * share:.0f} % at 1.8, " in text


def test_a_lean_downwards_harms_the_lower_limit_and_not_the_upper() -> None:
    """Mirror image of the case above: the long tail lies below (simulated in test_lean.py)."""
    text = " ".join(answer(ask(whole(results=8, skewness=-1.8), 6.0)).conditions)
    assert "a lower limit alone needs several times that, about 393, while an upper" in text
    assert "limit errs on the careful side" in text


def test_little_skewness_proves_no_symmetry() -> None:
    """A pilot of 10 with G1 = −0.03: no number from it, but the rule and what 10 can show."""
    parts = whole(results=10, skewness=-0.03, pilot="pilot.csv")
    text = " ".join(answer(ask(parts, 6.0)).conditions)
    assert "show little skewness (G1 = −0.030)" in text
    assert "a small pilot never proves symmetry" in text
    assert "At a skewness of 2 that is 100 and 484." in text
    assert "needs about" not in text


def test_conditions_give_the_rule_where_no_skewness_is_known() -> None:
    """The rule with one worked value: 25·4 and 121·4."""
    text = " ".join(answer(ask(three(), 9.0)).conditions)
    assert "needs n above 25·G1²" in text
    assert "At a skewness of 2 that is 100 and 484." in text


@settings(max_examples=40, deadline=None)
@given(
    st.floats(1, 60),
    st.floats(0.08, 1.5),
    st.none() | st.integers(2, 25),
    st.sampled_from(["standard_error", "half_width"]),
    st.none() | st.sampled_from([0.67, 0.8, 0.9]),
    st.floats(0, 0.4),
    st.sampled_from(["neyman", "proportional"]),
)
def test_invariants_of_every_answer(
    sigma: float,
    share: float,
    results: int | None,
    target: str,
    assurance: float | None,
    loss: float,
    allocation: str,
) -> None:
    """What must hold whatever is asked."""
    parts = (
        Part("a", 0.6, sigma, results=results, loss=loss),
        Part("b", 0.4, 2 * sigma, results=results),
    )
    size = answer(
        ask(parts, share * sigma, target=target, assurance=assurance, allocation=allocation)
    )
    assert size.plain_n <= size.needed <= size.planned
    assert size.needed == sum(entry.needed for entry in size.strata)
    assert size.planned == sum(entry.planned for entry in size.strata)
    reached = size.standard_error if target == "standard_error" else size.half_width
    assert reached <= share * sigma * (1 + 1e-8)
    counts = [entry.n for entry in size.assured]
    assert counts == sorted(counts)
    if assurance is not None and results is not None:
        assert size.chance_needed is not None
        assert size.chance_needed >= assurance


def test_curve_runs_from_half_to_twice_with_its_band() -> None:
    """J24: −50 % to +100 %; the band is sigma ∓ 25 %; cost by the prices."""
    size = answer(ask(whole(results=8), 6.0, prices=EUR))
    assert (size.curve[0].n, size.curve[-1].n) == (11, 44)
    for point in size.curve:
        assert point.standard_error == pytest.approx(27.57 / math.sqrt(point.n))
        assert point.standard_error_low == pytest.approx(0.75 * point.standard_error)
        assert point.standard_error_high == pytest.approx(1.25 * point.standard_error)
        assert point.cost == 400 + 75 * point.n
        assert point.chance == pytest.approx(stats.chi2.sf(7 * 27.57**2 / point.n / 36, 7))
    assert all(a.standard_error > b.standard_error for a, b in pairwise(size.curve))


def test_long_curves_stay_readable_and_hold_both_numbers() -> None:
    """At most 42 points, plain and needed among them."""
    size = answer(ask(whole(results=5), 0.5, assurance=0.9))
    numbers = [point.n for point in size.curve]
    assert len(numbers) <= 42
    assert {size.plain_n, size.needed} <= set(numbers)


def test_working_shows_all_its_numbers() -> None:
    """Every step can be done again from its own inputs (formulas by hand)."""
    size = answer(ask(whole(results=8, loss=0.1), 6.0, assurance=0.8, prices=EUR))
    steps = {step.meaning: step for step in size.steps}
    first = steps["Results needed with sigma at face value, first pass"]
    s, target = (quantity.value for quantity in first.inputs)
    assert first.unrounded == pytest.approx((s / target) ** 2)
    assert first.rounded == 22
    upper = steps["Upper confidence limit of sigma at the chosen assurance"]
    s, known, quantile = (quantity.value for quantity in upper.inputs)
    assert upper.unrounded == pytest.approx(s * math.sqrt(known / quantile))
    assert quantile == pytest.approx(stats.chi2.ppf(0.2, 7))
    needed = steps["Results needed at the chosen assurance"]
    assert (needed.unrounded, needed.rounded) == (pytest.approx((upper.unrounded / 6) ** 2), 39)
    visits = steps["Locations to visit, with the loss allowance"]
    assert (visits.unrounded, visits.rounded) == (pytest.approx(39 / 0.9), 44)
    cost = steps["Cost of the round"]
    once, locations, visit, analysis, controls = (q.value for q in cost.inputs)
    assert cost.unrounded == once + locations * (visit + analysis) + controls * analysis
    assert all(step.formula and step.inputs and step.source for step in size.steps)


def test_working_of_strata_shows_every_share() -> None:
    """Shares before rounding sum to the total before rounding."""
    size = answer(ask(three(results=8), 9.0, allocation="neyman"))
    shares = [step for step in size.steps if step.symbol.startswith("n(")]
    assert [step.rounded for step in shares] == [5, 4, 6]
    assert math.fsum(step.unrounded for step in shares) == pytest.approx(size.unrounded)
    total = next(step for step in size.steps if step.symbol == "n")
    assert (total.unrounded, total.rounded) == (pytest.approx(14.288, abs=5e-4), 15)


@pytest.mark.parametrize(
    ("more", "said"),
    [
        ({"assurance": 0.3}, "at least 0.5 and below 1"),
        ({"confidence": 95}, "above 0.5 and below 1"),
        ({"target": "relative_half_width"}, r"write expected_mean in the \[\[sigma\]\] table"),
    ],
)
def test_questions_without_answer_are_refused(more: dict[str, object], said: str) -> None:
    """Each says the value and the remedy."""
    with pytest.raises(DesignError, match=said):
        ask(whole(), 0.2, **more)


def test_assurance_beyond_reach_is_said() -> None:
    """Two pilot results a stratum at 99.9 %."""
    parts = (Part("a", 0.5, 900.0, results=2), Part("b", 0.5, 900.0, results=2))
    with pytest.raises(DesignError, match=r"an assurance of 0\.999999 asks for more than"):
        answer(ask(parts, 1.0, assurance=0.999999))


def test_a_list_so_short_that_every_chance_takes_it_whole_is_said_to_be() -> None:
    """Two pilot results, three units: n = 2 by the formula, all three for 67 % and more."""
    size = answer(ask(whole(5.0, results=2, population=3), 3.0))
    assert (size.needed, size.assured) == (2, ())
    assert any("takes every unit of the list" in line for line in size.sentences)


@pytest.mark.parametrize(("sigma", "width"), [(10.0, 100.0), (10.0, 10.0), (10.0, 2.0)])
def test_half_width_of_a_typed_sigma_says_how_often_it_is_kept_if_sigma_is_right(sigma, width):
    """Closed form with scipy: P(t s/√n ≤ h) by χ² on n − 1, s scattering about the true sigma."""
    asked = replace(ask(whole(), 6.0), target="half_width", value=width)
    asked = replace(asked, parts=(replace(asked.parts[0], sigma=sigma),))
    size = answer(asked)
    n = size.needed
    point = stats.t.ppf(0.975, n - 1)
    kept = stats.chi2.cdf((n - 1) * n * (width / (point * sigma)) ** 2, n - 1)
    said = f"with sigma exactly right {100 * kept:.0f} % of campaigns keep the half-width"
    assert said in " ".join(size.sentences)
