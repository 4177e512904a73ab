"""The picture of site against background: how often the call is wrong, by the true difference."""

from fieldplan.sizing.asked.two_populations import TwoPopulations
from fieldplan.sizing.asked.wrong_calls import Wing, wrong_calls
from fieldplan.sizing.model import Picture
from fieldplan.sizing.words import typed, typed_percent, with_unit

_POINTS = 17


def background_picture(both: TwoPopulations, counts: tuple[int, ...]) -> Picture:
    """Draw how often the call is wrong where the means are alike, and where they are not.

    Parameters
    ----------
    both : TwoPopulations
    counts : tuple of int
        Site results by stratum.

    Returns
    -------
    Picture
        Where a difference either way counts, it stands for its size: there is nothing below 0.
    """
    table, unit = both.table, both.asked.question.unit
    alike, apart = _wings(both, counts)
    return wrong_calls(
        (alike, apart),
        caption=(
            f"How often {sum(counts)} site results and {both.background(counts)} background "
            "results lead to the wrong call, by the true difference. Shaded: the gray region, "
            "where no call counts as wrong. Ticks: the chances allowed."
        ),
        alternative=(
            f"{alike.y[0]:.0f} % of calls are wrong where the means are alike, and "
            f"{apart.y[0]:.0f} % at a difference of {with_unit(typed(table.difference), unit)}; "
            "farther from the gray region it is fewer."
        ),
        x_label=f"True difference, {unit}".rstrip(", "),
        y_label="Wrong calls, % of campaigns",
    )


def _wings(both: TwoPopulations, counts: tuple[int, ...]) -> tuple[Wing, Wing]:
    """Give the wing from no difference downwards, then the one from the difference upwards."""
    table, unit = both.table, both.asked.question.unit
    apart = table.difference
    far = [apart * k / (_POINTS - 1) for k in range(_POINTS)]
    below = (0.0,) if both.sides == 2 else tuple(-step for step in far)
    above = tuple(apart + step for step in far)
    low = tuple(100 * both.shown(counts, true) for true in below)
    high = tuple(100 * both.shown(counts, true) for true in above)
    alpha, beta = f"alpha {typed_percent(table.alpha)}", f"beta {typed_percent(table.beta)}"
    at_null, at_apart = (alpha, 100 * table.alpha), (beta, 100 * table.beta)
    if both.from_above:
        low = tuple(100 - share for share in low)
        at_null, at_apart = at_apart, at_null
        claim = f"to lie less than {with_unit(typed(apart), unit)} above"
        words = (f"not shown {claim}, though it does", f"shown {claim}, though it does not")
    else:
        high = tuple(100 - share for share in high)
        claim = "to differ" if both.sides == 2 else "to lie above"
        words = (f"shown {claim}, though it does not", f"not shown {claim}, though it does")
    where = with_unit(typed(apart), unit)
    return (
        Wing("means alike", *at_null, words[0], below, low),
        Wing(
            f"{where} {'apart' if both.sides == 2 else 'above'}", *at_apart, words[1], above, high
        ),
    )
