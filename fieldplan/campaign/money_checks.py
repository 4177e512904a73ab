"""Rules for money: crew-days, what a wrong decision costs, cheap readings in the field."""

from collections.abc import Iterator
from typing import Any

from fieldplan.campaign import field_reading
from fieldplan.campaign.problems import Problem, shown
from fieldplan.campaign.table import tables

PAIRS = (("per_crew_day", "locations_per_day"), ("wrongly_acted", "wrongly_left"))
"""Keys of [cost] that mean something together only."""

PER_PLACE = ("per_location", "per_sample", "per_analysis", "per_crew_day")
"""Keys of [cost] of which a budget needs one."""


def money_problems(data: dict[str, Any]) -> Iterator[Problem]:
    """Give what is wrong with [cost], [[field_reading]] and what is believed of the mean.

    Parameters
    ----------
    data : dict
        The whole file, screened.
    """
    for cost in tables(data, "cost"):
        for pair in PAIRS:
            for one, other in (pair, pair[::-1]):
                if one in cost and other not in cost:
                    text = f"missing; {one} means nothing without it. Give both or neither."
                    yield Problem(("cost", other), text)
        if "wrongly_acted" in cost and not _has_level(data):
            text = (
                "a wrong decision needs a level to be wrong about, and the analyte that decides n "
                "has none. Give it an action_level."
            )
            yield Problem(("cost", "wrongly_acted"), text)
    for i, objective in enumerate(tables(data, "objective")):
        between = objective.get("mean_between")
        if isinstance(between, list) and len(between) == 2 and not between[0] < between[1]:
            text = f"the lower amount comes first (got {between[0]:g}, {between[1]:g}). Swap them."
            yield Problem(("objective", i, "mean_between"), text)
    yield from _readings(data)


def _has_level(data: dict[str, Any]) -> bool:
    objectives = tables(data, "objective")
    deciding = next((o for o in objectives if o.get("decides_n") is True), None)
    wanted = (deciding or (objectives[0] if objectives else {})).get("analyte")
    analytes = [a for a in tables(data, "analyte") if a.get("id") == wanted]
    return not analytes or "action_level" in analytes[0]


def _readings(data: dict[str, Any]) -> Iterator[Problem]:
    seen: set[str] = set()
    for i, table in enumerate(tables(data, "field_reading")):
        for key, text in field_reading.problems(table):
            yield Problem(("field_reading", i, *(key.split(".") if key else ())), text)
        name = str(table.get("name", ""))
        if name and name in seen:
            text = f"the reading {shown(name)} stands twice. Rename one."
            yield Problem(("field_reading", i, "name"), text)
        seen.add(name)
