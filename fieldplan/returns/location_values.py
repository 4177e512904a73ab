"""From matched rows to one value a location."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from fieldplan.lab.duplicates import MergedResult, merge_results
from fieldplan.lab.model import LabRow
from fieldplan.lab.words import listed
from fieldplan.plan.model import Plan


@dataclass(frozen=True)
class LocationValue:
    """The value of one location and the samples and rows behind it, the field sample first."""

    merged: MergedResult
    sample_ids: tuple[str, ...]
    rows: tuple[LabRow, ...]


def one_row_a_sample(
    file_name: str, by_sample: Mapping[str, Sequence[LabRow]]
) -> tuple[dict[str, list[LabRow]], list[str], list[str]]:
    """Drop rows that repeat a sample's result; two different results are a question.

    Parameters
    ----------
    file_name : str
    by_sample : mapping of str to sequence of LabRow

    Returns
    -------
    rows : dict of str to list of LabRow
        One row a sample, or a field sample and a duplicate that the plan did not foresee.
    problems, notes : list of str
    """
    kept: dict[str, list[LabRow]] = {}
    problems, repeats = [], []
    for sample_id, rows in by_sample.items():
        for row in rows:
            same_role = [r for r in kept.get(sample_id, []) if r.role == row.role]
            if not same_role:
                kept.setdefault(sample_id, []).append(row)
            elif _said(same_role[0]) == _said(row):
                repeats.append(str(row.row))
            else:
                problems.append(
                    f"{file_name} row {row.row}: sample '{sample_id}' has a second result "
                    f"'{row.as_reported.strip()}' beside '{same_role[0].as_reported.strip()}' in "
                    f"row {same_role[0].row}. If it is a revision or another dilution, keep the "
                    "row that the laboratory reports and delete the other."
                )
    notes = [f"{file_name}: rows that repeat a result were read once: row {listed(repeats)}."]
    return kept, problems, notes if repeats else []


def _said(row: LabRow) -> tuple[float | None, float | None]:
    return row.result, None if row.detected else row.reporting_limit


def location_values(
    plan: Plan, by_sample: Mapping[str, Sequence[LabRow]]
) -> dict[str, LocationValue]:
    """Merge the samples of each location by the recorded rule for duplicates.

    Parameters
    ----------
    plan : Plan
    by_sample : mapping of str to sequence of LabRow
        As from ``one_row_a_sample``.

    Returns
    -------
    dict of str to LocationValue
        By location id; locations without a result are absent.
    """
    values = {}
    rule = plan.campaign.rules.duplicates
    for place in plan.locations.places:
        samples = sorted(plan.samples.at(place.location_id), key=lambda sample: bool(sample.qc_of))
        rows = [row for s in samples for row in by_sample.get(s.sample_id, ())]
        if rows:
            names = tuple(s.sample_id for s in samples if s.sample_id in by_sample)
            values[place.location_id] = LocationValue(merge_results(rows, rule), names, tuple(rows))
    return values
