"""On which line of a TOML text each key stands."""

import tomllib
from collections.abc import Iterator
from typing import Any

KeyPath = tuple[str | int, ...]


_MOST_CHARACTERS = 2_000_000
"""Read again and again while a list of thousands of lines is not closed; then lines are guessed."""


def line_map(text: str) -> dict[KeyPath, int]:
    r"""Map each path of a TOML text to the line on which it first stands.

    Parameters
    ----------
    text : str
        TOML that parses as a whole.

    Returns
    -------
    dict
        ``("analyte", 0, "unit")`` → 7; members of arrays of tables are counted from 0. Values
        inside an inline table or a list that spans lines have the line where the key stands.

    Examples
    --------
    >>> line_map('[[analyte]]\nid = "a"\n[[analyte]]\nid = "b"')[("analyte", 1, "id")]
    4
    """
    found: dict[KeyPath, int] = {}
    counts: dict[KeyPath, int] = {}
    table: KeyPath = ()
    for line, statement, content in _statements(text):
        if statement.lstrip().startswith("["):
            table = _open_table(content, counts)
            _note_parents(table, line, found)
        else:
            for path in _paths(content):
                _note_parents(table + path, line, found)
    return found


def line_of(path: KeyPath, lines: dict[KeyPath, int]) -> int:
    """Return the line of a path, or of the nearest table above it; 1 when there is none.

    Examples
    --------
    >>> line_of(("plan", "title"), {("plan",): 3}), line_of(("draw",), {("plan",): 3})
    (3, 1)
    """
    for end in range(len(path), 0, -1):
        line = lines.get(path[:end]) or lines.get(_without_index(path[:end]))
        if line is not None:
            return line
    return 1


def _without_index(path: KeyPath) -> KeyPath:
    """Drop array positions: a table in single brackets stands in the text without one."""
    return tuple(step for step in path if isinstance(step, str))


def _statements(text: str) -> Iterator[tuple[int, str, dict[str, Any]]]:
    """Yield (line, text, content) of every header and every key with its value."""
    waiting: list[str] = []
    start = 1
    budget = _MOST_CHARACTERS
    for number, line in enumerate(text.replace("\r\n", "\n").split("\n"), start=1):
        if not waiting:
            start = number
            if not line.strip() or line.lstrip().startswith("#"):
                continue
        waiting.append(line)
        if len(waiting) > 1 and not any(end in line for end in ('"""', "'''", "]", "}")):
            continue
        statement = "\n".join(waiting)
        budget -= len(statement)
        if budget < 0:
            return
        try:
            content = tomllib.loads(statement)
        except (ValueError, RecursionError):
            continue
        yield start, statement, content
        waiting = []


def _open_table(content: dict[str, Any], counts: dict[KeyPath, int]) -> KeyPath:
    """Return the full path of a header, positions in arrays of tables included."""
    path: KeyPath = ()
    here: Any = content
    while here:
        key, here = next(iter(here.items()))
        path = (*path, key)
        if isinstance(here, list):
            counts[path] = counts.get(path, -1) + 1
            return (*path, counts[path])
        if here and path in counts:
            path = (*path, counts[path])
    return path


def _paths(content: Any, above: KeyPath = ()) -> Iterator[KeyPath]:
    """Yield the path of every value below ``content``."""
    members: Any = ()
    if isinstance(content, dict):
        members = content.items()
    elif isinstance(content, list):
        members = enumerate(content)
    for key, value in members:
        yield (*above, key)
        yield from _paths(value, (*above, key))


def _note_parents(path: KeyPath, line: int, found: dict[KeyPath, int]) -> None:
    """Note a path and those above it that were not seen before."""
    for end in range(1, len(path) + 1):
        found.setdefault(path[:end], line)
