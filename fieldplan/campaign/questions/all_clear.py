"""``[objective.all_clear]``: none of the results may exceed the level."""

from collections.abc import Iterator
from typing import Annotated, Any

from pydantic import Field

from fieldplan.campaign.table import Count, OpenShare, Table, tables

MEANING = {
    "": "none of the results may exceed the level",
    "share": "the share of the population above the level that must not stay unnoticed",
    "units": "the same as a number of units of the list",
    "confidence": "chance to notice it, if it is there",
}


class AllClear(Table):
    """The share, or the number of units, that must not stay unnoticed."""

    share: OpenShare | None = None
    units: Count | None = None
    confidence: Annotated[float, Field(gt=0.5, lt=1)] = 0.95


def problems(table: dict[str, Any], data: dict[str, Any]) -> Iterator[tuple[str, str]]:
    """Give key and sentence for each rule that the table breaks.

    Parameters
    ----------
    table : dict
        ``[objective.all_clear]`` as typed.
    data : dict
        The whole file.
    """
    if ("share" in table) == ("units" in table):
        got = "both" if "share" in table else "neither"
        yield "share", f"needs exactly one of share and units (got {got}). Keep one."
    kinds = [frame.get("kind") for frame in tables(data, "frame")]
    if "units" in table and "share" not in table and kinds[:1] in (["area"], ["line"]):
        what = "a line has" if kinds[0] == "line" else "an area has"
        yield "units", f"{what} no units to count. Write share in its place."
