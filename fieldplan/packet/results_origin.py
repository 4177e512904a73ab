"""Where results come from: the files handed in, and the estimates made before from one plan."""

import hashlib
import json
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from fieldplan.base.errors import RecordError
from fieldplan.estimate.model import Answers, Interval
from fieldplan.packet.folder import taken_numbers


@dataclass(frozen=True)
class PastAnswer:
    """The mean of one analyte as an earlier estimate gave it; ``changed`` names changed rules."""

    mean: float
    interval: Interval
    unit: str
    changed: tuple[str, ...] = ()


@dataclass(frozen=True)
class EarlierResults:
    """One earlier results folder of the same plan.

    Parameters
    ----------
    folder : str
        Its name.
    lab_file, lab_sha256 : str
    answers : mapping of str to PastAnswer
        By analyte; empty where ``results.json`` is gone or cannot be read.
    """

    folder: str
    lab_file: str
    lab_sha256: str
    answers: dict[str, PastAnswer]


@dataclass(frozen=True)
class ResultsOrigin:
    """What the sheet says of where its results come from.

    Parameters
    ----------
    files : tuple of (str, str)
        SHA-256 and name of every file handed in, as copied beside the sheet.
    report_number : str
        The laboratory's own, as typed by the user; empty when none was given.
    earlier : tuple of EarlierResults
        In the order of their numbers.
    packet_fingerprint : str
        From ``packet.evidence``; empty when the packet has no manifest.
    packet_differs : tuple of str
        Files of the packet that were changed or removed, in sentences.
    """

    files: tuple[tuple[str, str], ...] = ()
    report_number: str = ""
    earlier: tuple[EarlierResults, ...] = ()
    packet_fingerprint: str = ""
    packet_differs: tuple[str, ...] = ()


def earlier_results(folders: Iterable[Path], stem: str) -> tuple[EarlierResults, ...]:
    """Read what earlier estimates of one plan answered.

    Parameters
    ----------
    folders : iterable of Path
        Where results of the plan may lie; need not exist. Names of folders in any but the first
        have their parent's name before them.
    stem : str
        e.g. ``HL-r01-results-``; a number that is missing between others is listed too.

    Returns
    -------
    tuple of EarlierResults
    """
    places = list(dict.fromkeys(folder.absolute() for folder in folders))
    return tuple(
        _read(place / f"{stem}{number:02d}", "" if place == places[0] else f"{place.name}/")
        for place in places
        for number in range(1, max(taken_numbers(place, stem), default=0) + 1)
    )


def _read(folder: Path, within: str) -> EarlierResults:
    try:
        content = json.loads((folder / "results.json").read_text(encoding="utf-8"))
        parts = [content, *content.get("others", [])]
        answers = {str(part["analyte"]): _answer(part) for part in parts}
        returns = content["returns"]
        lab_file, digest = str(returns["lab_file"]), str(returns["lab_sha256"])
    except (OSError, ValueError, KeyError, TypeError, AttributeError):
        return EarlierResults(f"{within}{folder.name}", "", "", {})
    return EarlierResults(f"{within}{folder.name}", lab_file, digest, answers)


def _answer(part: dict[str, Any]) -> PastAnswer:
    ends = part["interval"]
    low, high = (None if ends[end] is None else float(ends[end]) for end in ("low", "high"))
    return PastAnswer(
        mean=float(part["mean"]),
        interval=Interval(str(ends["kind"]), float(ends["confidence"]), low, high),
        unit=str(part["unit"]),
        changed=tuple(str(change["rule"]) for change in part["changes_after_results"]),
    )


def keep_files(
    sources: Sequence[Path], folder: Path, *, answers: Answers
) -> tuple[tuple[str, str], ...]:
    """Copy the files behind the results; a second file of the same name gets a number.

    Parameters
    ----------
    sources : sequence of Path
    folder : Path
        Where the copies go; it exists.
    answers : Answers
        Made from them.

    Returns
    -------
    tuple of (str, str)
        SHA-256 and name of each copy.

    Raises
    ------
    RecordError
        A file is no longer the one that was read.
    """
    kept = []
    for number, source in enumerate(sources, start=1):
        content = source.read_bytes()
        target = folder / source.name
        if target.exists():
            target = folder / f"{number}-{source.name}"
        target.write_bytes(content)
        kept.append((hashlib.sha256(content).hexdigest(), target.name))
    returns = answers.main.returns
    read = {returns.lab_file: returns.lab_sha256, returns.field_file: returns.field_sha256}
    for digest, name in kept:
        if read.get(name, digest) != digest:
            message = f"{name} was changed while the estimate was made. Run the command again."
            raise RecordError(message)
    return tuple(kept)
