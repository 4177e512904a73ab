"""One row of a laboratory file: every cell checked, every fault of the row said at once."""

import math
import re
from collections.abc import Callable, Mapping
from contextlib import suppress
from dataclasses import dataclass, field
from datetime import date
from decimal import Decimal
from typing import NoReturn, TypeVar

from fieldplan.base.errors import LabError
from fieldplan.campaign.model import Analyte
from fieldplan.lab.cells import Reading, letters_beside, read_cell, tidy
from fieldplan.lab.marks import like_thousands
from fieldplan.lab.model import OTHER_ANALYTE, REJECTED, LabRow, LeftOutRow
from fieldplan.lab.qualifiers import read_qualifier
from fieldplan.lab.roles import plain_role
from fieldplan.lab.tables import TextTable
from fieldplan.lab.units import AMBIGUOUS, conversion_factor, plain_basis, plain_unit, split_basis

Result = TypeVar("Result")
_NO_LIMIT = {"", "-", "--", "na", "n/a", "nd"}


@dataclass(frozen=True)
class RowCells:
    """The cells of one row by our column names, and sentences that begin with file and row.

    ``point_unclear`` is for files in which ``1.200`` may be 1200.
    """

    table: TextTable
    found: Mapping[str, int]
    number: int
    cells: tuple[str, ...]
    point_unclear: bool = False

    def text(self, column: str) -> str:
        """Return a cell as written; empty when the file has no such column."""
        index = self.found.get(column)
        return "" if index is None else self.cells[index]

    def tidy(self, column: str) -> str:
        """Return a cell without odd spaces."""
        return tidy(self.text(column))

    def refuse(self, column: str, rest: str) -> NoReturn:
        """Raise a LabError: file, row, column, value, then the rule and the remedy."""
        shown = self.tidy(column)
        shown = shown if len(shown) <= 40 else f"{shown[:40]}…"
        message = f"{self.table.file_name} row {self.number}: {column} '{shown}' {rest}"
        raise LabError(message)

    def faults(self) -> list[str]:
        """List the cells in our columns that a workbook does not hold as text or number."""
        return [
            f"{self.table.file_name} row {self.number}: {column}: {fault.sentence}."
            for column, index in self.found.items()
            if (fault := self.table.faults.get((self.number, index)))
            and not (column == "collected_on" and fault.kind == "date")
        ]


@dataclass
class FileMemory:
    """What reading the rows of one file leaves to say about the whole."""

    other_analytes: dict[str, int] = field(default_factory=dict)
    rejected: list[LabRow] = field(default_factory=list)
    left_out: list[LeftOutRow] = field(default_factory=list)
    limits_differ: list[int] = field(default_factory=list)
    unknown_qualifiers: dict[str, list[int]] = field(default_factory=dict)
    converted: set[str] = field(default_factory=set)
    meanings: dict[tuple[str, str], set[str]] = field(default_factory=dict)
    basis_unsaid: dict[tuple[str, str], list[int]] = field(default_factory=dict)


class Attempts:
    """Calls checks one after another and keeps what each has to say, so that all is said."""

    def __init__(self) -> None:
        self.problems: list[str] = []

    def call(self, check: Callable[[], Result], otherwise: Result) -> Result:
        """Return what a check returns; note its problems and return ``otherwise`` if it fails."""
        try:
            return check()
        except LabError as fault:
            self.problems += fault.problems
            return otherwise


@dataclass(frozen=True)
class _Value:
    result: float | None
    limit: float | None
    detected: bool
    letters: str


def read_row(
    row: RowCells, analytes: Mapping[str, Analyte], memory: FileMemory, *, decimal_comma: bool
) -> LabRow | None:
    """Read one row.

    Parameters
    ----------
    row : RowCells
    analytes : mapping of str to Analyte
        By every name in lower case.
    memory : FileMemory
        Takes note of what was left out.
    decimal_comma : bool

    Returns
    -------
    LabRow or None
        None for another analyte or a rejected result.

    Raises
    ------
    LabError
        All that is wrong in this row.
    """
    analyte = analytes.get(row.tidy("analyte").casefold())
    if analyte is None:
        if not row.tidy("analyte"):
            row.refuse("analyte", "is blank. Fill it in, or delete the row if it is a footer.")
        name = row.tidy("analyte")
        memory.other_analytes[name] = memory.other_analytes.get(name, 0) + 1
        memory.left_out.append(_left_out(row, name, OTHER_ANALYTE))
        return None
    written = (row.tidy("qualifier_lab"), letters_beside(row.text("as_reported")))
    if any(read_qualifier(text).rejected for text in written):
        memory.left_out.append(_left_out(row, analyte.id, REJECTED))
        with suppress(LabError):  # a rejected cell need not hold a number
            memory.rejected.append(_checked(row, analyte, FileMemory(), decimal_comma))
        return None
    return _checked(row, analyte, memory, decimal_comma)


def _left_out(row: RowCells, analyte: str, why: str) -> LeftOutRow:
    written = row.tidy("sample_id") or row.tidy("location_id")
    return LeftOutRow(row.number, written, analyte, row.tidy("as_reported"), why)


def _checked(row: RowCells, analyte: Analyte, memory: FileMemory, decimal_comma: bool) -> LabRow:
    faults = row.faults()
    if faults:
        raise LabError(*faults)
    tried = Attempts()
    tried.call(lambda: _check_meaning(row, analyte, memory), None)
    tried.call(lambda: _check_ids(row), None)
    value = tried.call(
        lambda: _value(row, analyte, memory, decimal_comma), _Value(None, None, True, "")
    )
    role = tried.call(lambda: plain_role(row.text("role"), row.table.file_name, row.number), "")
    comma = decimal_comma
    latitude = tried.call(lambda: read_degrees(row, "latitude", 90, decimal_comma=comma), None)
    longitude = tried.call(lambda: read_degrees(row, "longitude", 180, decimal_comma=comma), None)
    collected_on = tried.call(lambda: read_day(row), None)
    if tried.problems:
        raise LabError(*tried.problems)
    parent = row.tidy("duplicate_of")
    return LabRow(
        row=row.number,
        location_id=row.tidy("location_id"),
        sample_id=row.tidy("sample_id"),
        analyte=analyte.id,
        as_reported=row.text("as_reported"),
        result=value.result,
        detected=value.detected,
        reporting_limit=value.limit,
        unit=analyte.unit,
        role="field duplicate" if parent and role == "field sample" else role,
        duplicate_of=parent,
        stratum=row.tidy("stratum"),
        latitude=latitude,
        longitude=longitude,
        qualifier_lab=row.tidy("qualifier_lab") or value.letters,
        collected_on=collected_on,
    )


def _check_ids(row: RowCells) -> None:
    if not row.tidy("location_id") and not row.tidy("sample_id"):
        row.refuse("location_id", "and sample_id are blank. Fill in one of them.")


def _check_meaning(row: RowCells, analyte: Analyte, memory: FileMemory) -> None:
    """Refuse another basis or fraction than the campaign's; note where no basis is said."""
    behind, planned = split_basis(row.text("unit"))[1], split_basis(analyte.unit)[1]
    basis = plain_basis(row.text("basis"))
    if basis and behind and basis != behind:
        row.refuse("unit", f"and the basis '{basis}' disagree. Ask the laboratory.")
    for kind, value, wanted in (
        ("basis", basis or behind, plain_basis(analyte.basis) or planned),
        ("fraction", plain_unit(row.text("fraction")), plain_unit(analyte.fraction)),
    ):
        if value and wanted and value != wanted:
            row.refuse(
                kind if row.tidy(kind) else "unit",
                f"means {value}, the campaign {wanted}; neither is turned into the other here. "
                "Ask the laboratory for results as planned.",
            )
        if kind == "basis" and wanted and not value:
            memory.basis_unsaid.setdefault((analyte.id, wanted), []).append(row.number)
        if value and not wanted:
            memory.meanings.setdefault((analyte.id, kind), set()).add(value)


def _value(row: RowCells, analyte: Analyte, memory: FileMemory, decimal_comma: bool) -> _Value:
    """Read result and limit in the campaign's unit; a limit in the cell wins over the column."""
    reading = _reading(row, "as_reported", decimal_comma)
    factor = _factor(row, "unit", analyte, memory)
    column_limit = _column_limit(row, analyte, memory, factor, decimal_comma)
    number, limit, detected = reading.number, reading.limit, reading.detected
    if detected and _column_says_not_detected(row, memory):
        number, limit, detected = None, number, False
    if detected:
        result = _in_range(row, "as_reported", (number or Decimal(0)) * factor)
        return _Value(result, column_limit, True, reading.letters)
    if limit is None:
        if column_limit is None:
            row.refuse(
                "as_reported",
                "is a non-detect with no number. Give the limit in the column "
                "'reporting_limit', or leave the row out.",
            )
        return _Value(None, column_limit, False, reading.letters)
    stated = _in_range(row, "as_reported", limit * factor)
    if column_limit is not None and not math.isclose(stated, column_limit):
        memory.limits_differ.append(row.number)
    return _Value(None, stated, False, reading.letters)


def _column_says_not_detected(row: RowCells, memory: FileMemory) -> bool:
    """Obey the qualifier beside a number; refuse what may change it in a way not known here."""
    qualifier = read_qualifier(row.tidy("qualifier_lab"))
    if qualifier.above:
        row.refuse(
            "qualifier_lab",
            "says that the result is above the number; a mean cannot use it. Ask for a dilution "
            "and type its result.",
        )
    if qualifier.not_detected:
        return True
    if qualifier.doubtful:
        row.refuse(
            "qualifier_lab",
            "is not known here and may change what the number means. Type U or < where it is a "
            "limit, R where it is rejected, J where it is a result; or leave it blank.",
        )
    for mark in qualifier.unknown:
        memory.unknown_qualifiers.setdefault(mark.upper(), []).append(row.number)
    return False


def _reading(row: RowCells, column: str, decimal_comma: bool) -> Reading:
    whole = like_thousands(row.text(column)) if row.point_unclear else ""
    if whole:
        row.refuse(
            column,
            "has a point that may part thousands or decimals, and no other number of the file "
            f"tells which. Type {whole} if that is meant; if the point is decimal, save the file "
            "with commas between its cells.",
        )
    try:
        return read_cell(row.text(column), decimal_comma=decimal_comma)
    except LabError as fault:
        return row.refuse(column, str(fault))


def _column_limit(
    row: RowCells,
    analyte: Analyte,
    memory: FileMemory,
    factor: Decimal,
    decimal_comma: bool,
) -> float | None:
    if row.tidy("reporting_limit").casefold() in _NO_LIMIT:
        return None
    reading = _reading(row, "reporting_limit", decimal_comma)
    number = reading.limit if reading.number is None else reading.number
    if number is None:
        row.refuse("reporting_limit", "is not a number. Type the limit.")
    if row.tidy("reporting_limit_unit"):
        factor = _factor(row, "reporting_limit_unit", analyte, memory)
    return _in_range(row, "reporting_limit", number * factor)


def _factor(row: RowCells, column: str, analyte: Analyte, memory: FileMemory) -> Decimal:
    unit = row.tidy(column)
    if not unit:
        row.refuse(column, f"is blank. Type the unit; {analyte.unit} is planned.")
    factor = conversion_factor(unit, analyte.unit)
    if factor is None and ("\ufffd" in unit or plain_unit(unit)[:1] in {"?", "æ"}):
        row.refuse(column, "has lost a character. Type ug where microgram is meant.")
    if factor is None and plain_unit(unit) in AMBIGUOUS:
        row.refuse(
            column,
            f"can mean several things. Type the unit in full; {analyte.unit} is planned.",
        )
    if factor is None:
        row.refuse(
            column, f"cannot be turned into the campaign's {analyte.unit}. Ask the laboratory."
        )
    if factor != 1:
        memory.converted.add(f"{unit} to {analyte.unit}")
    return factor


def _in_range(row: RowCells, column: str, value: Decimal) -> float:
    number = float(value)
    if not 1e-30 <= number <= 1e30:
        row.refuse(column, "is outside 1e-30 to 1e30. Check the exponent and the unit.")
    return number


def read_degrees(row: RowCells, column: str, largest: int, *, decimal_comma: bool) -> float | None:
    """Read decimal degrees; None for a blank.

    Parameters
    ----------
    row : RowCells
    column : str
    largest : int
        90 for a latitude, 180 for a longitude.
    decimal_comma : bool

    Returns
    -------
    float or None

    Raises
    ------
    LabError
        Not a decimal number, or beyond ``largest``.
    """
    written = row.tidy(column).replace("−", "-")
    if not written:
        return None
    if decimal_comma and written.count(",") == 1:
        written = written.replace(",", ".")
    try:
        value = float(written) if written.isascii() and "_" not in written else math.nan
    except ValueError:
        value = math.nan
    if not abs(value) <= largest:
        row.refuse(column, f"must be decimal degrees from -{largest} to {largest}, such as 52.1.")
    return value


def read_day(row: RowCells) -> date | None:
    """Read the day of collection; None for a blank. A time of day after it is not looked at.

    Parameters
    ----------
    row : RowCells

    Returns
    -------
    date or None

    Raises
    ------
    LabError
        Not year, month and day: other orders can be read in two ways.
    """
    written = row.tidy("collected_on")
    if not written:
        return None
    day = re.match(r"(\d{4}-\d{2}-\d{2})(?![0-9])", written, re.ASCII)
    try:
        return date.fromisoformat(day[1]) if day else row.refuse("collected_on", _AS_A_DAY)
    except ValueError:
        return row.refuse("collected_on", _AS_A_DAY)


_AS_A_DAY = "must be year, month and day with hyphens, such as 2026-05-04."
