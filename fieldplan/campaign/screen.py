"""A first look at parsed tables: shapes, unknown keys, quoted dates, paths, what is to fill in."""

import math
from dataclasses import dataclass, field
from datetime import date, datetime, time
from typing import Any

from pydantic import BaseModel

from fieldplan.base.bounds import magnitude_fault, share_fault
from fieldplan.campaign.later import MANY, later_key
from fieldplan.campaign.lines import KeyPath
from fieldplan.campaign.model import FILL_IN, Campaign
from fieldplan.campaign.problems import Problem, meaning, near_miss, shown
from fieldplan.campaign.shape import Shape, key_homes, shapes

_TEXT_CONTROLS = "\n\r\t"


@dataclass
class Screened:
    """Tables ready for the models, with what was found on the way."""

    data: dict[str, Any] = field(default_factory=dict)
    problems: list[Problem] = field(default_factory=list)
    fill_in: list[KeyPath] = field(default_factory=list)


def is_fill_in(value: object) -> bool:
    """Tell whether a value stands for "not known yet", in any letters and spacing.

    Examples
    --------
    >>> is_fill_in("Fill-in"), is_fill_in("FILL IN the form"), is_fill_in(3)
    (True, False, False)
    """
    if not isinstance(value, str):
        return False
    return " ".join(value.replace("-", " ").replace("_", " ").upper().split()) == FILL_IN


def screen(content: dict[str, Any]) -> Screened:
    """Look through parsed tables once.

    Parameters
    ----------
    content : dict
        What ``tomllib`` returned.

    Returns
    -------
    Screened
        The tables with brackets put right and dates as ISO text (the models are strict and read
        JSON), the problems, and the paths of all values that are still to fill in.
    """
    found = Screened()
    found.data = _table(content, Campaign, (), found)
    for name, words in MANY.items():
        members = found.data.get(name)
        if isinstance(members, list) and len(members) > 1:
            text = f"this version takes one [[{name}]]; {words} are not done yet. Keep one."
            found.problems.append(Problem((name, 1), text))
    return found


def table_name(path: KeyPath) -> str:
    """Name the table of a path without positions.

    Examples
    --------
    >>> table_name(("frame", 0, "exclusion", 1))
    'frame.exclusion'
    """
    return ".".join(step for step in path if isinstance(step, str))


def _table(content: Any, model: type[BaseModel], path: KeyPath, found: Screened) -> dict[str, Any]:
    """Look through one table."""
    known = shapes(model)
    result: dict[str, Any] = {}
    for key, value in content.items():
        if key not in known:
            found.problems.append(Problem((*path, key), _unknown(key, list(known), path)))
            continue
        result[key] = _value(value, known[key], (*path, key), found)
    return result


def _unknown(key: str, known: list[str], path: KeyPath) -> str:
    """Word an unknown key: not done yet, of another table, a near miss, or what there is."""
    later = later_key(key)
    if later:
        return f"not done yet in this version ({later}). Take it out."
    where = f"[{table_name(path)}]" if path else "the file"
    homes = key_homes().get(key, [])
    if homes:
        return f"this key does not belong in {where}. Write it below {' or '.join(homes)}."
    near = near_miss(key, known)
    listed = "" if near else f" It takes {', '.join(known)}."
    return f"unknown key in {where}.{near}{listed}"


def _value(value: Any, shape: Shape, path: KeyPath, found: Screened) -> Any:
    """Look through one value."""
    if is_fill_in(value):
        found.fill_in.append(path)
        return FILL_IN
    if shape.kind == "tables" and shape.model is not None:
        return _tables(value, shape.model, path, found)
    if shape.kind == "table" and shape.model is not None:
        return _one_table(value, shape.model, path, found)
    if isinstance(value, dict):
        return {
            key: _value(item, Shape("value"), (*path, key), found) for key, item in value.items()
        }
    if isinstance(value, list):
        return [_value(v, Shape("value"), (*path, i), found) for i, v in enumerate(value)]
    problem = _scalar_problem(value, shape, path)
    if problem:
        found.problems.append(Problem(path, problem))
    return value.isoformat() if isinstance(value, date | time) else _finite(value)


def _finite(value: Any) -> Any:
    """Keep out of JSON what it cannot hold; it is already reported."""
    return None if _not_finite(value) or _too_large(value) or _beyond(value) else value


def _not_finite(value: object) -> bool:
    return isinstance(value, float) and not math.isfinite(value)


def _beyond(value: object) -> bool:
    return isinstance(value, float) and bool(magnitude_fault(value))


def _too_large(value: object) -> bool:
    return isinstance(value, int) and abs(value) >= 2**63


def _tables(value: Any, model: type[BaseModel], path: KeyPath, found: Screened) -> Any:
    """Look through tables that may repeat, also where one stands in single brackets."""
    name = table_name(path)
    if isinstance(value, dict):
        text = f"one table in single brackets; several are possible. Write [[{name}]]."
        found.problems.append(Problem(path, text))
        value = [value]
    if not isinstance(value, list) or not all(isinstance(item, dict) for item in value):
        text = f"no table (got {shown(value)}). Write [[{name}]] on a line of its own."
        found.problems.append(Problem(path, text))
        return []
    return [_table(item, model, (*path, i), found) for i, item in enumerate(value)]


def _one_table(value: Any, model: type[BaseModel], path: KeyPath, found: Screened) -> Any:
    """Look through a table that stands once, also where it is in double brackets."""
    name = table_name(path)
    if isinstance(value, list) and value and isinstance(value[0], dict):
        text = f"a table in double brackets, which stands once. Write [{name}]."
        found.problems.append(Problem(path, text))
        value = value[0]
    if not isinstance(value, dict):
        text = f"no table (got {shown(value)}). Write [{name}] on a line of its own."
        found.problems.append(Problem(path, text))
        return {}
    return _table(value, model, path, found)


def _scalar_problem(value: Any, shape: Shape, path: KeyPath) -> str | None:
    """Say what is wrong with one value that the models would not see or word badly."""
    if _not_finite(value):
        return f"not a finite number (got {value}). Write a number."
    if _too_large(value):
        return "a whole number of 2^63 or more. Write a smaller one."
    if isinstance(value, int | float) and path[-1] != "seed":
        return _size_problem(float(value), path)
    if isinstance(value, datetime | time):
        return f"a time of day (got {value}). Write the date alone, such as 2026-11-02."
    if isinstance(value, date) and shape.kind != "date":
        return f"a date where none is expected (got {value}). Put it in quotes to make it text."
    if isinstance(value, str):
        return _text_problem(value, shape, path)
    return None


_SHARES = frozenset({"assurance", "confidence", "share", "by_stratum"})


def _size_problem(value: float, path: KeyPath) -> str | None:
    """Say what is wrong with a number that would break the arithmetic."""
    what = meaning(table_name(path[:-1]), str(path[-1]))
    fault = magnitude_fault(value)
    if fault:
        return f"{what}; {fault} (got {value:g}). Check it and its unit."
    near = share_fault(value) if _SHARES.intersection(path) else ""
    return f"{what}; {near} (got {value}). Take a smaller share." if near else None


def _text_problem(value: str, shape: Shape, path: KeyPath) -> str | None:
    """Say what is wrong with one text."""
    what = meaning(table_name(path[:-1]), str(path[-1]))
    if shape.kind == "date":
        bare = value.strip() or "2026-11-02"
        return f"{what}; a date in quotes (got {shown(value)}). Take the quotes off: {bare}."
    if shape.kind == "file":
        return _path_problem(value, what)
    if any(not c.isprintable() and ord(c) < 160 and c not in _TEXT_CONTROLS for c in value):
        return f"{what}; has control characters (got {shown(value)}). Type it anew."
    return None


def _path_problem(value: str, what: str) -> str | None:
    """Say what is wrong with the name of a file."""
    if any(ord(c) < 32 or ord(c) == 127 for c in value):
        return (
            f"{what}; the path has control characters, as \\n and \\t become in double quotes "
            f"(got {shown(value)}). Write / between folders, or put it in single quotes."
        )
    if "\\" in value:
        fixed = value.replace("\\", "/")
        return (
            f"{what}; the path has backslashes (got '{value}'). "
            f'Write / between folders on every system: "{fixed}".'
        )
    if not value.strip():
        return f'{what}; an empty name. Give the file, such as "boundary.geojson", or "FILL IN".'
    return None
