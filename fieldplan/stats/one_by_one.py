"""Results given out one after the other, each to the stratum where it is worth most."""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from heapq import heapify, heappop, heappush

import numpy as np

Numbers = np.ndarray[tuple[int], np.dtype[np.float64]]


@dataclass(frozen=True)
class FallOfVariance:
    """Order of results by the fall of the variance, for its money: W² σ² / (c n (n + 1))."""

    sizes: Numbers

    def next(self, k: int, n: int) -> float:
        """Give what the result after the n-th is worth in stratum k."""
        return float(self.sizes[k]) / (n * (n + 1))

    def down_to(self, worth: float) -> Numbers:
        """Count the results of each stratum that are worth so much or more."""
        with np.errstate(over="ignore"):
            return np.floor((np.sqrt(1 + 4 * self.sizes / worth) - 1) / 2) + 1


@dataclass(frozen=True)
class OwnVariance:
    """Order of results by the variance of the stratum's own mean before it: σ² (1/n − 1/N)."""

    sizes: Numbers
    unseen: Numbers

    def next(self, k: int, n: int) -> float:
        """Give what the result after the n-th is worth in stratum k."""
        return float(self.sizes[k]) * (1 / n - float(self.unseen[k]))

    def down_to(self, worth: float) -> Numbers:
        """Count the results of each stratum that are worth so much or more."""
        with np.errstate(over="ignore"):
            return np.floor(1 / (worth / self.sizes + self.unseen)) + 1


Order = FallOfVariance | OwnVariance


def given_out(order: Order, floors: Sequence[int], caps: Sequence[int], *, total: int) -> list[int]:
    """Give out a total in an order, between floors and caps."""
    least, most = np.array(floors, dtype=float), np.array(caps, dtype=float)

    def held(worth: float) -> Numbers:
        return np.clip(order.down_to(worth), least, most)

    # Bracket the worth of the last result, then give out the few that remain one by one.
    high = float(order.sizes.max())
    low = high * 1e-24
    for _ in range(200):
        middle = math.sqrt(low * high)
        low, high = (middle, high) if held(middle).sum() > total else (low, middle)
        if high / low < 1 + 1e-12:
            break
    counts = [int(n) for n in np.maximum(held(high) - 1, least)]
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
