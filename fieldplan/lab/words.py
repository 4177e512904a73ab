"""Counts and lists as a sentence says them."""

from collections.abc import Sequence


def counted(number: int, word: str, plural: str = "") -> str:
    """Write a count with its noun.

    Parameters
    ----------
    number : int
    word : str
        Singular.
    plural : str
        Where an s is not enough.

    Examples
    --------
    >>> counted(1, "duplicate"), counted(0, "duplicate"), counted(2, "stratum", "strata")
    ('1 duplicate', 'no duplicates', '2 strata')
    """
    noun = word if number == 1 else plural or f"{word}s"
    return f"{number or 'no'} {noun}"


def listed(items: Sequence[str], limit: int = 8) -> str:
    """Write names one after another, and count those beyond the limit.

    Parameters
    ----------
    items : sequence of str
    limit : int

    Examples
    --------
    >>> listed(["A", "B", "C"]), listed(["A", "B", "C", "D"], limit=2)
    ('A, B and C', 'A, B and 2 more')
    """
    shown = list(items[:limit])
    if len(items) > limit:
        return f"{', '.join(shown)} and {len(items) - limit} more"
    if len(shown) < 2:
        return "".join(shown)
    return f"{', '.join(shown[:-1])} and {shown[-1]}"
