"""The working of a comparison with a background: first pass, rule of ranks, exact chance."""

import math
from collections.abc import Iterator

from fieldplan.base.working import Quantity, Step
from fieldplan.campaign.questions.mean_and_background import MeanAndBackground
from fieldplan.sizing.asked.two_populations import OVERAGE, TwoPopulations
from fieldplan.stats.distributions import normal_quantile
from fieldplan.stats.precision import whole
from fieldplan.stats.rank_tests import rank_sum_formula_n, rank_sum_share

WELCH = "Welch 1947, Biometrika 34:28 (from memory); power by the noncentral t"
POOLED = "EPA QA/G-9 (2000), section 3.3.1; power by the noncentral t"
RULE = "NUREG-1575 (MARSSIM) rev. 1, section 5.5.2 (from memory)"
RANKS = "Lehmann 1975, Nonparametrics, sec. 2.3 (from memory)"


def words_of_test(table: MeanAndBackground) -> str:
    """Name the test."""
    if table.test == "ranks":
        return "the rank sum test"
    return "a pooled t test" if table.variances == "alike" else "Welch's t test"


def background_steps(both: TwoPopulations, needed: tuple[int, ...]) -> tuple[Step, ...]:
    """Write out the working of the site's number.

    Parameters
    ----------
    both : TwoPopulations
    needed : tuple of int
        Site results by stratum.

    Returns
    -------
    tuple of Step
    """
    if both.table.test == "means":
        return (_first_pass(both, needed), _power_step(both, needed))
    return tuple(_rank_steps(both, needed))


def _first_pass(both: TwoPopulations, needed: tuple[int, ...]) -> Step:
    table, unit = both.table, both.asked.question.unit
    z_alpha = normal_quantile(1 - table.alpha / both.sides)
    z_beta = normal_quantile(1 - table.beta)
    formula, first, last = _normal_number(both, (table.difference / (z_alpha + z_beta)) ** 2)
    halved = " / 2" if both.sides == 2 else ""
    return Step(
        symbol="n",
        meaning="Site results, first pass with both spreads known",
        formula=formula,
        inputs=(
            Quantity("z_α", f"normal quantile of 1 − α{halved}", z_alpha),
            Quantity("z_β", "normal quantile of 1 − β", z_beta),
            Quantity("Δ", "difference that must not be missed", table.difference, unit),
            Quantity("s1", "standard deviation of single site results", both.site_sigma, unit),
            Quantity("s2", "the same of the background", both.background_sigma, unit),
            last,
        ),
        unrounded=first if first > 0 else float(sum(needed)),
        rounded=float(whole(first) if first > 0 else sum(needed)),
        unit="results",
        source="normal theory; EPA QA/G-9 (2000), section 3.3.1, without its t correction",
    )


def _normal_number(both: TwoPopulations, room: float) -> tuple[str, float, Quantity]:
    """Give formula, number and last input; ``room`` is the variance that the difference allows."""
    fixed = both.table.background_results
    if fixed is None:
        return (
            "n = (z_α + z_β)² (s1² + s2²/r) / Δ²",
            (both.site_sigma**2 + both.background_sigma**2 / both.ratio) / room,
            Quantity("r", "background results for each of the site", both.ratio),
        )
    left = room - both.background_sigma**2 / fixed
    return (
        "n = s1² / (Δ² / (z_α + z_β)² − s2²/m)",
        both.site_sigma**2 / left if left > 0 else 0.0,
        Quantity("m", "background results there", fixed, "results"),
    )


def _power_step(both: TwoPopulations, needed: tuple[int, ...]) -> Step:
    power = both.power(needed)
    ranks, alike = both.table.test == "ranks", both.table.variances == "alike"
    formula = "noncentral t, averaged over the ratio of the two sample variances"
    if ranks:
        formula = "normal curve with the exact mean and variance of the pairs in order"
    elif alike:
        formula = "noncentral t with n + m − 2 degrees of freedom"
    return Step(
        symbol="power",
        meaning=f"Chance of {words_of_test(both.table)} to tell the difference: the fewest results "
        "that keep it at 1 − β or above",
        formula=formula,
        inputs=(
            Quantity("n", "site results", sum(needed), "results"),
            Quantity("m", "background results", both.background(needed), "results"),
            Quantity("β", "chance to miss the difference", both.table.beta),
        ),
        unrounded=power,
        rounded=power,
        source=RANKS if ranks else POOLED if alike else WELCH,
    )


def _rank_steps(both: TwoPopulations, needed: tuple[int, ...]) -> Iterator[Step]:
    table, unit = both.table, both.asked.question.unit
    spread = math.sqrt((both.site_sigma**2 + both.background_sigma**2) / 2)
    share = rank_sum_share(table.difference, spread)
    yield Step(
        symbol="P",
        meaning="Chance that a site result lies above a background result",
        formula="P = Φ(Δ / (s √2))",
        inputs=(
            Quantity("Δ", "difference that must not be missed", table.difference, unit),
            Quantity("s", "standard deviation of single results", spread, unit),
        ),
        unrounded=share,
        rounded=share,
        source=RULE,
    )
    yield _power_step(both, needed) if table.background_results else _rule(both, needed, share)


def _rule(both: TwoPopulations, needed: tuple[int, ...], share: float) -> Step:
    table = both.table
    overage = OVERAGE if table.overage is None else table.overage
    plain = rank_sum_formula_n(share, alpha=table.alpha, beta=table.beta)
    return Step(
        symbol="n",
        meaning="Results in each population by the published rule, rounded up once",
        formula="n = (1 + o) (z_α + z_β)² / (6 (P − 0.5)²)",
        inputs=(
            Quantity("P", "chance of a pair in order", share),
            Quantity("α", "chance to leave the assumption though it is true", table.alpha),
            Quantity("β", "chance to miss the difference", table.beta),
            Quantity("o", "overage for lost and unusable results", overage),
        ),
        unrounded=(1 + overage) * plain,
        rounded=float(sum(needed)),
        unit="results",
        source=RULE,
    )
