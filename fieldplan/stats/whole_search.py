"""The search for whole counts: what is made small, what is limited, and a bound that proves it.

With a price on every limit, strata part from each other, and the sum of their own minima is a
bound below which no counts lie. Counts whose priced excess over those minima is larger than the
gap to the best answer at hand cannot be in a better one; few are left, and all their combinations
are tried (Geoffrion 1974, Mathematical Programming Study 2:82, for the bound and the exclusion).
"""

from dataclasses import dataclass

import numpy as np

Numbers = np.ndarray[tuple[int], np.dtype[np.float64]]
Matrix = np.ndarray[tuple[int, int], np.dtype[np.float64]]
Positions = np.ndarray[tuple[int], np.dtype[np.intp]]

KEPT = (100, 200_000)
"""Part answers kept: in the first pass, and over all strata together in the second."""

WIDEST = 60
"""Most counts of one stratum that are tried."""

_SLACK = 1e-9


@dataclass(frozen=True)
class WholeCounts:
    """Whole counts and what they reach.

    Parameters
    ----------
    counts : tuple of int
        Results by stratum.
    value : float
        Money spent, or variance of the mean: what was made small.
    bound : float
        No whole counts within the limits reach less.
    """

    counts: tuple[int, ...]
    value: float
    bound: float

    @property
    def proven(self) -> bool:
        """Whether nothing lies between the bound and the value."""
        return self.value <= self.bound * (1 + 1e-7)


@dataclass(frozen=True)
class Limited:
    """Make Σ (up · n + down / n) of row 0 small while the other rows keep their limits.

    Parameters
    ----------
    up, down : array, 1 + limits by strata
    limits : array
        Of the rows from 1 on.
    floors, caps : array, length h
    step : float
        What row 0 can only be a multiple of; 0 where it can be anything.
    """

    up: Matrix
    down: Matrix
    limits: Numbers
    floors: Numbers
    caps: Numbers
    step: float = 0.0

    def totals(self, counts: Numbers) -> Numbers:
        """Give the sum of every row."""
        return self.up @ counts + self.down @ (1 / counts)


@dataclass
class _Priced:
    """A limited problem at given prices: each stratum's own minimum, and the bound they make."""

    problem: Limited
    prices: Numbers

    def __post_init__(self) -> None:
        """Find every stratum's own minimum."""
        together = np.concatenate([[1.0], self.prices])
        self.up, self.down = together @ self.problem.up, together @ self.problem.down
        root = np.ceil((np.sqrt(1 + 4 * self.down / self.up) - 1) / 2)
        self.best = np.clip(root, self.problem.floors, self.problem.caps)
        self.least = self.up * self.best + self.down / self.best
        bound = float(self.least.sum() - self.prices @ self.problem.limits)
        step = self.problem.step
        self.bound = step * np.ceil(bound / step - 1e-7) if step else bound

    def gap(self, value: float) -> float:
        """Give how far a value lies above the sum of the minima."""
        return value - float(self.least.sum() - self.prices @ self.problem.limits)

    def options(self, k: int, gap: float) -> Numbers:
        """List the counts of a stratum whose excess is no more than the gap."""
        middle = (self.least[k] + gap) / (2 * self.up[k])
        reach = np.sqrt(max(middle**2 - self.down[k] / self.up[k], 0.0))
        low = max(np.ceil(middle - reach - 1e-6), self.problem.floors[k])
        high = min(np.floor(middle + reach + 1e-6), self.problem.caps[k])
        low, high = min(low, self.best[k]), max(high, self.best[k])
        low, high = max(low, self.best[k] - WIDEST / 2), min(high, self.best[k] + WIDEST / 2)
        return np.arange(low, high + 1)


def search(problem: Limited, prices: Numbers, start: Numbers) -> WholeCounts:
    """Find the whole counts of smallest value that keep every limit.

    Parameters
    ----------
    problem : Limited
    prices : array
        One a limit; any prices give a valid bound, those of the unrounded optimum a close one.
    start : array, length h
        Whole counts that keep every limit.

    Returns
    -------
    WholeCounts
        With the value as bound where every combination was tried or excluded.

    Examples
    --------
    >>> rows = np.array([[3.0, 5.0], [0.0, 0.0]]), np.array([[0.0, 0.0], [4.0, 9.0]])
    >>> problem = Limited(*rows, np.array([2.0]), np.array([1.0, 1.0]), np.array([99.0, 99.0]))
    >>> search(problem, np.array([20.0]), np.array([9.0, 9.0]))
    WholeCounts(counts=(6, 7), value=53.0, bound=53.0)
    """
    priced = _Priced(problem, prices)
    best = WholeCounts(_whole(start), float(problem.totals(start)[0]), float(priced.bound))
    wide = KEPT[1] // len(start)
    for limit in (KEPT[0], wide) if wide > 2 * KEPT[0] else (KEPT[0],):
        if best.proven:
            break
        best, complete = _combined(priced, best, limit)
        if complete:
            return WholeCounts(best.counts, best.value, best.value)
    return best


def _whole(counts: Numbers) -> tuple[int, ...]:
    return tuple(round(float(n)) for n in counts)


def _combined(priced: _Priced, best: WholeCounts, limit: int) -> tuple[WholeCounts, bool]:
    """Try all combinations of the counts that are left; False where some were cut off."""
    problem, gap = priced.problem, priced.gap(best.value) + 1e-9 * best.value
    options = [priced.options(k, gap) for k in range(len(priced.best))]
    rows = [
        np.outer(problem.up[:, k], numbers) + np.outer(problem.down[:, k], 1 / numbers)
        for k, numbers in enumerate(options)
    ]
    rest = np.array([values.min(axis=1) for values in rows])
    after = np.vstack([np.cumsum(rest[::-1], axis=0)[::-1][1:], np.zeros(rest.shape[1])])
    ceiling = np.concatenate([[best.value], problem.limits]) * (1 + _SLACK)
    totals, excess = np.zeros((1, len(rest[0]))), np.zeros(1)
    trail: list[tuple[Positions, Numbers]] = []
    complete = all(len(numbers) < WIDEST for numbers in options)
    for k, numbers in enumerate(options):
        over = priced.up[k] * numbers + priced.down[k] / numbers - priced.least[k]
        spread = (totals[:, None, :] + rows[k].T[None, :, :]).reshape(-1, totals.shape[1])
        summed = (excess[:, None] + over[None, :]).reshape(-1)
        alive = np.flatnonzero((summed <= gap) & np.all(spread + after[k] <= ceiling, axis=1))
        alive = alive[_undominated(spread[alive], summed[alive])]
        if len(alive) > limit:
            complete = False
            alive = alive[np.argsort(summed[alive], kind="stable")[:limit]]
        totals, excess = spread[alive], summed[alive]
        trail.append((alive // len(numbers), numbers[alive % len(numbers)]))
    return _read_back(trail, totals, excess, best), complete


def _undominated(totals: Matrix, excess: Numbers) -> Positions:
    """Keep, under one limit, what no other beats in both value and load."""
    if totals.shape[1] > 2 or not len(totals):
        return np.arange(len(totals))
    order: Positions = np.lexsort((excess, totals[:, 0]))
    loads = totals[order, 1]
    before = np.concatenate([[np.inf], np.minimum.accumulate(loads)[:-1]])
    kept: Positions = order[loads < before]
    return kept


def _read_back(
    trail: list[tuple[Positions, Numbers]], totals: Matrix, excess: Numbers, best: WholeCounts
) -> WholeCounts:
    """Follow the best whole answer back through the strata."""
    if not len(totals):
        return best
    position = int(np.lexsort((excess, np.round(totals[:, 0] / best.value, 9)))[0])
    value = float(totals[position, 0])
    counts: list[int] = []
    for parents, numbers in reversed(trail):
        counts.append(round(float(numbers[position])))
        position = int(parents[position])
    return WholeCounts(tuple(reversed(counts)), value, best.bound)
