"""``[objective.mean_and_background]``: the site mean against that of a background area."""

from collections.abc import Iterator
from typing import Annotated, Any, Literal

from pydantic import Field

from fieldplan.campaign.questions.mean_and_level import Chance
from fieldplan.campaign.questions.share import risk_problems
from fieldplan.campaign.table import PositiveNumber, Table

MEANING = {
    "": "the site mean against the mean of a background area",
    "difference": "the difference between site and background that must not be missed",
    "assume": "how the two means are taken to lie until results show otherwise",
    "alpha": "chance to leave the assumption though it is true, at most",
    "beta": "chance to keep the assumption though the means differ from it by the difference",
    "test": "means by Student's t, or ranks by the rank sum test",
    "variances": "whether the two spreads may differ (Welch), or are taken as alike (pooled)",
    "background_sigma": "standard deviation of single background results; else that of the site",
    "background_results": "background results that are already there",
    "background_per_site": "background results for each site result, where both are to be taken",
    "overage": "share that the rank sum rule adds for lost results",
    "assurance": "how sure it shall be that n is enough, though sigma is an estimate",
}


class MeanAndBackground(Table):
    """The difference that matters, the chances of being wrong, and what the background has."""

    difference: PositiveNumber
    assume: Literal["at-background", "above-background", "no-difference"]
    alpha: Chance
    beta: Chance
    test: Literal["means", "ranks"] = "means"
    variances: Literal["may-differ", "alike"] = "may-differ"
    background_sigma: PositiveNumber | None = None
    background_results: Annotated[int, Field(ge=2)] | None = None
    background_per_site: PositiveNumber | None = None
    overage: Annotated[float, Field(ge=0, lt=1)] | None = None
    assurance: Annotated[float, Field(ge=0.5, lt=1)] | Literal["plain"] = "plain"


def problems(table: dict[str, Any], data: dict[str, Any]) -> Iterator[tuple[str, str]]:  # noqa: ARG001
    """Give key and sentence for each rule that the table breaks.

    Parameters
    ----------
    table : dict
        ``[objective.mean_and_background]`` as typed.
    data : dict
        The whole file.
    """
    yield from risk_problems(table)
    if "background_results" in table and "background_per_site" in table:
        yield (
            "background_per_site",
            "says how many background results to take, and background_results that they are "
            "there. Keep one of the two.",
        )
    if table.get("test") == "ranks":
        yield from _of_ranks(table)
    elif "overage" in table:
        yield "overage", 'belongs to test = "ranks"; lost results have their own table, [loss].'
    if table.get("variances") == "alike" and "background_sigma" in table:
        yield "background_sigma", 'contradicts variances = "alike". Keep one of the two.'


def _of_ranks(table: dict[str, Any]) -> Iterator[tuple[str, str]]:
    for key in ("variances", "background_per_site"):
        if key in table:
            yield key, 'belongs to test = "means". Take it out.'
    if table.get("assume") == "no-difference":
        yield "assume", "the rank sum test is sized for one direction. Choose one."
    if "overage" in table and "background_results" in table:
        yield "overage", "belongs to the rule for equal numbers; take [loss] in its place."
