"""Pairs of a cheap reading and the laboratory's result, one pair a row, to calibrate on."""

import math
from collections.abc import Mapping
from pathlib import Path

from fieldplan.base.errors import LabError
from fieldplan.campaign.field_reading import COLUMNS, FieldReading
from fieldplan.campaign.inputs import resolve_file
from fieldplan.campaign.model import ReadCampaign
from fieldplan.lab.cells import read_cell, tidy
from fieldplan.lab.columns import find_columns, in_campaign
from fieldplan.lab.marks import DecimalMarks, decimal_marks, like_thousands
from fieldplan.lab.model import ReadingPairs
from fieldplan.lab.tables import TextTable, capped, read_tables
from fieldplan.lab.words import counted

FEWEST = 4
"""Pairs below which a correlation has no interval."""


def read_reading_pairs(read: ReadCampaign) -> tuple[ReadingPairs, ...]:
    """Read the calibration file of every field reading that names one.

    Parameters
    ----------
    read : ReadCampaign

    Returns
    -------
    tuple of ReadingPairs
        In the order of the campaign's ``[[field_reading]]`` tables.

    Raises
    ------
    LabError
        A file cannot be read, or holds no pairs to learn from; all problems at once.
    """
    found: list[ReadingPairs] = []
    problems: list[str] = []
    for told in read.campaign.field_reading:
        if told.pilot is None:
            continue
        try:
            found.append(read_pairs(resolve_file(read, told.pilot), told))
        except LabError as fault:
            problems += [line for line in fault.problems if line not in problems]
    if problems:
        raise LabError(*problems)
    return tuple(found)


def read_pairs(path: Path, told: FieldReading) -> ReadingPairs:
    """Read the pairs of one file.

    Parameters
    ----------
    path : Path
        CSV or workbook with the columns ``reading`` and ``result``.
    told : FieldReading
        Its ``columns`` say what they are called there.

    Returns
    -------
    ReadingPairs
        A row without one of the two is left out and counted; a non-detect stands at half its limit.

    Raises
    ------
    LabError
        A cell is no number, or fewer than 4 pairs are left.
    """
    table, found = _chosen(path, told)
    # the two columns hold what a laboratory's file holds as results
    marks = decimal_marks(
        table, {"as_reported": found["result"], "reporting_limit": found["reading"]}
    )
    readings: list[float] = []
    results: list[float] = []
    problems: list[str] = []
    single = non_detects = 0
    for number, cells in table.rows:
        reading, result = tidy(cells[found["reading"]]), tidy(cells[found["result"]])
        if not (reading and result):
            single += bool(reading or result)
            continue
        try:
            pair = _number(reading, marks), *_result(result, marks)
        except LabError as fault:
            problems += [f"{table.file_name} row {number}: {line}" for line in fault.problems]
            continue
        readings.append(pair[0])
        results.append(pair[1])
        non_detects += pair[2]
    if not problems and len(results) < FEWEST:
        problems.append(
            f"{table.file_name} has {counted(len(results), 'pair')} of reading and result; a "
            f"correlation needs {FEWEST} or more. Add rows, or type the correlation."
        )
    if problems:
        raise LabError(*capped(problems))
    return ReadingPairs(
        name=told.name,
        analyte=told.analyte or "",
        readings=tuple(readings),
        results=tuple(results),
        source=table.file_name,
        non_detects=non_detects,
        unpaired=single,
    )


def _remedy(named: Mapping[str, str]) -> str:
    return in_campaign(named).replace("[[sigma]] table of this pilot", "[[field_reading]] table")


def _chosen(path: Path, told: FieldReading) -> tuple[TextTable, dict[str, int]]:
    """Take the first table that has both columns."""
    faults: list[str] = []
    for table in read_tables(path):
        try:
            return table, find_columns(
                table, COLUMNS, ("reading", "result"), renamed=told.columns, remedy=_remedy
            )
        except LabError as fault:
            faults += fault.problems
    raise LabError(*capped(faults))


def _number(text: str, marks: DecimalMarks) -> float:
    """Read a meter's number; it may be 0 or below, unlike a laboratory's."""
    _refuse_thousands(text, marks)
    plain = text.replace("−", "-")
    plain = plain.replace(",", ".", 1) if marks.comma and "." not in plain else plain
    try:
        value = math.nan if "_" in plain else float(plain)
    except ValueError:
        value = math.nan
    if math.isfinite(value):
        return value
    message = f"the reading {text!r} is no number. Correct it, or leave it blank."
    raise LabError(message)


def _result(text: str, marks: DecimalMarks) -> tuple[float, bool]:
    """Read a laboratory's result; a non-detect stands at half its limit."""
    _refuse_thousands(text, marks)
    cell = read_cell(text, decimal_comma=marks.comma)
    if cell.detected and cell.number is not None:
        return float(cell.number), False
    if cell.limit is None:
        message = f"the result {text!r} gives no limit. Write it as < and the limit."
        raise LabError(message)
    return float(cell.limit) / 2, True


def _refuse_thousands(text: str, marks: DecimalMarks) -> None:
    whole = like_thousands(text) if marks.point_unclear else ""
    if whole:
        message = f"{text!r} has a point that may part thousands. Type {whole}, or one digit more."
        raise LabError(message)
