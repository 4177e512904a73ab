"""``[objective.upper_share]``: at least a stated share of the population lies below the level."""

from collections.abc import Iterator
from typing import Annotated, Any, Literal

from pydantic import Field

from fieldplan.campaign.table import OpenShare, Share, Table, tables

MEANING = {
    "": "at least a stated share of the population shall be shown to lie below the level",
    "share": "the share that shall lie below the level",
    "confidence": "how sure the claim shall be",
    "method": "count the results above the level, or take a bound mean + k s of normal results",
    "allowed": "results that may lie above the level while the claim still stands",
    "expected_above": "the share expected above the level, for which the claim shall come out",
    "power": "chance that the claim comes out, if the population is as expected",
}


class UpperShare(Table):
    """The share, how sure the claim shall be, and how it shall be shown."""

    share: Annotated[float, Field(ge=0.5, lt=1)]
    confidence: Annotated[float, Field(gt=0.5, lt=1)] = 0.95
    method: Literal["counting", "normal"] = "counting"
    allowed: Annotated[int, Field(ge=0)] | None = None
    expected_above: Share | None = None
    power: OpenShare | None = None


def problems(table: dict[str, Any], data: dict[str, Any]) -> Iterator[tuple[str, str]]:
    """Give key and sentence for each rule that the table breaks.

    Parameters
    ----------
    table : dict
        ``[objective.upper_share]`` as typed.
    data : dict
        The whole file.
    """
    if table.get("method", "counting") == "normal":
        yield from _of_a_normal_bound(table, data)
    else:
        yield from _of_counting(table)


def _of_counting(table: dict[str, Any]) -> Iterator[tuple[str, str]]:
    if "allowed" in table and "expected_above" in table:
        yield "allowed", "follows from expected_above and power. Keep one of the two."
    if ("expected_above" in table) != ("power" in table):
        missing = "power" if "expected_above" in table else "expected_above"
        yield missing, "is missing: expected_above and power are asked together. Write both."
    share, above = table.get("share"), table.get("expected_above")
    if isinstance(share, float) and isinstance(above, int | float) and above + share > 1 - 1e-9:
        yield (
            "expected_above",
            f"is {above:g}, and {share:g} shall lie below the level; it must be below "
            f"{1 - share:g}. Expect less above the level, or claim a smaller share.",
        )


def _of_a_normal_bound(table: dict[str, Any], data: dict[str, Any]) -> Iterator[tuple[str, str]]:
    for key in ("allowed", "expected_above"):
        if key in table:
            yield key, 'belongs to method = "counting". Take it out.'
    if "power" not in table:
        yield "power", "is missing: how often shall the bound come out below the level? E.g. 0.8."
    if not any("action_level" in analyte for analyte in tables(data, "analyte")):
        yield "method", "a normal bound needs the level. Write action_level in [[analyte]]."
    if not tables(data, "sigma"):
        yield "method", "a normal bound needs the spread and the mean. Write a [[sigma]] table."
    if any("strata" in frame for frame in tables(data, "frame")):
        yield (
            "method",
            "a normal bound is for one population, and this frame has strata. Take "
            'method = "counting", or ask for each stratum in a campaign of its own.',
        )
