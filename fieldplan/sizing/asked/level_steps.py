"""The working of a mean against a level, step by step."""

import math
from collections.abc import Iterator, Sequence

from fieldplan.base.working import Quantity, Step
from fieldplan.sizing.asked.level_decision import LevelDecision
from fieldplan.sizing.precision import Precision
from fieldplan.stats.distributions import normal_quantile, normal_share, student_quantile
from fieldplan.stats.power import expected_margin, guidance_n, mean_of_s, one_sample_n
from fieldplan.stats.precision import whole
from fieldplan.stats.rank_tests import OVERAGE, sign_formula_n, sign_planned_n, sign_test_count
from fieldplan.stats.signed_rank import (
    SIGNED_RANK_SHARE,
    signed_rank_count,
    signed_rank_planned_n,
)

QA_G9 = "EPA QA/G-9 2000, section 3.2.1 (from memory)"
NONCENTRAL = "noncentral t: Johnson, Kotz & Balakrishnan 1995, ch. 31 (from memory)"
MARSSIM = "NUREG-1575 2000, section 5.5.2 (from memory)"
HAHN = "Hahn & Meeker 1991, Statistical Intervals, ch. 4 (from memory)"
HODGES = "Hodges & Lehmann 1956, Ann. Math. Stat. 27:324 (from memory)"
MANY = "Bonferroni; all or nothing: Berger 1982, Technometrics 24:295 (from memory)"
SOURCES = {
    "t": (QA_G9, NONCENTRAL),
    "sign": (MARSSIM,),
    "signed-rank": (HODGES, NONCENTRAL, "Lehmann 1975, Nonparametrics, section 4.2 (from memory)"),
}


def counting_steps(decision: LevelDecision, counts: Sequence[int]) -> Iterator[Step]:
    """Show how the counts came about: gray region, chances, formula, exact number.

    Parameters
    ----------
    decision : LevelDecision
    counts : sequence of int
        Results by stratum.
    """
    yield _gray_region(decision)
    if decision.table.decisions > 1:
        yield from _shared_out(decision)
    if len(decision.asked.question.parts) == 1:
        if decision.table.test == "sign":
            yield from _sign(decision)
        else:
            yield _guidance(decision)
        if decision.table.test == "signed-rank":
            yield _signed_rank(decision)
    yield _exact(decision)
    if tuple(counts) != decision.plain:
        yield _assured(decision, counts)


def buying_steps(decision: LevelDecision, counts: Sequence[int]) -> Iterator[Step]:
    """Show what counts buy: power at the gray edge, the mean at 8 of 10, the limit's margin.

    Parameters
    ----------
    decision : LevelDecision
    counts : sequence of int
        Results by stratum.
    """
    yield _power(decision, counts)
    reach = decision.reach(counts, 0.8)
    if reach is not None:
        yield _eight_of_ten(decision, reach)
    if decision.table.test == "t" and margin_of(decision, counts) > 0:
        yield _margin(decision, counts)
    chance = decision.chance_enough(counts)
    if chance is not None and decision.enough_reach(counts):
        yield _enough(decision, counts, chance)


def margin_of(decision: LevelDecision, counts: Sequence[int]) -> float:
    """Give the expected distance from the mean to the limit that the test sets to the level."""
    precision = Precision(decision.asked.question)
    error = precision.standard_error(counts)
    if error == 0:
        return 0.0
    return expected_margin(error, precision.degrees_of_freedom(counts), alpha=decision.risks[0])


def _gray_region(decision: LevelDecision) -> Step:
    unit = decision.asked.question.unit
    return Step(
        symbol="Δ",
        meaning="Width of the gray region, in which either decision is tolerated more often",
        formula="Δ = |level − gray edge|",
        inputs=(
            Quantity("level", "action level", decision.level, unit),
            Quantity("gray edge", "mean to be told from it", decision.table.gray_edge, unit),
        ),
        unrounded=decision.width,
        rounded=decision.width,
        unit=unit,
        source="campaign choice",
    )


def _shared_out(decision: LevelDecision) -> Iterator[Step]:
    alone = decision.table.together != "all-or-nothing"
    for symbol, overall, each, shared in (
        ("alpha", decision.table.alpha, decision.risks[0], alone),
        ("beta", decision.table.beta, decision.risks[1], True),
    ):
        yield Step(
            symbol=f"{symbol} each",
            meaning=f"{symbol} of each decision, so that all together keep theirs",
            formula=f"{symbol} / m" if shared else f"{symbol}: one claim needs every decision",
            inputs=(
                Quantity(symbol, "of all decisions together", overall),
                Quantity("m", "decisions", decision.table.decisions),
            ),
            unrounded=each,
            rounded=each,
            source=MANY,
        )


def _quantiles(decision: LevelDecision) -> tuple[Quantity, Quantity]:
    alpha, beta = decision.risks
    return (
        Quantity("z(alpha)", f"normal quantile at 1 − {alpha:g}", normal_quantile(1 - alpha)),
        Quantity("z(beta)", f"normal quantile at 1 − {beta:g}", normal_quantile(1 - beta)),
    )


def _sigma(decision: LevelDecision) -> Quantity:
    unit = decision.asked.question.unit
    return Quantity("s", "standard deviation of single results", decision.sigma, unit)


def _width(decision: LevelDecision) -> Quantity:
    return Quantity("Δ", "width of the gray region", decision.width, decision.asked.question.unit)


def guidance_of(decision: LevelDecision) -> float:
    """Give the guidance formula's number for one population, unrounded and without overage."""
    alpha, beta = decision.risks
    if decision.table.test == "sign":
        share = normal_share(decision.width / decision.sigma)
        return sign_formula_n(share, alpha=alpha, beta=beta)
    return guidance_n(decision.width, decision.sigma, alpha=alpha, beta=beta)


def _guidance(decision: LevelDecision) -> Step:
    value = guidance_of(decision)
    return Step(
        symbol="n(formula)",
        meaning="The guidance formula, to compare: within one or two of the exact number",
        formula="n = (z(alpha) + z(beta))² · s² / Δ² + z(alpha)² / 2",
        inputs=(*_quantiles(decision), _sigma(decision), _width(decision)),
        unrounded=value,
        rounded=float(whole(value)),
        unit="results",
        source=QA_G9,
    )


def _sign(decision: LevelDecision) -> Iterator[Step]:
    alpha, beta = decision.risks
    share = normal_share(decision.width / decision.sigma)
    value = sign_formula_n(share, alpha=alpha, beta=beta)
    chance = Quantity("p", "chance of a result on the side to be shown", share)
    yield Step(
        symbol="p",
        meaning=f"Chance of a result {decision.side} the level, the mean lying at the gray edge",
        formula="p = Φ(Δ / s)",
        inputs=(_width(decision), _sigma(decision)),
        unrounded=share,
        rounded=share,
        source=MARSSIM,
    )
    yield Step(
        symbol="N",
        meaning="The published formula, to compare",
        formula="N = (z(alpha) + z(beta))² / (4 (p − 0.5)²)",
        inputs=(*_quantiles(decision), chance),
        unrounded=value,
        rounded=float(whole(value)),
        unit="results",
        source=MARSSIM,
    )
    yield Step(
        symbol="N(planned)",
        meaning="The same with the published overage for losses, rounded up before and after",
        formula="N = (1 + overage) · N, rounded up",
        inputs=(
            Quantity("overage", "share added for losses", OVERAGE),
            Quantity("N", "formula, rounded up", whole(value), "results"),
        ),
        unrounded=(1 + OVERAGE) * whole(value),
        rounded=float(sign_planned_n(share, alpha=alpha, beta=beta)),
        unit="results",
        source=MARSSIM,
    )


def _assured(decision: LevelDecision, counts: Sequence[int]) -> Step:
    """Show what the assurance adds, from how many results stand behind sigma."""
    behind = [part.results or 0 for part in decision.asked.question.parts]
    return Step(
        symbol="n(assured)",
        meaning="Results that keep both chances with the assurance chosen, sigma being an estimate",
        formula="smallest n whose chance to be enough is at least the assurance",
        inputs=(
            Quantity("assurance", "chosen", float(decision.table.assurance)),
            Quantity("n0", "results behind s, all strata", sum(behind), "results"),
        ),
        unrounded=float(sum(counts)),
        rounded=float(sum(counts)),
        unit="results",
        source=HAHN,
    )


def _enough(decision: LevelDecision, counts: Sequence[int], chance: float) -> Step:
    unit = decision.asked.question.unit
    precision = Precision(decision.asked.question)
    known = precision.pilot_degrees_of_freedom(counts) or 0.0
    luck = precision.luck_of_allocation(counts)
    inputs = [
        Quantity("df", "degrees of freedom behind s", known),
        Quantity(
            "d", "distance shown with chance 1 − beta", decision.enough_reach(counts) or 0.0, unit
        ),
        _width(decision),
    ]
    if luck != 1:
        inputs.append(Quantity("k", "luck of Neyman counts, factor on the variance", luck))
    return Step(
        symbol="chance",
        meaning="Chance that these results are enough, sigma being an estimate",
        formula="P(χ² ≥ df · (d / Δ)²" + (" · k)" if luck != 1 else ")"),
        inputs=tuple(inputs),
        unrounded=chance,
        rounded=chance,
        source=HAHN,
    )


def _signed_rank(decision: LevelDecision) -> Step:
    alpha, beta = decision.risks
    plain = one_sample_n(decision.width, decision.sigma, alpha=alpha, beta=beta)
    return Step(
        symbol="n",
        meaning="Results for the signed rank test, whatever the symmetric shape",
        formula="n = n(t) / 0.864",
        inputs=(
            Quantity("n(t)", "exact number for the t test, sigma at face value", plain, "results"),
            Quantity("0.864", "least efficiency against t", SIGNED_RANK_SHARE),
        ),
        unrounded=plain / SIGNED_RANK_SHARE,
        rounded=float(signed_rank_planned_n(plain)),
        unit="results",
        source=HODGES,
    )


def _exact(decision: LevelDecision) -> Step:
    _, beta = decision.risks
    total = float(sum(decision.plain))
    words = {
        "t": "smallest n whose power at the gray edge is at least 1 − beta",
        "sign": "smallest n from which on the power at the gray edge is at least 1 − beta",
        "signed-rank": "smallest n not below the last whose power at the gray edge is at least "
        "1 − beta for normal results",
    }[decision.table.test]
    return Step(
        symbol="n",
        meaning="Results needed with sigma at face value, exact",
        formula=words,
        inputs=(Quantity("1 − beta", "chance to show the side at the gray edge", 1 - beta),),
        unrounded=total,
        rounded=total,
        unit="results",
        source=SOURCES[decision.table.test][-1],
    )


def _power(decision: LevelDecision, counts: Sequence[int]) -> Step:
    alpha, _ = decision.risks
    value = decision.power(counts, decision.width)
    n = sum(counts)
    inputs: list[Quantity]
    if decision.table.test == "t":
        precision = Precision(decision.asked.question)
        error = precision.standard_error(counts)
        unit = decision.asked.question.unit
        formula = "power = P(T' > t), T' noncentral with shift Δ / SE"
        inputs = [_width(decision), Quantity("SE", "standard error of the mean", error, unit)]
        if error > 0:
            known = precision.degrees_of_freedom(counts)
            t = student_quantile(1 - alpha, known)
            inputs.append(Quantity("t", f"Student quantile at {known:.4g} df, 1 − {alpha:g}", t))
    elif decision.table.test == "sign":
        count = sign_test_count(n, alpha=alpha)
        formula = "power = P(Binomial(n, p) ≥ c)"
        inputs = [
            Quantity("n", "results", n, "results"),
            Quantity("p", "Φ(Δ / s)", normal_share(decision.width / decision.sigma)),
            Quantity("c", f"results {decision.side} the level that decide", count, "results"),
        ]
    else:
        formula = "power = P(W ≥ w), W the sum of ranks on the side to be shown"
        inputs = [
            Quantity("n", "results", n, "results"),
            Quantity(
                "Δ / s", "gray region in standard deviations", decision.width / decision.sigma
            ),
            Quantity("w", "sum of ranks that decides", signed_rank_count(n, alpha=alpha)),
        ]
    return Step(
        symbol="power",
        meaning=f"Chance to show a mean {decision.side} the level when it lies at the gray edge",
        formula=formula,
        inputs=tuple(inputs),
        unrounded=value,
        rounded=value,
        source=SOURCES[decision.table.test][-1],
    )


def _eight_of_ten(decision: LevelDecision, reach: float) -> Step:
    unit = decision.asked.question.unit
    sign = "−" if decision.side == "below" else "+"
    return Step(
        symbol="mean(8 of 10)",
        meaning=f"True mean at which 8 of 10 campaigns come out {decision.side} the level",
        formula=f"level {sign} the distance whose power is 0.8",
        inputs=(
            Quantity("level", "action level", decision.level, unit),
            Quantity("distance", "solved from the power, see there", reach, unit),
        ),
        unrounded=decision.mean_at(reach),
        rounded=decision.mean_at(reach),
        unit=unit,
        source=SOURCES[decision.table.test][-1],
    )


def _margin(decision: LevelDecision, counts: Sequence[int]) -> Step:
    alpha, _ = decision.risks
    precision = Precision(decision.asked.question)
    known = precision.degrees_of_freedom(counts)
    unit = decision.asked.question.unit
    value = margin_of(decision, counts)
    name = "upper" if decision.side == "below" else "lower"
    return Step(
        symbol="margin",
        meaning=f"Distance from the mean to its {name} limit, on average over campaigns",
        formula="margin = t · c4 · SE",
        inputs=(
            Quantity("t", f"Student quantile at {known:.4g} df, 1 − {alpha:g}",
                     student_quantile(1 - alpha, known)),
            Quantity("c4", "mean of s as a share of sigma", mean_of_s(known)),
            Quantity("SE", "standard error of the mean", precision.standard_error(counts), unit),
        ),
        unrounded=value,
        rounded=value,
        unit=unit,
        source="closed form for normal results" + (
            "; df Satterthwaite 1946" if not math.isclose(known, round(known)) else ""
        ),
    )  # fmt: skip
