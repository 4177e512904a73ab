"""A mean against a level: exact noncentral t, the guidance formula and their inverses."""

import math

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy import optimize, special, stats

from fieldplan.base.errors import DesignError
from fieldplan.stats.distributions import normal_quantile, student_quantile
from fieldplan.stats.intervals import t_interval
from fieldplan.stats.noncentral_t import noncentral_t_beyond
from fieldplan.stats.power import (
    expected_margin,
    guidance_n,
    mean_of_s,
    normal_n,
    one_sample_n,
    one_sample_power,
    power_at,
    shift_for_chance,
    sigma_of_change,
    smallest_difference,
    smallest_shift,
)
from fieldplan.stats.precision import standard_error, whole
from fieldplan.stats.summary import sample_mean, sample_sd
from tests.unit.stats.published import row

EXACT_TABLE = [f"A03-0{n}" for n in (11, 12, 14, 15, 17, 18, 19, 20, 21, 22, 31, 33, 34, 35)]
NORMAL_TABLE = [("A03-021", round), ("A03-022", round)] + [
    (f"A03-0{n}", math.ceil) for n in (31, 33, 34, 35)
]
PRINTED = {
    "A03-021": 126,
    "A03-022": 208,
    "A03-031": 25,
    "A03-033": 11,
    "A03-034": 9,
    "A03-035": 6,
}


@settings(deadline=None)
@given(st.floats(1, 3000), st.floats(-40, 40), st.floats(-5, 15))
def test_noncentral_t_equals_scipy(known: float, value: float, shift: float) -> None:
    """Source: scipy.stats.nct (Boost), a series where ours is a quadrature."""
    assume(abs(value) > 1e-6)  # nearer to 0 the other library's series gives up
    expected = float(stats.nct.sf(value, known, shift))
    assert noncentral_t_beyond(value, known, shift) == pytest.approx(expected, abs=1e-9)


def test_noncentral_t_without_a_shift_is_students() -> None:
    """Closed form: noncentrality 0 leaves Student's own tail."""
    for known in (1.0, 1.3, 4.0, 75.5):
        value = student_quantile(0.95, known)
        assert noncentral_t_beyond(value, known, 0.0) == pytest.approx(0.05, abs=1e-10)
    assert noncentral_t_beyond(1.0, math.inf, 3.0) == pytest.approx(float(special.ndtr(2.0)))


@pytest.mark.parametrize("row_id", EXACT_TABLE)
def test_exact_n_of_the_published_tables(row_id: str) -> None:
    """Source: course tables, Univ. of Nebraska-Lincoln, and the NIST handbook 7.2.2.2.

    Where the print is the plain normal formula, ``exact`` holds the noncentral-t number.
    """
    inputs = row(row_id).inputs
    n = one_sample_n(
        inputs["delta_over_sigma"],
        1.0,
        alpha=inputs["alpha"],
        beta=1 - inputs["power"],
        sides=inputs["sides"],
    )
    assert n == row(row_id).exact


@pytest.mark.parametrize(("row_id", "rounding"), NORMAL_TABLE)
def test_normal_formula_gives_the_printed_cells(row_id: str, rounding) -> None:
    """Source: the same tables: these cells are the normal formula, rounded as named there."""
    inputs = row(row_id).inputs
    n = normal_n(
        inputs["delta_over_sigma"],
        1.0,
        alpha=inputs["alpha"],
        beta=1 - inputs["power"],
        sides=inputs["sides"],
    )
    assert rounding(n) == PRINTED[row_id]


def test_first_pass_of_the_handbook() -> None:
    """Source: NIST/SEMATECH e-Handbook 7.2.2.2: 8.567 with z to three decimals, 8.5638 exact."""
    inputs = row("A01-025").inputs
    n = normal_n(inputs["delta_over_sigma"], 1.0, alpha=inputs["alpha"], beta=inputs["beta"])
    assert n == pytest.approx(row("A01-025").exact, rel=1e-10)
    alpha_z, beta_z = inputs["pub_z"]
    assert (alpha_z + beta_z) ** 2 == pytest.approx(8.567, abs=0.0005)


@pytest.mark.parametrize("row_id", ["A01-026", "A01-027"])
def test_iterations_of_the_handbook_lead_to_the_exact_number(row_id: str) -> None:
    """Source: NIST/SEMATECH e-Handbook 7.2.2.2: 10.6, then 10.1, so 11, which is exact as well."""
    inputs = row(row_id).inputs
    t = sum(student_quantile(1 - inputs[k], inputs["df"]) for k in ("alpha", "beta"))
    assert (t / inputs["delta_over_sigma"]) ** 2 == pytest.approx(row(row_id).exact, rel=1e-9)
    assert one_sample_n(1.0, 1.0, alpha=0.05, beta=0.1) == 11


def test_guidance_formula_of_the_worked_example() -> None:
    """Source: EPA QA/G-9 (2000), box 3-2: s = 10.41, Δ = 10, α 0.1, β 0.2 give 5.71."""
    inputs = row("A03-005").inputs
    n = guidance_n(inputs["delta"], inputs["sd"], alpha=inputs["alpha"], beta=inputs["beta"])
    assert n == pytest.approx(row("A03-005").exact, rel=2e-3)  # z typed there with 3 decimals
    a, b = inputs["pub_z"]
    typed = ((a + b) * inputs["sd"] / inputs["delta"]) ** 2 + a * a / 2
    assert n == pytest.approx(typed, rel=1e-3)


def test_level_example_with_the_factor_for_one_mean() -> None:
    """Source: Berthouex & Brown, example 23.4; values.csv: 1.85 by the guidance formula, exact 3.

    The print, 1.21, takes the factor for two means and a two-sided z; with it σ/Δ = 0.24 follows.
    """
    ratio = 0.24
    both = normal_quantile(0.975) + normal_quantile(0.9)
    assert 2 * (both * ratio) ** 2 == pytest.approx(1.21, abs=0.005)
    n = guidance_n(1.0, ratio, alpha=0.05, beta=0.1)
    assert n == pytest.approx(row("A03-009").exact, rel=1e-9)
    assert one_sample_n(1.0, ratio, alpha=0.05, beta=0.1) == 3


def test_margin_of_the_barium_example_is_half_way_to_a_decision() -> None:
    """Source: EPA SW-846 chapter nine: t² s² / Δ² = 5.76 plans for a chance of 1 in 2.

    With t(3) one-sided at 0.1, a mean lying Δ below the threshold is shown in half the campaigns.
    """
    inputs = row("A01-038").inputs
    sigma, delta = math.sqrt(inputs["s2"]), inputs["delta"]
    t = student_quantile(1 - inputs["alpha_two"] / 2, inputs["df"])
    assert (t * sigma / delta) ** 2 == pytest.approx(row("A01-038").exact, rel=1e-9)
    power = one_sample_power(delta, sigma, n=6, alpha=inputs["alpha_two"] / 2)
    assert 0.5 < power < 0.7


def test_power_of_the_help_page() -> None:
    """Source: R pwr::pwr.t.test, example d = 0.2, n = 60, α = 0.10: 0.4555818."""
    inputs = row("A03-030").inputs
    power = one_sample_power(inputs["d"], 1.0, n=inputs["n"], alpha=inputs["alpha"], sides=2)
    assert power == pytest.approx(row("A03-030").exact, abs=1e-9)


@settings(deadline=None, max_examples=60)
@given(
    st.floats(0.25, 3),
    st.floats(0.01, 0.3),
    st.floats(0.02, 0.5),
    st.sampled_from([1, 2]),
    st.none() | st.integers(5, 200),
)
def test_n_is_the_first_that_counting_upward_finds(
    ratio: float, alpha: float, beta: float, sides: int, population: int | None
) -> None:
    """Brute force: try 2, 3, 4 … with scipy's noncentral t until the power is there."""
    n = one_sample_n(ratio, 1.0, alpha=alpha, beta=beta, sides=sides, population=population)
    for tried in range(2, n + 1):
        shrink = 1 if population is None else 1 - tried / population
        if shrink <= 0:
            break
        shift = ratio * math.sqrt(tried / shrink)
        limit = stats.t.isf(alpha / sides, tried - 1)
        power = stats.nct.sf(limit, tried - 1, shift)
        if sides == 2:
            power += stats.nct.cdf(-limit, tried - 1, shift)
        if abs(power - (1 - beta)) < 1e-7:
            return
        assert (power > 1 - beta) == (tried == n)


@settings(deadline=None, max_examples=40)
@given(st.integers(2, 300), st.floats(0.01, 0.3), st.floats(0.05, 0.5), st.sampled_from([1, 2]))
def test_smallest_difference_undoes_power(n: int, alpha: float, beta: float, sides: int) -> None:
    """Inverse and forward must agree: at that distance the power is 1 − β."""
    found = smallest_difference(7.0, n, alpha=alpha, beta=beta, sides=sides)
    power = one_sample_power(found, 7.0, n=n, alpha=alpha, sides=sides)
    assert power == pytest.approx(1 - beta, abs=1e-9)


def test_smallest_difference_equals_a_root_by_scipy() -> None:
    """Source: scipy.optimize.brentq on scipy.stats.nct."""
    limit = stats.t.isf(0.05, 19)
    shift = optimize.brentq(lambda d: stats.nct.sf(limit, 19, d) - 0.8, 0, 10)
    expected = 30 * shift / math.sqrt(20)
    assert smallest_difference(30.0, 20, alpha=0.05, beta=0.2) == pytest.approx(expected, rel=1e-8)


def test_guidance_formula_is_exact_or_one_short_for_one_side() -> None:
    """Source: tests/reference/notes.md, convention 6: within one of exact, most often equal."""
    short = []
    for alpha in (0.01, 0.05, 0.1):
        for beta in (0.05, 0.1, 0.2):
            for ratio in (0.2, 0.3, 0.4, 0.5, 0.75, 1.0, 1.5, 2.0, 3.0):
                plain = whole(guidance_n(ratio, 1.0, alpha=alpha, beta=beta))
                short.append(one_sample_n(ratio, 1.0, alpha=alpha, beta=beta) - plain)
    assert set(short) == {0, 1}
    assert short.count(0) > 5 * short.count(1)


def test_guidance_example_is_one_short_of_exact() -> None:
    """Source: EPA QA/G-4, cadmium example (inputs from memory): 37 there, 38 by noncentral t."""
    asked = {"alpha": 0.05, "beta": 0.2}
    assert whole(guidance_n(0.25, 0.6, **asked)) == 37
    assert one_sample_n(0.25, 0.6, **asked) == 38


def test_margin_expected_equals_scipys_chi_and_a_simulation() -> None:
    """Source: mean of scipy.stats.chi; and 40,000 samples of 6 within four standard errors."""
    for known in (1, 2, 9, 200):
        assert mean_of_s(known) == pytest.approx(stats.chi.mean(known) / math.sqrt(known))
    assert mean_of_s(math.inf) == 1.0
    samples = np.random.default_rng(11).normal(50, 8, (40_000, 6))
    margins = stats.t.isf(0.05, 5) * samples.std(axis=1, ddof=1) / math.sqrt(6)
    bar = 4 * margins.std() / math.sqrt(len(margins))
    assert abs(expected_margin(8 / math.sqrt(6), 5, alpha=0.05) - margins.mean()) < bar


def test_power_equals_a_simulation_of_campaigns() -> None:
    """Draw campaigns of 9 results and count limits below the level: four standard errors."""
    samples = np.random.default_rng(12).normal(80, 25, (40_000, 9))
    limit = samples.mean(axis=1) + stats.t.isf(0.05, 8) * samples.std(axis=1, ddof=1) / 3
    share = float(np.mean(limit < 100))
    power = one_sample_power(20.0, 25.0, n=9, alpha=0.05)
    assert abs(share - power) < 4 * math.sqrt(power * (1 - power) / len(samples))


def test_change_between_rounds_has_the_spread_of_differences() -> None:
    """Closed form at the ends: correlation 1 leaves the difference of the two, −1 the sum."""
    assert sigma_of_change(10.0, 8.0, correlation=1.0) == pytest.approx(2.0)
    assert sigma_of_change(10.0, 8.0, correlation=-1.0) == pytest.approx(18.0)
    pairs = np.random.default_rng(13).multivariate_normal(
        [0, 0], [[100, 48], [48, 64]], size=40_000
    )
    change = np.diff(pairs, axis=1).std()
    expected = sigma_of_change(10.0, 8.0, correlation=0.6)
    assert abs(change - expected) < 4 * expected / math.sqrt(2 * len(pairs))


def test_a_whole_list_settles_the_question() -> None:
    """With all units analysed the mean is known: power 1 below the level, 0 at it."""
    assert one_sample_power(0.1, 5.0, n=12, alpha=0.05, population=12) == 1.0
    assert one_sample_power(0.0, 5.0, n=12, alpha=0.05, population=12) == 0.0


@pytest.mark.parametrize(
    ("asked", "words"),
    [
        ({"alpha": 0.5, "beta": 0.5}, "below 1"),
        ({"alpha": 0.0, "beta": 0.2}, "alpha is 0.0"),
        ({"alpha": 0.05, "beta": 1.0}, "beta is 1.0"),
        ({"alpha": 0.05, "beta": 0.2, "sides": 3}, "not 3"),
    ],
)
def test_impossible_chances_are_refused(asked: dict, words: str) -> None:
    """No n answers them, so the line says which chance and what it must be."""
    with pytest.raises(DesignError, match=words):
        one_sample_n(1.0, 1.0, **asked)


@pytest.mark.parametrize(("difference", "sigma"), [(0.0, 1.0), (-1.0, 1.0), (1.0, 0.0)])
def test_a_gray_region_without_width_is_refused(difference: float, sigma: float) -> None:
    """A zero width would ask for endless results, a zero sigma for none."""
    with pytest.raises(DesignError, match="above 0"):
        one_sample_n(difference, sigma, alpha=0.05, beta=0.2)


def test_out_of_reach_is_said_at_once() -> None:
    """A gray region of a millionth of sigma asks for more results than any campaign has."""
    with pytest.raises(DesignError, match="more than"):
        one_sample_n(1e-6, 1.0, alpha=0.05, beta=0.2)
    with pytest.raises(DesignError, match="at least 2"):
        smallest_difference(1.0, 1, alpha=0.05, beta=0.2)
    assert normal_quantile(0.5) == pytest.approx(0.0)


@pytest.mark.parametrize("known", [1, 9, 400.5])
@pytest.mark.parametrize("chance", [0.01, 0.05, 0.2, 0.95])
def test_distance_undoes_power_on_both_sides_of_the_level(known: float, chance: float) -> None:
    """A mean on the allowed side is claimed off it less often than alpha, so distances go on."""
    shift = shift_for_chance(chance, known, alpha=0.05)
    assert power_at(shift, known, alpha=0.05) == pytest.approx(chance, abs=1e-9)
    assert (shift > 1e-6) == (chance > 0.05)


def test_worked_example_stands_where_it_is_printed() -> None:
    """Source: EPA QA/G-9 (2000), box 3-2: mean 99.38, t = 1.26 against 95, not shown at α 0.1."""
    inputs = row("A03-002").inputs
    mean, sigma, n = sample_mean(inputs["x"]), sample_sd(inputs["x"]), len(inputs["x"])
    assert mean == pytest.approx(row("A03-003").exact, rel=1e-12)
    error = standard_error(sigma, n)
    assert (mean - inputs["mu0"]) / error == pytest.approx(row("A03-002").exact, rel=1e-12)
    low, _ = t_interval(mean, error, n - 1, confidence=0.9, kind="lower-limit")
    assert low is not None
    assert low < inputs["mu0"]


def test_far_chances_at_very_many_degrees_of_freedom_can_be_solved() -> None:
    """With so many the normal curve is the answer, and no digit may be lost on the way to it."""
    shift = smallest_shift(5e6, alpha=1e-9, beta=1e-10)
    assert shift == pytest.approx(normal_quantile(1 - 1e-9) + normal_quantile(1 - 1e-10), rel=1e-5)
