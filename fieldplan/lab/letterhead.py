"""Where the table of a certificate begins and ends: letterhead above it, remarks below it."""

from collections.abc import Container, Iterable, Mapping, Sequence
from dataclasses import dataclass

from fieldplan.base.errors import LabError
from fieldplan.campaign.model import Analyte
from fieldplan.lab.cells import read_cell, tidy
from fieldplan.lab.columns import OFTEN_CALLED, plain_name
from fieldplan.lab.units import AMBIGUOUS, conversion_factor, plain_unit
from fieldplan.lab.words import listed

Row = tuple[int, Sequence[str]]
LOOKED_THROUGH = 60
"""Rows in which a header is looked for."""
FEWEST_TITLES = 2
"""Titles that a row must have to be taken for a header that does not stand on top."""
FEWEST_CELLS = 3
"""Filled cells of a row that is no line of text."""


@dataclass(frozen=True)
class Certificate:
    """What tells the header, the results and the remarks of one laboratory's file apart.

    Parameters
    ----------
    titles : tuple of frozenset of str
        For each thing that a result needs, the plain names its column goes by.
    analytes : mapping of str to Analyte
        By every name in lower case.
    how : str
        How to say which columns are which.
    """

    titles: tuple[frozenset[str], ...]
    analytes: Mapping[str, Analyte]
    how: str = ""

    def titles_in(self, cells: Sequence[str]) -> int:
        """Count the things needed that a row has a title for."""
        names = {plain_name(cell) for cell in cells if cell.strip()}
        return sum(not names.isdisjoint(known) for known in self.titles)

    def is_result(self, cells: Sequence[str]) -> bool:
        """Whether a row has a number or non-detect, and an analyte or unit of the campaign."""
        return any(map(_is_number, cells)) and any(map(self._is_ours, cells))

    def is_remark(self, cells: Sequence[str]) -> bool:
        """Whether a row has nothing of a result and is no id: three words, a heading, a rule."""
        text = " ".join(tidy(cell) for cell in cells if cell.strip())
        if not text or any(map(_is_number, cells)) or any(map(self._is_ours, cells)):
            return False
        return text.count(" ") > 1 or text.endswith(":") or text[0] in "*=_#–—-"

    def _is_ours(self, cell: str) -> bool:
        text = tidy(cell)
        if not text:
            return False
        if text.casefold() in self.analytes or plain_unit(text) in AMBIGUOUS:
            return True
        units = {analyte.unit for analyte in self.analytes.values()}
        return any(conversion_factor(text, unit) is not None for unit in units)


def certificate_of(
    required: Iterable[str],
    told: Mapping[str, Iterable[str]],
    analytes: Mapping[str, Analyte],
    *,
    how: str = "",
) -> Certificate:
    """Say what to look for in the file of a laboratory.

    Parameters
    ----------
    required : iterable of str
        Our columns that each result needs; ``a|b`` asks for one of two.
    told : mapping of str to iterable of str
        Our name to the titles that were said to mean it.
    analytes : mapping of str to Analyte
        By every name in lower case.
    how : str
        How a person says which columns are which.
    """
    titles = []
    for need in required:
        names = need.split("|")
        usual = [name for ours in names for name in OFTEN_CALLED.get(ours, ())]
        own = [plain_name(title) for ours in names for title in told.get(ours, ())]
        titles.append(frozenset([*names, *usual, *own]))
    return Certificate(tuple(titles), analytes, how)


def _is_number(cell: str) -> bool:
    try:
        read_cell(cell, decimal_comma=True)
    except LabError:
        return False
    return True


def header_at(rows: Sequence[Row], certificate: Certificate | None) -> int:
    """Say at which of the filled rows the header stands.

    Parameters
    ----------
    rows : sequence of (int, sequence of str)
        Row number and cells, at least one row.
    certificate : Certificate or None
        None where the header must be the first row.

    Returns
    -------
    int
        0 where no row further down has more titles, or where a result stands above it.
    """
    if certificate is None:
        return 0
    found = [certificate.titles_in(cells) for _, cells in rows[:LOOKED_THROUGH]]
    best = found.index(max(found))
    if found[best] < FEWEST_TITLES or any(certificate.is_result(cells) for _, cells in rows[:best]):
        return 0
    return best


def results_end(
    rows: Sequence[Row], certificate: Certificate | None, *, but: Container[int] = ()
) -> int:
    """Say how many of the rows below the header come before the remarks at the end.

    Parameters
    ----------
    rows : sequence of (int, sequence of str)
    certificate : Certificate or None
    but : container of int
        Numbers of rows that are no remarks, since not all that they hold can be read.
    """
    end = len(rows)
    while certificate is not None and end:
        number, cells = rows[end - 1]
        if number in but or not certificate.is_remark(cells):
            break
        end -= 1
    return end


def no_header(name: str, rows: Sequence[Row], certificate: Certificate | None) -> list[str]:
    """Say that no header was found, where the first row cannot be one.

    Parameters
    ----------
    name : str
    rows : sequence of (int, sequence of str)
        From the row that would be the header on.
    certificate : Certificate or None

    Returns
    -------
    list of str
        One sentence where that row holds one cell and others hold three or more; else none.
    """
    filled = [sum(1 for cell in cells if cell.strip()) for _, cells in rows]
    if certificate is None or filled[0] > 1 or max(filled) < FEWEST_CELLS:
        return []
    number = rows[filled.index(max(filled))][0]
    return [
        f"{name}: none of its first {LOOKED_THROUGH} rows has titles that are known here for the "
        f"sample, the analyte, the result and the unit; row {rows[0][0]} holds {_texts(rows[:1])} "
        f"alone. If row {number} or one above it is the header, call its columns location_id "
        f"or sample_id, analyte, as_reported and unit; or {certificate.how}"
    ]


def skipped_notes(
    name: str, above: Sequence[Row], header_row: int, below: Sequence[Row]
) -> list[str]:
    """Say which rows were not read, with what they hold.

    Parameters
    ----------
    name : str
    above, below : sequence of (int, sequence of str)
    header_row : int
    """
    notes = []
    if above:
        where = f"above the header in row {header_row}"
        notes.append(f"{name}: {_rows(above)} {where} not read: {_texts(above)}.")
    if below:
        notes.append(f"{name}: {_rows(below)} below the results not read: {_texts(below)}.")
    return notes


def _rows(rows: Sequence[Row]) -> str:
    numbers = [str(number) for number, _ in rows]
    return f"row {numbers[0]}" if len(rows) == 1 else f"rows {listed(numbers)}"


def _texts(rows: Iterable[Row]) -> str:
    texts = [" ".join(tidy(cell) for cell in cells if cell.strip()) for _, cells in rows]
    return listed([f"'{text[:40]}…'" if len(text) > 40 else f"'{text}'" for text in texts])
