"""``[objective.which_exceed]``: which units of a list exceed the level, tested in pools."""

from collections.abc import Iterator
from typing import Any

from fieldplan.campaign.table import Count, OpenShare, Table

MEANING = {
    "": "which units of the list exceed the level; every unit is sampled, pools are tested first",
    "share": "the share of units that is expected to exceed the level",
    "largest_pool": "the most units that one pool may hold",
}


class WhichExceed(Table):
    """The share of units expected above the level, and what a pool may hold."""

    share: OpenShare
    largest_pool: Count | None = None


def problems(table: dict[str, Any], data: dict[str, Any]) -> Iterator[tuple[str, str]]:
    """Give key and sentence for each rule that the table breaks.

    Parameters
    ----------
    table : dict
        ``[objective.which_exceed]`` as typed.
    data : dict
        The whole file.
    """
    kinds = [frame.get("kind") for frame in data.get("frame", []) if isinstance(frame, dict)]
    if kinds and kinds[0] in ("area", "line"):
        what = "a line has" if kinds[0] == "line" else "an area has"
        yield "share", f"{what} no units to tell apart. Ask it of a list."
    if table.get("largest_pool") == 1:
        yield "largest_pool", "one unit is no pool (got 1). Write 2 or more, or take it out."
