"""Numbered folders that appear whole or not at all, and are never replaced."""

import hashlib
import json
import os
import re
import secrets
import shutil
from collections.abc import Callable
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
    pattern = re.compile(re.escape(stem) + r"(\d{2,})(-draft)?", re.IGNORECASE)
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
    make_way: Callable[[], None] | None = None,
) -> Path:
    """Fill a hidden folder beside ``target``, then give it its name in one step.

    Parameters
    ----------
    target : Path
        Must not exist, unless ``make_way`` moves it. Its parent is made if need be.
    fill : callable
        Writes the content into the folder it is given.
    make_way : callable, optional
        Called when the content is complete, just before the folder gets its name.

    Returns
    -------
    Path
        ``target``.

    Raises
    ------
    RecordError
        ``target`` exists, or the folder cannot be written.
    """
    if target.exists() and make_way is None:
        message = f"{target} is there already and is never replaced; pack the next revision."
        raise RecordError(message)
    staging: Path | None = None
    try:
        target.parent.mkdir(parents=True, exist_ok=True)
        _sweep(target)
        staging = target.with_name(f".{target.name}.{secrets.token_hex(4)}.part")
        staging.mkdir()
        fill(staging)
        _settle(staging)
        if make_way is not None:
            make_way()
        staging.rename(target)
    except OSError as fault:
        message = (
            f"{target} cannot be written ({fault.strerror or fault}). Close what is open in it, "
            "or name another folder with --out; nothing half-written was left."
        )
        raise RecordError(message) from fault
    finally:
        if staging is not None:
            shutil.rmtree(staging, ignore_errors=True)
    return target


def _sweep(target: Path) -> None:
    """Remove what a killed run left behind under a hidden name of its own."""
    for leftover in target.parent.glob(f".{target.name}.????????.part"):
        shutil.rmtree(leftover, ignore_errors=True)


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
        if path.is_file() and name != MANIFEST_PLACE:
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
    except (OSError, ValueError, AttributeError) as fault:
        message = f"{folder / MANIFEST_PLACE} cannot be read ({fault}). Pack the campaign again."
        raise RecordError(message) from fault
    present = file_hashes(folder)
    names = set(known) | set(present)
    return tuple(sorted(name for name in names if known.get(name) != present.get(name)))
