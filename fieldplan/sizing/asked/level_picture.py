"""The picture of a decision: the chance of the wrong call, off the gray region on either side."""

import math
from collections.abc import Sequence

from fieldplan.sizing.asked.level_decision import LevelDecision
from fieldplan.sizing.asked.wrong_calls import Wing, wrong_calls
from fieldplan.sizing.model import Picture
from fieldplan.sizing.words import counted, figure, percent, typed, with_unit
from fieldplan.stats.distributions import chi_square_quantile, normal_quantile, normal_share

_CHANCES = (0.001, 0.01, 0.05, 0.25, 0.5, 0.8, 0.95, 0.999)
_POINTS = 25
_RARE = 0.005
"""Wings run to where a wrong call is so rare, sigma being larger."""


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
    """Draw how often the call is wrong, by the true mean: at the level and beyond, and at the edge.

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
    side, unit = decision.side, decision.asked.question.unit
    at_level, at_edge = _wings(decision, knots, times)
    alpha, beta = at_level.y[0], at_edge.y[0]
    return wrong_calls(
        (at_level, at_edge),
        caption=(
            f"How often {counted(sum(counts), 'result')} lead to the wrong call, by the true mean. "
            "Shaded: the gray region, where no call counts as wrong. Ticks: the chances allowed; "
            f"dashed: {words}."
        ),
        alternative=(
            f"Two lines fall away from the gray region: from {alpha:.0f} % at the level of "
            f"{typed(decision.level)}, where a mean is wrongly taken to lie {side} it, and from "
            f"{beta:.0f} % at {typed(decision.table.gray_edge)}, where it is not seen to."
        ),
        x_label=f"True mean, {unit}".rstrip(", "),
        y_label="Wrong calls, % of campaigns",
    )


def _wings(
    decision: LevelDecision, knots: list[tuple[float, float]], times: float
) -> tuple[Wing, Wing]:
    """Give the wing beyond the level, then the one beyond the gray edge."""
    side, unit, width = decision.side, decision.asked.question.unit, decision.width
    alpha, beta = decision.risks
    rare = normal_quantile(1 - _RARE)
    behind = min(max(-_at(knots, -rare) * times, width / 2), 2 * width)
    beyond = min(max(_at(knots, rare) * times - width, width / 2), 2 * width)
    if side == "below":
        beyond = min(beyond, decision.table.gray_edge)
    else:
        behind = min(behind, decision.level)
    outward = [k / (_POINTS - 1) for k in range(_POINTS)]
    level_side = [-behind * share for share in outward]
    edge_side = [width + beyond * share for share in outward]

    def shown(distance: float, factor: float = 1.0) -> float:
        return 100 * normal_share(_straight(knots, distance / factor))

    at_level = Wing(
        name=f"level {with_unit(typed(decision.level), unit)}",
        chance_name=f"alpha {percent(alpha)}",
        chance=100 * alpha,
        words=f"comes out {side} the level, though it is not {side} it",
        x=tuple(decision.mean_at(distance) for distance in level_side),
        y=tuple(shown(distance) for distance in level_side),
        wider=tuple(shown(distance, times) for distance in level_side),
    )
    at_edge = Wing(
        name=f"gray edge {with_unit(typed(decision.table.gray_edge), unit)}",
        chance_name=f"beta {percent(beta)}",
        chance=100 * beta,
        words=f"does not come out {side} the level, though it is {side} it",
        x=tuple(decision.mean_at(distance) for distance in edge_side),
        y=tuple(100 - shown(distance) for distance in edge_side),
        wider=tuple(100 - shown(distance, times) for distance in edge_side),
    )
    return at_level, at_edge


def _knots(decision: LevelDecision, counts: Sequence[int]) -> list[tuple[float, float]]:
    """Give distances with the normal quantile of their chance; on that scale lines are straight."""
    alpha, beta = decision.risks
    middle = decision.reach(counts, 0.5)
    if middle is None or middle == 0:
        return []
    found = []
    for chance in sorted({*_CHANCES, round(alpha, 9), round(1 - beta, 9)}):
        reach = decision.reach(counts, chance)
        if reach is None:
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


def _straight(knots: list[tuple[float, float]], at: float) -> float:
    """Interpolate between knots; beyond the ends the last line goes on."""
    place = next((k for k in range(1, len(knots) - 1) if at <= knots[k][0]), len(knots) - 1)
    (left, low), (right, high) = knots[place - 1], knots[place]
    return low + (high - low) * (at - left) / (right - left)


def _at(knots: list[tuple[float, float]], quantile: float) -> float:
    """Give the distance at a normal quantile."""
    return _straight([(high, reach) for reach, high in knots], quantile)
