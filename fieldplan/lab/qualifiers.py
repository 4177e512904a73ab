"""Qualifiers: what a laboratory's letters and signs say of the number beside them."""

import re
from dataclasses import dataclass

_NOTHING = {"", "-", "--", "na", "n/a", "none", "null", "nil", "."}
_NOT_DETECTED = {
    "u", "<", "<=", "nd", "n.d.", "n.d", "n/d", "bdl", "bql", "brl", "bmdl", "not detected",
    "none detected", "nondetect", "non detect", "non-detect", "nondetected", "non-detected",
    "below detection limit", "below reporting limit", "below quantification limit",
    "present below quantification limit", "less than",
}  # fmt: skip
_REJECTED = {"r", "ur", "ru", "jr", "rj", "rej", "rej.", "reject", "rejected"}
_ABOVE = {">", ">=", "greater than"}
_FLAGS = {"=", "j+", "j-", "n", "q", "det", "detected", "est", "est.", "estimated"}
_JOINED = re.compile(r"[uj]?[bdehnq*^]?[uj]?[+\-]?|[bdeh*^]{1,3}")
"""U or J beside one other flag, or flags such as B, D, E, H that are set side by side."""
_DOUBTFUL = re.compile(
    r"[<>]|\b(?:above|absent|below|censor\w*|detect\w*|exceed\w*|greater|gt|invalid|less|limit\w*"
    r"|lod|loq|lor|lt|mdl|mrl|non|not|over|pql|reject\w*|rl|tr|trace|under|unusable|void\w*)\b"
)


@dataclass(frozen=True)
class Qualifier:
    """What one text of qualifiers says.

    Parameters
    ----------
    not_detected : bool
        The number beside it is a limit.
    rejected : bool
        The result must not be used.
    above : bool
        The result is larger than the number beside it.
    unknown : tuple of str
        Marks that are none of those known here.
    doubtful : bool
        Among the unknown ones there are words of limits and detection.
    """

    not_detected: bool = False
    rejected: bool = False
    above: bool = False
    unknown: tuple[str, ...] = ()
    doubtful: bool = False


def read_qualifier(text: str) -> Qualifier:
    """Read the qualifiers of one result, from its own column or from behind its number.

    Parameters
    ----------
    text : str

    Returns
    -------
    Qualifier

    Notes
    -----
    Known: U and what is spelled with it, ``<``, ND and the like (not detected); R, REJ (rejected);
    ``>`` (above the number); J, B, D, E, H, N, Q, ``*``, ``^``, ``=`` (they change nothing). One
    letter may mean different things to two laboratories, so that no others are taken as known.

    Examples
    --------
    >>> read_qualifier("U1").not_detected, read_qualifier("<RL").not_detected
    (True, True)
    >>> read_qualifier("J, B")
    Qualifier(not_detected=False, rejected=False, above=False, unknown=(), doubtful=False)
    >>> read_qualifier("X").unknown, read_qualifier("trace").doubtful
    (('x',), True)
    """
    plain = _plain(text)
    marks = _marks(plain)
    known = {mark: _meaning(mark) for mark in marks}
    unknown = tuple(mark for mark, meaning in known.items() if not meaning)
    return Qualifier(
        not_detected="not detected" in known.values() or not {"ur", "ru"}.isdisjoint(marks),
        rejected="rejected" in known.values(),
        above="above" in known.values(),
        unknown=unknown,
        doubtful=bool(unknown) and bool(_DOUBTFUL.search(plain)),
    )


def _plain(text: str) -> str:
    """Write signs and brackets in one way."""
    signs = text.casefold().translate(str.maketrans("＜＞≤≥", "<><>"))
    bare = re.sub(r"[()\[\]{}\"']", " ", signs)
    return " ".join(re.sub(r"([<>]=?)\s*", r" \1", bare).split())


def _marks(plain: str) -> list[str]:
    """Part a text at commas, semicolons and slashes, then at spaces, unless it is one term."""
    if _meaning(plain):
        return [plain]
    marks: list[str] = []
    for part in (" ".join(piece.split()) for piece in re.split(r"[,;/|]", plain)):
        marks += [part] if _meaning(part) else part.split()
    return marks


def _meaning(mark: str) -> str:
    """Name what a mark means; empty for one that is not known."""
    if mark in _NOT_DETECTED or re.fullmatch(r"<=?[a-z]{1,5}", mark):
        return "not detected"
    if mark in _REJECTED:
        return "rejected"
    if mark in _ABOVE or re.fullmatch(r">=?[a-z]{1,5}", mark):
        return "above"
    letters = mark.rstrip("0123456789") if mark[:1] in {"u", "j"} else mark
    if mark in _NOTHING or mark in _FLAGS:
        return "nothing"
    if not _JOINED.fullmatch(letters):
        return ""
    return "not detected" if "u" in letters else "nothing"
