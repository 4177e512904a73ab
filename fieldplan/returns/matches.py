"""``matches.csv``: proposals that the user answers with yes or no and hands back."""

import csv
import io
from collections.abc import Sequence
from pathlib import Path

from fieldplan.base.errors import LabError
from fieldplan.lab.columns import find_columns
from fieldplan.lab.model import LabTable
from fieldplan.lab.row import RowCells
from fieldplan.lab.tables import read_tables
from fieldplan.plan.model import Plan
from fieldplan.returns.form import as_text
from fieldplan.returns.ids import plain_id
from fieldplan.returns.laboratory import rows_of
from fieldplan.returns.matching import ConfirmedMatch, match_rows
from fieldplan.returns.model import NearMatch

MATCH_COLUMNS = ("row", "as_written", "proposed", "why", "confirm", "confirmed_by")


def propose_matches(
    plan: Plan,
    lab_table: LabTable,
    *,
    confirmed: Sequence[ConfirmedMatch] = (),
    analyte: str | None = None,
) -> tuple[NearMatch, ...]:
    """List laboratory ids that no planned sample has, with the planned ids they resemble.

    Parameters
    ----------
    plan : Plan
    lab_table : LabTable
    confirmed : sequence of ConfirmedMatch
        Answers so far.
    analyte : str, optional
        Whose rows are looked at; the deciding one's unless given.

    Returns
    -------
    tuple of NearMatch
        Empty when nothing is left to decide.
    """
    asked = analyte or plan.campaign.deciding_analyte.id
    rows = rows_of(lab_table, asked)
    others = [row for row in lab_table.rows if row.analyte != asked]
    found = match_rows(plan, rows, analyte=asked, confirmed=confirmed, elsewhere=others)
    return tuple(found.near)


def matches_csv(near: Sequence[NearMatch], *, confirmed: Sequence[ConfirmedMatch] = ()) -> str:
    """Write proposals as a file to answer; answers given before are kept.

    Parameters
    ----------
    near : sequence of NearMatch
    confirmed : sequence of ConfirmedMatch

    Returns
    -------
    str
        CSV with CRLF line ends; the column ``confirm`` waits for yes or no, ``confirmed_by`` for
        the name of whoever says so.

    Examples
    --------
    >>> matches_csv([NearMatch(7, "fc 01", "FC-01", "case")]).splitlines()[1]
    '7,fc 01,FC-01,case,,'
    """
    text = io.StringIO(newline="")
    writer = csv.writer(text)
    writer.writerow(MATCH_COLUMNS)
    for answer in confirmed:
        if answer.confirmed is not None:
            word = "yes" if answer.confirmed else "no"
            cells = [as_text(answer.as_written), as_text(answer.proposed), "answered before", word]
            writer.writerow([str(answer.row), *cells, as_text(answer.by)])
    for match in near:
        writer.writerow(
            [str(match.row), as_text(match.as_written), as_text(match.proposed), match.why, "", ""]
        )
    return text.getvalue()


def read_matches(path: Path) -> tuple[ConfirmedMatch, ...]:
    """Read the answers that the user gave.

    Parameters
    ----------
    path : Path
        ``matches.csv`` as written by the command, with the column ``confirm`` filled in.

    Returns
    -------
    tuple of ConfirmedMatch

    Raises
    ------
    LabError
        The file cannot be read, or a row number or an answer is none; all at once.
    """
    table = read_tables(path)[0]
    found = find_columns(table, MATCH_COLUMNS, ("row", "as_written", "proposed", "confirm"))
    answers = {"yes": True, "y": True, "no": False, "n": False, "": None}
    matches, problems = [], []
    for number, cells in table.rows:
        row = RowCells(table, found, number, cells)
        word, counted_row = row.tidy("confirm").casefold(), row.tidy("row")
        if word not in answers:
            problems.append(f"{path.name} row {number}: confirm '{word}' must be yes or no.")
        if not (counted_row.isascii() and counted_row.isdigit()):
            problems.append(f"{path.name} row {number}: row '{counted_row}' is no row number.")
            continue
        matches.append(
            ConfirmedMatch(
                row=int(counted_row[:9]),
                as_written=plain_id(row.text("as_written")),
                proposed=plain_id(row.text("proposed")),
                confirmed=answers.get(word),
                by=plain_id(row.text("confirmed_by")),
            )
        )
    if problems:
        raise LabError(*problems)
    return tuple(matches)
