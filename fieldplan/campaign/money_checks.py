"""Rules for money: crew-days, what a wrong decision costs, cheap readings in the field."""

from collections.abc import Iterator
from typing import Any, TypeGuard

from fieldplan.campaign import field_reading
from fieldplan.campaign.lines import KeyPath
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
            yield from _together(cost, ("cost",), pair)
        if "wrongly_acted" in cost and not _has_level(data):
            text = (
                "a wrong decision needs a level to be wrong about, and the analyte that decides n "
                "has none. Give it an action_level."
            )
            yield Problem(("cost", "wrongly_acted"), text)
    for i, objective in enumerate(tables(data, "objective")):
        yield from _together(objective, ("objective", i), ("mean_from", "mean_to"))
        low, high = objective.get("mean_from"), objective.get("mean_to")
        if _is_number(low) and _is_number(high) and not low < high:
            text = f"must be above mean_from = {shown(low)} (got {shown(high)}). Swap the two."
            yield Problem(("objective", i, "mean_to"), text)
    yield from _readings(data)


def _together(table: dict[str, Any], path: KeyPath, pair: tuple[str, str]) -> Iterator[Problem]:
    """Ask for the other of two keys that mean something together only."""
    for one, other in (pair, pair[::-1]):
        if one in table and other not in table:
            text = f"missing; {one} means nothing without it. Give both or neither."
            yield Problem((*path, other), text)


def _is_number(value: object) -> TypeGuard[float]:
    return isinstance(value, int | float) and not isinstance(value, bool)


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
