"""A laboratory or pilot file, read row by row; what cannot be read is said, never guessed."""

from collections.abc import Iterator, Mapping
from difflib import get_close_matches
from functools import partial
from pathlib import Path

from fieldplan.base.errors import LabError
from fieldplan.campaign.model import Analyte, Campaign
from fieldplan.lab.cells import tidy
from fieldplan.lab.columns import Remedy, in_campaign, on_the_command
from fieldplan.lab.far import far_results_notes
from fieldplan.lab.letterhead import certificate_of
from fieldplan.lab.marks import decimal_marks
from fieldplan.lab.model import REJECTED, LabRow, LabTable
from fieldplan.lab.row import FileMemory, RowCells, read_row
from fieldplan.lab.sheet import REQUIRED, Named, choose_sheet, pilot_titles
from fieldplan.lab.spreadsheet_ids import changed_ids_note
from fieldplan.lab.tables import capped
from fieldplan.lab.unread import unread_qualifiers
from fieldplan.lab.words import counted, listed


def read_lab(
    path: Path,
    campaign: Campaign,
    *,
    columns: Mapping[str, str] | None = None,
    of_pilot: bool = False,
    remedy: Remedy = on_the_command,
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
    of_pilot : bool
        Whether the campaign file names the columns. If not, those that it names for a pilot hold
        here too where the file has them, and that is noted.
    remedy : callable
        Says where to write what a column is called; the campaign file for a pilot.

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
    qualifier R are left out and noted; flags are kept and change nothing, and those that are not
    known here are noted or, where they may speak of limits, refused.
    """
    analytes = {tidy(name).casefold(): a for a in campaign.analyte for name in _names(a)}
    remedy = partial(_in_campaign_too, columns or {}) if of_pilot else remedy
    named = Named(columns or {}, {} if of_pilot else pilot_titles(campaign), remedy, of_pilot)
    certificate = certificate_of(REQUIRED, named.titles(), analytes, how=named.how())
    table, found, notes = choose_sheet(path, named, certificate)
    memory, marks = FileMemory(), decimal_marks(table, found)
    rows: list[LabRow] = []
    problems: list[str] = []
    for number, cells in table.rows:
        try:
            row = read_row(
                RowCells(table, found, number, cells, marks.point_unclear),
                analytes,
                memory,
                decimal_comma=marks.comma,
            )
        except LabError as fault:
            problems += fault.problems
        else:
            rows += [row] if row else []
    problems += _mixed_meanings(table.file_name, memory)
    problems += unread_qualifiers(table, found, rows, remedy=remedy)
    if not rows and not problems:
        problems.append(_nothing_found(table.file_name, analytes, memory))
    if problems:
        raise LabError(*capped(problems))
    labels = {analyte.id: analyte.label for analyte in campaign.analyte}
    strange = changed_ids_note(table.file_name, rows)
    strange += far_results_notes(table.file_name, rows, labels)
    more = _notes(
        table.file_name, memory, labels=labels, comma_read=marks.comma and _has_comma(rows)
    )
    return LabTable(
        file_name=table.file_name,
        sha256=table.sha256,
        rows=tuple(rows),
        notes=(*table.notes, *notes, *strange, *more),
        rejected=tuple(memory.rejected),
        left_out=tuple(memory.left_out),
    )


def _has_comma(rows: list[LabRow]) -> bool:
    return any("," in row.as_reported for row in rows)


def _names(analyte: Analyte) -> tuple[str, ...]:
    return tuple(n for n in (analyte.id, analyte.name, *analyte.laboratory_names) if n)


def _in_campaign_too(columns: Mapping[str, str], named: Mapping[str, str]) -> str:
    """Write all columns of a pilot in one line, those that it has already among them."""
    return in_campaign({**columns, **named})


def _mixed_meanings(name: str, memory: FileMemory) -> list[str]:
    """Refuse a file that mixes bases or fractions which the campaign leaves open."""
    return [
        f"{name} mixes {listed(sorted(values))} in '{kind}' for {analyte}; say in the campaign "
        f"file which {kind} counts, and ask for all results in it."
        for (analyte, kind), values in memory.meanings.items()
        if len(values) > 1
    ]


def _nothing_found(name: str, analytes: Mapping[str, Analyte], memory: FileMemory) -> str:
    known = listed(sorted({analyte.id for analyte in analytes.values()}))
    if any(entry.why == REJECTED for entry in memory.left_out):
        return f"{name}: every result of {known} is rejected (qualifier R); ask the laboratory."
    if not memory.other_analytes:
        return f"{name} has a header but no rows; export it again."
    seen = listed([f"'{other}'" for other in memory.other_analytes])
    folded = {other.casefold(): other for other in memory.other_analytes}
    near = [other for other in folded for own in analytes if own in other]
    near += [match for own in analytes for match in get_close_matches(own, folded, n=1)]
    which = f"'{folded[near[0]]}'" if near else "the laboratory's name"
    return (
        f"{name} has no row of {known}; it has {seen}. Add {which} to laboratory_names of the "
        "analyte in the campaign file, if that is it."
    )


def _notes(
    name: str, memory: FileMemory, *, labels: Mapping[str, str], comma_read: bool
) -> tuple[str, ...]:
    """Say what was left out, converted or taken for granted."""
    lines = []
    if memory.other_analytes:
        count = counted(sum(memory.other_analytes.values()), "row")
        lines.append(
            f"{name}: {count} of other analytes not read ({listed(sorted(memory.other_analytes))})."
        )
    rejected = [entry for entry in memory.left_out if entry.why == REJECTED]
    for analyte in dict.fromkeys(entry.analyte for entry in rejected):
        group = [entry.in_words for entry in rejected if entry.analyte == analyte]
        lines.append(f"{name}: {labels[analyte]} left out, {REJECTED}: {listed(group)}.")
    if memory.limits_differ:
        rows = listed([str(number) for number in memory.limits_differ])
        lines.append(
            f"{name}: the limit written in the cell is not the 'reporting_limit' of its row and "
            f"was used: row {rows}."
        )
    for mark, numbers in memory.unknown_qualifiers.items():
        rows = listed([str(number) for number in numbers])
        lines.append(
            f"{name}: the qualifier '{mark[:40]}' is not known here and changed nothing: row "
            f"{rows}. Where it says more, type U (not detected) or R (rejected) instead."
        )
    lines += _basis_notes(name, memory, labels)
    if memory.converted:
        lines.append(f"{name}: converted from {listed(sorted(memory.converted))}.")
    if comma_read:
        lines.append(f"{name}: commas were read as decimal commas.")
    return tuple(lines)


def _basis_notes(name: str, memory: FileMemory, labels: Mapping[str, str]) -> Iterator[str]:
    """Say where the planned basis was taken for granted: neither turns into the other."""
    for basis in dict.fromkeys(basis for _, basis in memory.basis_unsaid):
        found = {a: rows for (a, b), rows in memory.basis_unsaid.items() if b == basis}
        numbers = sorted(number for rows in found.values() for number in rows)
        which = f" ({listed([str(number) for number in numbers])})" if len(numbers) < 5 else ""
        names = "names" if len(numbers) == 1 else "name"
        yield (
            f"{name}: {counted(len(numbers), 'row')}{which} of "
            f"{listed([labels[analyte] for analyte in found])} {names} no basis; {basis} was "
            "taken, as planned. Ask the laboratory where its report does not say so elsewhere."
        )
