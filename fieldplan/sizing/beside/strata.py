"""What the strata gain against no strata, and what other shares would cost."""

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import get_args

from fieldplan.base.errors import DesignError
from fieldplan.base.working import Quantity, Step
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.counting import affordable_counts, needed_counts, planned_counts, total_cost
from fieldplan.sizing.model import Amount, Finding, Size
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Question
from fieldplan.sizing.words import counted, figure, typed, with_unit
from fieldplan.stats.allocation import Allocation, share_total
from fieldplan.stats.precision import n_for_standard_error, unrounded_for_list, whole
from fieldplan.stats.strata_gain import WholeVariance, gain_of_strata, whole_variance

COCHRAN = "Cochran 1977, Sampling Techniques, 3rd ed."
SOURCES = (f"{COCHRAN}, sec. 5.6 and 5A.11 (from memory)",)


@dataclass(frozen=True)
class _Gain:
    """The question, the counts it got, and the variance without strata."""

    question: Question
    counts: tuple[int, ...]
    whole: WholeVariance
    means_known: bool

    @property
    def factor(self) -> float:
        """How many times larger the variance would be without strata."""
        parts = self.question.parts
        return gain_of_strata(
            self.whole,
            [part.weight for part in parts],
            [part.sigma for part in parts],
            self.counts,
            populations=[part.population for part in parts],
        )

    @property
    def error(self) -> float:
        """The standard error with strata."""
        return Precision(self.question).standard_error(self.counts)

    @property
    def without(self) -> int:
        """Simple random results that would be as precise."""
        endless = self.whole.total / self.error**2
        size = self.question.total_population
        return whole(endless if size is None else unrounded_for_list(endless, size))


def finding(asked: Asked, size: Size) -> Finding | None:
    """Set the strata against no strata; None for one stratum, another question or a census.

    Parameters
    ----------
    asked : Asked
    size : Size
    """
    question = asked.question
    counts = tuple(entry.needed for entry in size.strata)
    if size.question != "mean" or len(question.parts) == 1 or question.takes_all(counts):
        return None
    known = all(part.mean is not None for part in question.parts)
    gain = _Gain(question, counts, _whole(asked, known=known), known)
    if not math.isfinite(gain.factor):
        return None
    own = _own_errors(question, counts)
    return Finding(
        topic="strata",
        title="What the strata gain",
        answer=_answer(gain) + _equal(question, own),
        amounts=tuple(_amounts(gain, own)),
        columns=("shares", "results", "standard error", "cost")[: 4 if question.prices else 3],
        rows=tuple(_rows(question)),
        steps=tuple(_steps(gain)),
        assumptions=(
            "Means and standard deviations of the strata are right; simple random locations would "
            "have met the whole of the variance between strata.",
        ),
        sources=SOURCES,
    )


def _whole(asked: Asked, *, known: bool) -> WholeVariance:
    """Put the whole variance together; without means it is the part inside strata alone."""
    parts = asked.question.parts
    values = {entry.stratum: len(entry.values) for entry in asked.entries}
    return whole_variance(
        [part.weight for part in parts],
        [part.mean or 0.0 for part in parts] if known else [0.0] * len(parts),
        [part.sigma for part in parts],
        populations=[part.population for part in parts],
        results=[values.get(part.name) or None for part in parts] if known else None,
    )


def _answer(gain: _Gain) -> str:
    question, n = gain.question, sum(gain.counts)
    simple = with_unit(figure(gain.error * math.sqrt(gain.factor)), question.unit)
    error = with_unit(figure(gain.error), question.unit)
    least = "" if gain.means_known else "at least "
    if gain.factor < 1:
        return (
            f"These shares cost more than the strata gain: simple random, the same "
            f"{counted(n, 'result')} would have a standard error of {simple} instead of {error}"
            + (
                "."
                if gain.means_known
                else ", unless the means of the strata differ; none are known."
            )
        )
    line = (
        f"Without strata the same {counted(n, 'result')} would have a standard error of {least}"
        f"{simple} instead of {error}, and the same precision would take {least}{gain.without}."
    )
    if not gain.means_known:
        line += " How far the means of the strata differ is not known, so the gain may be larger."
    return line


def _own_errors(question: Question, counts: tuple[int, ...]) -> list[float]:
    """Give the standard error of every stratum's own mean."""
    found = []
    for part, n in zip(question.parts, counts, strict=True):
        seen = 0.0 if part.population is None else n / part.population
        found.append(part.sigma * math.sqrt(max(1 - seen, 0.0) / n))
    return found


def _equal(question: Question, own: list[float]) -> str:
    """Say, for equal precision, how alike the strata's own means are."""
    if question.allocation != "equal-precision":
        return ""
    if question.equal_in == "relative-standard-error":
        shares = [e / (p.mean or 1.0) for e, p in zip(own, question.parts, strict=True)]
        low, high = (f"{100 * share:.3g} %" for share in (min(shares), max(shares)))
        return f" The mean of each stratum alone has a relative standard error of {low} to {high}."
    low, high = figure(min(own)), with_unit(figure(max(own)), question.unit)
    line = f" The mean of each stratum alone has a standard error of {low} to {high}."
    target = question.target_standard_error
    if target is None:
        return line
    each = sum(
        max(n_for_standard_error(p.sigma, target, population=p.population), floor)
        for p, floor in zip(question.parts, question.strata.floors, strict=True)
    )
    wanted = with_unit(typed(target), question.unit)
    return f"{line} For {wanted} in every single stratum it would take {each} results."


def _amounts(gain: _Gain, own: list[float]) -> Iterator[Amount]:
    unit = gain.question.unit
    squared = f"({unit})²" if unit else ""
    yield Amount("gain", "variance without strata over the variance with them", gain.factor)
    yield Amount("within", "variance inside strata", gain.whole.within, squared)
    if gain.means_known:
        yield Amount("between", "variance between strata", gain.whole.between, squared)
    if gain.error > 0:
        meaning = "simple random results of the same precision"
        yield Amount("results_without", meaning, gain.without, "results")
    yield Amount(
        "own_error_smallest", "smallest standard error of a stratum's mean", min(own), unit
    )
    yield Amount("own_error_largest", "largest standard error of a stratum's mean", max(own), unit)


def _rows(question: Question) -> Iterator[tuple[str, ...]]:
    """Answer the same question with every other way of sharing, after rounding."""
    for allocation in get_args(Allocation):
        counts = _counted(question, allocation)
        if counts is None:
            continue
        error = Precision(question).standard_error(counts)
        cost = total_cost(question, planned_counts(question, counts))
        mark = " (chosen)" if allocation == question.allocation else ""
        row = (f"{allocation}{mark}", str(sum(counts)), with_unit(figure(error), question.unit))
        if question.prices is None or cost is None:
            yield row
        else:
            yield (*row, f"{cost:.0f} {question.prices.currency}")


def _counted(question: Question, allocation: Allocation) -> list[int] | None:
    """Count with other shares; None where they lack prices or cannot reach the target."""
    if allocation == "cost-optimal" and not question.strata.costs:
        return None
    relative = question.equal_in if allocation == question.allocation else "standard-error"
    others = tuple(replace(o, allocation=allocation, equal_in=relative) for o in question.also)
    try:
        other = replace(question, allocation=allocation, equal_in=relative, also=others)
        if question.locations is not None:
            return share_total(other.sharing_of_visits, question.locations, allocation=allocation)
        return affordable_counts(other) if other.target == "budget" else needed_counts(other)
    except DesignError:
        return None


def _steps(gain: _Gain) -> Iterator[Step]:
    question, unit = gain.question, gain.question.unit
    squared = f"({unit})²" if unit else ""
    listed = question.total_population
    between = "Σ W·(mean − overall mean)², less luck"
    if not gain.means_known:
        between = "not known, taken as 0"
    whole_inputs = [
        Quantity("within", "Σ W·s²", gain.whole.within, squared),
        Quantity("between", between, gain.whole.between, squared),
    ]
    if gain.whole.chance_between:
        luck = gain.whole.chance_between
        whole_inputs.append(Quantity("luck", "Σ W·(1 − W)·s²/n0 of the pilots", luck, squared))
    yield Step(
        symbol="S²",
        meaning="Variance of single results over the whole population",
        formula="S² = within + between"
        + ("" if listed is None else ", with N − 1 below the line in every part"),
        inputs=tuple(whole_inputs),
        unrounded=gain.whole.total,
        rounded=gain.whole.total,
        unit=squared,
        source=f"{COCHRAN}, sec. 5.6; luck of the means sec. 5A.11",
    )
    counts = [
        Quantity("S²", "variance of the whole", gain.whole.total, squared),
        Quantity("n", "results", sum(gain.counts), "results"),
        Quantity("SE", "standard error with strata", gain.error, unit),
    ]
    if listed is not None:
        counts.append(Quantity("N", "units in the list", listed, "units"))
    yield Step(
        symbol="gain",
        meaning="Variance without strata over the variance with them, at the same n",
        formula=f"gain = S²{'' if listed is None else '·(1 − n/N)'} / (n·SE²)",
        inputs=tuple(counts),
        unrounded=gain.factor,
        rounded=gain.factor,
        source=f"{COCHRAN}, sec. 5.6",
    )
