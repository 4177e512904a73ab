"""``[objective.change]``: the change of the mean between two rounds at the same places."""

from collections.abc import Iterator
from typing import Annotated, Any, Literal

from pydantic import Field

from fieldplan.campaign.questions.mean_and_level import Chance
from fieldplan.campaign.questions.share import risk_problems
from fieldplan.campaign.table import PositiveNumber, Table, tables

MEANING = {
    "": "the change of the mean between two rounds at the same places",
    "difference": "the change that must not be missed",
    "direction": "which change counts",
    "alpha": "chance to claim a change where there is none",
    "beta": "chance to miss the change",
    "half_width": "tolerated distance from the change to the end of its interval",
    "sigma_of_differences": "standard deviation of the differences place by place",
    "correlation": "correlation between the two results of a place",
    "next_sigma": "standard deviation of single results in the other round; else the same",
    "assurance": "how sure it shall be that n is enough, though sigma is an estimate",
}


class Change(Table):
    """The change that matters or the width wanted, and the spread of the differences."""

    difference: PositiveNumber | None = None
    direction: Literal["either-way", "rise", "fall"] = "either-way"
    alpha: Chance | None = None
    beta: Chance | None = None
    half_width: PositiveNumber | None = None
    sigma_of_differences: PositiveNumber | None = None
    correlation: Annotated[float, Field(gt=-1, lt=1)] | None = None
    next_sigma: PositiveNumber | None = None
    assurance: Annotated[float, Field(ge=0.5, lt=1)] | Literal["plain"] = "plain"


def problems(table: dict[str, Any], data: dict[str, Any]) -> Iterator[tuple[str, str]]:
    """Give key and sentence for each rule that the table breaks.

    Parameters
    ----------
    table : dict
        ``[objective.change]`` as typed.
    data : dict
        The whole file.
    """
    yield from _of_the_target(table)
    yield from _of_the_spread(table, data)
    yield from risk_problems(table)


def _of_the_target(table: dict[str, Any]) -> Iterator[tuple[str, str]]:
    if ("difference" in table) == ("half_width" in table):
        got = "both" if "difference" in table else "neither"
        yield "difference", f"needs exactly one of difference and half_width (got {got}). Keep one."
    elif "difference" in table:
        for key in ("alpha", "beta"):
            if key not in table:
                yield key, "is missing: a difference needs alpha and beta, e.g. 0.05 and 0.2."
    else:
        for key in ("alpha", "beta", "direction"):
            if key in table:
                yield key, "belongs to difference; a half_width takes its confidence from [rules]."


def _of_the_spread(table: dict[str, Any], data: dict[str, Any]) -> Iterator[tuple[str, str]]:
    if ("sigma_of_differences" in table) == ("correlation" in table):
        got = "both" if "correlation" in table else "neither"
        yield (
            "sigma_of_differences",
            f"needs exactly one of sigma_of_differences and correlation (got {got}). Keep one.",
        )
    if "next_sigma" in table and "correlation" not in table:
        yield "next_sigma", "stands beside correlation. Write both, or neither."
    if "correlation" in table and not tables(data, "sigma"):
        yield "correlation", "needs the spread of a round. Write a [[sigma]] table."
