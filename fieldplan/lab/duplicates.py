"""One value a location: duplicates are handled once, by the recorded rule, and add no n."""

from collections.abc import Sequence
from dataclasses import dataclass

from fieldplan.lab.model import LabRow


@dataclass(frozen=True)
class MergedResult:
    """The value of one location, with its non-detects at 0, at half and at their limit."""

    low: float
    half: float
    high: float
    detected: bool


def bounds(row: LabRow) -> tuple[float, float, float]:
    """Give one result with a non-detect at 0, at half and at its limit.

    Parameters
    ----------
    row : LabRow

    Returns
    -------
    low, half, high : float
        All the same when it was detected.

    Examples
    --------
    >>> bounds(LabRow(2, "A", "", "lead", "<5", None, False, 5.0, "mg/kg"))
    (0.0, 2.5, 5.0)
    """
    if row.result is not None:
        return row.result, row.result, row.result
    limit = row.reporting_limit or 0.0
    return 0.0, limit / 2, limit


def merge_results(rows: Sequence[LabRow], rule: str) -> MergedResult:
    """Make one value from the results of one location.

    Parameters
    ----------
    rows : sequence of LabRow
        At least one; the field sample before its duplicates.
    rule : str
        ``average``, or ``first`` for the field sample alone.

    Returns
    -------
    MergedResult

    Examples
    --------
    >>> first = LabRow(2, "A", "", "lead", "8", 8.0, True, None, "mg/kg")
    >>> second = LabRow(3, "A", "", "lead", "<5", None, False, 5.0, "mg/kg")
    >>> merge_results([first, second], "average")
    MergedResult(low=4.0, half=5.25, high=6.5, detected=False)
    """
    used = rows[:1] if rule == "first" else rows
    ends = [bounds(row) for row in used]
    low, half, high = (sum(values) / len(used) for values in zip(*ends, strict=True))
    return MergedResult(low, half, high, all(row.detected for row in used))
