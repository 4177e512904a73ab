"""A laboratory or pilot file, read row by row; what cannot be read is said, never guessed."""

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from decimal import Decimal
from difflib import get_close_matches
from pathlib import Path

from fieldplan.base.errors import LabError
from fieldplan.campaign.model import Analyte, Campaign
from fieldplan.lab.cells import (
    Reading,
    read_cell,
    says_not_detected,
    says_rejected,
    tidy,
)
from fieldplan.lab.columns import LAB_COLUMNS, find_columns
from fieldplan.lab.model import LabRow, LabTable
from fieldplan.lab.roles import plain_role
from fieldplan.lab.tables import TextTable, capped, read_tables
from fieldplan.lab.units import AMBIGUOUS, conversion_factor, plain_basis, plain_unit, split_basis

REQUIRED = ("analyte", "as_reported", "unit", "location_id|sample_id")


def read_lab(
    path: Path, campaign: Campaign, *, columns: Mapping[str, str] | None = None
) -> LabTable:
    """Read one laboratory or pilot file, one result a row.

    Parameters
    ----------
    path : Path
        CSV (UTF-8, UTF-16 or Windows-1252; comma, semicolon or tab) or .xlsx.
    campaign : Campaign
        Gives the analytes, their units, bases and fractions.
    columns : mapping of str to str, optional
        Our column name to the file's.

    Returns
    -------
    LabTable
        Rows of the campaign's analytes in file order, in the campaign's units.

    Raises
    ------
    LabError
        All cells that cannot be read, at once, each with its row, rule and remedy.

    Notes
    -----
    A limit written in the cell wins over the column ``reporting_limit``. Rows with the
    qualifier R are left out and noted; other qualifiers are kept and change nothing.
    """
    table, found, notes = _choose_sheet(path, columns)
    reader = _RowReader(table, found, campaign)
    rows: list[LabRow] = []
    problems: list[str] = []
    for number, cells in table.rows:
        try:
            row = reader.read(number, cells)
        except LabError as fault:
            problems += fault.problems
        else:
            rows += [row] if row else []
    if problems:
        raise LabError(*capped(problems))
    if not rows:
        raise LabError(reader.nothing_found())
    mixed = reader.mixed_meanings()
    if mixed:
        raise LabError(*mixed)
    return LabTable(
        file_name=table.file_name,
        sha256=table.sha256,
        rows=tuple(rows),
        notes=(*table.notes, *notes, *reader.notes()),
    )


def _choose_sheet(
    path: Path, columns: Mapping[str, str] | None
) -> tuple[TextTable, dict[str, int], tuple[str, ...]]:
    """Take the one table that has our columns; refuse where several have them."""
    tables = read_tables(path)
    fitting: list[tuple[TextTable, dict[str, int]]] = []
    faults: list[LabError] = []
    for table in tables:
        try:
            fitting.append((table, find_columns(table, LAB_COLUMNS, REQUIRED, renamed=columns)))
        except LabError as fault:
            faults.append(fault)
    if not fitting:
        lines = [
            f"sheet '{table.sheet}': {line}" if len(tables) > 1 else line
            for table, fault in zip(tables, faults, strict=True)
            for line in fault.problems
        ]
        raise LabError(*capped(lines))
    if len(fitting) > 1:
        names = ", ".join(f"'{table.sheet}'" for table, _ in fitting)
        message = (
            f"{path.name} has results on several sheets ({names}); put them on one sheet, or "
            "save the one that counts as a file of its own."
        )
        raise LabError(message)
    table, found = fitting[0]
    others = [f"'{t.sheet}'" for t in tables if t is not table]
    note = f"{path.name}: sheet '{table.sheet}' was read; {', '.join(others)} was not."
    return table, found, (note,) if others else ()


@dataclass(frozen=True)
class _Place:
    """File and row, so that every sentence begins with them."""

    file_name: str
    row: int

    def error(self, column: str, value: str, rest: str) -> LabError:
        shown = tidy(value)
        shown = shown if len(shown) <= 40 else f"{shown[:40]}…"
        return LabError(f"{self.file_name} row {self.row}: {column} '{shown}' {rest}")


class _RowReader:
    """Reads rows one after another and remembers what the whole file must agree on."""

    def __init__(self, table: TextTable, found: Mapping[str, int], campaign: Campaign) -> None:
        self.table, self.found = table, found
        self.analytes = {tidy(name).casefold(): a for a in campaign.analyte for name in _names(a)}
        self.decimal_comma = table.separator in {";", "\t"} and not self._has_points()
        self.others: dict[str, int] = {}
        self.rejected: list[int] = []
        self.meanings: dict[tuple[str, str], set[str]] = {}
        self.limits_differ: list[int] = []

    def _has_points(self) -> bool:
        indexes = [self.found[c] for c in ("as_reported", "reporting_limit") if c in self.found]
        return any(
            any(a.isdigit() and b.isdigit() for a, b in _about(cells[i], "."))
            for _, cells in self.table.rows
            for i in indexes
        )

    def read(self, number: int, cells: tuple[str, ...]) -> LabRow | None:
        """Read one row; None for another analyte or a rejected result."""
        place = _Place(self.table.file_name, number)

        def cell(column: str) -> str:
            index = self.found.get(column)
            return "" if index is None else cells[index]

        self._refuse_faults(place)
        analyte = self._analyte(place, cell("analyte"))
        if analyte is None:
            return None
        letters = tidy(cell("qualifier_lab"))
        if says_rejected(letters) or says_rejected(_letters_of(cell("as_reported"))):
            self.rejected.append(number)
            return None
        self._check_meaning(place, analyte, cell)
        location, sample = tidy(cell("location_id")), tidy(cell("sample_id"))
        if not location and not sample:
            raise place.error("location_id", "", "and sample_id are blank. Fill in one of them.")
        result, limit, detected, beside = self._values(place, analyte, cell)
        parent = tidy(cell("duplicate_of"))
        role = plain_role(cell("role"), place.file_name, number)
        return LabRow(
            row=number,
            location_id=location,
            sample_id=sample,
            analyte=analyte.id,
            as_reported=cell("as_reported"),
            result=result,
            detected=detected,
            reporting_limit=limit,
            unit=analyte.unit,
            role="field duplicate" if parent and role == "field sample" else role,
            duplicate_of=parent,
            stratum=tidy(cell("stratum")),
            latitude=self._degrees(place, "latitude", cell, 90),
            longitude=self._degrees(place, "longitude", cell, 180),
            qualifier_lab=letters or beside,
        )

    def _refuse_faults(self, place: _Place) -> None:
        problems = [
            f"{place.file_name} row {place.row}: {fault.sentence}."
            for column, index in self.found.items()
            if (fault := self.table.faults.get((place.row, index)))
            and column not in {"qualifier_lab"}
        ]
        if problems:
            raise LabError(*problems)

    def _analyte(self, place: _Place, written: str) -> Analyte | None:
        name = tidy(written)
        if not name:
            raise place.error(
                "analyte", "", "is blank. Fill it in, or delete the row if it is a footer."
            )
        analyte = self.analytes.get(name.casefold())
        if analyte is None:
            self.others[name] = self.others.get(name, 0) + 1
        return analyte

    def _check_meaning(self, place: _Place, analyte: Analyte, cell: Callable[[str], str]) -> None:
        """Refuse another basis or fraction than the campaign's; none is converted."""
        behind = split_basis(cell("unit"))[1] or split_basis(analyte.unit)[1]
        written = {"basis": plain_basis(tidy(cell("basis"))) or split_basis(cell("unit"))[1]}
        written["fraction"] = plain_unit(tidy(cell("fraction")))
        wanted = {"basis": plain_basis(analyte.basis) or split_basis(analyte.unit)[1]}
        wanted["fraction"] = plain_unit(analyte.fraction)
        if (
            written["basis"]
            and behind
            and split_basis(cell("unit"))[1]
            not in {
                "",
                written["basis"],
            }
        ):
            raise place.error("unit", cell("unit"), "and 'basis' disagree. Ask the laboratory.")
        for kind, value in written.items():
            if value and wanted[kind] and value != wanted[kind]:
                raise place.error(
                    kind,
                    value,
                    f"is not the campaign's '{wanted[kind]}', and none is turned into the other "
                    "here. Ask the laboratory for results as planned.",
                )
            if value and not wanted[kind]:
                self.meanings.setdefault((analyte.id, kind), set()).add(value)

    def _values(
        self, place: _Place, analyte: Analyte, cell: Callable[[str], str]
    ) -> tuple[float | None, float | None, bool, str]:
        """Result, limit, detected and letters, in the campaign's unit."""
        factor = _factor(place, "unit", cell("unit"), analyte)
        reading = self._reading(place, "as_reported", cell("as_reported"))
        column_limit = self._column_limit(place, analyte, cell, factor)
        number, limit, detected = reading.number, reading.limit, reading.detected
        if detected and says_not_detected(cell("qualifier_lab")):
            number, limit, detected = None, number, False
        if detected:
            value = _in_range(place, cell("as_reported"), (number or Decimal(0)) * factor)
            return value, column_limit, True, reading.letters
        if limit is None:
            if column_limit is None:
                raise place.error(
                    "as_reported",
                    cell("as_reported"),
                    "is a non-detect with no number. Give the limit in the column "
                    "'reporting_limit', or leave the row out.",
                )
            return None, column_limit, False, reading.letters
        stated = _in_range(place, cell("as_reported"), limit * factor)
        if column_limit is not None and not math.isclose(stated, column_limit):
            self.limits_differ.append(place.row)
        return None, stated, False, reading.letters

    def _reading(self, place: _Place, column: str, written: str) -> Reading:
        try:
            return read_cell(written, decimal_comma=self.decimal_comma)
        except LabError as fault:
            raise place.error(column, written, str(fault)) from None

    def _column_limit(
        self, place: _Place, analyte: Analyte, cell: Callable[[str], str], factor: Decimal
    ) -> float | None:
        written = cell("reporting_limit")
        if tidy(written) in {"", "-", "--", "n/a", "NA", "N/A"}:
            return None
        reading = self._reading(place, "reporting_limit", written)
        number = reading.limit if reading.number is None else reading.number
        if number is None:
            raise place.error("reporting_limit", written, "is not a number. Type the limit.")
        if tidy(cell("reporting_limit_unit")):
            factor = _factor(place, "reporting_limit_unit", cell("reporting_limit_unit"), analyte)
        return _in_range(place, written, number * factor)

    def _degrees(
        self, place: _Place, column: str, cell: Callable[[str], str], largest: float
    ) -> float | None:
        written = tidy(cell(column)).replace("−", "-")
        if not written:
            return None
        if self.decimal_comma and written.count(",") == 1:
            written = written.replace(",", ".")
        try:
            value = float(written)
        except ValueError:
            value = math.nan
        if not (written.isascii() and abs(value) <= largest):
            raise place.error(
                column, written, f"must be decimal degrees from -{largest} to {largest}."
            )
        return value

    def nothing_found(self) -> str:
        """Say why no row was taken."""
        known = ", ".join(sorted({a.id for a in self.analytes.values()}))
        if self.rejected:
            return f"{self.table.file_name}: every result of {known} is rejected (qualifier R)."
        if not self.others:
            return f"{self.table.file_name} has a header but no rows; export it again."
        seen = ", ".join(f"'{name}'" for name in list(self.others)[:10])
        near = get_close_matches(next(iter(self.analytes)), [n.casefold() for n in self.others])
        hint = f" If '{near[0]}' is meant, add it" if near else " Add the laboratory's name"
        return (
            f"{self.table.file_name} has no row of {known}; its analytes are {seen}.{hint} to "
            "laboratory_names in the campaign file."
        )

    def mixed_meanings(self) -> list[str]:
        """Refuse a file that mixes bases or fractions that the campaign leaves open."""
        return [
            f"{self.table.file_name} mixes {' and '.join(sorted(values))} in '{kind}' for "
            f"{analyte}; say in the campaign file which {kind} counts, and ask for all in it."
            for (analyte, kind), values in self.meanings.items()
            if len(values) > 1
        ]

    def notes(self) -> tuple[str, ...]:
        """Say what was left out or converted."""
        name, lines = self.table.file_name, []
        if self.others:
            seen = ", ".join(sorted(self.others)[:6])
            lines.append(f"{name}: {sum(self.others.values())} rows of {seen} were not read.")
        if self.rejected:
            lines.append(
                f"{name}: rejected results (qualifier R) were left out: row "
                f"{', '.join(map(str, self.rejected[:20]))}."
            )
        if self.limits_differ:
            lines.append(
                f"{name}: the limit in the cell differs from 'reporting_limit' and was used: row "
                f"{', '.join(map(str, self.limits_differ[:20]))}."
            )
        if self.decimal_comma:
            if any("," in cells[self.found["as_reported"]] for _, cells in self.table.rows):
                lines.append(f"{name}: commas were read as decimal commas.")
        return tuple(lines)


def _names(analyte: Analyte) -> tuple[str, ...]:
    return tuple(n for n in (analyte.id, analyte.name, *analyte.laboratory_names) if n)


def _about(text: str, mark: str) -> list[tuple[str, str]]:
    padded = f" {text} "
    return [(padded[i - 1], padded[i + 1]) for i in range(1, len(padded) - 1) if padded[i] == mark]


def _letters_of(text: str) -> str:
    return tidy(text).lstrip("<>=≤+-0123456789.,eE ")


def _factor(place: _Place, column: str, written: str, analyte: Analyte) -> Decimal:
    unit = tidy(written)
    if not unit:
        raise place.error(column, "", f"is blank. Type the unit; {analyte.unit} is planned.")
    factor = conversion_factor(unit, analyte.unit)
    if factor is not None:
        return factor
    if "\ufffd" in unit or plain_unit(unit) in {"?g/l", "?g/kg", "æg/l"}:
        raise place.error(column, unit, "has lost a character. Type ug for microgram.")
    if plain_unit(unit) in AMBIGUOUS:
        raise place.error(
            column,
            unit,
            f"can mean several things. Type the unit in full; {analyte.unit} is planned.",
        )
    raise place.error(
        column, unit, f"cannot be turned into the campaign's {analyte.unit}. Ask the laboratory."
    )


def _in_range(place: _Place, written: str, value: Decimal) -> float:
    number = float(value)
    if not 1e-30 <= number <= 1e30:
        raise place.error("value", written, "is outside 1e-30 to 1e30. Check the exponent.")
    return number
