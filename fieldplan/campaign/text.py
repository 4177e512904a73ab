"""The campaign file as text: found, decoded, and no larger than a campaign file is."""

from codecs import BOM_UTF8, BOM_UTF16_BE, BOM_UTF16_LE, BOM_UTF32_BE, BOM_UTF32_LE
from difflib import get_close_matches
from pathlib import Path

from fieldplan.base.errors import CampaignError
from fieldplan.base.files import NOT_ORDINARY, is_ordinary

LARGEST_FILE = 500_000
"""Bytes; a long campaign of a hundred tables has about 20 000."""

# UTF-32 stands before UTF-16 because its little-endian mark begins with the one of UTF-16.
_MARKS = (
    (BOM_UTF8, "utf-8"),
    (BOM_UTF32_LE, "utf-32-le"),
    (BOM_UTF32_BE, "utf-32-be"),
    (BOM_UTF16_LE, "utf-16-le"),
    (BOM_UTF16_BE, "utf-16-be"),
)


def near_names(path: Path) -> list[str]:
    """Names in the folder of ``path`` that look like its own, nearest first."""
    try:
        names = sorted(entry.name for entry in path.parent.iterdir())
    except OSError:
        return []
    by_small_letters = {name.lower(): name for name in names}
    found = get_close_matches(path.name.lower(), list(by_small_letters), n=3, cutoff=0.6)
    return [by_small_letters[name] for name in found]


def read_text(path: Path) -> str:
    """Return the text of a campaign file, without a byte-order mark.

    Parameters
    ----------
    path : Path
        UTF-8 with or without a mark, or UTF-16 as some Windows editors save it.

    Raises
    ------
    CampaignError
        The file is missing, a folder, a pipe, empty, too large, unreadable or not text.
    """
    data = _read_bytes(path)
    encoding = "utf-8"
    for mark, name in _MARKS:
        if data.startswith(mark):
            data, encoding = data[len(mark) :], name
            break
    else:
        if data[1:2] == b"\0":
            encoding = "utf-16-le"
        elif data[:1] == b"\0":
            encoding = "utf-16-be"
    try:
        text = data.decode(encoding)
    except UnicodeDecodeError as fault:
        line = data[: fault.start].count(b"\n") + 1
        message = (
            f"{path}:{line}: the file is not {encoding.upper()} text (byte "
            f"0x{data[fault.start]:02X}). Save it again as UTF-8 in a text editor."
        )
        raise CampaignError(message) from fault
    if not text.strip():
        message = f"{path}: the file is empty. Run 'fieldplan new' to write a campaign file."
        raise CampaignError(message)
    return text


def _read_bytes(path: Path) -> bytes:
    """Read the file whole, or say why it cannot be read."""
    try:
        if path.is_dir():
            raise CampaignError(_folder_message(path))
        if not is_ordinary(path):
            message = f"{path}: this {NOT_ORDINARY}. Save it as a file and name that."
            raise CampaignError(message)
        with path.open("rb") as stream:
            data = stream.read(LARGEST_FILE + 1)
    except FileNotFoundError as fault:
        near = " or ".join(near_names(path))
        remedy = f"Did you mean {near}?" if near else "Run 'fieldplan new' to write one."
        message = f"{path}: there is no such file. {remedy}"
        raise CampaignError(message) from fault
    except (OSError, ValueError) as fault:
        reason = getattr(fault, "strerror", None) or fault
        message = f"{path}: the file cannot be read ({reason}). Check its name and its rights."
        raise CampaignError(message) from fault
    if len(data) > LARGEST_FILE:
        message = (
            f"{path}: the file is larger than {LARGEST_FILE:,} bytes, so it is no campaign file. "
            "Name the TOML file that describes the campaign."
        )
        raise CampaignError(message)
    return data


def _folder_message(path: Path) -> str:
    """Say that a folder was named, and which campaign files it holds."""
    inside = sorted(entry.name for entry in path.glob("*.toml"))[:5]
    held = f"It holds {', '.join(inside)}" if inside else "It holds no .toml file"
    return f"{path}: this is a folder, not a campaign file. {held}; name the file itself."
