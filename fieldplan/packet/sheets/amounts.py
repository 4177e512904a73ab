"""Numbers, shares and dates in the words of a sheet."""

import math
from collections.abc import Sequence
from datetime import date

from fieldplan.base.units import LARGEST_EXPONENT, LEAST_EXPONENT, significant
from fieldplan.packet.sheets.wording import number

BLANK = "not typed"
"""Stands where the campaign file holds nothing."""


def rounded(value: float, *, digits: int = 3) -> str:
    """Write a computed number with so many significant digits, as sentences write it.

    Examples
    --------
    >>> rounded(8.8213), rounded(16800.4), rounded(0.01234), rounded(1e30)
    ('8.82', '16800', '0.0123', '1.00E+30')
    """
    if value == 0 or not math.isfinite(value):
        return number(value)
    exponent = math.floor(math.log10(abs(value)))
    if not LEAST_EXPONENT <= exponent <= LARGEST_EXPONENT:
        return significant(value, digits)
    decimals = max(0, digits - 1 - exponent)
    return f"{value:.{decimals}f}".replace("-", "−")


def trimmed(value: float, *, digits: int = 4) -> str:
    """Write a result with so many significant digits at most, without zeros at its end.

    Examples
    --------
    >>> trimmed(41.0), trimmed(66.46667), trimmed(1240.0), trimmed(1e30)
    ('41', '66.47', '1240', '1E+30')
    """
    digits_alone, mark, exponent = rounded(value, digits=digits).partition("E")
    if "." in digits_alone:
        digits_alone = digits_alone.rstrip("0").rstrip(".")
    return f"{digits_alone}{mark}{exponent}"


def percent(share: float) -> str:
    """Write a share of 1 as a percentage, three significant digits at most.

    Examples
    --------
    >>> percent(0.8), percent(0.9833), percent(0.4587), percent(1.0)
    ('80 %', '98.3 %', '45.9 %', '100 %')
    """
    return f"{float(f'{100 * share:.3g}'):g} %"


def likely(chance: float) -> str:
    """Write a computed chance as a percentage, never rounded up to certainty.

    Examples
    --------
    >>> likely(0.80228), likely(0.99997), likely(1.0)
    ('80.2 %', 'over 99.9 %', '100 %')
    """
    return percent(chance) if chance < 0.9995 or chance == 1 else "over 99.9 %"


def area(square_metres: float) -> str:
    """Write an area in square metres and hectares.

    Examples
    --------
    >>> area(23600.4)
    '23 600 m² (2.36 ha)'
    """
    grouped = f"{square_metres:,.0f}".replace(",", "\N{NO-BREAK SPACE}")
    return f"{grouped} m² ({square_metres / 1e4:.2f} ha)".replace("\N{NO-BREAK SPACE}", " ")


def counted(count: int, thing: str, things: str = "") -> str:
    """Write a count with its noun.

    Examples
    --------
    >>> counted(1, "location"), counted(9, "location"), counted(2, "dry well", "dry wells")
    ('1 location', '9 locations', '2 dry wells')
    """
    return f"{count} {thing if count == 1 else things or thing + 's'}"


def listed(words: Sequence[str]) -> str:
    """Join words as in a sentence.

    Examples
    --------
    >>> listed(["4 in meadow", "5 in yard"]), listed(["a", "b", "c"])
    ('4 in meadow and 5 in yard', 'a, b and c')
    """
    if len(words) < 2:
        return "".join(words)
    return ", ".join(words[:-1]) + " and " + words[-1]


def days(first: date | None, last: date | None) -> str:
    """Write the days of field work.

    Examples
    --------
    >>> days(date(2026, 10, 12), date(2026, 10, 16)), days(None, None)
    ('2026-10-12 to 2026-10-16', 'not typed')
    """
    if first and last and first != last:
        return f"{first} to {last}"
    return str(first or last or BLANK)
