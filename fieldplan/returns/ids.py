"""Ids as people and laboratories write them, and when two spellings mean the same."""

import re

from fieldplan.lab.cells import tidy

_LOOK_ALIKE = str.maketrans({"o": "0", "i": "1", "l": "1"})


def plain_id(text: str) -> str:
    """Take away odd spaces and the apostrophe that keeps a spreadsheet from changing an id.

    Parameters
    ----------
    text : str

    Examples
    --------
    >>> plain_id(" '007 ")
    '007'
    """
    return tidy(text).removeprefix("'").strip()


def likeness(text: str) -> str:
    """Reduce an id to what survives retyping: no case, dashes, spaces or leading zeros.

    Parameters
    ----------
    text : str

    Returns
    -------
    str
        Two ids with the same likeness may be the same; nothing is decided by it.

    Examples
    --------
    >>> likeness("FC-01") == likeness("fc_1") == likeness("FC O1")
    True
    >>> likeness("FC-01") == likeness("FC-10")
    False
    """
    folded = plain_id(text).casefold().translate(_LOOK_ALIKE)
    parts = re.findall(r"\d+|[^\W\d_]+", folded)
    return "·".join(part.lstrip("0") or "0" if part.isdigit() else part for part in parts)
