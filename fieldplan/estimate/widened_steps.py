"""The arithmetic of the skew-widened interval, and what it keeps by the evidence, in words."""

from typing import TYPE_CHECKING

from fieldplan.base.errors import DesignError
from fieldplan.base.working import Quantity, Step
from fieldplan.estimate.widened import CLASS_WORDS, class_of, contradictions
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.skew_interval import (
    FEWEST,
    LONG_LOW_TAIL,
    hall_factor,
    low_skewness,
    sample_shape,
    widening,
)
from fieldplan.stats.widened_coverage import populations_simulated, widened_coverage

if TYPE_CHECKING:
    from fieldplan.estimate.means import Means

HALL = "Hall 1992, Journal of the Royal Statistical Society B 54:221 (from memory)"
OWN = "constants fitted for this tool to simulated populations of the class; no published source"
EVIDENCE = (
    "simulated for this tool, 60,000 samples a cell (docs/evidence/intervals.md); no published "
    "source"
)


def widened_steps(means: "Means", unit: str) -> list[Step]:
    """Show how the ends come from mean, standard error, skewness and variation.

    Parameters
    ----------
    means : Means
        By a skew-widened rule.
    unit : str

    Returns
    -------
    list of Step
    """
    rules, values = means.rules, means.values[0].values
    t = t_quantile(int(values.size) - 1, confidence=rules.confidence, kind=rules.interval)
    skewness, variation = sample_shape(values)
    steps, interval = [_quantile(means, t), _skewness(means, unit, skewness)], means.interval
    if interval.low is not None:
        steps += _low_end(means, unit, t=t, skewness=skewness)
    if interval.high is not None:
        steps += [
            _variation(means, unit, variation),
            *_high_end(means, unit, t=t, shape=(skewness, variation)),
        ]
    return steps


def _quantile(means: "Means", t: float) -> Step:
    rules, n = means.rules, int(means.values[0].values.size)
    level = (1 + rules.confidence) / 2 if rules.interval == "two-sided" else rules.confidence
    inputs = (
        Quantity("p", f"share for a confidence of {rules.confidence:g}", level),
        Quantity("n", "results", n),
    )
    source = "Student 1908, Biometrika 6:1"
    return Step("t", "Student's quantile", "t(p, n − 1)", inputs, t, t, source=source)


def _skewness(means: "Means", unit: str, skewness: float) -> Step:
    off = means.values[0].values - means.values[0].values.mean()
    second, third = float((off**2).mean()), float((off**3).mean())
    inputs = (
        Quantity("m2", "mean squared distance from the mean", second, f"({unit})²"),
        Quantity("m3", "mean cubed distance from the mean", third, f"({unit})³"),
    )
    meaning, source = "Skewness of the results", "Joanes & Gill 1998, The Statistician 47:183 (g1)"
    return Step("g", meaning, "g = m3 / m2^1.5", inputs, skewness, skewness, source=source)


def _variation(means: "Means", unit: str, variation: float) -> Step:
    inputs = (
        Quantity("s", "standard deviation", means.half.strata[0].sd, unit),
        Quantity("mean", "estimated mean", means.half.mean, unit),
    )
    meaning = "Coefficient of variation of the results"
    return Step("c", meaning, "c = s / mean", inputs, variation, variation, source="definition")


def _low_end(means: "Means", unit: str, *, t: float, skewness: float) -> list[Step]:
    n, low = int(means.values[0].values.size), means.interval.low or 0.0
    used = float(low_skewness(n, skewness))
    factor = float(hall_factor(-t, used / n**0.5))
    formula = "k1 = (3/γ)·(1 − ∛(1 − γ·(γ/6 − t))), γ = g/√n"
    if skewness < 0:
        formula += f"; g below 0 is raised to g·(1 + {LONG_LOW_TAIL:g}/√n)"
    inputs = (
        Quantity("g", "skewness of the results", skewness),
        Quantity("n", "results", n),
        Quantity("t", "Student's quantile", t),
    )
    floored = means.half.mean + factor * means.half.standard_error < 0
    return [
        Step("k1", "Standard errors from the mean to the low end", formula, inputs, factor, factor,
             source=HALL),
        _end("low", f"mean + k1·SE{', no lower than 0' if floored else ''}", means, unit,
             k=Quantity("k1", "standard errors to the low end", factor), end=low),
    ]  # fmt: skip


def _high_end(means: "Means", unit: str, *, t: float, shape: tuple[float, float]) -> list[Step]:
    n, (skewness, variation) = int(means.values[0].values.size), shape
    name = class_of(means.rules)
    wide = widening(name, means.rules.interval)
    raised = float(wide.raised(n, skewness, variation))
    factor = float(hall_factor(t, raised / n**0.5)) * wide.stretched(n)
    sign = "−" if wide.cubic < 0 else "+"
    return [
        Step(
            "G",
            f"Skewness raised to what {name} may hide from {n} results",
            f"G = max(g·(1 + {wide.skewness:g}/√n), {wide.linear:g}·c {sign} "
            f"{abs(wide.cubic):g}·c³)",
            (
                Quantity("g", "skewness of the results", skewness),
                Quantity("c", "coefficient of variation", variation),
                Quantity("n", "results", n),
            ),
            raised,
            raised,
            source=OWN,
        ),
        Step(
            "k2",
            "Standard errors from the mean to the high end",
            "k2 = (3/γ)·(1 − ∛(1 − γ·(t + γ/6)))·"
            f"(1 + {wide.per_result:g}/n + {wide.per_root:g}/√n), γ = G/√n",
            (
                Quantity("G", "raised skewness", raised),
                Quantity("n", "results", n),
                Quantity("t", "Student's quantile", t),
            ),
            factor,
            factor,
            source=f"{HALL}; {OWN}",
        ),
        _end("high", "mean + k2·SE", means, unit,
             k=Quantity("k2", "standard errors to the high end", factor),
             end=means.interval.high or 0.0),
    ]  # fmt: skip


def _end(symbol: str, formula: str, means: "Means", unit: str, *, k: Quantity, end: float) -> Step:
    inputs = (
        Quantity("mean", "estimated mean", means.half.mean, unit),
        k,
        Quantity("SE", "standard error", means.half.standard_error, unit),
    )
    meaning = f"{symbol.title()} end at {100 * means.rules.confidence:g} % confidence"
    return Step(symbol, meaning, formula, inputs, end, end, unit, HALL)


def widened_held_steps(means: "Means") -> list[Step]:
    """Show where the expected coverage is looked up; empty outside the table."""
    rules, n = means.rules, int(means.values[0].values.size)
    name = class_of(rules)
    try:
        found = widened_coverage(
            n, population_class=name, confidence=rules.confidence, kind=rules.interval
        )
    except DesignError:
        return []
    return [
        Step(
            "held",
            f"Share of nominal {100 * rules.confidence:g} % statements that hold the true mean, "
            f"worst simulated population of {name}",
            "table at n, between its cells straight in 1/√n",
            (Quantity("n", "results", n),),
            found.worst,
            round(found.worst, 3),
            source=EVIDENCE,
        )
    ]


def widened_coverage_sentence(means: "Means") -> str:
    """Say what coverage can be expected at this n for the class, and what speaks against it.

    Parameters
    ----------
    means : Means
        By a skew-widened rule.

    Returns
    -------
    str
    """
    rules, n = means.rules, int(means.values[0].values.size)
    name = class_of(rules)
    what = "interval" if rules.interval == "two-sided" else rules.interval.replace("-", " ")
    claim = f"a nominal {100 * rules.confidence:g} % {what} from {n} results"
    try:
        found = widened_coverage(
            n, population_class=name, confidence=rules.confidence, kind=rules.interval
        )
        said = (
            f"simulated over {populations_simulated(name)} populations of the class, {claim} held "
            f"the true mean in {100 * found.worst:.1f} % of campaigns in the worst of them and in "
            f"{100 * found.middle:.1f} % in the middle one"
        )
    except DesignError:
        said = f"for {claim} nothing is simulated"
    kept = "" if n >= FEWEST[name] else f", so that the promise, made from {FEWEST[name]} on, is "
    lines = [
        f"This interval is promised for a class declared before the results, {name}: "
        f"{CLASS_WORDS[name]}, and no separate high part that all {n} results miss with a chance "
        f"above 5 %. There {said}{kept}{'not kept' if kept else ''}.",
        contradictions(means),
        "Few results cannot prove that a population belongs to the class, and no interval keeps "
        "its confidence without one.",
    ]
    return " ".join(line for line in lines if line)
