"""Numbers as a reader wants them, and lists as a sentence says them."""

import math
from collections.abc import Sequence


def figure(value: float, digits: int = 3) -> str:
    """Write a number with so many significant digits and no exponent where it can be avoided.

    Parameters
    ----------
    value : float
    digits : int
        Significant digits, at least 1; whole numbers are never cut.

    Examples
    --------
    >>> figure(27.5681), figure(1234.5), figure(0.00512), figure(40.0)
    ('27.6', '1234', '0.00512', '40.0')
    """
    if value == 0 or not math.isfinite(value):
        return f"{value:g}"
    power = math.floor(math.log10(abs(value)))
    if not -6 <= power <= 8:
        return f"{value:.{digits - 1}e}"
    rounded = round(value, digits - 1 - power)
    if rounded != 0:
        power = math.floor(math.log10(abs(rounded)))
    return f"{value:.{max(digits - 1 - power, 0)}f}"


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
