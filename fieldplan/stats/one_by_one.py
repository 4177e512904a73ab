"""Results given out one after the other, each to the stratum where it is worth most."""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from heapq import heapify, heappop, heappush

NEAR = 1e-3
"""The worth of the last result is bracketed this closely before single results are given out."""


@dataclass(frozen=True)
class FallOfVariance:
    """Order of results by the fall of the variance, for its money: W² σ² / (c n (n + 1))."""

    sizes: tuple[float, ...]

    def next(self, k: int, n: int) -> float:
        """Give what the result after the n-th is worth in stratum k."""
        return self.sizes[k] / (n * (n + 1))

    def guess(self, total: int) -> float:
        """Guess what the last of a total is worth."""
        return (math.fsum(map(math.sqrt, self.sizes)) / total) ** 2

    def held(self, worth: float, bounds: Sequence[tuple[int, int]]) -> list[int]:
        """Count the results of each stratum that are worth so much or more, within bounds."""
        counts = []
        for size, (floor, cap) in zip(self.sizes, bounds, strict=True):
            root = (math.sqrt(1 + 4 * size / worth) - 1) / 2
            counts.append(min(max(int(root) + 1, floor), cap))
        return counts


@dataclass(frozen=True)
class OwnVariance:
    """Order of results by the variance of the stratum's own mean before it: σ² (1/n − 1/N)."""

    sizes: tuple[float, ...]
    unseen: tuple[float, ...]

    def next(self, k: int, n: int) -> float:
        """Give what the result after the n-th is worth in stratum k."""
        return self.sizes[k] * (1 / n - self.unseen[k])

    def guess(self, total: int) -> float:
        """Guess what the last of a total is worth."""
        return math.fsum(self.sizes) / total

    def held(self, worth: float, bounds: Sequence[tuple[int, int]]) -> list[int]:
        """Count the results of each stratum that are worth so much or more, within bounds."""
        counts = []
        for size, unseen, (floor, cap) in zip(self.sizes, self.unseen, bounds, strict=True):
            counts.append(min(max(int(1 / (worth / size + unseen)) + 1, floor), cap))
        return counts


Order = FallOfVariance | OwnVariance


def given_out(order: Order, floors: Sequence[int], caps: Sequence[int], *, total: int) -> list[int]:
    """Give out a total in an order, between floors and caps.

    Examples
    --------
    >>> given_out(FallOfVariance((4.0, 1.0)), (2, 2), (99, 99), total=9)
    [6, 3]
    """
    bounds = list(zip(floors, caps, strict=True))
    low = high = order.guess(total)
    for _ in range(60):
        if sum(order.held(high, bounds)) <= total:
            break
        high *= 8
    for _ in range(60):
        if sum(order.held(low, bounds)) > total:
            break
        low /= 8
    while high / low > 1 + NEAR:
        middle = math.sqrt(low * high)
        low, high = (middle, high) if sum(order.held(middle, bounds)) > total else (low, middle)
    counts = [max(n - 1, floor) for n, floor in zip(order.held(high, bounds), floors, strict=True)]
    return topped_up(counts, order, caps, total=total)


def topped_up(counts: Sequence[int], order: Order, caps: Sequence[int], *, total: int) -> list[int]:
    """Give out what is left of a total one by one: each to the stratum where it is worth most.

    Strata at their cap get no more; of equals the first comes first.
    """
    filled = list(counts)
    waiting = [
        (-order.next(k, n), k)
        for k, (n, cap) in enumerate(zip(filled, caps, strict=True))
        if n < cap
    ]
    heapify(waiting)
    for _ in range(total - sum(filled)):
        _, k = heappop(waiting)
        filled[k] += 1
        if filled[k] < caps[k]:
            heappush(waiting, (-order.next(k, filled[k]), k))
    return filled
