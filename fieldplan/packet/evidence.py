"""What a packet can prove: its fingerprint, and where it differs from what was written."""

import hashlib
from dataclasses import dataclass
from pathlib import Path

from fieldplan.base.errors import RecordError
from fieldplan.packet.folder import MANIFEST_PLACE, changed_files, listed
from fieldplan.plan.agreement import disagreements
from fieldplan.plan.model import Plan
from fieldplan.plan.record import RECORD_PLACE

FILLED_BY_CREW = "crew/field_return.csv"


@dataclass(frozen=True)
class Evidence:
    """What the files of a packet say about each other.

    Parameters
    ----------
    fingerprint : str
        First 16 hexadecimal digits of the SHA-256 of the manifest, which holds the SHA-256 of
        every file; empty when the manifest is missing. Lodged with somebody else, it shows
        later that nothing was changed.
    record : tuple of str
        Why the record cannot be relied on, in sentences.
    others : tuple of str
        Which other files were changed or removed, in sentences.
    """

    fingerprint: str
    record: tuple[str, ...]
    others: tuple[str, ...]

    @property
    def sentences(self) -> tuple[str, ...]:
        """Everything that differs, the record first."""
        return (*self.record, *self.others)


def packet_folder(packet: Path) -> Path:
    """Return the packet's folder, whether it or its record was named."""
    return packet.parent.parent if packet.is_file() else packet


def packet_fingerprint(packet: Path) -> str:
    """Return the fingerprint of a packet, empty when it has no manifest.

    Parameters
    ----------
    packet : Path
        Its folder, or its record.
    """
    path = packet_folder(packet) / MANIFEST_PLACE
    return hashlib.sha256(path.read_bytes()).hexdigest()[:16] if path.is_file() else ""


def examine(packet: Path, plan: Plan) -> Evidence:
    """Compare a packet with its manifest, and its record with itself.

    The crew's return form may be filled in where it lies, and files may be added.

    Parameters
    ----------
    packet : Path
        Its folder, or its record.
    plan : Plan
        Read from it.
    """
    folder = packet_folder(packet)
    record = [f"{RECORD_PLACE.as_posix()}: {sentence}." for sentence in disagreements(plan)]
    try:
        changed = changed_files(folder)
    except RecordError:
        missing = f"{MANIFEST_PLACE.as_posix()} is missing or damaged: no file can be vouched for."
        return Evidence(packet_fingerprint(folder), tuple(record), (missing,))
    if RECORD_PLACE.as_posix() in changed:
        record.insert(0, f"{RECORD_PLACE.as_posix()} is not the file that the manifest names.")
    others = [
        f"{name} was changed or removed after the packet was written."
        for name in changed
        if name not in {RECORD_PLACE.as_posix(), FILLED_BY_CREW} and listed(folder, name)
    ]
    return Evidence(packet_fingerprint(folder), tuple(record), tuple(others))


def rely_on(packet: Path, plan: Plan) -> Evidence:
    """Examine a packet and refuse it when its record was changed.

    Parameters
    ----------
    packet : Path
        Its folder, or its record.
    plan : Plan
        Read from it.

    Raises
    ------
    RecordError
        The record is not the one that the manifest names, or contradicts itself.
    """
    evidence = examine(packet, plan)
    if evidence.record:
        advice = "Restore the packet from a copy; an estimate needs the record as it was written."
        raise RecordError(
            *(f"{packet_folder(packet)}: {line} {advice}" for line in evidence.record)
        )
    return evidence
