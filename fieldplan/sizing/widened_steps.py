"""The working and the words of a number sized for the skew-widened interval."""

from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING

from fieldplan.base.errors import DesignError
from fieldplan.base.working import Quantity, Step
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.quantities import sigma_quantity, target_quantity
from fieldplan.sizing.question import Question
from fieldplan.sizing.widened import (
    by_student,
    class_of,
    coefficient,
    outside_class,
    shapes_of,
    widest,
)
from fieldplan.sizing.words import counted, figure, typed_percent, with_unit
from fieldplan.stats.skew_interval import FEWEST

if TYPE_CHECKING:
    from fieldplan.sizing.counting import Counts

SIMULATED = (
    "simulated for this tool with a fixed seed (fieldplan.stats.widened_reach); no published source"
)


def widened_n_steps(question: Question, plain: int) -> Iterator[Step]:
    """Show Student's n, the coefficient of variation, and the n of the fixed interval."""
    from fieldplan.sizing.counting import plain_counts

    student = sum(plain_counts(by_student(question)))
    yield Step(
        symbol="n(t)",
        meaning="Results that Student's t would ask for, beside",
        formula="smallest n that is at least (t · s / h)², t at n − 1 degrees of freedom",
        inputs=(sigma_quantity(question), target_quantity(question)),
        unrounded=float(student),
        rounded=float(student),
        unit="results",
        source="Cochran 1977, Sampling Techniques, 3rd ed., ch. 4",
    )
    yield _variation(question)
    shape, reach = widest(question, plain)
    name, width = class_of(question), Precision(question).half_width([plain])
    yield Step(
        symbol="n",
        meaning=f"Smallest number, from {FEWEST[name]} on, whose expected half-width is at most h "
        f"for every shape that fits; {shape.name} reaches farthest",
        formula="R · s/√n ≤ h" + ("" if question.total_population is None else " times √(1 − n/N)"),
        inputs=(
            Quantity("R", f"expected reach at {plain} results in true standard errors", reach.mean),
            sigma_quantity(question),
            target_quantity(question),
            Quantity("R · s/√n", "expected half-width there", width, question.unit),
        ),
        unrounded=float(plain),
        rounded=float(plain),
        unit="results",
        source=SIMULATED,
    )


def _variation(question: Question) -> Step:
    part, cv = question.parts[0], coefficient(question)
    mean = part.mean or question.mean or 0.0
    return Step(
        symbol="CV",
        meaning="Coefficient of variation to expect",
        formula="CV = s / mean",
        inputs=(sigma_quantity(question), Quantity("mean", "to expect", mean, question.unit)),
        unrounded=cv,
        rounded=cv,
        source="definition",
    )


def widened_reach_step(question: Question, needed: Sequence[int]) -> Step:
    """Show how far the fixed interval is expected to reach."""
    precision = Precision(question)
    shape, reach = widest(question, needed[0])
    error, width = precision.standard_error(needed), precision.half_width(needed)
    two_sided = question.interval == "two-sided"
    name = "interval, half its width" if two_sided else question.interval.replace("-", " ")
    return Step(
        symbol="half-width",
        meaning=f"Reach of the skew-widened {typed_percent(question.confidence)} {name}, to expect",
        formula="half-width = R · SE",
        inputs=(
            Quantity("R", f"expected reach in true standard errors, {shape.name}", reach.mean),
            Quantity("SE", "standard error to expect", error, question.unit),
        ),
        unrounded=width,
        rounded=width,
        unit=question.unit,
        source=SIMULATED,
    )


def widened_chance_step(question: Question, chosen: tuple[int, ...], chance: float) -> Step:
    """Show the chance that a number keeps its half-width."""
    precision = Precision(question)
    pilot = precision.pilot_degrees_of_freedom(chosen)
    unit = f"({question.unit})²" if question.unit else ""
    inputs = [
        Quantity("n", "results", sum(chosen), "results"),
        Quantity("V", "predicted variance of the mean", precision.variance(chosen), unit),
        target_quantity(question),
    ]
    formula = "chance = share of simulated reaches R with R²·V ≤ h², lowest over the shapes"
    if pilot is not None:
        inputs.append(Quantity("df", "degrees of freedom behind sigma", pilot))
        formula = "chance = mean of P(χ² ≥ df · R²·V / h²) over simulated reaches R, lowest shape"
    return Step(
        symbol="chance",
        meaning=f"Chance that {sum(chosen)} results meet the target"
        + (", were sigma exactly right" if pilot is None else ""),
        formula=formula,
        inputs=tuple(inputs),
        unrounded=chance,
        rounded=round(chance, 3),
        source=f"{SIMULATED}; derived here",
    )


def widened_sentences(question: Question, counts: "Counts") -> list[str]:
    """Say for which interval the number is, what Student's t would ask, and where it is not kept.

    Parameters
    ----------
    question : Question
    counts : Counts

    Returns
    -------
    list of str
        Empty for Student's t.
    """
    if not question.widened or question.takes_all(counts.needed):
        return []
    name, n = class_of(question), sum(counts.needed)
    lines = [outside_class(question)]
    if question.target_half_width is not None and counts.plain is not None:
        lines.insert(0, _beside_student(question, sum(counts.plain)))
    if n < FEWEST[name]:
        lines.append(
            f"NOT KEPT: skew-widened keeps its promise for {name} from {FEWEST[name]} results on, "
            f"and {n} are expected."
        )
    return [line for line in lines if line]


def _beside_student(question: Question, plain: int) -> str:
    from fieldplan.sizing.counting import plain_counts

    name = class_of(question)
    student = sum(plain_counts(by_student(question)))
    line = (
        f"Sized for the interval that the rules fix (skew-widened, {name}): {plain} results if "
        f"sigma is right, by the widest over shapes that fit ({_shaped(question)}). Student's t "
        "would ask "
        f"for {student}, and keep less than it claims where results are skewed."
    )
    if plain == FEWEST[name]:
        line += f" {FEWEST[name]} is the fewest for which the promise is kept."
    return line


def _shaped(question: Question) -> str:
    shapes = shapes_of(question)
    families = " or ".join(dict.fromkeys(shape.family for shape in shapes))
    zeros = max(shape.zeros for shape in shapes)
    lump = f", with or without {100 * zeros:.0f} % zeros" if zeros else ""
    return f"{families}, CV {figure(coefficient(question), 2)}{lump}"


def widened_conditions(question: Question, needed: Sequence[int]) -> list[str]:
    """Say what the fixed interval keeps at this n, by the evidence for its class."""
    from fieldplan.stats.widened_coverage import populations_simulated, widened_coverage

    name, n = class_of(question), sum(needed)
    what = "interval" if question.interval == "two-sided" else question.interval.replace("-", " ")
    claim = f"a nominal {typed_percent(question.confidence)} skew-widened {what}"
    try:
        found = widened_coverage(
            n, population_class=name, confidence=question.confidence, kind=question.interval
        )
        said = (
            f"Simulated over {populations_simulated(name)} populations of {name}, {claim} from "
            f"{counted(n, 'result')} held the true mean in {100 * found.worst:.1f} % of campaigns "
            f"in the worst of them and in {100 * found.middle:.1f} % in the middle one."
        )
    except DesignError:
        said = f"For {claim} from {counted(n, 'result')} nothing is simulated."
    return [
        said,
        "That holds for the class declared before the results, not for what a pilot shows: a "
        "separate high part that the results may miss altogether lies outside it, and no interval "
        "keeps its confidence without a class.",
    ]


def widened_condition(question: Question) -> str:
    """Say under what condition a chance of the fixed interval holds."""
    families = " or ".join(dict.fromkeys(shape.family for shape in shapes_of(question)))
    return (
        f"if the site is shaped {families}, whichever is lower, and sigma is as well known as from "
        "near normal results (lower if it is not)"
    )


def expected_words(question: Question, reach: float) -> str:
    """Write the width to expect: the ends lie unevenly about the mean."""
    share = typed_percent(question.confidence)
    whole = with_unit(figure(2 * reach), question.unit)
    return (
        f"a {share} interval {whole} wide (±{figure(reach)} on average, farther above the mean "
        "than below it)"
    )
