"""Every analyte of the campaign, met with the plan from one laboratory file."""

from collections.abc import Sequence
from dataclasses import dataclass

from fieldplan.base.errors import LabError
from fieldplan.lab.model import LabTable
from fieldplan.lab.tables import capped
from fieldplan.plan.model import Plan
from fieldplan.returns.field import FieldReturn
from fieldplan.returns.ids import plain_id
from fieldplan.returns.laboratory import rows_of
from fieldplan.returns.matching import ConfirmedMatch
from fieldplan.returns.model import FieldRow, NearMatch, Returns
from fieldplan.returns.reconcile import reconcile


@dataclass(frozen=True)
class Received:
    """What one laboratory file brought of every analyte.

    Parameters
    ----------
    main : Returns
        Of the deciding analyte, or of the one asked for.
    others : tuple of Returns
        Of the campaign's other analytes that the file has results of, in the campaign's order.
    missing : tuple of str
        Ids of the analytes that it has none of.
    """

    main: Returns
    others: tuple[Returns, ...] = ()
    missing: tuple[str, ...] = ()

    @property
    def every(self) -> tuple[Returns, ...]:
        """All returns, the main one first."""
        return (self.main, *self.others)

    @property
    def needs_you(self) -> tuple[NearMatch, ...]:
        """What waits for the user; a jar that several analytes name is asked for once."""
        asked: set[str] = set()
        questions: list[NearMatch] = []
        for returns in self.every:
            new = [m for m in returns.needs_you if plain_id(m.as_written) not in asked]
            questions += new
            asked |= {plain_id(match.as_written) for match in new}
        return tuple(questions)


def reconcile_all(
    plan: Plan,
    lab_table: LabTable,
    field_rows: FieldReturn | Sequence[FieldRow] = (),
    *,
    confirmed: Sequence[ConfirmedMatch] = (),
    analyte: str | None = None,
) -> Received:
    """Meet the results of every analyte with the plan.

    Parameters
    ----------
    plan : Plan
    lab_table : LabTable
    field_rows : FieldReturn or sequence of FieldRow
    confirmed : sequence of ConfirmedMatch
    analyte : str, optional
        Only this one.

    Returns
    -------
    Received

    Raises
    ------
    LabError
        A fault in the rows of any analyte, all of them at once: a file is right or it is not.
        The main analyte has no result. Another one without a result is no fault and is named.
    """
    main = analyte or plan.campaign.deciding_analyte.id
    besides = [a.id for a in plan.campaign.analyte if a.id != main] if analyte is None else []
    missing = tuple(name for name in besides if not rows_of(lab_table, name))
    problems: list[str] = []
    found: list[Returns] = []
    for name in (main, *(other for other in besides if other not in missing)):
        try:
            found.append(reconcile(plan, lab_table, field_rows, confirmed=confirmed, analyte=name))
        except LabError as fault:
            problems += [line for line in fault.problems if line not in problems]
    if problems:
        raise LabError(*capped(problems))
    return Received(found[0], tuple(found[1:]), missing)
