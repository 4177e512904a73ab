"""A delimited file as rows of text: encodings, separators, row numbers, and nothing guessed."""

import csv
import hashlib
import io
import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from itertools import islice, pairwise
from pathlib import Path
from typing import Literal

from fieldplan.base.errors import LabError
from fieldplan.base.files import NOT_ORDINARY, is_ordinary
from fieldplan.lab.letterhead import (
    LOOKED_THROUGH,
    Certificate,
    header_at,
    no_header,
    results_end,
    skipped_notes,
)

LARGEST_FILE = 64 * 1024 * 1024
_SEPARATORS = {",": "comma", ";": "semicolon", "\t": "tab"}
_WHOLE = re.compile(r"[<+ ]*[0-9]+ *").fullmatch


@dataclass(frozen=True)
class CellFault:
    """Why a workbook's cell cannot be taken as text; ``kind`` tells dates from the rest."""

    kind: Literal["date", "other"]
    sentence: str


@dataclass(frozen=True)
class TextTable:
    """A file's cells as text, every row with the number that a spreadsheet gives it.

    Parameters
    ----------
    file_name, sha256 : str
        The name without its folder, and the fingerprint of the bytes as read.
    header : tuple of str
        The cells of the first row that holds anything, or of the header that was found further
        down in a certificate, untouched.
    header_row : int
        Its number, from 1.
    rows : tuple of (int, tuple of str)
        Row number and cells, as many as the header has; empty rows are left out.
    separator : str
        ``,``, ``;`` or a tab; empty for a workbook.
    sheet : str
        The sheet's name; empty for a text file.
    faults : mapping of (row, column index) to CellFault
        Cells of a workbook that hold no plain text or number.
    notes : tuple of str
    """

    file_name: str
    sha256: str
    header: tuple[str, ...]
    header_row: int
    rows: tuple[tuple[int, tuple[str, ...]], ...]
    separator: str = ""
    sheet: str = ""
    faults: Mapping[tuple[int, int], CellFault] = field(default_factory=dict)
    notes: tuple[str, ...] = ()


def read_tables(path: Path, *, certificate: Certificate | None = None) -> tuple[TextTable, ...]:
    """Read a CSV file as one table, or a workbook as one table for each visible sheet.

    Parameters
    ----------
    path : Path
        The content decides what it is, not the ending of the name.
    certificate : Certificate, optional
        How to find the header below a letterhead, and the remarks below the results; the header
        is the first row that holds anything unless given.

    Returns
    -------
    tuple of TextTable
        At least one.

    Raises
    ------
    LabError
        The file is missing, too large, of another kind, empty or damaged.
    """
    content = read_bytes(path)
    if content.startswith(b"PK\x03\x04"):
        from fieldplan.lab.workbook import workbook_tables

        return workbook_tables(path.name, content, certificate=certificate)
    if content.startswith(b"\xd0\xcf\x11\xe0"):
        message = (
            f"{path.name} is an old .xls workbook or is locked with a password; "
            "save it as .xlsx without one, or as CSV."
        )
        raise LabError(message)
    if content.startswith((b"%PDF", b"\x1f\x8b", b"Rar!", b"7z")):
        message = f"{path.name} is a PDF or an archive; ask for the results as CSV or .xlsx."
        raise LabError(message)
    return (_text_table(path.name, content, certificate),)


def read_bytes(path: Path) -> bytes:
    """Read a file whole.

    Parameters
    ----------
    path : Path

    Raises
    ------
    LabError
        It is missing, a folder, no ordinary file, unreadable, empty or larger than 64 MB.
    """
    try:
        size = path.stat().st_size
        if path.is_dir():
            message = f"{path} is a folder; name the file in it."
            raise LabError(message)
        if not is_ordinary(path):
            message = f"{path} {NOT_ORDINARY}; save the results as a file and name that."
            raise LabError(message)
        if size > LARGEST_FILE:
            message = f"{path} has {size / 1e6:.0f} MB; at most 64 MB are read. Split the file."
            raise LabError(message)
        content = path.read_bytes()
    except (OSError, ValueError) as fault:
        reason = getattr(fault, "strerror", None) or fault
        message = f"{path} cannot be read ({reason}). Check the name and that it is closed."
        raise LabError(message) from fault
    if not content.strip(b"\x00\r\n\t \xef\xbb\xbf\xff\xfe"):
        message = f"{path.name} is empty; export it again."
        raise LabError(message)
    return content


def _text_table(name: str, content: bytes, certificate: Certificate | None) -> TextTable:
    text, notes = _decoded(name, content)
    separator, text, skipped = _separator(text, certificate)
    records = _records(name, text, separator, skipped)
    filled = [(number, cells) for number, cells in records if any(c.strip() for c in cells)]
    if not filled:
        message = f"{name} holds no cells; export it again as CSV."
        raise LabError(message)
    at = header_at(filled, certificate)
    header_row, header = filled[at]
    width = len(header)
    below = filled[at + 1 :]
    end = results_end(below, certificate)
    problems = no_header(name, filled[at:], certificate)
    problems = problems or _surplus(name, width, below[:end], separator)
    if problems:
        raise LabError(*capped(problems))
    rows = [(n, (*cells[:width], *[""] * (width - len(cells)))) for n, cells in below[:end]]
    return TextTable(
        file_name=name,
        sha256=hashlib.sha256(content).hexdigest(),
        header=tuple(header),
        header_row=header_row,
        rows=tuple(rows),
        separator=separator,
        notes=(*notes, *skipped_notes(name, filled[:at], header_row, below[end:])),
    )


def _surplus(
    name: str, width: int, rows: Sequence[tuple[int, Sequence[str]]], separator: str
) -> list[str]:
    """Refuse rows with more cells than the header: something in them was split in two.

    A blank at the end is no excuse: ``49,6,`` for a result and a limit left blank is 49.6 in one
    cell. Only where all rows end in the same blanks, and none has two whole numbers side by side
    that a decimal comma could have parted, was it the program that wrote them.
    """
    blank = not any(cell.strip() for _, cells in rows for cell in cells[width:])
    if blank and len({len(cells) for _, cells in rows}) == 1:
        pairs = (pair for _, cells in rows for pair in pairwise(cells))
        if not (separator == "," and any(_WHOLE(a) and _WHOLE(b) for a, b in pairs)):
            return []
    return [
        f"{name} row {number} has {len(cells)} cells, the header {width}; a "
        f"{_SEPARATORS[separator]} inside a cell, such as a decimal comma, splits it. Put that "
        "cell in quotes, or take the surplus cell away."
        for number, cells in rows
        if len(cells) > width
    ]


def _decoded(name: str, content: bytes) -> tuple[str, tuple[str, ...]]:
    """Decode by byte-order mark, else UTF-8, else Windows-1252, and say which was not UTF-8."""
    try:
        if content.startswith((b"\xff\xfe", b"\xfe\xff")):
            return content.decode("utf-16"), ()
        if content[1:2] == b"\x00" and len(content) % 2 == 0:
            return content.decode("utf-16-le"), ()
        if content[:1] == b"\x00" and len(content) % 2 == 0:
            return content.decode("utf-16-be"), ()
        if b"\x00" in content:
            message = f"{name} is not a text file; export the results as CSV or .xlsx."
            raise LabError(message)
        return content.decode("utf-8-sig"), ()
    except UnicodeDecodeError:
        pass
    try:
        text = content.decode("cp1252")
    except UnicodeDecodeError as fault:
        message = (
            f"{name} is neither UTF-8, UTF-16 nor Windows-1252 text "
            f"(byte {fault.start + 1}); save it again as CSV UTF-8."
        )
        raise LabError(message) from fault
    return text, (f"{name} was read as Windows-1252 text, not UTF-8.",)


def _separator(text: str, certificate: Certificate | None) -> tuple[str, str, int]:
    """Choose the separator that cuts the header into most cells; obey ``sep=``.

    The header is the first filled line, or in a certificate the one with most titles.
    """
    first, _, rest = text.partition("\n")
    told = first.strip().lower()
    if told.startswith("sep=") and told[4:] in {",", ";"}:
        return told[4:], rest, 1
    filled = (line for line in text.splitlines() if line.strip(' \t,;"'))
    lines = list(islice(filled, LOOKED_THROUGH if certificate else 1))

    def worth(mark: str) -> tuple[int, int]:
        cut = [_cut(line, mark) for line in lines] or [[]]
        titles = max(map(certificate.titles_in, cut)) if certificate else 0
        return titles, len(cut[0])

    return max(_SEPARATORS, key=worth), text, 0


def _cut(line: str, separator: str) -> list[str]:
    """Cut one line; what cannot be cut, such as a cell of a megabyte, is said by who reads it."""
    try:
        return next(csv.reader([line], delimiter=separator), [])
    except csv.Error:
        return []


def _records(name: str, text: str, separator: str, skipped: int) -> list[tuple[int, list[str]]]:
    records: list[tuple[int, list[str]]] = []
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=separator, strict=True)
    try:
        for number, cells in enumerate(reader, start=1 + skipped):
            records.append((number, cells))
    except csv.Error as fault:
        message = (
            f"{name} row {len(records) + 1 + skipped} cannot be cut into cells ({fault}); "
            "look for a quotation mark that is not closed."
        )
        raise LabError(message) from fault
    return records


def capped(problems: list[str], limit: int = 20) -> list[str]:
    """Keep the first problems and count the rest, so that a screen is not flooded.

    Parameters
    ----------
    problems : list of str
    limit : int
        How many are kept.

    Examples
    --------
    >>> capped(['row 2', 'row 3', 'row 4'], limit=2)
    ['row 2', '… and 2 more.']
    """
    if len(problems) <= limit:
        return problems
    kept = problems[: limit - 1]
    return [*kept, f"… and {len(problems) - len(kept)} more."]
