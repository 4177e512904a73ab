"""Columns that nobody mapped but that say what a number means: a ``<`` of its own, a flag."""

import re
from collections.abc import Mapping, Sequence

from fieldplan.lab.cells import tidy
from fieldplan.lab.columns import Remedy, on_the_command, plain_name
from fieldplan.lab.model import LabRow
from fieldplan.lab.qualifiers import read_qualifier
from fieldplan.lab.tables import TextTable
from fieldplan.lab.words import counted

_TITLES = (
    "<", "qualif", "flag", "remark", "sign", "prefix", "modif", "operator", "compar", "censor",
)  # fmt: skip
_LESS = "<＜≤"
_PLAIN = re.compile(r"[<>＜＞≤≥]|n[./]?d\b|n[./]d|no[nt]|below|b[dqr]l\b")
_NO = {"n", "no", "false", "0"}


def unread_qualifiers(
    table: TextTable,
    found: Mapping[str, int],
    rows: Sequence[LabRow],
    *,
    remedy: Remedy = on_the_command,
) -> list[str]:
    """Refuse columns that were not read but contradict what was read beside them.

    Parameters
    ----------
    table : TextTable
    found : mapping of str to int
        The columns that were read.
    rows : sequence of LabRow
    remedy : callable
        Says where to write what a column is called.

    Returns
    -------
    list of str
        A sentence for each column that says not detected, rejected or above beside a number that
        was read as a result: left unread, a limit would count as a measurement.
    """
    cells = dict(table.rows)
    detected = {row.row: row for row in rows if row.detected}
    problems = []
    for index, title in enumerate(table.header):
        if index in found.values():
            continue
        name = plain_name(title)
        said = [
            number
            for number, row in detected.items()
            if _contradicts(name, tidy(cells[number][index]), tidy(row.as_reported))
        ]
        if said:
            first = detected[said[0]]
            cell = tidy(cells[first.row][index])
            more = f" (and in {counted(len(said) - 1, 'more row')})" if len(said) > 1 else ""
            problems.append(
                f"{table.file_name}: {_named(title)} is not read, but says "
                f"'{cell}' beside '{first.as_reported.strip()}' in row "
                f"{first.row}{more}. {_what_to_do(title, cell, found, remedy)}"
            )
    return problems


def _contradicts(title: str, cell: str, result: str) -> bool:
    """Whether a cell says that the number of its row is no result.

    Signs, ND and the number itself behind a ``<`` mean the same under any title. U and R are
    common letters: they count only where the title is one of qualifiers, or there is none.
    """
    words = title.split("_")
    if any(w.startswith("detect") for w in words) and {"limit", "not", "non"}.isdisjoint(words):
        return cell.casefold() in _NO
    if cell[:1] in _LESS and cell.lstrip(f"{_LESS}= ") == result:
        return True
    qualifier = read_qualifier(cell)
    if qualifier.unknown or not (qualifier.not_detected or qualifier.rejected or qualifier.above):
        return False
    named = not title or any(word.startswith(_TITLES) for word in words)
    return named or bool(_PLAIN.match(cell.casefold()))


def _named(title: str) -> str:
    return f"the column '{tidy(title)}'" if title.strip() else "a column without a title"


def _what_to_do(title: str, cell: str, found: Mapping[str, int], remedy: Remedy) -> str:
    own, qualifier = tidy(title), read_qualifier(cell)
    if not (qualifier.not_detected or qualifier.rejected or qualifier.above):
        return (
            "Where it is right, write < into the column 'qualifier_lab' of these rows; then take "
            "this column out of the file."
        )
    if "qualifier_lab" in found:
        return "Bring both columns together in the one that is read as 'qualifier_lab'."
    if not own:
        return "Give it the title qualifier_lab."
    return (
        "If it does not qualify the results, take it out of the file; if it does, "
        f"{remedy({'qualifier_lab': own})}"
    )
