"""Which column of a file is which of ours, with suggestions where one is missing."""

import json
import shlex
from collections.abc import Callable, Mapping, Sequence
from difflib import get_close_matches
from typing import TYPE_CHECKING

from fieldplan.base.errors import LabError
from fieldplan.lab.cells import tidy

if TYPE_CHECKING:
    from fieldplan.lab.tables import TextTable

LAB_COLUMNS = (
    "location_id", "sample_id", "analyte", "as_reported", "unit", "reporting_limit",
    "reporting_limit_unit", "qualifier_lab", "role", "duplicate_of", "stratum", "latitude",
    "longitude", "basis", "fraction", "collected_on",
)  # fmt: skip
OFTEN_CALLED = {
    "location_id": ("location", "station", "station_id", "site", "site_id", "point", "well"),
    "sample_id": ("sample", "sample_no", "sample_name", "client_sample_id", "field_sample_id"),
    "analyte": ("parameter", "compound", "determinand", "substance", "chemical"),
    "as_reported": ("result", "value", "concentration", "reported_result", "result_value"),
    "unit": ("units", "uom", "result_unit"),
    "reporting_limit": ("rl", "limit", "detection_limit", "lor", "loq", "pql"),
    "qualifier_lab": ("qualifier", "flag", "lab_qualifier"),
}
"""What laboratories often call our columns: a hint, never a reason to read one as ours."""


Remedy = Callable[[Mapping[str, str]], str]
"""Says where a person writes which column is which, given our names and the file's."""


def renamed_in_file(named: Mapping[str, str]) -> str:
    """Say which columns to rename, where nothing else tells them apart.

    Parameters
    ----------
    named : mapping of str to str
        Our name to the file's.

    Examples
    --------
    >>> renamed_in_file({"taken": "Taken?"})
    "rename 'Taken?' to 'taken'."
    """
    pairs = [f"'{theirs}' to '{ours}'" for ours, theirs in named.items()]
    return f"rename {', '.join(pairs)}."


def in_campaign(named: Mapping[str, str]) -> str:
    """Write the line that names the columns of a pilot.

    Parameters
    ----------
    named : mapping of str to str
        Our name to the file's.

    Examples
    --------
    >>> in_campaign({"analyte": "Parameter"})
    'write into the [[sigma]] table of this pilot: columns = { analyte = "Parameter" }'
    """
    inside = ", ".join(f"{ours} = {json.dumps(t, ensure_ascii=False)}" for ours, t in named.items())
    return f"write into the [[sigma]] table of this pilot: columns = {{ {inside} }}"


def on_the_command(named: Mapping[str, str]) -> str:
    """Write the options that name the columns of a laboratory's file.

    Parameters
    ----------
    named : mapping of str to str
        Our name to the file's.

    Examples
    --------
    >>> on_the_command({"analyte": "Parameter", "unit": "UOM"})
    'add to the command: --column "analyte=Parameter" --column "unit=UOM"'
    """
    return f"add to the command: {column_options(named)}"


def column_options(named: Mapping[str, str]) -> str:
    """Write the options as a shell takes them; inside double quotes, which every shell knows.

    Parameters
    ----------
    named : mapping of str to str
        Our name to the file's.

    Examples
    --------
    >>> column_options({"unit": "UOM"}), column_options({"unit": "$/kg"})
    ('--column "unit=UOM"', "--column 'unit=$/kg'")
    """
    pairs = [f"{ours}={theirs}" for ours, theirs in named.items()]
    return " ".join(f"--column {quoted(pair, always=True)}" for pair in pairs)


def quoted(word: str, *, always: bool = False) -> str:
    """Quote a word of a command line where it needs it, in double quotes where these do.

    Parameters
    ----------
    word : str
    always : bool
        Also where it does not need it.

    Examples
    --------
    >>> quoted("HL-r01"), quoted("my labs.csv"), quoted("$labs")
    ('HL-r01', '"my labs.csv"', "'$labs'")
    """
    if not always and shlex.quote(word) == word:
        return word
    return f'"{word}"' if set('"$`\\!%').isdisjoint(word) else shlex.quote(word)


UNKNOWN = "…"
"""Stands for a title that a person has to look up."""


def plain_name(text: str) -> str:
    """Write a column name the way ours are written: lower case, underscores.

    Parameters
    ----------
    text : str

    Examples
    --------
    >>> plain_name(" Location ID ")
    'location_id'
    """
    return "_".join(tidy(text).casefold().replace("-", " ").replace("_", " ").split())


def find_columns(
    table: "TextTable",
    known: Sequence[str],
    required: Sequence[str],
    *,
    renamed: Mapping[str, str] | None = None,
    remedy: Remedy = renamed_in_file,
) -> dict[str, int]:
    """Say at which index each of our columns stands.

    Parameters
    ----------
    table : TextTable
    known : sequence of str
        All our names that the file may have.
    required : sequence of str
        Those that it must have; ``a|b`` asks for at least one of the two.
    renamed : mapping of str to str, optional
        Our name to the file's.
    remedy : callable
        Says where to write what a missing column is called.

    Returns
    -------
    dict of str to int

    Raises
    ------
    LabError
        All that is missing, doubled or wrongly renamed, at once.
    """
    theirs = [plain_name(cell) for cell in table.header]
    found, problems = _renamed_columns(table, theirs, known, renamed or {})
    for ours in known:
        if ours in found or ours in (renamed or {}) or ours not in theirs:
            continue
        if theirs.count(ours) > 1:
            problems.append(f"{table.file_name} has {theirs.count(ours)} columns '{ours}'; keep 1.")
        if theirs.index(ours) not in found.values():
            found[ours] = theirs.index(ours)
    given = {*found, *(renamed or {})}
    missing = [need for need in required if given.isdisjoint(need.split("|"))]
    problems += _missing(table, missing, found, known=known, remedy=remedy)
    if problems:
        raise LabError(*problems, *_header_elsewhere(table, known))
    return found


def _renamed_columns(
    table: "TextTable", theirs: Sequence[str], known: Sequence[str], renamed: Mapping[str, str]
) -> tuple[dict[str, int], list[str]]:
    found: dict[str, int] = {}
    problems = []
    for ours, wanted in renamed.items():
        if ours not in known:
            problems.append(_no_such_name(table, ours, known))
        elif theirs.count(plain_name(wanted)) != 1:
            problems.append(_renamed_wrongly(table, ours, wanted, theirs))
        elif theirs.index(plain_name(wanted)) in found.values():
            problems.append(f"{table.file_name}: '{wanted}' cannot serve for two columns of ours.")
        else:
            found[ours] = theirs.index(plain_name(wanted))
    return found, problems


def _no_such_name(table: "TextTable", ours: str, known: Sequence[str]) -> str:
    near = get_close_matches(plain_name(ours), known, n=1)
    hint = f"; did you mean '{near[0]}'?" if near else f"; names are: {', '.join(known)}."
    return f"{table.file_name}: no column of ours is called '{ours}'{hint}"


def _renamed_wrongly(table: "TextTable", ours: str, wanted: str, theirs: Sequence[str]) -> str:
    if plain_name(wanted) in theirs:
        return f"{table.file_name} has the column '{wanted}' twice; keep one for '{ours}'."
    near = get_close_matches(plain_name(wanted), theirs, n=1)
    hint = f"; did you mean '{table.header[theirs.index(near[0])].strip()}'?" if near else "."
    have = ", ".join(f"'{cell.strip()}'" for cell in table.header[:30] if cell.strip())
    return f"{table.file_name} has no column '{wanted}' for '{ours}'{hint} It has {have}."


def _missing(
    table: "TextTable",
    needs: Sequence[str],
    found: Mapping[str, int],
    *,
    known: Sequence[str],
    remedy: Remedy,
) -> list[str]:
    """Name the missing columns, what each may be called, and one line that says so for all."""
    named: dict[str, str] = {}
    lines = []
    for need in needs:
        names = need.split("|")
        called = f"'{names[0]}'" + "".join(f" or '{name}'" for name in names[1:])
        guesses = {ours: _guess(table, ours, found) for ours in names}
        ours = next((o for o, t in guesses.items() if t and t not in named.values()), "")
        named[ours or names[0]] = guesses.get(ours, UNKNOWN)
        if ours:
            lines.append(f"{table.file_name} has no column {called}; is it '{guesses[ours]}'?")
        else:
            have = ", ".join(f"'{cell.strip()}'" for cell in table.header[:30] if cell.strip())
            lines.append(f"{table.file_name} has no column {called}; its columns are {have}.")
    if not needs:
        return []
    unknown = UNKNOWN in named.values()
    head = "Add what is missing; where it has another name," if unknown else "If so,"
    return [*lines, f"{head} {remedy({**named, **_besides(table, found, named, known)})}"]


def _besides(
    table: "TextTable", found: Mapping[str, int], named: Mapping[str, str], known: Sequence[str]
) -> dict[str, str]:
    """Add limits and qualifiers under their usual names, so that one line is enough."""
    besides = {}
    for ours in ("reporting_limit", "qualifier_lab"):
        title = _guess(table, ours, found, usual=True)
        if ours in known and ours not in found and title and title not in named.values():
            besides[ours] = title
    return besides


def _guess(table: "TextTable", ours: str, found: Mapping[str, int], *, usual: bool = False) -> str:
    """Give the title that may mean one of our columns; empty where none does."""
    theirs = [plain_name(cell) for cell in table.header]
    free = [
        name
        for at, name in enumerate(theirs)
        if name and at not in found.values() and theirs.count(name) == 1
    ]
    called = [name for name in free if name in OFTEN_CALLED.get(ours, ())]
    near = called or ([] if usual else get_close_matches(ours, free, n=1, cutoff=0.7))
    return table.header[theirs.index(near[0])].strip() if near else ""


def _header_elsewhere(table: "TextTable", known: Sequence[str]) -> list[str]:
    """Notice a title or a second header row above the true one."""
    first = sum(plain_name(cell) in known for cell in table.header)
    for number, cells in table.rows[:10]:
        if sum(plain_name(cell) in known for cell in cells) > max(first, 1):
            return [
                f"Row {number} of {table.file_name} looks like the header; delete the rows above."
            ]
    return []
