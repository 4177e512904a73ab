"""A workbook's visible sheets as text, with every cell that is not what it shows pointed out."""

import hashlib
import io
import math
import re
import warnings
import zipfile
from collections.abc import Mapping
from datetime import date, datetime, time
from typing import TYPE_CHECKING, Any

from fieldplan.base.errors import LabError
from fieldplan.lab.letterhead import Certificate, header_at, results_end, skipped_notes
from fieldplan.lab.number_formats import shows_number, shows_text
from fieldplan.lab.tables import CellFault, TextTable

if TYPE_CHECKING:
    from openpyxl.worksheet.worksheet import Worksheet

LARGEST_UNPACKED = 256 * 1024 * 1024
LAST_COLUMN = 1024
"""Columns past this one are no column of results; a stray cell may lie there."""
MOST_MERGED = 100_000
_MERGED = re.compile(rb'<mergeCell\b[^>]*\bref="([A-Za-z0-9$:]+)"')
_ERRORS = {"#N/A", "#DIV/0!", "#VALUE!", "#REF!", "#NAME?", "#NUM!", "#NULL!"}


def workbook_tables(
    name: str, content: bytes, *, certificate: Certificate | None = None
) -> tuple[TextTable, ...]:
    """Read each visible sheet that holds anything.

    Parameters
    ----------
    name : str
        The file's name, for messages.
    content : bytes
        The .xlsx file.
    certificate : Certificate, optional
        How to find header and remarks.

    Returns
    -------
    tuple of TextTable

    Raises
    ------
    LabError
        The workbook is damaged, of another kind, or shows nothing.

    Notes
    -----
    Cells are read one by one and never through the size that the sheet declares for itself,
    which some programs write wrongly. Values come from the last save; a formula without a
    saved value is a fault, not a blank.
    """
    _check_size(name, content)
    values, formulas = _opened(name, content, True), _opened(name, content, False)
    digest = hashlib.sha256(content).hexdigest()
    tables, hidden = [], []
    for title in values.sheetnames:
        sheet = values[title]
        if getattr(sheet, "sheet_state", "") != "visible":
            hidden.append(title)
        elif hasattr(sheet, "iter_rows"):
            table = _sheet_table(name, digest, (sheet, formulas[title]), certificate)
            tables += [table] if table else []
    if not tables:
        extra = f" Its hidden sheets ({', '.join(hidden)}) are not read." if hidden else ""
        message = (
            f"{name} shows no sheet with cells in it; save it again as an ordinary .xlsx "
            f"workbook, or as CSV.{extra}"
        )
        raise LabError(message)
    return tuple(tables)


def _check_size(name: str, content: bytes) -> None:
    try:
        with zipfile.ZipFile(io.BytesIO(content)) as archive:
            unpacked = sum(entry.file_size for entry in archive.infolist())
            names = set(archive.namelist())
    except (zipfile.BadZipFile, OSError, ValueError, NotImplementedError) as fault:
        message = f"{name} is a damaged workbook ({fault}); save or fetch it again."
        raise LabError(message) from fault
    if unpacked > LARGEST_UNPACKED:
        message = f"{name} unpacks to {unpacked / 1e6:.0f} MB; save the one sheet needed as CSV."
        raise LabError(message)
    if "[Content_Types].xml" not in names:
        message = f"{name} is an archive but no .xlsx workbook; save it as .xlsx or CSV."
        raise LabError(message)


def _check_merges(name: str, content: bytes) -> None:
    """Refuse vast merges before the library opens the file: it makes each of their cells."""
    from openpyxl.utils.cell import range_boundaries

    with zipfile.ZipFile(io.BytesIO(content)) as archive:
        sheets = [n for n in archive.namelist() if n.startswith("xl/worksheets/")]
        found = [area.decode() for n in sheets for area in _MERGED.findall(archive.read(n))]
    total = 0
    for area in found:
        bounds: Any = range_boundaries(area)
        left, top, right, bottom = bounds
        total += (right - left + 1) * (bottom - top + 1)
        if total > MOST_MERGED:
            message = (
                f"{name} has more than {MOST_MERGED:,} merged cells ({area} among them); unmerge "
                "them, or save the one sheet needed as CSV."
            )
            raise LabError(message)


def _opened(name: str, content: bytes, saved_values: bool) -> Any:
    from openpyxl import load_workbook

    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            _check_merges(name, content)
            return load_workbook(io.BytesIO(content), data_only=saved_values)
    except LabError:
        raise
    except Exception as fault:  # a damaged part raises whatever it provokes
        message = f"{name} is a damaged workbook ({type(fault).__name__}); save it again."
        raise LabError(message) from fault


def _sheet_table(
    name: str,
    digest: str,
    sheet: "tuple[Worksheet, Worksheet]",
    certificate: Certificate | None,
) -> TextTable | None:
    values, formulas = sheet
    texts, faults = _filled(values, formulas)
    if not texts:
        return None
    filled = [(number, _in_line(texts[number], 0)) for number in sorted(texts)]
    at = header_at(filled, certificate)
    header_row = filled[at][0]
    width = min(max(texts[header_row], default=0), LAST_COLUMN)
    below = filled[at + 1 :]
    unsaved = {row for (row, _), fault in faults.items() if fault.kind == "other"}
    end = results_end(below, certificate, but=unsaved)
    rows = [(number, _in_line(texts[number], width)) for number, _ in below[:end]]
    _add_merged(values, faults)
    notes = skipped_notes(name, filled[:at], header_row, below[end:])
    unseen = sum(1 for number in texts if values.row_dimensions[number].hidden)
    if unseen:
        notes.append(f"{name}: {unseen} rows that the sheet hides were read too.")
    return TextTable(
        file_name=name,
        sha256=digest,
        header=_in_line(texts[header_row], width)[:width],
        header_row=header_row,
        rows=tuple(rows),
        sheet=values.title,
        faults=faults,
        notes=tuple(notes),
    )


def _filled(
    values: "Worksheet", formulas: "Worksheet"
) -> tuple[dict[int, dict[int, str]], dict[tuple[int, int], CellFault]]:
    """Give the texts of each row that holds any, by column, and the faults of its cells.

    Only cells that the file holds are visited: one stray cell in the last row makes the sheet
    that surrounds it a million rows tall. The library has no public way to ask for them.
    """
    own, others = values._cells, formulas._cells
    texts: dict[int, dict[int, str]] = {}
    faults: dict[tuple[int, int], CellFault] = {}
    for row, column in sorted(own):
        text, fault = _cell_text(own[row, column], others.get((row, column)))
        if fault:
            faults[row, column - 1] = fault
        if text.strip() or fault:
            texts.setdefault(row, {})[column] = text
    return texts, faults


def _in_line(texts: Mapping[int, str], width: int) -> tuple[str, ...]:
    """Set the texts of a row side by side, blanks between them, at least to a width."""
    last = min(max(width, *texts), LAST_COLUMN)
    return tuple(texts.get(column, "") for column in range(1, last + 1))


def _cell_text(cell: Any, formula: Any) -> tuple[str, CellFault | None]:
    """Write one cell as text; give a fault when it is not a plain text or number."""
    value = cell.value
    place = f"{cell.coordinate}"
    if value is None:
        if formula is not None and formula.data_type == "f" and isinstance(formula.value, str):
            sentence = (
                f"cell {place} holds a formula without a saved value; open the workbook, save "
                "it, or paste the values in place of the formulas"
            )
            return "", CellFault("other", sentence)
        return "", None
    if isinstance(value, bool):
        return str(value).upper(), None
    if isinstance(value, datetime | date | time):
        sentence = (
            f"cell {place} is a date for the spreadsheet ({value}); set the column to text and "
            "type what was meant"
        )
        return str(value), CellFault("date", sentence)
    if isinstance(value, int | float):
        return _number_text(value, cell.number_format or "General", place)
    text = str(value)
    if cell.data_type == "e" or text in _ERRORS:
        return text, CellFault("other", f"cell {place} holds the error {text}; put the value in")
    if text.strip() and not shows_text(cell.number_format or "General"):
        return text, _not_shown(place, text, cell.number_format)
    return text, None


def _number_text(value: float, number_format: str, place: str) -> tuple[str, CellFault | None]:
    if isinstance(value, float) and not math.isfinite(value):
        return str(value), CellFault("other", f"cell {place} holds no number; put the value in")
    whole = float(value).is_integer() and abs(value) < 1e15
    text = str(int(value)) if whole else repr(float(value))
    if not shows_number(number_format, value):
        return text, _not_shown(place, text, number_format)
    if whole and re.fullmatch(r"0+", number_format):
        text = text.zfill(len(number_format))
    return text, None


def _not_shown(place: str, text: str, number_format: str) -> CellFault:
    sentence = (
        f"cell {place} holds {text} but its number format ({number_format}) shows something "
        "else; set the column to text and type what the laboratory reported"
    )
    return CellFault("other", sentence)


def _add_merged(sheet: "Worksheet", faults: dict[tuple[int, int], CellFault]) -> None:
    """Point at cells under a merge that runs over several rows: they look blank but are not."""
    for area in sheet.merged_cells.ranges:
        for row in range(area.min_row + 1, min(area.max_row, area.min_row + 2000) + 1):
            sentence = f"cell {area.coord} is merged over several rows; unmerge it and fill each"
            faults[(row, area.min_col - 1)] = CellFault("other", sentence)
