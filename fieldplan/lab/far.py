"""Results far from all others: a unit or a decimal point that slipped shows as a wide gap."""

from collections.abc import Mapping, Sequence
from itertools import pairwise

from fieldplan.base.units import significant
from fieldplan.lab.model import LabRow
from fieldplan.lab.roles import IN_THE_MEAN
from fieldplan.lab.words import listed

WIDE = 100.0
"""Neighbours in order of size further apart than this are pointed out (common practice, no
source): concentrations lean, but seldom leave two powers of ten empty."""


def far_results_notes(
    file_name: str, rows: Sequence[LabRow], labels: Mapping[str, str]
) -> list[str]:
    """Name the few results that a wide gap parts from all others of their analyte.

    Parameters
    ----------
    file_name : str
    rows : sequence of LabRow
    labels : mapping of str to str
        Names of analytes by id.

    Returns
    -------
    list of str
        A sentence for each analyte that has such results; they count all the same.
    """
    notes = []
    for analyte, label in labels.items():
        own = [row for row in rows if row.analyte == analyte and row.role in IN_THE_MEAN]
        far, times, way = _beyond_the_gap(own)
        if far:
            named = [
                f"'{_written_id(r)}' with '{r.as_reported.strip()}' (row {r.row})" for r in far
            ]
            verb = "lies" if len(far) == 1 else "lie"
            notes.append(
                f"{file_name}: {label} of {listed(named)} {verb} a factor of "
                f"{significant(times)} {way} the nearest of the others. Check unit and decimal "
                "point with the laboratory; it counts as it stands."
            )
    return notes


def _beyond_the_gap(rows: Sequence[LabRow]) -> tuple[list[LabRow], float, str]:
    """Part the rows at the widest gap; give the fewer ones, the factor and the side."""
    ordered = sorted(_measured(rows), key=_size)
    if len(ordered) < 3:
        return [], 1.0, ""
    ratios = [_size(large) / _size(small) for small, large in pairwise(ordered)]
    times = max(ratios)
    below = ratios.index(times) + 1
    if times < WIDE or 2 * below == len(ordered):
        return [], 1.0, ""
    above = 2 * below > len(ordered)
    few = ordered[below:] if above else ordered[:below]
    return sorted(few, key=lambda row: row.row), times, "above" if above else "below"


def _measured(rows: Sequence[LabRow]) -> list[LabRow]:
    """Give detected results, and non-detects above half of them: a low limit is no slip."""
    found = sorted(_size(row) for row in rows if row.detected)
    middle = found[len(found) // 2] if found else 0.0
    return [row for row in rows if row.detected or (found and _size(row) > middle)]


def _size(row: LabRow) -> float:
    return row.result or row.reporting_limit or 0.0


def _written_id(row: LabRow) -> str:
    return row.sample_id or row.location_id
