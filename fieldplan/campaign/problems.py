"""Problems of a campaign file: where each stands and how it is worded."""

import json
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date
from difflib import get_close_matches
from functools import cache
from typing import Any

from fieldplan.campaign.lines import KeyPath, line_map, line_of
from fieldplan.campaign.meaning import MEANING


@dataclass(frozen=True)
class Problem:
    """One thing to put right: the path of its key and a sentence with the remedy."""

    path: KeyPath
    text: str


def shown(value: object) -> str:
    """Show a value as it is typed in the file, shortened to one short line.

    Examples
    --------
    >>> shown("a b"), shown(True), shown({"a": 1})
    ('"a b"', 'true', 'a table')
    """
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, list):
        return f"a list of {len(value)}"
    if isinstance(value, date):
        return value.isoformat()
    try:
        text = json.dumps(value, ensure_ascii=False, default=str)
    except ValueError:
        return "a number of very many digits"
    text = "".join(c if c.isprintable() else f"\\x{ord(c):02x}" for c in text)
    return text if len(text) <= 60 else f"{text[:57]}..."


def key_name(path: KeyPath, data: Any) -> str:
    """Name a key as in ``objective.analyte``, or ``analyte[2].unit`` where there are several.

    Examples
    --------
    >>> key_name(("analyte", 1, "unit"), {"analyte": [{}, {"unit": 3}]})
    'analyte[2].unit'
    """
    name = ""
    here = data
    for step in path:
        if isinstance(step, int):
            several = isinstance(here, list) and len(here) > 1
            name += f"[{step + 1}]" if several else ""
        else:
            name += f".{step}" if name else step
        try:
            here = here[step]
        except (LookupError, TypeError):
            here = None
    return name


def near_miss(word: str, known: Sequence[str]) -> str:
    """Return `` Did you mean "x"?`` with a leading blank, or nothing.

    Examples
    --------
    >>> near_miss("titel", ["id", "title"]), near_miss("xyz", ["id", "title"])
    (' Did you mean "title"?', '')
    """
    by_small_letters = {name.lower(): name for name in known}
    near = get_close_matches(word.lower(), list(by_small_letters), n=1, cutoff=0.6)
    return f' Did you mean "{by_small_letters[near[0]]}"?' if near else ""


def meaning(table: str, key: str) -> str:
    """Say what a key is, in the words that editors and the reference show.

    Examples
    --------
    >>> meaning("draw", "seed")
    'a whole number'
    """
    return MEANING.get(f"{table}.{key}".lstrip("."), key).split(";")[0]


@cache
def _schema() -> dict[str, Any]:
    from fieldplan.campaign.model import Campaign

    return Campaign.model_json_schema()


def accepted(model_name: str, key: str) -> str:
    """Say what a key accepts.

    Examples
    --------
    >>> accepted("Objective", "half_width"), accepted("Paper", "size")
    ('a number above 0', 'one of "A4", "Letter"')
    """
    return _accepted(_property(model_name, key))


def choices(model_name: str, key: str) -> list[str]:
    """List the words that a key accepts; empty where it accepts more than a few words.

    Examples
    --------
    >>> choices("Objective", "assurance"), choices("Draw", "seed")
    (['plain'], [])
    """
    schema = _property(model_name, key)
    parts = [schema, *schema.get("anyOf", [])]
    words = [word for part in parts for word in part.get("enum", [part.get("const")])]
    return [word for word in words if isinstance(word, str)]


def longest(model_name: str, key: str) -> int | None:
    """Return how many letters a text may have; None where it is not bounded.

    Examples
    --------
    >>> longest("PlanTable", "title"), longest("PlanTable", "site")
    (2000, None)
    """
    schema = _property(model_name, key)
    found = (part.get("maxLength") for part in [schema, *schema.get("anyOf", [])])
    return next((limit for limit in found if limit is not None), None)


def _property(model_name: str, key: str) -> dict[str, Any]:
    """Find the JSON Schema of one key."""
    schema = _schema()
    table = schema if model_name == "Campaign" else schema["$defs"][model_name]
    found: dict[str, Any] = table["properties"][key]
    return found


def _accepted(schema: dict[str, Any]) -> str:
    """Put one JSON Schema of a value into words."""
    if "anyOf" in schema:
        parts = [part for part in schema["anyOf"] if part.get("type") != "null"]
        return " or ".join(_accepted(part) for part in parts)
    if "const" in schema:
        return shown(schema["const"])
    if "enum" in schema:
        return "one of " + ", ".join(shown(value) for value in schema["enum"])
    if schema.get("format") == "date":
        return "a date without quotes, such as 2026-11-02"
    kind = schema.get("type")
    if kind in ("number", "integer"):
        return ("a number" if kind == "number" else "a whole number") + _bounds(schema)
    if kind == "boolean":
        return "true or false"
    if kind == "array":
        inner = schema.get("items", {})
        return 'a list of texts, such as ["a", "b"]' if "$ref" not in inner else "[[tables]]"
    if kind == "string":
        return _PATTERNS.get(schema.get("pattern", ""), "text in double quotes")
    return "a [table]"


_PATTERNS = {
    "^[A-Za-z0-9][A-Za-z0-9_.-]{0,34}$": (
        "up to 35 letters A-Z, digits, points, hyphens and underscores, a letter or digit first"
    ),
    "^[A-Z][A-Z0-9]?$": "one capital letter A-Z, or two signs such as QF or Q2",
}


def _bounds(schema: dict[str, Any]) -> str:
    """Say the range of a number."""
    words = []
    for key, word in (
        ("exclusiveMinimum", "above"),
        ("minimum", "of at least"),
        ("exclusiveMaximum", "below"),
        ("maximum", "of at most"),
    ):
        if key in schema:
            words.append(f"{word} {schema[key]:g}" if schema[key] < 1e6 else f"{word} 2^63")
    return (" " + " and ".join(words)) if words else ""


def render(problems: Sequence[Problem], *, name: str, text: str, data: Any) -> tuple[str, ...]:
    """Set problems as ``file:line: key: sentence``, in the order of the file, each once.

    Parameters
    ----------
    problems : sequence of Problem
        In any order.
    name, text : str
        The file's name as messages give it, and its text.
    data : dict
        The tables as parsed, to number those that repeat.
    """
    lines = line_map(text)
    placed = [
        (line_of(problem.path, lines), key_name(problem.path, data), problem.text)
        for problem in problems
    ]
    unique = dict.fromkeys(sorted(placed, key=lambda entry: entry[0]))
    return tuple(
        f"{name}:{line}: {key}: {words}" if key else f"{name}:{line}: {words}"
        for line, key, words in unique
    )
