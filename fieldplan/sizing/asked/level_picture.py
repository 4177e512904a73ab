"""The picture of a decision: the chance to come out on the side, over the true mean."""

import math
from collections.abc import Sequence

from fieldplan.sizing.asked.level_decision import LevelDecision
from fieldplan.sizing.model import Picture, Series
from fieldplan.sizing.words import counted, figure, percent, typed
from fieldplan.stats.distributions import chi_square_quantile, normal_quantile, normal_share

_CHANCES = (0.001, 0.01, 0.05, 0.25, 0.5, 0.8, 0.95, 0.999)
_POINTS = 41


def lines_of(decision: LevelDecision, counts: Sequence[int]) -> tuple[tuple[str, str], ...]:
    """List true means with the share of campaigns that come out on the side.

    Parameters
    ----------
    decision : LevelDecision
    counts : sequence of int
        Results by stratum.

    Returns
    -------
    tuple of (str, str)
        From the level outwards, the gray edge among them.
    """
    reaches = [decision.reach(counts, chance) for chance in (0.2, 0.5, 0.8, 0.9, 0.95)]
    distances = {0.0, decision.width, *(reach for reach in reaches if reach is not None)}
    rows = []
    for distance in sorted(distances):
        mean = decision.mean_at(distance)
        if mean > 0:
            rows.append((figure(mean, 4), percent(decision.power(counts, distance))))
    return tuple(rows)


def level_picture(decision: LevelDecision, counts: Sequence[int]) -> Picture | None:
    """Draw the chance to come out on the side over the true mean.

    Parameters
    ----------
    decision : LevelDecision
    counts : sequence of int
        Results by stratum.

    Returns
    -------
    Picture or None
        None where the mean will be known, or nothing can be shown.
    """
    knots = _knots(decision, counts)
    if not knots:
        return None
    times, words = _larger(decision, counts)
    n, side = sum(counts), decision.side
    furthest = max(knots[-1][0] * times, 1.3 * decision.width)
    if side == "below":
        furthest = min(furthest, decision.level)
    span = [-0.3 * decision.width + k * (furthest + 0.3 * decision.width) / (_POINTS - 1)
            for k in range(_POINTS)]  # fmt: skip
    edge, level = decision.table.gray_edge, decision.level
    return Picture(
        kind="lines",
        caption=(
            f"How often {counted(n, 'result')} show the mean to lie {side} the level, by the true "
            f"mean; dashed: {words}."
        ),
        alternative=(
            f"The share of campaigns that come out {side} the level of {typed(level)} rises from "
            f"{percent(decision.power(counts, 0.0))} at the level to "
            f"{percent(decision.power(counts, decision.width))} at {typed(edge)}."
        ),
        x_label=f"True mean, {decision.asked.question.unit}".rstrip(", "),
        y_label=f"Campaigns that come out {side}, %",
        series=(
            _series(decision, "sigma right", knots, span, 1.0),
            _series(decision, "sigma larger", knots, span, times, dashed=True),
        ),
        marks=(("level", level), ("gray edge", edge)),
        levels=(("8 of 10", 80.0),),
    )


def _knots(decision: LevelDecision, counts: Sequence[int]) -> list[tuple[float, float]]:
    """Give distances with the normal quantile of their chance; on that scale lines are straight."""
    found = []
    for chance in _CHANCES:
        reach = decision.reach(counts, chance)
        if reach is None or reach == 0:
            return []
        found.append((reach, normal_quantile(chance)))
    return found


def _larger(decision: LevelDecision, counts: Sequence[int]) -> tuple[float, str]:
    """Give how much larger sigma may be: its 80 % limit, or a quarter where nobody can say."""
    from fieldplan.sizing.precision import Precision

    known = Precision(decision.asked.question).pilot_degrees_of_freedom(counts)
    if known is None or math.isinf(known):
        return 1.25, "sigma a quarter larger"
    times = math.sqrt(known / chi_square_quantile(0.2, known))
    return times, "sigma at the end of its 80 % upper limit"


def _series(
    decision: LevelDecision,
    label: str,
    knots: list[tuple[float, float]],
    span: Sequence[float],
    times: float,
    *,
    dashed: bool = False,
) -> Series:
    points = sorted(
        (decision.mean_at(distance), 100 * normal_share(_straight(knots, distance / times)))
        for distance in span
    )
    return Series(
        label,
        tuple(mean for mean, _ in points),
        tuple(share for _, share in points),
        "dashes" if dashed else "line",
    )


def _straight(knots: list[tuple[float, float]], at: float) -> float:
    """Interpolate between knots; beyond the ends the last line goes on."""
    place = next((k for k in range(1, len(knots) - 1) if at <= knots[k][0]), len(knots) - 1)
    (left, low), (right, high) = knots[place - 1], knots[place]
    return low + (high - low) * (at - left) / (right - left)
