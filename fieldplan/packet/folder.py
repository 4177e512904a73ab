"""Numbered folders that appear whole or not at all, and are never replaced."""

import glob
import hashlib
import json
import os
import re
import secrets
import shutil
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path

from fieldplan.base.errors import RecordError

MANIFEST_PLACE = Path("office") / "manifest.json"


def taken_numbers(parent: Path, stem: str) -> set[int]:
    """Find the numbers in use for folders called ``stem`` and two digits.

    Parameters
    ----------
    parent : Path
        Folder to look in; need not exist.
    stem : str
        e.g. ``HL-r``; ``HL-r01`` and ``HL-r01-draft`` both take number 1.
    """
    pattern = re.compile(re.escape(stem) + r"(\d{2,3})(-draft)?", re.IGNORECASE)
    names = [entry.name for entry in parent.iterdir()] if parent.is_dir() else []
    return {int(found.group(1)) for name in names if (found := pattern.fullmatch(name))}


def next_number(parent: Path, stem: str) -> int:
    """Return the number after the highest in use, 1 when there is none.

    Parameters
    ----------
    parent : Path
        Folder to look in.
    stem : str
        e.g. ``HL-r``.
    """
    return max(taken_numbers(parent, stem), default=0) + 1


def build_folder(
    target: Path,
    fill: Callable[[Path], None],
    *,
    make_way: Callable[[], Callable[[], object]] | None = None,
) -> Path:
    """Fill a hidden folder beside ``target``, then give it its name in one step.

    Parameters
    ----------
    target : Path
        Must not exist, unless ``make_way`` moves it. Its parent is made if need be.
    fill : callable
        Writes the content into the folder it is given.
    make_way : callable, optional
        Called when the content is complete, just before the folder gets its name; returns what
        puts things back if that fails.

    Returns
    -------
    Path
        ``target``.

    Raises
    ------
    RecordError
        ``target`` exists or lies inside a packet, or the folder cannot be written.
    """
    if make_way is None:
        _must_be_free(target)
    must_be_outside_packets(target.parent)
    try:
        target.parent.mkdir(parents=True, exist_ok=True)
        _sweep(target)
        with _staging(target) as staging:
            fill(staging)
            _settle(staging)
            _give_name(staging, target, make_way)
    except OSError as fault:
        message = (
            f"{target} cannot be written ({fault.strerror or fault}). Close what is open in it, "
            "or choose another folder; nothing half-written was left."
        )
        raise RecordError(message) from fault
    return target


def _give_name(
    staging: Path, target: Path, make_way: Callable[[], Callable[[], object]] | None
) -> None:
    put_back = make_way() if make_way is not None else None
    try:
        _must_be_free(target)
        staging.rename(target)
    except (OSError, RecordError):
        if put_back is not None:
            put_back()
        raise


def _must_be_free(target: Path) -> None:
    if target.exists() or target.is_symlink():
        message = (
            f"{target} is there already and is never replaced. If another run has just written "
            "it, run the command again: it takes the next number."
        )
        raise RecordError(message)


def must_be_outside_packets(place: Path) -> None:
    """Refuse a place inside a packet: what was issued never changes.

    Parameters
    ----------
    place : Path
        A folder to be written into; need not exist.

    Raises
    ------
    RecordError
        It lies in a packet.
    """
    whole = place.absolute()
    for folder in (whole, *whole.parents):
        if (folder / "office" / "record.json").is_file():
            message = f"{place} lies inside the packet {folder.name}; choose a folder outside it."
            raise RecordError(message)


@contextmanager
def _staging(target: Path) -> Iterator[Path]:
    """Make a hidden folder that says by a lock that somebody is filling it; remove what is left."""
    staging = target.with_name(f".{target.name}.{secrets.token_hex(4)}.part")
    staging.mkdir()
    lock = _hold(staging)
    try:
        yield staging
    finally:
        if lock is not None:
            os.close(lock)
        shutil.rmtree(staging, ignore_errors=True)


def _hold(folder: Path) -> int | None:
    """Lock a folder for as long as this process lives; None where systems have no such lock.

    Raises
    ------
    OSError
        Somebody else holds it.
    """
    try:
        import fcntl
    except ImportError:
        return None
    handle = os.open(folder, os.O_RDONLY)
    try:
        fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except OSError:
        os.close(handle)
        raise
    return handle


def _sweep(target: Path) -> None:
    """Remove what killed runs left for this name; a folder that is being filled stays."""
    for leftover in target.parent.glob(f".{glob.escape(target.name)}.????????.part"):
        try:
            lock = _hold(leftover)
        except OSError:
            continue
        if lock is not None:
            shutil.rmtree(leftover, ignore_errors=True)
            os.close(lock)


def _settle(folder: Path) -> None:
    """Ask the system to put every file on the disk before the folder gets its name."""
    for path in folder.rglob("*"):
        if path.is_file():
            with path.open("rb+") as stream:
                os.fsync(stream.fileno())


def write_manifest(folder: Path) -> Path:
    """List every file of a packet with its SHA-256.

    Parameters
    ----------
    folder : Path
        A packet, complete but for its manifest.
    """
    path = folder / MANIFEST_PLACE
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_text(json.dumps(file_hashes(folder), indent=2) + "\n", encoding="utf-8")
    return path


def file_hashes(folder: Path) -> dict[str, str]:
    """Hash every file below a folder, its manifest left out.

    Parameters
    ----------
    folder : Path
        Names are relative to it, with ``/``.
    """
    found = {}
    for path in sorted(folder.rglob("*")):
        name = path.relative_to(folder)
        if path.is_file() and not path.is_symlink() and name != MANIFEST_PLACE:
            found[name.as_posix()] = hashlib.sha256(path.read_bytes()).hexdigest()
    return found


def listed(folder: Path, name: str) -> bool:
    """Return whether the manifest knows a file; others were added later.

    Parameters
    ----------
    folder : Path
        A packet with a manifest that can be read.
    name : str
        Relative to it, with ``/``.
    """
    return name in json.loads((folder / MANIFEST_PLACE).read_text(encoding="utf-8"))


def changed_files(folder: Path) -> tuple[str, ...]:
    """Name the files that were changed, added or removed since the manifest was written.

    Parameters
    ----------
    folder : Path
        A packet.

    Raises
    ------
    RecordError
        The manifest is missing or cannot be read.
    """
    try:
        recorded = json.loads((folder / MANIFEST_PLACE).read_text(encoding="utf-8"))
        known = {str(name): str(value) for name, value in recorded.items()}
    except (OSError, ValueError, AttributeError, RecursionError) as fault:
        message = f"{folder / MANIFEST_PLACE} cannot be read ({fault}). Pack the campaign again."
        raise RecordError(message) from fault
    present = file_hashes(folder)
    names = set(known) | set(present)
    return tuple(sorted(name for name in names if known.get(name) != present.get(name)))
