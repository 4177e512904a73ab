"""Whole files or none: a write that is cut short leaves what stood there before."""

import os
import secrets
import stat
from contextlib import suppress
from pathlib import Path

from fieldplan.base.errors import FieldplanError

NOT_ORDINARY = "is no ordinary file (a pipe or a device)"
"""What messages say of a path that leads to something else than a file on a disk."""


def is_ordinary(path: Path) -> bool:
    """Tell whether a path leads to a file or folder on a disk.

    A pipe may keep its reader waiting for ever, and a device may never end.

    Raises
    ------
    OSError
        There is nothing, or it may not be looked at.

    Examples
    --------
    >>> is_ordinary(Path("."))
    True
    """
    mode = path.stat().st_mode
    return stat.S_ISREG(mode) or stat.S_ISDIR(mode)


def write_atomically(path: Path, content: bytes | str) -> Path:
    """Write ``content`` under a passing name, then move it over ``path`` in one step.

    Parameters
    ----------
    path : Path
        Where the file shall stand; its folder must exist.
    content : bytes or str
        Text is written as UTF-8 with line feeds only.

    Returns
    -------
    Path
        ``path``.

    Raises
    ------
    FieldplanError
        The folder cannot be written, or the file is open in another program.
    """
    data = content.encode("utf-8") if isinstance(content, str) else content
    passing = path.with_name(f".{path.name}.{secrets.token_hex(4)}.part")
    try:
        with passing.open("xb") as stream:
            stream.write(data)
            stream.flush()
            os.fsync(stream.fileno())
        passing.replace(path)
    except OSError as fault:
        with suppress(OSError):
            passing.unlink(missing_ok=True)
        message = (
            f"{path} cannot be written ({fault.strerror or fault}); "
            "close it elsewhere, or name another folder."
        )
        raise FieldplanError(message) from fault
    return path


def write_new(path: Path, content: bytes | str) -> Path:
    """Write a file that is not there yet.

    Parameters
    ----------
    path : Path
        Where the file shall stand; its folder must exist.
    content : bytes or str
        As for ``write_atomically``.

    Returns
    -------
    Path
        ``path``.

    Raises
    ------
    FieldplanError
        A file of that name is there already, or it cannot be written.
    """
    if path.exists() or path.is_symlink():
        message = f"{path} is there already and is not replaced; give another name."
        raise FieldplanError(message)
    return write_atomically(path, content)
