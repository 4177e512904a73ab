"""Means with non-detects, against published numbers, brute force, closed forms and other fits."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import optimize, stats

from fieldplan.base.errors import DesignError
from fieldplan.stats.censored import (
    CensoredMean,
    CensoredMethod,
    bounds_of_mean,
    censored_mean,
    refuse_too_few,
    weighted_mean,
)
from fieldplan.stats.censored_choice import choose_method
from fieldplan.stats.censored_fit import fit_censored
from fieldplan.stats.censoring_forecast import chance_of_few
from fieldplan.stats.kaplan_meier import kaplan_meier, kaplan_meier_mean
from fieldplan.stats.order_statistics import fill_in, order_statistics_mean, plotting_positions
from fieldplan.stats.profile_mean import jackknifed, profile_mean, profile_of_mean
from tests.evidence.non_detects import Cell, simulate
from tests.unit.stats import published

METHODS: tuple[CensoredMethod, ...] = (
    "kaplan-meier",
    "order-statistics",
    "lognormal-likelihood",
    "gamma-likelihood",
    "normal-likelihood",
)
DETECTS = [5.5, 6.0, 7.5, 9.0, 12.0, 20.0, 31.0, 2.5]
LIMITS = [5.0, 5.0, 2.0, 10.0]


# --- Kaplan and Meier ----------------------------------------------------------------------------


@pytest.mark.parametrize("number", ["A09-034", "A09-035", "A09-036"])
def test_shares_are_those_of_kaplan_and_meiers_own_example(number):
    """Source: Kaplan & Meier 1958, p. 464, as in values.csv; times are turned about 100."""
    row = published.row(number)
    detects, limits = turned(row.inputs["times"], row.inputs["events"])
    curve = kaplan_meier(detects, limits)
    found = next(j.below for j in curve.jumps if j.value == 100 - row.inputs["at"])
    assert found == pytest.approx(row.exact, abs=1e-12)


@pytest.mark.parametrize(
    ("mean_row", "error_row"), [("A09-038", "A09-039"), ("A09-040", "A09-041")]
)
def test_mean_and_standard_error_are_those_of_survival_times(mean_row, error_row):
    """Source: values.csv A09-038 to -041, aml data by R survival, printed without the factor."""
    row = published.row(mean_row)
    detects, limits = turned(row.inputs["times"], row.inputs["events"], about=200)
    curve = kaplan_meier(detects, limits)
    at = min(limits) if curve.left > 0 else 0.0
    assert 200 - curve.mean(at) == pytest.approx(row.exact, abs=1e-9)
    error = curve.standard_error(at, factor=False)
    assert error == pytest.approx(published.row(error_row).exact, abs=1e-9)


def turned(times, events, *, about=100.0):
    """Turn right-censored times into left-censored results."""
    pairs = list(zip(times, events, strict=True))
    return [about - t for t, e in pairs if e], [about - t for t, e in pairs if not e]


def test_the_median_is_the_published_one():
    """Source: Berthouex & Brown 2002, example 15.1 (A09-027): 4 of 27 below 6, median 7.6."""
    row = published.row("A09-027")
    detects = [x for x in row.inputs["x"] if x > 0]
    assert kaplan_meier(detects, [6.0] * 4).quantile(0.5) == row.exact


def test_without_non_detects_kaplan_and_meier_give_students_interval():
    """Closed form: the product limit is then the plain sample, and the factor makes it s²/n."""
    found = kaplan_meier_mean(DETECTS, [])
    expected = stats.ttest_1samp(DETECTS, 0).confidence_interval(0.95)
    assert (found.low, found.high) == pytest.approx((expected.low, expected.high), rel=1e-10)
    assert not found.upper_bound


def test_one_limit_makes_the_mean_the_bound_that_it_is():
    """Closed form: with one limit below all detects the mean is that with them at the limit."""
    detects, limits = [6.0, 7.5, 9.0, 12.0], [5.0, 5.0]
    found = kaplan_meier_mean(detects, limits)
    assert found.upper_bound
    low, high = bounds_of_mean(detects, limits)
    assert found.mean == pytest.approx(high, rel=1e-12)
    assert found.numbers["mean_at_0"] == pytest.approx(low, rel=1e-12)
    at_zero = stats.ttest_1samp([*detects, 0, 0], 0).confidence_interval(0.95)
    assert found.low < low
    assert found.low == pytest.approx(
        low - (low - at_zero.low) * math.sqrt(5 / 6 * 4 / 3), rel=1e-9
    )


def test_a_detect_below_every_limit_leaves_no_share_open():
    """Then the estimate is whole, and no bound."""
    assert not kaplan_meier_mean(DETECTS, [5.0, 10.0]).upper_bound


def test_self_consistency_gives_the_same_shares():
    """Brute force: spreading each non-detect over what lies below it settles on the same shares.

    Source: Efron 1967, redistribution of censored mass (from memory).
    """
    detects, limits = [2.0, 4.0, 6.0, 8.0, 9.0], [5.0, 7.0, 5.0]
    values = np.array(sorted(detects))
    share = np.full(values.size, 1 / values.size)
    for _ in range(5000):
        new = np.full(values.size, 1.0)
        for limit in limits:
            inside = values < limit
            new[inside] += share[inside] / share[inside].sum()
        share = new / new.sum()
    curve = kaplan_meier(detects, limits)
    assert curve.mean(0.0) == pytest.approx(float(share @ values), abs=1e-9)


# --- order statistics ----------------------------------------------------------------------------


def test_plotting_positions_follow_their_definition():
    """Worked by hand for limits of 2 and 5: detects 3, 6, 8; non-detects <2, <5, <5."""
    detected, censored = plotting_positions([3.0, 6.0, 8.0], [2.0, 5.0, 5.0])
    above_5 = 2 / (2 + 4)
    above_2 = above_5 + 1 / (1 + 1) * (1 - above_5)
    assert [p for _, p in detected] == pytest.approx(
        [
            1 - above_2 + (above_2 - above_5) / 2,
            1 - above_5 + above_5 / 3,
            1 - above_5 + 2 * above_5 / 3,
        ]
    )
    assert [p for _, p in censored] == pytest.approx(
        [(1 - above_2) / 2, (1 - above_5) / 3, 2 * (1 - above_5) / 3]
    )


def test_positions_without_non_detects_are_weibulls():
    """Closed form: i/(n + 1)."""
    detected, censored = plotting_positions([4.0, 1.0, 3.0], [])
    assert detected == [(1.0, 0.25), (3.0, 0.5), (4.0, 0.75)]
    assert censored == []


def test_the_line_is_that_of_scipy():
    """Source: scipy.stats.linregress on scipy's normal quantiles."""
    done = fill_in(DETECTS, LIMITS)
    detected, censored = plotting_positions(DETECTS, LIMITS)
    line = stats.linregress(
        stats.norm.ppf([p for _, p in detected]), np.log([x for x, _ in detected])
    )
    assert (done.slope, done.intercept) == pytest.approx((line.slope, line.intercept), rel=1e-9)
    on_line = np.exp(line.intercept + line.slope * stats.norm.ppf([p for _, p in censored]))
    assert done.filled == pytest.approx(np.minimum(on_line, [x for x, _ in censored]), rel=1e-9)


def test_exactly_lognormal_results_are_filled_in_exactly():
    """Closed form: detects on a line of logs draw that line, whatever was censored."""
    z = stats.norm.ppf(np.arange(1, 20) / 20)
    values = np.exp(1 + 0.7 * z)
    limit = float((values[7] + values[8]) / 2)
    detected, censored = plotting_positions(list(values[8:]), [limit] * 8)
    done = fill_in([math.exp(1 + 0.7 * stats.norm.ppf(p)) for _, p in detected], [limit] * 8)
    expected = [math.exp(1 + 0.7 * stats.norm.ppf(p)) for _, p in censored]
    assert done.filled == pytest.approx(np.minimum(expected, limit), rel=1e-9)


def test_completed_results_have_the_mean_that_is_reported():
    """The mean is that of detects and filled numbers, the error s/√n of them."""
    found, done = order_statistics_mean(DETECTS, LIMITS), fill_in(DETECTS, LIMITS)
    values = np.array([*done.detects, *done.filled])
    assert found.mean == pytest.approx(values.mean(), rel=1e-12)
    assert found.standard_error == pytest.approx(stats.sem(values), rel=1e-12)
    assert found.numbers["skewness"] == pytest.approx(stats.skew(values), rel=1e-12)


# --- likelihood ----------------------------------------------------------------------------------


def on_three_places(mean, variance, count):
    """Give ``count`` values, a multiple of 3, with this mean and variance of divisor n."""
    off = math.sqrt(1.5 * variance)
    return [mean - off, mean, mean + off] * (count // 3)


COHEN = [f"A09-0{k:02d}" for k in (1, 2, 3, 4, 5, 6, 7, 9, 11)]


@pytest.mark.parametrize("number", COHEN)
def test_cohens_lambda_is_met(number):
    """Source: Cohen 1961 by Berthouex & Brown, table 15.4: μ = mean − λ (mean − limit)."""
    row = published.row(number)
    h, gamma = row.inputs["h"], row.inputs["gamma"]
    missing = round(300 * h / (1 - h))
    assert abs(missing / (300 + missing) - h) < 1e-3
    count = {0.3: 210, 0.4: 300, 0.1: 270, 0.2: 240, 0.5: 300}[h]
    detects = on_three_places(11.0, gamma, count)
    found = profile_of_mean(detects, [10.0] * round(count * h / (1 - h)), "normal")
    assert 11.0 - found.mean == pytest.approx(row.exact, abs=2e-5)


@pytest.mark.parametrize(("number", "what"), [("A09-014", 2), ("A09-015", 1), ("A09-026", 1)])
def test_spread_of_a_normal_is_the_likelihoods(number, what):
    """Source: values.csv; 1.834, 1.354, 153.6: Berthouex & Brown ex. 15.4 and G-9's sulfate."""
    inputs = published.row(number).inputs
    found = profile_of_mean(inputs["detects"], [inputs["limit"]] * inputs["nd"], "normal")
    assert found.spread**what == pytest.approx(published.row(number).exact, rel=1e-6)


def test_mean_of_a_normal_is_the_likelihoods():
    """Source: EPA QA/G-9 sulfate example (A09-025), exact 1724.0; λ of A09-024 follows from it."""
    inputs = published.row("A09-025").inputs
    detects = inputs["detects"]
    found = profile_of_mean(detects, [inputs["limit"]] * inputs["nd"], "normal")
    assert found.mean == pytest.approx(published.row("A09-025").exact, rel=1e-7)
    centre = published.row("A09-022").exact
    assert np.mean(detects) == pytest.approx(centre, rel=1e-9)
    known = (centre - found.mean) / (centre - inputs["limit"])
    assert known == pytest.approx(published.row("A09-024").exact, rel=1e-5)


def test_a_lognormal_example_is_met():
    """Source: Berthouex & Brown 2002, example 15.5 (A09-016 to -020), 40 % below the limit."""
    inputs = published.row("A09-016").inputs
    logs = on_three_places(inputs["mean_d"], inputs["var_d"], 300)
    limits = [math.exp(inputs["limit"])] * 200
    found = profile_of_mean([math.exp(x) for x in logs], limits, "lognormal")
    assert found.spread**2 == pytest.approx(published.row("A09-018").exact, rel=2e-5)
    mu = math.log(found.mean) - found.spread**2 / 2
    assert mu == pytest.approx(published.row("A09-017").exact, rel=1e-6)
    assert found.mean == pytest.approx(published.row("A09-019").exact, rel=1e-6)
    variance = found.mean**2 * math.expm1(found.spread**2)
    assert variance == pytest.approx(published.row("A09-020").exact, rel=5e-5)
    centre, limit = inputs["mean_d"], inputs["limit"]
    known = (centre - mu) / (centre - limit)
    assert known == pytest.approx(published.row("A09-016").exact, rel=1e-5)


@pytest.mark.parametrize("model", ["lognormal", "gamma", "normal"])
def test_the_fit_is_that_of_a_free_search(model):
    """Other route: censored_fit searches both parameters at once by Nelder and Mead."""
    found, other = profile_of_mean(DETECTS, LIMITS, model), fit_censored(DETECTS, LIMITS, model)
    assert found.mean == pytest.approx(other.mean, rel=1e-5)


@pytest.mark.parametrize("model", ["lognormal", "gamma", "normal"])
def test_the_ends_lie_where_scipys_likelihood_has_fallen_by_the_drop(model):
    """Other library: densities of scipy.stats, spread by scipy.optimize, at ends and top."""

    def best(mean):
        def loss(spread):
            law = {
                "lognormal": lambda: stats.lognorm(spread, scale=mean * math.exp(-(spread**2) / 2)),
                "gamma": lambda: stats.gamma(spread**-2, scale=mean * spread**2),
                "normal": lambda: stats.norm(mean, spread),
            }[model]()
            return -float(law.logpdf(DETECTS).sum() + law.logcdf(LIMITS).sum())

        ends = (1.0, 80.0) if model == "normal" else (0.05, 4.0)
        return float(
            optimize.minimize_scalar(
                loss, bounds=ends, method="bounded", options={"xatol": 1e-9}
            ).fun
        )

    found = profile_of_mean(DETECTS, LIMITS, model)
    top = best(found.mean)
    n, t = len(DETECTS) + len(LIMITS), float(stats.t.ppf(0.975, 11))
    assert found.drop == pytest.approx(n / 2 * math.log1p(t**2 / (n - 1)), rel=1e-9)
    assert best(found.low) - top == pytest.approx(found.drop, abs=1e-5)
    assert best(found.high) - top == pytest.approx(found.drop, abs=1e-5)


def test_a_normal_without_non_detects_has_exactly_students_interval():
    """Closed form: this is what the drop is set for."""
    found = profile_mean(DETECTS, [], "normal-likelihood")
    expected = stats.ttest_1samp(DETECTS, 0).confidence_interval(0.95)
    assert (found.low, found.high) == pytest.approx((expected.low, expected.high), rel=1e-7)


def test_logs_without_non_detects_are_the_published_ones():
    """Source: EPA OSWER 9285.6-10 (A08-004, -005): mean and SD of 31 logs, by the fit."""
    inputs = published.row("A08-004").inputs
    found = profile_of_mean(inputs["x"], [], "lognormal")
    mu = math.log(found.mean) - found.spread**2 / 2
    assert mu == pytest.approx(published.row("A08-004").exact, rel=1e-6)
    sd = found.spread * math.sqrt(31 / 30)
    assert sd == pytest.approx(published.row("A08-005").exact, rel=1e-5)


@pytest.mark.parametrize("method", ["kaplan-meier", "order-statistics"])
def test_mean_and_sd_without_non_detects_are_the_published_ones(method):
    """Source: EPA OSWER 9285.6-10 (A08-001, -002); Berthouex & Brown, ex. 15.1 (A09-032)."""
    for mean_row, sd_row in (("A08-001", "A08-002"), (None, "A09-032")):
        row = published.row(sd_row)
        found = censored_mean(row.inputs["x"], [], method)
        assert found.standard_error * math.sqrt(found.n) == pytest.approx(row.exact, rel=1e-9)
        if mean_row:
            assert found.mean == pytest.approx(published.row(mean_row).exact, rel=1e-9)


def test_a_lognormal_without_non_detects_has_the_textbook_mean():
    """Closed form: exp(mean of logs + half their variance of divisor n)."""
    logs = np.log(DETECTS)
    found = profile_of_mean(DETECTS, [], "lognormal")
    assert found.mean == pytest.approx(math.exp(logs.mean() + logs.var() / 2), rel=1e-6)


@pytest.mark.parametrize("model", ["lognormal", "gamma", "normal"])
def test_the_jackknife_is_that_of_fits_to_all_but_one(model):
    """Brute force: every result left out in turn, each fit from scratch; one lies far off."""
    detects, limits = [*DETECTS, 90.0], LIMITS
    n, fitted = len(detects) + len(limits), profile_of_mean(detects, limits, model).mean
    fits = [
        profile_of_mean(detects[:k] + detects[k + 1 :], limits, model).mean
        for k in range(len(detects))
    ]
    fits += [
        profile_of_mean(detects, limits[:k] + limits[k + 1 :], model).mean
        for k in range(len(limits))
    ]
    expected = n * fitted - (n - 1) * float(np.mean(fits))
    assert jackknifed(detects, limits, model, fitted=fitted) == pytest.approx(expected, rel=2e-4)


@pytest.mark.parametrize("model", ["lognormal", "gamma", "normal"])
def test_the_error_is_that_of_scipys_second_derivatives(model):
    """Other route: the inverse of the observed information in mean and spread, by differences."""
    found = profile_of_mean(DETECTS, LIMITS, model)

    def loss(mean, spread):
        law = {
            "lognormal": lambda: stats.lognorm(spread, scale=mean * math.exp(-(spread**2) / 2)),
            "gamma": lambda: stats.gamma(spread**-2, scale=mean * spread**2),
            "normal": lambda: stats.norm(mean, spread),
        }[model]()
        return -float(law.logpdf(DETECTS).sum() + law.logcdf(LIMITS).sum())

    m, s, a, b = found.mean, found.spread, 1e-3 * found.mean, 1e-3 * found.spread
    mm = (loss(m + a, s) - 2 * loss(m, s) + loss(m - a, s)) / a**2
    ss = (loss(m, s + b) - 2 * loss(m, s) + loss(m, s - b)) / b**2
    corners = loss(m + a, s + b) - loss(m + a, s - b) - loss(m - a, s + b) + loss(m - a, s - b)
    ms = corners / (4 * a * b)
    assert found.standard_error == pytest.approx(math.sqrt(ss / (mm * ss - ms**2)), rel=1e-3)


# --- what holds for all ---------------------------------------------------------------------------


@pytest.mark.parametrize("method", METHODS)
@pytest.mark.parametrize("times", [1000.0, 1e-6, 1e9])
def test_a_change_of_unit_changes_nothing_else(method, times):
    """From mg/kg to µg/kg everything is a thousand times as large."""
    one = censored_mean(DETECTS, LIMITS, method)
    many = censored_mean([times * x for x in DETECTS], [times * x for x in LIMITS], method)
    ours = (many.mean, many.standard_error, many.low, many.high)
    expected = [times * x for x in (one.mean, one.standard_error, one.low, one.high)]
    assert ours == pytest.approx(expected, rel=1e-4)


@pytest.mark.parametrize("method", METHODS)
def test_a_limit_on_one_side_leaves_the_other_end_open(method):
    """An upper limit is the end of a wider interval: 90 % two-sided is 95 % one-sided."""
    upper = censored_mean(DETECTS, LIMITS, method, kind="upper-limit")
    lower = censored_mean(DETECTS, LIMITS, method, kind="lower-limit")
    both = censored_mean(DETECTS, LIMITS, method, confidence=0.90)
    assert (upper.low, lower.high) == (None, None)
    assert (lower.low, upper.high) == pytest.approx((both.low, both.high), rel=1e-6)


@settings(max_examples=40, deadline=None)
@given(
    st.lists(st.floats(0.01, 1e4), min_size=4, max_size=30, unique=True),
    st.lists(st.sampled_from([0.05, 0.5, 5.0, 50.0]), min_size=0, max_size=12),
)
def test_order_statistics_lie_between_the_bounds(detects, limits):
    """Nothing is filled in below 0 or above its limit."""
    if len(limits) > 0.8 * (len(detects) + len(limits)):
        return
    found = censored_mean(detects, limits, "order-statistics")
    low, high = bounds_of_mean(detects, limits)
    assert low - 1e-9 * high <= found.mean <= high * (1 + 1e-9)
    assert found.low <= found.mean <= found.high


@pytest.mark.parametrize("method", METHODS)
@pytest.mark.parametrize(
    ("detects", "limits", "words"),
    [
        ([6.0, 6.0, 7.0], [5.0], "2 different detects among 4 results"),
        ([6.0, 7.0, 8.0], [5.0] * 13, "13 of 16 results are non-detects, more than 80%"),
    ],
)
def test_a_mean_is_refused_where_only_bounds_are_left(method, detects, limits, words):
    """Fewer than 3 detects, or more than 80 % below: the message has the bounds."""
    with pytest.raises(DesignError, match=words) as refusal:
        censored_mean(detects, limits, method)
    assert "All that is left are its bounds" in str(refusal.value)


def test_eighty_per_cent_is_still_answered():
    """The rule says more than 80 %."""
    refuse_too_few([6.0, 7.0, 8.0], [5.0] * 12)


@pytest.mark.parametrize("method", ["order-statistics", "lognormal-likelihood", "gamma-likelihood"])
def test_a_zero_has_no_logarithm(method):
    """One clear line, no NaN."""
    with pytest.raises(DesignError, match="0"):
        censored_mean([0.0, 2.0, 3.0, 4.0], [1.0], method)


def test_published_order_statistics_hold_the_median_as_often_as_they_say():
    """Source: Berthouex & Brown 2002, example 15.1 (A09-028): ranks 9 and 20 of 27, 96.4 %."""
    row = published.row("A09-028")
    n, low, high = row.inputs["n"], row.inputs["lo"], row.inputs["hi"]
    held = chance_of_few(n, 0.5, least=high) - chance_of_few(n, 0.5, least=low)
    assert held == pytest.approx(row.exact, rel=1e-9)


# --- strata ---------------------------------------------------------------------------------------


def test_one_stratum_of_the_whole_changes_nothing():
    """Weight 1 gives back mean, error and ends."""
    one = censored_mean(DETECTS, LIMITS, "order-statistics")
    whole = weighted_mean([one], [1.0])
    assert (whole.mean, whole.standard_error, whole.low, whole.high) == pytest.approx(
        (one.mean, one.standard_error, one.low, one.high)
    )


def test_even_intervals_combine_as_standard_errors_do():
    """Closed form: with mean ± t·SE in each part, the ends are mean ± t·√Σ W²·SE²."""
    parts = [
        CensoredMean("kaplan-meier", m, e, m - 2 * e, m + 2 * e, 9, 1)
        for m, e in ((10.0, 1.0), (30.0, 4.0), (5.0, 0.5))
    ]
    whole = weighted_mean(parts, [0.5, 0.2, 0.3])
    error = math.sqrt(0.5**2 + 0.8**2 + 0.15**2)
    assert whole.standard_error == pytest.approx(error)
    assert (whole.low, whole.high) == pytest.approx((12.5 - 2 * error, 12.5 + 2 * error))


# --- the choice, and coverage -----------------------------------------------------------------


@pytest.mark.parametrize(
    ("n", "missing", "shape", "method"),
    [
        (30, 12, None, "order-statistics"),
        (30, 13, None, "bounds"),
        (29, 5, None, "bounds"),
        (20, 12, "lognormal", "lognormal-likelihood"),
        (20, 13, "lognormal", "bounds"),
        (19, 2, "gamma", "bounds"),
        (40, 20, "gamma", "gamma-likelihood"),
        (200, 40, None, "order-statistics"),
        (201, 40, None, "bounds"),
        (900, 500, "gamma", "gamma-likelihood"),
        (40, 20, "normal", "normal-likelihood"),
    ],
)
def test_share_number_and_shape_choose_the_method(n, missing, shape, method):
    """The limits are those of docs/evidence/non-detects.md; the reason has the numbers."""
    choice = choose_method(n, missing, shape=shape)
    assert choice.method == method
    assert f"{missing} of {n} results are non-detects" in choice.reason


@pytest.mark.parametrize(
    ("n", "together", "method"),
    [(10, 30, "order-statistics"), (9, 40, "bounds"), (12, 24, "bounds"), (60, 240, "bounds")],
)
def test_strata_are_counted_together_with_a_least_number_each(n, together, method):
    """Three strata of 10 are what was simulated."""
    assert choose_method(n, 3, together=together).method == method


def test_more_non_detects_than_results_are_refused():
    """There is no such share."""
    with pytest.raises(DesignError, match="5 non-detects of 4 results"):
        choose_method(4, 5)


SPOT = [
    Cell("lognormal, CV 1", 20, 0.6, 1, "lognormal-likelihood"),
    Cell("lognormal, CV 0.5", 20, 0.4, 3, "lognormal-likelihood"),
    Cell("gamma, CV 1", 30, 0.4, 1, "order-statistics"),
    Cell("normal, CV 0.3", 30, 0.4, 3, "order-statistics"),
]


@pytest.mark.parametrize("cell", SPOT, ids=lambda c: f"{c.population} {c.method}")
def test_coverage_holds(cell):
    """Bars: 94 % on lognormals by likelihood, 90 % on unknown shapes; four standard errors."""
    bar, repetitions = 0.94 if "likelihood" in cell.method else 0.90, 500
    found = simulate(cell, repetitions=repetitions)
    assert found.coverage >= bar - 4 * math.sqrt(bar * (1 - bar) / repetitions)
