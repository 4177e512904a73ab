"""``[objective.share]``: the share of places or units that have something, or exceed a level."""

from collections.abc import Iterator
from typing import Any, Literal

from fieldplan.campaign.questions.mean_and_level import Chance, alpha_problems
from fieldplan.campaign.table import OpenShare, Table

MEANING = {
    "": "the share of places or units that have something, or exceed the level",
    "expected": "the share to expect; 0.5 asks for the most results",
    "margin": "the tolerated distance from the share to the end of its interval, as a share",
    "method": "the exact interval, or the normal formula of the textbooks",
    "compare_with": "a share that the true one shall be told from",
    "alpha": "chance to tell them apart where there is no difference",
    "beta": "chance to miss the expected share",
}


class ShareTable(Table):
    """A margin about a share, or a share that it shall be told from."""

    expected: OpenShare | None = None
    margin: OpenShare | None = None
    method: Literal["exact", "normal"] = "exact"
    compare_with: OpenShare | None = None
    alpha: Chance | None = None
    beta: Chance | None = None


def problems(table: dict[str, Any], data: dict[str, Any]) -> Iterator[tuple[str, str]]:  # noqa: ARG001
    """Give key and sentence for each rule that the table breaks.

    Parameters
    ----------
    table : dict
        ``[objective.share]`` as typed.
    data : dict
        The whole file.
    """
    if ("margin" in table) == ("compare_with" in table):
        got = "both" if "margin" in table else "neither"
        yield "margin", f"needs exactly one of margin and compare_with (got {got}). Keep one."
    elif "margin" in table:
        for key in ("alpha", "beta"):
            if key in table:
                yield key, "belongs to compare_with; a margin takes the confidence of [rules]."
    else:
        yield from _of_a_comparison(table)


def _of_a_comparison(table: dict[str, Any]) -> Iterator[tuple[str, str]]:
    if "method" in table:
        yield "method", "belongs to margin; a comparison is always exact. Take it out."
    for key in ("expected", "alpha", "beta"):
        if key not in table:
            yield key, "is missing: compare_with needs expected, alpha and beta. Write it."
    if table.get("expected") is not None and table.get("expected") == table.get("compare_with"):
        yield "expected", "is the same as compare_with: there is nothing to tell apart."
    yield from risk_problems(table)


def risk_problems(table: dict[str, Any]) -> Iterator[tuple[str, str]]:
    """Refuse chances of a wrong decision that sum to 1 or more."""
    alpha, beta = table.get("alpha"), table.get("beta")
    yield from alpha_problems(alpha)
    if isinstance(alpha, float) and isinstance(beta, float) and alpha + beta >= 1:
        yield (
            "beta",
            f"alpha {alpha:g} and beta {beta:g} sum to {alpha + beta:g}; together they must stay "
            "below 1: tossing a coin does as well. Lower one of them.",
        )
