"""The bound mean + k s of normal results below the level: how many bring it there often enough."""

import math

from fieldplan.base.errors import DesignError
from fieldplan.base.working import Quantity, Step
from fieldplan.campaign.questions.upper_share import UpperShare
from fieldplan.sizing.asked.counting_claims import level_words, population_words
from fieldplan.sizing.asked.model import Answered, Asked
from fieldplan.sizing.asked.sure_words import sure_words
from fieldplan.sizing.model import Amount, Finding, Picture, Series
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.words import counted, figure, percent, typed_percent
from fieldplan.stats.assurance import chance_of_variance
from fieldplan.stats.distributions import chi_square_quantile, normal_quantile
from fieldplan.stats.precision import whole
from fieldplan.stats.tolerance import n_by_counting
from fieldplan.stats.tolerance_factors import (
    chance_of_bound,
    n_for_bound,
    near_bound,
    upper_factor,
)

TITLE = "A stated share lies below the level"
OWEN = "Owen 1963, Sandia Corporation monograph SCR-607 (from memory)"
NORMAL_SKEW = 0.5
"""Skewness from which a normal bound is warned against: common practice, no source."""


def count(asked: Asked, table: UpperShare) -> Answered:
    """Count the results whose normal bound comes out below the level often enough.

    Parameters
    ----------
    asked : Asked
    table : UpperShare

    Raises
    ------
    DesignError
        No level, mean or sigma, several strata, or a level that is too near the mean.
    """
    margin, power = _margin(asked), table.power or 0.0
    total = n_for_bound(margin, share=table.share, confidence=table.confidence, power=power)
    needed = asked.shared(total)
    total = sum(needed)
    answer = (
        f"{counted(total, 'result')} would put the bound mean + {_factor(total, table):.3f} s "
        f"below {level_words(asked)} in {percent(_chance(total, margin, table))} of campaigns, if "
        "results are normal with the mean and sigma expected. " + _claim(asked, table)
    )
    return Answered(
        needed,
        f"at least {typed_percent(table.share)} at or below {level_words(asked)}",
        _finding(asked, table, total, answer, _steps(asked, table, total)),
        near_bound(margin, table.share, confidence=table.confidence, power=power),
    )


def bought(asked: Asked, table: UpperShare, counts: tuple[int, ...]) -> Finding:
    """Say how often the bound of given counts comes out below the level."""
    total = sum(counts)
    chance = _chance(total, _margin(asked), table)
    answer = (
        f"With {counted(total, 'result')} the bound mean + {_factor(total, table):.3f} s comes out "
        f"below {level_words(asked)} in {percent(chance)} of campaigns, if results are normal with "
        "the mean and sigma expected. " + _claim(asked, table)
    )
    return _finding(asked, table, total, answer, ())


def _claim(asked: Asked, table: UpperShare) -> str:
    return (
        f"Where it does, at least {typed_percent(table.share)} of {population_words(asked)} lie "
        f"below the level with {typed_percent(table.confidence)} confidence."
    )


def _factor(n: int, table: UpperShare) -> float:
    return upper_factor(n, table.share, confidence=table.confidence)


def _chance(n: int, margin: float, table: UpperShare) -> float:
    return chance_of_bound(n, margin, share=table.share, confidence=table.confidence)


def chance_enough(asked: Asked, table: UpperShare, n: int) -> float | None:
    """Give the chance that n results keep the power, sigma being an estimate and the mean known.

    Parameters
    ----------
    asked : Asked
    table : UpperShare
    n : int

    Returns
    -------
    float or None
        None where nobody said how many results stand behind sigma.

    Notes
    -----
    The power is kept from some distance m* between mean and level on, in true standard deviations:
    P(χ² ≥ df (m*/m)²), m being the distance in pilot standard deviations.
    """
    pilot = Precision(asked.question).pilot_degrees_of_freedom((n,))
    if pilot is None:
        return None
    low, high = 0.0, 1.0
    while _chance(n, high, table) < (table.power or 0.0):
        low, high = high, 2 * high
    for _ in range(40):
        middle = (low + high) / 2
        enough = _chance(n, middle, table) >= (table.power or 0.0)
        low, high = (low, middle) if enough else (middle, high)
    return chance_of_variance((high / _margin(asked)) ** 2, 1.0, pilot)


def _sure(asked: Asked, table: UpperShare, n: int, *, counting: bool) -> str:
    """Say how sure the number is, sigma being an estimate."""
    chance = chance_enough(asked, table, n)
    if chance is None or not counting:
        return sure_words(asked.question, chance)
    pilot = Precision(asked.question).pilot_degrees_of_freedom((n,)) or 1.0
    found = []
    for assurance in (0.8, 0.9):
        margin = _margin(asked) * math.sqrt(chi_square_quantile(1 - assurance, pilot) / pilot)
        try:
            more = n_for_bound(
                margin, share=table.share, confidence=table.confidence, power=table.power or 0.0
            )
        except DesignError:
            found.append("more than can be had")
        else:
            found.append(f"{more}")
    more_words = f"for a chance of 80 % and 90 % it takes {found[0]} and {found[1]}"
    if found[0] == found[1]:
        more_words = f"for a chance of 80 % it takes {found[0]}"
    return sure_words(asked.question, chance, f"the mean is taken as known; {more_words}")


def _margin(asked: Asked) -> float:
    """Give how many standard deviations the level lies above the expected mean."""
    question = asked.question
    if len(question.parts) > 1:
        message = (
            f"a normal bound is for one population, and this one has {len(question.parts)} "
            'strata; take method = "counting", or ask for each stratum by itself.'
        )
        raise DesignError(message)
    if asked.level is None:
        message = "a normal bound needs the level; give the analyte's action_level (--level)."
        raise DesignError(message)
    if question.mean is None or not asked.sigma_known:
        message = (
            "a normal bound needs the mean and the standard deviation to expect; give sigma and "
            "expected_mean (--sigma and --mean), or a pilot."
        )
        raise DesignError(message)
    return (asked.level - question.mean) / question.parts[0].sigma


def _steps(asked: Asked, table: UpperShare, n: int) -> tuple[Step, ...]:
    return (_margin_step(asked), _number_step(asked, table, n), _factor_step(table, n))


def _margin_step(asked: Asked) -> Step:
    question, margin = asked.question, _margin(asked)
    sigma = question.parts[0].sigma
    return Step(
        symbol="m",
        meaning="Distance from the expected mean to the level, in standard deviations",
        formula="m = (L − mean) / s",
        inputs=(
            Quantity("L", "level", asked.level or 0.0, question.unit),
            Quantity("mean", "expected mean", question.mean or 0.0, question.unit),
            Quantity("s", "standard deviation of single results", sigma, question.unit),
        ),
        unrounded=margin,
        rounded=margin,
        source="definition",
    )


def _number_step(asked: Asked, table: UpperShare, n: int) -> Step:
    margin, power = _margin(asked), table.power or 0.0
    return Step(
        symbol="n",
        meaning="Results whose bound comes out below the level often enough; first pass by the "
        "large-sample variance of mean + k s, then exactly",
        formula="smallest n with P(T(n − 1, m √n) > k √n) ≥ power",
        inputs=(
            Quantity("m", "distance to the level", margin),
            Quantity("p", "share that shall lie below the level", table.share),
            Quantity("C", "confidence", table.confidence),
            Quantity("power", "chance wanted", power),
        ),
        unrounded=near_bound(margin, table.share, confidence=table.confidence, power=power),
        rounded=float(n),
        unit="results",
        source=OWEN,
    )


def _factor_step(table: UpperShare, n: int) -> Step:
    return Step(
        symbol="k",
        meaning="Factor of the bound mean + k s",
        formula="P(T(n − 1, z √n) ≤ k √n) = C, z the normal quantile of p",
        inputs=(
            Quantity("n", "results", n, "results"),
            Quantity("p", "share", table.share),
            Quantity("C", "confidence", table.confidence),
        ),
        unrounded=_factor(n, table),
        rounded=round(_factor(n, table), 3),
        source=OWEN,
    )


def _finding(
    asked: Asked, table: UpperShare, n: int, answer: str, steps: tuple[Step, ...]
) -> Finding:
    margin = _margin(asked)
    by_counting = n_by_counting(table.share, table.confidence)
    larger = _chance(n, margin / 1.25, table)
    return Finding(
        topic="upper-share",
        title=TITLE,
        answer=answer,
        amounts=(
            Amount("n", "Results", n, "results"),
            Amount("factor", "k of the bound mean + k s", _factor(n, table)),
            Amount("margin", "Expected mean to level, in standard deviations", margin),
            Amount("chance", "Chance that the bound comes out below", _chance(n, margin, table)),
            Amount("chance_enough", "Chance that these are enough", chance_enough(asked, table, n)),
            Amount("chance_at_larger_sigma", "The same if sigma is a quarter larger", larger),
            Amount("n_by_counting", "Results by counting, none above", by_counting, "results"),
        ),
        columns=("results", "k", "chance that the bound comes out below"),
        rows=tuple(
            (str(m), f"{_factor(m, table):.3f}", percent(_chance(m, margin, table)))
            for m in sorted({max(2, whole(n * f)) for f in (0.5, 0.75, 1.0, 1.5, 2.0)})
        ),
        steps=steps,
        assumptions=(
            "Results are normal, out to the tail that is claimed; places are drawn at random.",
            "Mean and sigma are as expected; were they not, the claim stays honest but comes out "
            "more or less often.",
        ),
        warnings=_warnings(
            asked, by_counting, larger, sure=_sure(asked, table, n, counting=bool(steps))
        ),
        sources=(OWEN,),
        picture=_picture(asked, table, n),
    )


def _warnings(asked: Asked, by_counting: int, larger: float, *, sure: str) -> tuple[str, ...]:
    lines = [
        sure,
        "The claim leans on the normal shape far out, where few results can show it. Counting "
        f"needs no shape: {by_counting} results, none of them above the level.",
        "It says nothing about the mean, nor that no place exceeds the level.",
        "Were sigma a quarter larger than expected, the bound would come out below the level in "
        f"{percent(larger)} of campaigns only; the claim would stay as honest.",
    ]
    skewness = asked.question.parts[0].skewness
    if skewness is not None and abs(skewness) > NORMAL_SKEW:
        lines.insert(
            0,
            f"The results at hand have a skewness of {figure(skewness)}: they do not look normal, "
            "and this bound may claim too much. Take counting.",
        )
    if asked.population is not None:
        lines.append("A list is taken as endless here; counting makes use of its end.")
    return tuple(lines)


def _picture(asked: Asked, table: UpperShare, n: int) -> Picture:
    margin = _margin(asked)
    low = normal_quantile(table.share)
    span = max(margin - low, 0.2)
    margins = [max(low - span / 2, 0.01) + 2 * span * k / 20 for k in range(21)]
    mean, sigma = asked.question.mean or 0.0, asked.question.parts[0].sigma
    means = [(asked.level or 0.0) - m * sigma for m in margins]
    chances = [100 * _chance(n, m, table) for m in margins]
    return Picture(
        kind="lines",
        caption="How often the bound comes out below the level, by the true mean.",
        alternative=f"A line that falls from {chances[-1]:.0f} % at the lowest mean shown to "
        f"{chances[0]:.0f} % at the highest.",
        x_label=f"true mean, {asked.question.unit}" if asked.question.unit else "true mean",
        y_label="chance that the bound comes out below, %",
        series=(Series(f"{n} results", tuple(means), tuple(chances)),),
        marks=(("expected mean", mean),),
        levels=(("1 − confidence", 100 * (1 - table.confidence)),),
    )
