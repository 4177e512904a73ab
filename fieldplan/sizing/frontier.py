"""Designs priced side by side: which of them no other beats in both precision and money."""

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

from fieldplan.base.errors import DesignError
from fieldplan.sizing.counting import assured_counts
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Question, TargetKind
from fieldplan.stats.intervals import IntervalKind, t_quantile
from fieldplan.stats.precision import meets

REACH = 1.8
"""Designs are traced from a precision so many times wider than wanted to as much narrower."""


FLOORED = 0.8
"""Where floors bring a plan to less than this share of its target, what it reaches counts."""

POINTS = 40
"""Designs traced for each kind, unless it says otherwise."""


@dataclass(frozen=True)
class PricedDesign:
    """One way to sample, with what it reaches and what it costs.

    Parameters
    ----------
    kind : str
        The kind of design, e.g. ``strata, Neyman``; the label in the picture.
    words : str
        What is taken, e.g. ``9 results and 51 readings``.
    results, locations : int
        Laboratory results that remain after losses, and locations to visit.
    standard_error, half_width : float
        To expect, sigma at face value, in the analyte's unit.
    cost : float
        In money; control samples and targeted places are in it.
    crew_days : int
        Whole days of one crew; 0 where nobody said how many locations a day has.
    readings : int
        Field readings that remain after losses; 0 where nothing is read.
    """

    kind: str
    words: str
    results: int
    locations: int
    standard_error: float
    half_width: float
    cost: float
    crew_days: int = 0
    readings: int = 0


@dataclass(frozen=True)
class Wanted:
    """The precision that designs are compared at: a standard error, or a half-width.

    Parameters
    ----------
    measure : str
        ``standard_error`` or ``half_width``.
    value : float
        In the analyte's unit.
    confidence : float
    interval : str
        Of the half-width.
    """

    measure: TargetKind
    value: float
    confidence: float
    interval: IntervalKind

    def of(self, design: PricedDesign) -> float:
        """Give the measure of a design."""
        widths = self.measure == "half_width"
        return design.half_width if widths else design.standard_error

    def variance(self, degrees_of_freedom: float) -> float:
        """Give the tolerated variance of the mean where the interval has so many df."""
        if self.measure == "standard_error":
            return self.value**2
        return (self.value / self.quantile(degrees_of_freedom)) ** 2

    def quantile(self, degrees_of_freedom: float) -> float:
        """Give Student's t of the campaign's interval."""
        return t_quantile(degrees_of_freedom, confidence=self.confidence, kind=self.interval)

    def times(self, factor: float) -> "Wanted":
        """Give the same measure, wider or narrower."""
        return replace(self, value=self.value * factor)


def wanted_of(question: Question, needed: tuple[int, ...]) -> Wanted:
    """Say at which precision designs are to be compared.

    Parameters
    ----------
    question : Question
    needed : tuple of int
        Results by stratum that the campaign goes for.

    Returns
    -------
    Wanted
        The target; where an assurance was chosen, the precision that the counts for it predict,
        since designs of equal predicted precision share the pilot's luck. Without a target, and
        where floors carry the plan far beyond it, what ``needed`` predicts.
    """
    precision = Precision(question)
    measure: TargetKind = "standard_error" if question.target_half_width is None else "half_width"

    def reached(counts: Iterable[int]) -> float:
        numbers = tuple(counts)
        widths = measure == "half_width"
        return precision.half_width(numbers) if widths else precision.standard_error(numbers)

    if question.target == "budget":
        value = reached(needed)
    else:
        value = question.target_half_width or question.value
        assured = _assured(question, needed)
        if assured is not None:
            value = min(value, reached(assured))
        elif question.locations is None and reached(needed) < FLOORED * value:
            value = reached(needed)
    return Wanted(measure, value, question.confidence, question.interval)


def _assured(question: Question, needed: tuple[int, ...]) -> Sequence[int] | None:
    """Give the counts that hold to the chosen assurance; None where there is none to hold to."""
    if question.assurance is None:
        return None
    if question.pilots is None and question.target_half_width is None:
        return None
    return needed if question.locations is None else assured_counts(question, question.assurance)


def efficient(designs: Iterable[PricedDesign]) -> tuple[PricedDesign, ...]:
    """Keep the designs that no other beats: as precise for less, or more precise for as much.

    Parameters
    ----------
    designs : iterable of PricedDesign

    Returns
    -------
    tuple of PricedDesign
        Rising cost, falling standard error; of equals the first.

    Examples
    --------
    >>> def at(cost, error):
    ...     return PricedDesign("one", "", 9, 9, error, 2 * error, cost)
    >>> [d.cost for d in efficient([at(300, 2.0), at(200, 3.0), at(250, 3.0), at(400, 2.5)])]
    [200, 300]
    """
    kept: list[PricedDesign] = []
    for design in sorted(designs, key=lambda d: (d.cost, d.standard_error)):
        if not kept or design.standard_error < kept[-1].standard_error * (1 - 1e-12):
            kept.append(design)
    return tuple(kept)


def cheapest(designs: Iterable[PricedDesign], wanted: Wanted) -> PricedDesign | None:
    """Take the cheapest design that reaches a precision; of equals the more precise.

    Examples
    --------
    >>> goal = Wanted("standard_error", 2.5, 0.95, "two-sided")
    >>> one, other = (PricedDesign("one", "", 9, 9, e, 5.0, c) for e, c in ((2.5, 400), (2.0, 300)))
    >>> cheapest([one, other], goal).cost
    300
    """
    fitting = [design for design in designs if meets(wanted.of(design), wanted.value)]
    return min(fitting, key=lambda d: (d.cost, d.standard_error), default=None)


def most_precise(designs: Iterable[PricedDesign], budget: float) -> PricedDesign | None:
    """Take the most precise design within a budget; of equals the cheaper.

    Examples
    --------
    >>> one, other = (PricedDesign("one", "", 9, 9, e, 5.0, c) for e, c in ((2.5, 400), (2.0, 300)))
    >>> most_precise([one, other], 450).standard_error
    2.0
    """
    paid = [design for design in designs if meets(design.cost, budget)]
    return min(paid, key=lambda d: (d.standard_error, d.cost), default=None)


def levels(wanted: Wanted, *, points: int, reach: float = REACH) -> list[Wanted]:
    """Give precisions from ``reach`` times wider to as much narrower and a step beyond."""
    if points < 3:
        message = f"{points} points trace no frontier; ask for 3 or more."
        raise DesignError(message)
    step = 2 * math.log(reach) / (points - 2)
    return [wanted.times(reach * math.exp(-step * k)) for k in range(points)]
