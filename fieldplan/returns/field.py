"""The crew's return, read line by line against the plan."""

import re
from collections.abc import Iterator
from dataclasses import dataclass
from difflib import get_close_matches
from pathlib import Path
from typing import NoReturn, get_args

from fieldplan.base.errors import LabError
from fieldplan.design.model import Location
from fieldplan.lab.columns import find_columns
from fieldplan.lab.row import Attempts, RowCells, read_degrees
from fieldplan.lab.tables import TextTable, capped, read_tables
from fieldplan.lab.words import listed
from fieldplan.plan.model import Plan
from fieldplan.returns.form import FIELD_COLUMNS, plain_offset
from fieldplan.returns.ids import nearest, plain_id
from fieldplan.returns.model import FieldRow, ReasonCode
from fieldplan.returns.revisions import told_apart

REASONS: tuple[str, ...] = get_args(ReasonCode)
_YES = {"yes", "y", "true", "1", "x", "taken"}
_NO = {"no", "n", "false", "0", "not taken"}


@dataclass(frozen=True)
class FieldReturn:
    """All lines of one field return, with the file's name and fingerprint."""

    file_name: str
    sha256: str
    rows: tuple[FieldRow, ...]

    def __iter__(self) -> Iterator[FieldRow]:
        return iter(self.rows)

    def __len__(self) -> int:
        return len(self.rows)


def read_field_return(path: Path, plan: Plan) -> FieldReturn:
    """Read what the crew filled in.

    Parameters
    ----------
    path : Path
        ``field_return.csv`` of the packet, filled in; .xlsx is read too.
    plan : Plan
        The plan that the crew carried.

    Returns
    -------
    FieldReturn
        Iterates over its ``FieldRow``; lines that were left as they came are among them.

    Raises
    ------
    LabError
        All lines that cannot be read or that contradict the plan or themselves, at once.
    """
    tables = read_tables(path)
    if len(tables) > 1:
        names = listed([f"'{table.sheet}'" for table in tables])
        message = f"{path.name} has several sheets ({names}); keep the one the crew filled in."
        raise LabError(message)
    table = tables[0]
    found = find_columns(table, FIELD_COLUMNS, ("location_id", "sample_id", "taken"))
    lines = [RowCells(table, found, number, cells) for number, cells in table.rows]
    strangers = told_apart(plan, [(line.number, (line.text("sample_id"),)) for line in lines])
    problems = [
        f"{path.name} {sentence} Read it with the packet of {name}." for name, sentence in strangers
    ]
    if problems:
        raise LabError(*problems)
    reader = _LineReader(plan, table.separator in {";", "\t"})
    rows: list[FieldRow] = []
    for line in lines:
        faults, row = reader.read(line)
        problems += faults
        rows += [row] if row else []
    problems += _contradictions(table, rows)
    if problems:
        raise LabError(*capped(problems))
    return FieldReturn(table.file_name, table.sha256, tuple(rows))


class _LineReader:
    """Reads one line after another against the same plan."""

    def __init__(self, plan: Plan, decimal_comma: bool) -> None:
        places = plan.locations.places
        self.places = {place.location_id: place for place in places}
        self.spellings = {place.location_id.casefold(): place for place in places}
        self.spellings |= {place.short_name.casefold(): place for place in places}
        self.samples = {sample.sample_id: sample for sample in plan.samples.samples}
        self.decimal_comma = decimal_comma

    def read(self, row: RowCells) -> tuple[list[str], FieldRow | None]:
        """Return what is wrong with a line, and the line when nothing is."""
        attempts, comma = Attempts(), self.decimal_comma
        attempts.call(lambda: _refuse_faults(row), None)
        location = attempts.call(lambda: self._location(row), "")
        taken = attempts.call(lambda: _taken(row), None)
        reason = attempts.call(lambda: _reason(row), "")
        replaced_by = attempts.call(lambda: self._replaced_by(row), "")
        north = attempts.call(
            lambda: read_degrees(row, "actual_latitude", 90, decimal_comma=comma), None
        )
        east = attempts.call(
            lambda: read_degrees(row, "actual_longitude", 180, decimal_comma=comma), None
        )
        attempts.call(lambda: _check_line(row, taken), None)
        if attempts.problems:
            return attempts.problems, None
        return [], FieldRow(
            row=row.number,
            location_id=location,
            sample_id=plain_id(row.text("sample_id")),
            taken=taken,
            collected_at=row.tidy("collected_at"),
            utc_offset=plain_offset(row.text("utc_offset")),
            actual_latitude=north,
            actual_longitude=east,
            replaced_by=replaced_by,
            reason=reason,
            initials=row.tidy("initials"),
            note=row.tidy("note"),
        )

    def _location(self, row: RowCells) -> str:
        """Name the location of a line: by its sample, which must not contradict the id."""
        sample_id, written = plain_id(row.text("sample_id")), plain_id(row.text("location_id"))
        sample = self.samples.get(sample_id)
        place = self.spellings.get(written.casefold())
        if sample is None and sample_id:
            self._refuse_sample(row, sample_id)
        if sample is not None and place is not None and sample.location_id != place.location_id:
            row.refuse(
                "sample_id",
                f"belongs to {sample.location_id or 'no location'}, not to {written}. Correct one; "
                "an alternate is named in 'replaced_by' and has a line and a sample of its own.",
            )
        if sample is not None:
            return sample.location_id
        if place is None:
            row.refuse("location_id", "is no location of the plan. Take it from the packet.")
        return place.location_id

    def _refuse_sample(self, row: RowCells, sample_id: str) -> NoReturn:
        """Say which sample of the plan it is like."""
        near = nearest(sample_id, self.samples)
        hint = f"did you mean '{near[0]}'?" if near else "check that it is this packet's form."
        row.refuse("sample_id", f"is no sample of the plan; {hint}")

    def _replaced_by(self, row: RowCells) -> str:
        written = plain_id(row.text("replaced_by"))
        if not written:
            return ""
        place = self.spellings.get(written.casefold())
        if place is None or place.location_class != "alternate":
            names = [p.location_id for p in self.places.values() if p.location_class == "alternate"]
            near = nearest(written, names)
            hint = f"did you mean '{near[0]}'?" if near else f"alternates are {listed(names)}."
            row.refuse("replaced_by", f"is no alternate of the plan; {hint}")
        return self._same_stratum(row, place)

    def _same_stratum(self, row: RowCells, place: Location) -> str:
        sample = self.samples.get(plain_id(row.text("sample_id")))
        own = self.places.get(sample.location_id) if sample else None
        own = own or self.spellings.get(plain_id(row.text("location_id")).casefold())
        if own is not None and own.stratum != place.stratum:
            row.refuse(
                "replaced_by",
                f"is an alternate of stratum {place.stratum}; {own.location_id} lies in "
                f"{own.stratum}. An alternate stands in only inside its own stratum: leave the "
                "cell empty, and the location counts as lost.",
            )
        return place.location_id


def _taken(row: RowCells) -> bool | None:
    word = row.tidy("taken").casefold()
    if not word:
        return None
    if word in _YES:
        return True
    if word in _NO:
        return False
    return row.refuse("taken", "must be yes or no.")


def _reason(row: RowCells) -> str:
    word = "-".join(re.split(r"[\s_-]+", row.tidy("reason").casefold()))
    if not word or word in REASONS:
        return word
    near = get_close_matches(word, REASONS, n=1)
    hint = f"did you mean '{near[0]}'?" if near else f"codes are {', '.join(REASONS)}."
    return row.refuse("reason", f"is none of the codes; {hint} Say the rest in 'note'.")


def _refuse_faults(row: RowCells) -> None:
    """Refuse ids that a workbook holds as a date, an error or an unsaved formula."""
    problems = [
        f"{row.table.file_name} row {row.number}: {column}: {fault.sentence}."
        for column in ("location_id", "sample_id", "replaced_by", "taken")
        if (fault := row.table.faults.get((row.number, row.found.get(column, -1))))
    ]
    if problems:
        raise LabError(*problems)


def _check_line(row: RowCells, taken: bool | None) -> None:
    """Refuse half a position, and a line that says both taken and replaced."""
    for column, partner in (
        ("actual_latitude", "actual_longitude"),
        ("actual_longitude", "actual_latitude"),
    ):
        if row.tidy(partner) and not row.tidy(column):
            row.refuse(column, "is blank and its partner is not. Fill in both or none.")
    if taken is True and row.tidy("replaced_by"):
        row.refuse(
            "replaced_by", "names an alternate, but taken is yes. A location is taken or replaced."
        )


def _contradictions(table: TextTable, rows: list[FieldRow]) -> list[str]:
    """Find samples with two lines, and alternates that stand in twice."""
    problems = []
    by_sample: dict[str, int] = {}
    stands_for: dict[str, str] = {}
    for row in rows:
        if row.sample_id and row.sample_id in by_sample:
            problems.append(
                f"{table.file_name} row {row.row}: sample_id '{row.sample_id}' stands in row "
                f"{by_sample[row.sample_id]} already. Keep one line a sample."
            )
        by_sample.setdefault(row.sample_id, row.row)
        other = stands_for.setdefault(row.replaced_by, row.location_id)
        if row.replaced_by and other != row.location_id:
            problems.append(
                f"{table.file_name} row {row.row}: replaced_by '{row.replaced_by}' stands in for "
                f"{other} already. One alternate replaces one location."
            )
    return problems
