"""Rows that the laboratory made for itself: named and left out, unless they claim a jar."""

from collections.abc import Sequence
from dataclasses import replace

from fieldplan.lab.model import OTHER_ANALYTE, REJECTED, LabRow, LabTable, LeftOutRow
from fieldplan.lab.roles import IN_THE_MEAN
from fieldplan.plan.model import Plan
from fieldplan.returns.ids import likeness, plain_id

LABORATORY_ROLES = ("laboratory duplicate", "laboratory control", "method blank", "matrix spike")
"""Rows that the laboratory made for itself; they belong to no planned sample."""
MADE_FROM_NOTHING_OF_OURS = frozenset({"laboratory control", "method blank"})
"""Those that are made without a sample of the client, so that none can bear the id of one."""


def rows_of(lab_table: LabTable, analyte: str) -> list[LabRow]:
    """Give the rows of one analyte, without those that the laboratory made for itself.

    Parameters
    ----------
    lab_table : LabTable
    analyte : str
        Its id.
    """
    return [
        row for row in lab_table.rows if row.analyte == analyte and row.role not in LABORATORY_ROLES
    ]


def id_as_written(row: LabRow) -> str:
    """Give the id that a row is known by: the sample's, else the location's.

    Parameters
    ----------
    row : LabRow
    """
    return row.sample_id or row.location_id


def left_out(row: LabRow, why: str) -> LeftOutRow:
    """Keep a row that is not used, as it was written.

    Parameters
    ----------
    row : LabRow
    why : str
    """
    return LeftOutRow(row.row, id_as_written(row), row.analyte, row.as_reported.strip(), why)


def own_controls(lab_table: LabTable, analyte: str) -> list[LeftOutRow]:
    """List the laboratory's own controls; a duplicate or spike may well bear the id of a jar.

    Parameters
    ----------
    lab_table : LabTable
    analyte : str
        Its id.
    """
    return [
        left_out(row, f"{row.role}, made by the laboratory for itself")
        for row in lab_table.rows
        if row.analyte == analyte and row.role in LABORATORY_ROLES
    ]


def not_read(plan: Plan, lab_table: LabTable, analyte: str) -> list[LeftOutRow]:
    """List what the reader left out: rejected results, and issued jars under other analytes.

    Parameters
    ----------
    plan : Plan
    lab_table : LabTable
    analyte : str
        Its id; results rejected for another one are left to that one.
    """
    issued = {likeness(sample.sample_id) for sample in plan.samples.samples}
    issued |= {likeness(place.location_id) for place in plan.locations.places}
    return [
        entry
        for entry in lab_table.left_out
        if (entry.why == REJECTED and entry.analyte == analyte)
        or (entry.why == OTHER_ANALYTE and likeness(entry.written_id) in issued)
    ]


def with_rejected(lab_table: LabTable, analyte: str) -> LabTable | None:
    """Put the rejected results of one analyte back among the others.

    Parameters
    ----------
    lab_table : LabTable
    analyte : str
        Its id.

    Returns
    -------
    LabTable or None
        None where none was rejected, or where every jar of theirs has a result that was not.
    """
    kept = {(plain_id(id_as_written(row)), row.role) for row in rows_of(lab_table, analyte)}
    back = [
        row
        for row in lab_table.rejected
        if row.analyte == analyte and (plain_id(id_as_written(row)), row.role) not in kept
    ]
    if not back:
        return None
    rows = sorted([*lab_table.rows, *back], key=lambda row: row.row)
    return replace(lab_table, rows=tuple(rows), rejected=(), notes=())


def claimed_jars(plan: Plan, rows: Sequence[LabRow], file_name: str) -> list[str]:
    """Refuse rows that bear the id of an issued jar and call it a control of the laboratory.

    Parameters
    ----------
    plan : Plan
    rows : sequence of LabRow
        Of one analyte.
    file_name : str
        For messages.

    Returns
    -------
    list of str
        A sentence for each; left out in silence, a high result would lower the mean.
    """
    issued = {likeness(s.sample_id): s for s in plan.samples.samples if s.role in IN_THE_MEAN}
    problems = []
    for row in rows:
        sample = issued.get(likeness(id_as_written(row)))
        if sample is not None and row.role in MADE_FROM_NOTHING_OF_OURS:
            problems.append(
                f"{file_name} row {row.row}: role '{row.role}' with '{row.as_reported.strip()}', "
                f"but '{id_as_written(row)}' is the id of the issued sample {sample.sample_id} of "
                f"{sample.location_id}. Ask the laboratory which is right: the role, or the id."
            )
    return problems
