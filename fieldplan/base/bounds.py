"""Bounds of the numbers that people type: beyond them lies a slip, or arithmetic that breaks."""

SMALLEST = 1e-12
LARGEST = 1e12
"""Any unit of a laboratory leaves room to spare on both sides; squares and ratios stay finite."""

NEAREST_TO_ONE = 0.999999
"""Confidences, assurances and lost shares above this are asked of the far tails alone."""


def magnitude_fault(value: float) -> str:
    """Say what is wrong with the size of a number; nothing when it can be reckoned with.

    Examples
    --------
    >>> magnitude_fault(27.57), magnitude_fault(0), magnitude_fault(-3.0)
    ('', '', '')
    >>> magnitude_fault(1e200)
    'beyond what can be reckoned with, 1e-12 to 1e12'
    """
    if value == 0 or SMALLEST <= abs(value) <= LARGEST:
        return ""
    return "beyond what can be reckoned with, 1e-12 to 1e12"


def share_fault(value: float) -> str:
    """Say what is wrong with a share below 1 that is too near to 1.

    Examples
    --------
    >>> share_fault(0.95), share_fault(1 - 1e-9)
    ('', 'nearer to 1 than can be reckoned with, 0.999999')
    """
    if not NEAREST_TO_ONE < value < 1:
        return ""
    return "nearer to 1 than can be reckoned with, 0.999999"
