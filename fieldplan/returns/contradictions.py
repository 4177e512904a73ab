"""Results of jars that, by the crew's return, cannot have one."""

from collections.abc import Mapping, Sequence

from fieldplan.lab.model import LabRow
from fieldplan.plan.model import Plan
from fieldplan.returns.field import FieldReturn
from fieldplan.returns.model import FieldRow

OF_THE_JAR = {"broken": "is broken", "lost": "is lost"}
"""Reasons that leave nothing for a laboratory to report."""


def contradictions(
    plan: Plan, given: FieldReturn, by_sample: Mapping[str, Sequence[LabRow]], *, file_name: str
) -> list[str]:
    """Say which results belong to jars that were not taken, broke or were lost.

    Parameters
    ----------
    plan : Plan
    given : FieldReturn
    by_sample : mapping of str to sequence of LabRow
        Rows by the sample that they were matched with, exactly or by an answer.
    file_name : str
        The laboratory's file.

    Returns
    -------
    list of str
        One sentence for each; somebody has to say which of the two is wrong.
    """
    problems = []
    for line in given.rows:
        fate = "was not taken" if line.taken is False else OF_THE_JAR.get(line.reason, "")
        for sample_id in _samples_of(plan, line) if fate else ():
            for row in by_sample.get(sample_id, ())[:1]:
                of = f" of {line.location_id}" if line.location_id else ""
                problems.append(
                    f"{file_name} row {row.row}: the laboratory reports "
                    f"'{row.as_reported.strip()}' for sample '{sample_id}'{of}, but "
                    f"{given.file_name} row {line.row} says that it {fate}. Correct the return, or "
                    "delete the row if the jar was mixed up."
                )
    return problems


def _samples_of(plan: Plan, line: FieldRow) -> list[str]:
    """Name the samples that a line speaks of: its own, else all of its location."""
    if line.sample_id:
        return [line.sample_id]
    return [sample.sample_id for sample in plan.samples.at(line.location_id)]
