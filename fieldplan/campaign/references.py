"""References between tables: filled in where there is one of a thing, checked where several."""

import re
from typing import Any

from fieldplan.campaign.lines import KeyPath
from fieldplan.campaign.problems import Problem, near_miss, shown
from fieldplan.campaign.screen import is_fill_in
from fieldplan.campaign.table import tables

DEFAULT_IDS = {"frame": "site", "event": "round-1", "design": "main"}

_REFERENCES = (
    ("design", "frame", "frame"),
    ("objective", "design", "design"),
    ("objective", "analyte", "analyte"),
    ("sigma", "analyte", "analyte"),
    ("field_reading", "analyte", "analyte"),
)
"""(table, key, table whose id it names)."""


def resolve(data: dict[str, Any]) -> list[Problem]:
    """Fill in ids and references in ``data`` and return what cannot be resolved."""
    _name_only_analyte(data)
    for name, default in DEFAULT_IDS.items():
        members = tables(data, name)
        if len(members) == 1:
            members[0].setdefault("id", default)
    problems = [problem for name in ("analyte", *DEFAULT_IDS) for problem in _twice(data, name)]
    for table, key, target in _REFERENCES:
        ids = [str(member["id"]) for member in tables(data, target) if "id" in member]
        for position, member in enumerate(tables(data, table)):
            problem = _resolve_one(member, key, target, ids)
            if problem:
                problems.append(Problem((table, position, key), problem))
    return problems


def _name_only_analyte(data: dict[str, Any]) -> None:
    """Give the only analyte an id made from its name when it has none."""
    members = tables(data, "analyte")
    if len(members) != 1 or "id" in members[0]:
        return
    name = members[0].get("name")
    if isinstance(name, str) and name.strip():
        slug = "" if is_fill_in(name) else re.sub(r"[^A-Za-z0-9]+", "-", name).strip("-").lower()
        members[0]["id"] = slug[:35].strip("-") or "analyte"


def _twice(data: dict[str, Any], name: str) -> list[Problem]:
    """Find ids that stand twice, capital and small letters taken as equal."""
    problems = []
    seen: set[str] = set()
    for position, member in enumerate(tables(data, name)):
        identifier = member.get("id")
        if not isinstance(identifier, str) or is_fill_in(identifier):
            continue
        if identifier.lower() in seen:
            path: KeyPath = (name, position, "id")
            text = f"the id {shown(identifier)} stands twice, capital letters aside. Rename one."
            problems.append(Problem(path, text))
        seen.add(identifier.lower())
    return problems


def _resolve_one(member: dict[str, Any], key: str, target: str, ids: list[str]) -> str | None:
    """Fill in or check one reference; return what is wrong with it."""
    value = member.get(key)
    if value is None:
        if len(ids) == 1:
            member[key] = ids[0]
        elif len(ids) > 1:
            listed = ", ".join(ids)
            return f"missing; with several [[{target}]] say which one is meant: {listed}."
        return None
    if not isinstance(value, str) or is_fill_in(value) or value in ids or not ids:
        return None
    if any(is_fill_in(identifier) for identifier in ids):
        return None
    listed = ", ".join(ids)
    return f"no [[{target}]] has the id {shown(value)}; there is {listed}.{near_miss(value, ids)}"
