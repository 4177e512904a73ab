"""What fewer or more results would buy: one curve with its band for sigma off by a quarter."""

from collections.abc import Sequence

from fieldplan.sizing.counting import planned_counts, total_cost
from fieldplan.sizing.model import CurvePoint
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Question
from fieldplan.stats.allocation import share_total

POINTS = 40
"""Most points on the curve, ends included."""


def curve(question: Question, plain: int, needed: int) -> tuple[CurvePoint, ...]:
    """Trace precision, cost and chance from half the plain n to twice the needed n.

    Parameters
    ----------
    question : Question
    plain, needed : int
        Totals; both are on the curve.

    Returns
    -------
    tuple of CurvePoint
        Rising n, within the floors and the list.
    """
    strata = question.sharing
    ends = sorted((plain, needed))
    low = min(max(sum(strata.floors), ends[0] // 2), needed)
    high = max(min(strata.most, 2 * ends[1]), needed)
    totals = set(range(low, high + 1))
    if len(totals) > POINTS:
        totals = {round(low + k * (high - low) / (POINTS - 1)) for k in range(POINTS)}
    totals |= {n for n in (plain, needed) if low <= n <= high}
    points = [
        _point(question, share_total(strata, total, allocation=question.allocation))
        for total in sorted(totals)
        if total >= sum(strata.floors)
    ]
    return tuple(points)


def _point(question: Question, counts: Sequence[int]) -> CurvePoint:
    precision = Precision(question)
    error = precision.standard_error(counts)
    return CurvePoint(
        n=sum(counts),
        standard_error=error,
        standard_error_low=0.75 * error,
        standard_error_high=1.25 * error,
        half_width=precision.half_width(counts),
        cost=total_cost(question, planned_counts(question, counts)),
        chance=precision.chance(counts),
    )
