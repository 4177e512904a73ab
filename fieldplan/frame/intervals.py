"""Stretches of a line as pairs of whole millimetres, so that cuts sum to the whole exactly."""

from collections.abc import Iterable

Interval = tuple[int, int]
"""From and to along a branch, in millimetres; the first below the second."""

Intervals = tuple[Interval, ...]
"""In order, none touching the next."""


def united(stretches: Iterable[Interval]) -> Intervals:
    """Join stretches that overlap or touch; empty ones vanish.

    Examples
    --------
    >>> united([(5, 9), (0, 3), (3, 4), (7, 7)])
    ((0, 4), (5, 9))
    """
    found: list[Interval] = []
    for low, high in sorted(stretch for stretch in stretches if stretch[0] < stretch[1]):
        if found and low <= found[-1][1]:
            found[-1] = (found[-1][0], max(found[-1][1], high))
        else:
            found.append((low, high))
    return tuple(found)


def shared(first: Intervals, second: Intervals) -> Intervals:
    """Give what lies in both.

    Examples
    --------
    >>> shared(((0, 10),), ((2, 4), (8, 12)))
    ((2, 4), (8, 10))
    """
    return united(
        (max(low, other_low), min(high, other_high))
        for low, high in first
        for other_low, other_high in second
    )


def without(first: Intervals, second: Intervals) -> Intervals:
    """Give what lies in the first and not in the second.

    Examples
    --------
    >>> without(((0, 10),), ((2, 4), (8, 12)))
    ((0, 2), (4, 8))
    """
    left = list(first)
    for low, high in second:
        left = [
            piece
            for start, end in left
            for piece in ((start, min(end, low)), (max(start, high), end))
            if piece[0] < piece[1]
        ]
    return united(left)


def total_m(stretches: Intervals) -> float:
    """Sum the lengths, in metres.

    Examples
    --------
    >>> total_m(((0, 1500), (2000, 2250)))
    1.75
    """
    return sum(high - low for low, high in stretches) / 1000.0
