"""Which column of a file is which of ours, with suggestions where one is missing."""

from collections.abc import Mapping, Sequence
from difflib import get_close_matches
from typing import TYPE_CHECKING

from fieldplan.base.errors import LabError
from fieldplan.lab.cells import tidy

if TYPE_CHECKING:
    from fieldplan.lab.tables import TextTable

LAB_COLUMNS = (
    "location_id", "sample_id", "analyte", "as_reported", "unit", "reporting_limit",
    "reporting_limit_unit", "qualifier_lab", "role", "duplicate_of", "stratum", "latitude",
    "longitude", "basis", "fraction",
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
    problems += [_missing(table, need, theirs) for need in missing]
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


def _missing(table: "TextTable", need: str, theirs: Sequence[str]) -> str:
    names = need.split("|")
    called = f"'{names[0]}'" + "".join(f" or '{name}'" for name in names[1:])
    for ours in names:
        usual = [name for name in theirs if name in OFTEN_CALLED.get(ours, ())]
        near = usual or get_close_matches(ours, theirs, n=1, cutoff=0.7)
        if near:
            title = table.header[theirs.index(near[0])].strip()
            return (
                f"{table.file_name} has no column {called}. If '{title}' is that column, say "
                f'so: columns = {{ {ours} = "{title}" }} in the campaign file, or '
                f'--column "{ours}={title}".'
            )
    have = ", ".join(f"'{cell.strip()}'" for cell in table.header[:30] if cell.strip())
    return f"{table.file_name} has no column {called}; its columns are {have}. Add it."


def _header_elsewhere(table: "TextTable", known: Sequence[str]) -> list[str]:
    """Notice a title or a second header row above the true one."""
    first = sum(plain_name(cell) in known for cell in table.header)
    for number, cells in table.rows[:10]:
        if sum(plain_name(cell) in known for cell in cells) > max(first, 1):
            return [
                f"Row {number} of {table.file_name} looks like the header; delete the rows above."
            ]
    return []
