"""Units as people write them: square metres, hectares and acres side by side."""

import math

SQUARE_METRES_PER_HECTARE = 10_000.0
SQUARE_METRES_PER_ACRE = 4046.8564224
"""The international acre: 4840 square yards of 0.9144 m."""

LEAST_EXPONENT, LARGEST_EXPONENT = -9, 14
"""Powers of ten that are still written out with all their zeros."""


def hectares(square_metres: float) -> float:
    """Turn square metres into hectares.

    Examples
    --------
    >>> hectares(23600.0)
    2.36
    """
    return square_metres / SQUARE_METRES_PER_HECTARE


def acres(square_metres: float) -> float:
    """Turn square metres into international acres.

    Examples
    --------
    >>> round(acres(10_000.0), 4)
    2.4711
    """
    return square_metres / SQUARE_METRES_PER_ACRE


METRES_PER_MILE = 1609.344
"""The international mile."""


def length_in_words(metres: float, digits: int = 4) -> str:
    """Write a length in the unit that fits it, with miles beside kilometres.

    Examples
    --------
    >>> length_in_words(3420.0)
    '3.420 km (2.125 miles)'
    >>> length_in_words(412.04)
    '412.0 m'
    """
    if metres < 1000:
        return f"{significant(metres, digits)} m"
    miles = significant(metres / METRES_PER_MILE, digits)
    return f"{significant(metres / 1000, digits)} km ({miles} miles)"


def significant(value: float, digits: int = 3) -> str:
    """Write a number with so many significant digits, thousands apart.

    Only where zeros would fill the line is it a power of ten: from 1E+15 on, and below 1E-9.

    Examples
    --------
    >>> significant(12345.6), significant(2.36), significant(0.00423), significant(0.0)
    ('12,300', '2.36', '0.00423', '0')
    >>> significant(1e30), significant(2.5e-12, 2)
    ('1.00E+30', '2.5E-12')
    """
    if value == 0 or not math.isfinite(value):
        return f"{value:g}"
    rounded = float(f"{value:.{digits - 1}e}")
    exponent = int(f"{rounded:e}".partition("e")[2])
    if not LEAST_EXPONENT <= exponent <= LARGEST_EXPONENT:
        return f"{rounded:.{digits - 1}E}"
    return f"{rounded:,.{max(digits - 1 - exponent, 0)}f}"


def area_in_words(square_metres: float, digits: int = 4) -> str:
    """Write an area in the unit that fits it, with acres beside hectares.

    Examples
    --------
    >>> area_in_words(23600.0)
    '2.360 ha (5.832 acres)'
    >>> area_in_words(412.04)
    '412.0 m²'
    """
    if square_metres < 1000:
        return f"{significant(square_metres, digits)} m²"
    return (
        f"{significant(hectares(square_metres), digits)} ha "
        f"({significant(acres(square_metres), digits)} acres)"
    )
