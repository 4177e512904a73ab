"""Ids as people and laboratories write them, and when two spellings mean the same."""

import re
from collections.abc import Iterable
from difflib import SequenceMatcher

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


def nearest(text: str, names: Iterable[str], *, cutoff: float = 0.75) -> list[str]:
    """List the names that come nearest to an id, all of them where several are as near.

    Parameters
    ----------
    text : str
    names : iterable of str
    cutoff : float
        Least share of letters in common, by ``difflib``.

    Returns
    -------
    list of str
        Empty when none is near. Between equals, the same letters in another order count more,
        then letters that agree place by place. A name whose leading letters stand nowhere in the
        id is of another job, however well the numbers agree.

    Examples
    --------
    >>> nearest("QF-732", ["QF-872", "QF-731"]), nearest("X", ["QF-872"])
    (['QF-731'], [])
    >>> nearest("OT-02143", ["HL-2143"]), nearest("LH-2143", ["HL-2143"])
    ([], ['HL-2143'])
    """
    wanted = likeness(text)
    scores: dict[str, tuple[float, bool, int]] = {}
    matcher = SequenceMatcher(None, "", wanted, autojunk=False)
    words = _words(text)
    for name in names:
        if not _of_one_job(words, _words(name)):
            continue
        other = likeness(name)
        matcher.set_seq1(other)
        share = matcher.ratio() if matcher.quick_ratio() >= cutoff else 0.0
        if share >= cutoff:
            in_place = sum(a == b for a, b in zip(wanted, other, strict=False))
            scores[name] = (share, sorted(wanted) == sorted(other), in_place)
    best = max(scores.values(), default=None)
    return [name for name, score in scores.items() if score == best]


def _words(text: str) -> list[str]:
    """Give the runs of letters of an id, in lower case."""
    return re.findall(r"[^\W\d_]+", plain_id(text).casefold())


def _of_one_job(words: list[str], planned: list[str]) -> bool:
    """Whether the first letters of a planned id stand somewhere in an id as written.

    Half of the letters is enough, and one letter may stand for another: those are slips.
    """
    if not words or not planned:
        return True
    lead = planned[0]
    return any(
        SequenceMatcher(None, word, lead, autojunk=False).ratio() >= 0.5
        or len(word) == len(lead) == 1
        for word in words
    )
