"""What came back, set against the plan."""

from dataclasses import dataclass
from typing import Literal

from fieldplan.lab.model import LeftOutRow


@dataclass(frozen=True)
class FieldRow:
    """One line of the crew's return.

    ``taken`` is None where the crew left it blank; ``reason`` is one of our own codes.
    """

    row: int
    location_id: str
    sample_id: str
    taken: bool | None
    collected_at: str = ""
    utc_offset: str = ""
    actual_latitude: float | None = None
    actual_longitude: float | None = None
    replaced_by: str = ""
    reason: str = ""
    initials: str = ""
    note: str = ""


@dataclass(frozen=True)
class NearMatch:
    """A laboratory id that no planned sample has, with the planned ids it resembles.

    Nothing is applied until the user confirms it in ``matches.csv``.
    """

    row: int
    as_written: str
    proposed: str
    why: str


@dataclass(frozen=True)
class ConfirmedId:
    """A laboratory row that belongs to a sample because a person said so; ``by`` may be empty."""

    row: int
    as_written: str
    sample_id: str
    by: str


@dataclass(frozen=True)
class LocationResult:
    """The value of one location, after duplicates were handled by the recorded rule.

    Parameters
    ----------
    location_id, stratum, location_class : str
    sample_ids : tuple of str
        Samples that went into the value.
    as_reported : tuple of str
        Their cells as written.
    low, half, high : float
        The value with non-detects at 0, half and the limit (equal when all were detected).
    detected : bool
        True when every result behind the value was detected.
    used : bool
        In the mean.
    why_not : str
        Sentence when ``used`` is False.
    latitude, longitude : float
        Planned position.
    actual_latitude, actual_longitude : float or None
    moved_m : float or None
        Distance planned to actual.
    stands_in_for : str
        For a used alternate: the location it replaces.
    """

    location_id: str
    stratum: str
    location_class: str
    sample_ids: tuple[str, ...]
    as_reported: tuple[str, ...]
    low: float
    half: float
    high: float
    detected: bool
    used: bool
    why_not: str
    latitude: float
    longitude: float
    actual_latitude: float | None = None
    actual_longitude: float | None = None
    moved_m: float | None = None
    stands_in_for: str = ""


@dataclass(frozen=True)
class LostLocation:
    """A planned random location with no result, and what the return says of it."""

    location_id: str
    stratum: str
    reason: str
    replaced_by: str


@dataclass(frozen=True)
class Returns:
    """The reconciled campaign.

    Parameters
    ----------
    analyte : str
    results : tuple of LocationResult
        In the plan's order, targeted places and control samples apart.
    lost : tuple of LostLocation
    matched, planned_samples, extra : int
        Laboratory rows matched, planned samples expected, rows that belong to no planned sample.
    needs_you : tuple of NearMatch
        Not empty means that no estimate is made until the user confirms.
    lab_file, lab_sha256, field_file, field_sha256 : str
    duplicate_pairs : tuple of (str, float or None, float or None)
        Location, first and second result; None for a non-detect.
    notes : tuple of str
        Sentences: missing, extra, moved outside tolerance, moved outside its stratum …
    left_out : tuple of LeftOutRow
        Rows of the laboratory's file that are in no mean, each with its value and why.
    with_rejected : Returns or None
        The same with the results counted that the laboratory rejected; None without such.
    confirmed : tuple of ConfirmedId
        Rows that were matched by an answer in ``matches.csv``.
    first_collected : str
        Earliest date of collection in the field return, ISO; empty where none can be read.
    """

    analyte: str
    results: tuple[LocationResult, ...]
    lost: tuple[LostLocation, ...]
    matched: int
    planned_samples: int
    extra: int
    needs_you: tuple[NearMatch, ...]
    lab_file: str
    lab_sha256: str
    field_file: str = ""
    field_sha256: str = ""
    duplicate_pairs: tuple[tuple[str, float | None, float | None], ...] = ()
    notes: tuple[str, ...] = ()
    left_out: tuple[LeftOutRow, ...] = ()
    with_rejected: "Returns | None" = None
    confirmed: tuple[ConfirmedId, ...] = ()
    first_collected: str = ""


ReasonCode = Literal[
    "no-access", "obstructed", "unsafe", "outside", "dry", "frozen", "no-recovery", "broken",
    "lost", "other",
]  # fmt: skip
