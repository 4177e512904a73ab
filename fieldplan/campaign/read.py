"""The campaign file read and checked: all that is wrong with it is said at once."""

import json
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from pydantic import BaseModel, ValidationError

from fieldplan.base.errors import CampaignError
from fieldplan.campaign.checks import check
from fieldplan.campaign.later import later_value
from fieldplan.campaign.lines import KeyPath, line_map, line_of
from fieldplan.campaign.meaning import NOT_KNOWN
from fieldplan.campaign.model import Campaign, ReadCampaign
from fieldplan.campaign.problems import (
    Problem,
    accepted,
    choices,
    key_name,
    longest,
    meaning,
    near_miss,
    render,
    shown,
)
from fieldplan.campaign.references import resolve
from fieldplan.campaign.screen import Screened, screen, table_name
from fieldplan.campaign.shape import shapes
from fieldplan.campaign.syntax import parse
from fieldplan.campaign.text import read_text


@dataclass(frozen=True)
class OpenEntry:
    """A value that is still to fill in: its line, its key, and what the key is."""

    line: int
    key: str
    meaning: str


@dataclass(frozen=True)
class Inspection:
    """What a campaign file holds.

    Parameters
    ----------
    problems : tuple of str
        What is typed wrong, in the order of the file.
    fill_in : tuple of OpenEntry
        What its author did not know yet.
    campaign : ReadCampaign or None
        The campaign, when nothing is wrong and nothing is left to fill in.
    path, text, data : Path, str, dict
        The file as read, and its tables as parsed with references filled in: for what can be
        looked at before the campaign is whole.
    """

    problems: tuple[str, ...]
    fill_in: tuple[OpenEntry, ...]
    campaign: ReadCampaign | None
    path: Path = Path()
    text: str = ""
    data: dict[str, Any] = field(default_factory=dict)


def read_campaign(path: Path) -> ReadCampaign:
    """Read a campaign file that is complete.

    Parameters
    ----------
    path : Path
        A TOML file; UTF-8, with or without a byte-order mark, or UTF-16.

    Returns
    -------
    ReadCampaign
        The campaign with all references resolved, the path, and the text as read.

    Raises
    ------
    CampaignError
        Everything that is wrong with the file, or still to fill in, one line each.
    """
    inspection = inspect_campaign(path)
    if inspection.campaign is None:
        still_open = (
            f"{path}:{entry.line}: {entry.key}: still to fill in: {entry.meaning}."
            for entry in inspection.fill_in
        )
        raise CampaignError(*inspection.problems, *still_open)
    return inspection.campaign


def inspect_campaign(path: Path) -> Inspection:
    """Read a campaign file that may be incomplete; say what is wrong and what is open.

    Raises
    ------
    CampaignError
        The file cannot be read at all: missing, no text, no TOML.
    """
    return inspect_text(read_text(path), path)


def inspect_text(text: str, path: Path) -> Inspection:
    """Inspect the text of a campaign file that stands, or shall stand, at ``path``."""
    content = parse(text, str(path))
    screened = screen(content)
    problems = list(screened.problems)
    problems += resolve(screened.data)
    problems += check(screened.data)
    campaign, faults = validated(screened, problems)
    problems += faults
    lines = line_map(text) if screened.fill_in else {}
    fill_in = sorted(
        (
            OpenEntry(line_of(p, lines), key_name(p, screened.data), _meaning_of(p))
            for p in screened.fill_in
        ),
        key=lambda entry: entry.line,
    )
    told = render(problems, name=str(path), text=text, data=screened.data) if problems else ()
    whole = None
    if campaign is not None and not problems and not fill_in:
        whole = ReadCampaign(campaign=campaign, path=path, text=text)
    return Inspection(told, tuple(fill_in), whole, path, text, screened.data)


def _meaning_of(path: KeyPath) -> str:
    """Say what the key at a path is, and what to do if nobody knows its value."""
    told = meaning(table_name(path[:-1]), str(path[-1]))
    remedy = NOT_KNOWN.get(table_name(path))
    return f"{told}; {remedy}" if remedy else told


def validated(screened: Screened, known: list[Problem]) -> tuple[Campaign | None, list[Problem]]:
    """Build the campaign, or return what the models refuse and nobody has reported yet."""
    told = {problem.path for problem in known} | set(screened.fill_in)
    try:
        # JSON, since strict models take lists as tuples and ISO text as dates only from there.
        return Campaign.model_validate_json(json.dumps(screened.data)), []
    except ValidationError as fault:
        problems: dict[KeyPath, Problem] = {}
        for error in fault.errors(include_url=False, include_context=False):
            path, model, key = _owner(error["loc"])
            if error["type"] == "too_short" and error["input"]:
                continue  # its members are reported one by one
            if any(path[:end] in told for end in range(1, len(path) + 1)) or path in problems:
                continue
            text = _word(error["type"], error["input"], model, path, key)
            problems[path] = Problem(path, text)
        return None, list(problems.values())


def _owner(location: tuple[int | str, ...]) -> tuple[KeyPath, type[BaseModel], str]:
    """Follow an error's location down to the table and key that own it."""
    model: type[BaseModel] = Campaign
    path: KeyPath = ()
    key = ""
    for step in location:
        path = (*path, step)
        if isinstance(step, int):
            continue
        key = step
        shape = shapes(model).get(step)
        if shape is None or shape.model is None:
            break
        model = shape.model
    else:
        return path, model, ""
    return path, model, key


def _word(kind: str, value: Any, model: type[BaseModel], path: KeyPath, key: str) -> str:
    """Word what a model refuses: what the key is, what it takes, what was typed, the remedy."""
    if not key:
        return _word_missing_table(kind, value, path)
    table = table_name(path[:-1])
    takes = accepted(model.__name__, key)
    if kind == "missing":
        return f'missing; {meaning(table, key)}. Takes {takes}; "FILL IN" while it is not known.'
    later = later_value(table, key, value)
    if later:
        return f"{shown(value)} ({later}) is not done yet. This version takes {takes}."
    if kind == "string_too_long":
        takes += f" of at most {longest(model.__name__, key):,} letters"
        got = f"{len(value):,} letters, {shown(value)}"
        return f"{meaning(table, key)}; takes {takes} (got {got}). Shorten it."
    remedy = _remedy(value, takes, choices(model.__name__, key))
    return f"{meaning(table, key)}; takes {takes} (got {shown(value)}).{remedy}"


def _word_missing_table(kind: str, value: Any, path: KeyPath) -> str:
    """Word a table that is missing or empty."""
    name = table_name(path)
    shape = shapes(Campaign).get(name)
    header = f"[[{name}]]" if shape and shape.kind == "tables" else f"[{name}]"
    if kind in ("missing", "too_short"):
        return f"this table is missing. Write {header} with its keys."
    return f"not a table (got {shown(value)}). Write {header} on a line of its own."


def _remedy(value: Any, takes: str, words: list[str]) -> str:
    """Say what to do about a value that was refused."""
    if not isinstance(value, str):
        return ""
    if takes.startswith(("a number", "a whole number")):
        plain = value.strip().replace(",", ".").replace(" ", "")
        try:
            float(plain)
        except ValueError:
            return ' Write a number without quotes, or "FILL IN".'
        return f" Take the quotes off: {plain}."
    if takes.startswith("true"):
        return " Take the quotes off."
    return near_miss(value, words)
