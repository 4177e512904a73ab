"""Several analytes in the same samples, each with a target of its own: who decides the shares.

The variance of every mean falls with every result, and convexly, so the least cost at which all
targets are kept is a convex problem. Its dual has one multiplier an analyte: what the target of
that analyte costs. Analytes with a multiplier above 0 control the shares; for the others the
results that those need are enough (Bethel 1989, Survey Methodology 15:47; Chromy 1987, Proceedings
of the Section on Survey Research Methods, American Statistical Association, 194).
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from fieldplan.base.errors import DesignError
from fieldplan.stats.strata import Strata
from fieldplan.stats.stratified import predicted_variance
from fieldplan.stats.whole_search import Matrix, Numbers

ROUNDS = 300
"""Rounds of the multiplicative rule before the dual is climbed to its top."""

CONTROLS = 1e-3
"""An analyte controls when its multiplier is at least this share of them all."""


@dataclass(frozen=True)
class Demand:
    """What one analyte asks of the counts.

    Parameters
    ----------
    sigmas : tuple of float
        Standard deviation of single results in each stratum, above 0.
    target_variance : float
        Tolerated variance of its mean, above 0.
    name : str
    """

    sigmas: tuple[float, ...]
    target_variance: float
    name: str = ""


@dataclass(frozen=True)
class Balance:
    """How several analytes together share results between strata.

    Parameters
    ----------
    multipliers : tuple of float
        By how much the cost of the unrounded counts falls, for each analyte, when its tolerated
        variance grows, per share of that variance: a variance 2 % larger (a standard error 1 %
        larger) saves about 0.02 times as much.
    shares : tuple of float
        The multipliers, summing to 1; all 0 where the floors alone keep every target.
    duals : tuple of float
        The multipliers of the problem as it is solved, per share of V + Σ W² σ²/N.
    counts : tuple of float
        Unrounded results by stratum, within floors and caps.
    lowest_cost : float
        No counts, whole or not, cost less.
    sigmas : tuple of float
        The joint spread: √(Σ share · σ²/V). Neyman or least-cost shares for it are the shares
        for all.
    """

    multipliers: tuple[float, ...]
    shares: tuple[float, ...]
    duals: tuple[float, ...]
    counts: tuple[float, ...]
    lowest_cost: float
    sigmas: tuple[float, ...]

    @property
    def controlling(self) -> tuple[int, ...]:
        """Positions of the analytes that decide the shares, the strongest first."""
        order = sorted(range(len(self.shares)), key=lambda j: -self.shares[j])
        return tuple(j for j in order if self.shares[j] >= CONTROLS)


@dataclass(frozen=True)
class Bounds:
    """The problem in numbers: least cost Σ c n with Σ a/n ≤ 1 for each analyte.

    Parameters
    ----------
    costs, floors, caps : array, length h
    spreads : array, analytes by strata
        W² σ² over (V + Σ W² σ²/N).
    sizes : array, length of the analytes
        V + Σ W² σ²/N.
    """

    costs: Numbers
    spreads: Matrix
    floors: Numbers
    caps: Numbers
    sizes: Numbers

    def counts(self, multipliers: Numbers) -> Numbers:
        """Give the unrounded counts at these multipliers."""
        return np.clip(np.sqrt(multipliers @ self.spreads / self.costs), self.floors, self.caps)

    def loads(self, counts: Numbers) -> Numbers:
        """Give Σ a/n of each analyte: 1 at its target."""
        return self.spreads @ (1 / counts)

    def lowest(self, multipliers: Numbers) -> float:
        """Give the dual value: no counts that keep all targets cost less."""
        counts = self.counts(multipliers)
        priced = self.costs @ counts + multipliers @ (self.loads(counts) - 1)
        return float(priced)


def bounds_of(strata: Strata, demands: Sequence[Demand]) -> Bounds:
    """Set a problem up, and refuse one that even the fullest counts cannot solve.

    Parameters
    ----------
    strata : Strata
        Its weights, lists, floors, ceilings and costs; its sigmas are not read.
    demands : sequence of Demand

    Raises
    ------
    DesignError
        A cost is 0, or a target is out of reach.
    """
    if min(strata.unit_costs) <= 0:
        message = (
            "a result that costs nothing cannot be weighed against others; type what a location "
            "and an analysis cost in every stratum."
        )
        raise DesignError(message)
    caps = strata.caps
    rows, sizes = [], []
    for demand in demands:
        best = predicted_variance(strata.weights, demand.sigmas, caps, strata.populations)
        if best > demand.target_variance * (1 + 1e-9):
            _refuse(strata, demand, best)
        spreads = [w * s for w, s in zip(strata.weights, demand.sigmas, strict=True)]
        pairs = zip(spreads, strata.populations, strict=True)
        listed = math.fsum(a * a / size for a, size in pairs if size is not None)
        sizes.append(demand.target_variance + listed)
        rows.append([a * a / sizes[-1] for a in spreads])
    return Bounds(
        costs=np.array(strata.unit_costs, dtype=float),
        spreads=np.array(rows, dtype=float),
        floors=np.array(strata.floors, dtype=float),
        caps=np.array(caps, dtype=float),
        sizes=np.array(sizes, dtype=float),
    )


def _refuse(strata: Strata, demand: Demand, best: float) -> None:
    """Say that a target is out of reach, and what the fullest counts give."""
    named = f"{demand.name}: " if demand.name else ""
    limit = "the ceilings allow" if any(strata.ceilings) else "can be had"
    message = (
        f"{named}a standard error of {math.sqrt(demand.target_variance):.4g} is out of reach: the "
        f"{strata.most} results that {limit} give {math.sqrt(best):.4g}; allow a larger error"
        + (", or raise a ceiling." if any(strata.ceilings) else ".")
    )
    raise DesignError(message)


def balance(strata: Strata, demands: Sequence[Demand]) -> Balance:
    """Find the unrounded counts of least cost that keep every analyte's target.

    Parameters
    ----------
    strata : Strata
        Its weights, lists, floors, ceilings and costs; its sigmas are not read.
    demands : sequence of Demand
        One an analyte.

    Returns
    -------
    Balance

    Raises
    ------
    DesignError
        A cost is 0, or a target is out of reach.

    Notes
    -----
    Minimise Σ c n with Σ W² σ² (1/n − 1/N) ≤ V for every analyte and floor ≤ n ≤ cap. At
    multipliers λ the counts are √(Σ λ W² σ² / c) within the bounds. Each round multiplies λ by the
    squared ratio of an analyte's variance to its target (Chromy 1987); then the dual, which is
    concave, is climbed to its top by a quasi-Newton method with bounds.

    Examples
    --------
    >>> site = Strata((0.5, 0.5), (1.0, 1.0), (None, None))
    >>> lead, zinc = Demand((10.0, 40.0), 9.0, "lead"), Demand((30.0, 15.0), 9.0, "zinc")
    >>> found = balance(site, [lead, zinc])
    >>> [round(n, 1) for n in found.counts], [round(share, 2) for share in found.shares]
    ([28.6, 49.2], [0.65, 0.35])
    """
    problem = bounds_of(strata, demands)
    multipliers = _top(problem)
    total = float(multipliers.sum())
    multipliers[multipliers < 1e-9 * total] = 0.0
    counts = problem.counts(multipliers)
    shares = multipliers / total if total > 0 else multipliers
    # Where floors keep every target nobody decides; the joint spread then weighs all alike.
    weighing = shares if total > 0 else np.full(len(shares), 1 / len(shares))
    squared = np.array([demand.sigmas for demand in demands], dtype=float) ** 2
    joint = np.sqrt((weighing / problem.sizes) @ squared)
    targets = np.array([demand.target_variance for demand in demands])
    return Balance(
        multipliers=tuple(float(m) for m in multipliers * targets / problem.sizes),
        shares=tuple(float(share) for share in shares),
        duals=tuple(float(m) for m in multipliers),
        counts=tuple(float(n) for n in counts),
        lowest_cost=problem.lowest(multipliers),
        sigmas=tuple(float(sigma) for sigma in joint),
    )


def _top(problem: Bounds) -> Numbers:
    """Climb the dual to its top."""
    multipliers = np.full(len(problem.spreads), float(problem.costs @ problem.floors))
    smallest = 1e-9 * float(problem.costs @ problem.floors)
    for _ in range(ROUNDS):
        loads = problem.loads(problem.counts(multipliers))
        multipliers = multipliers * loads**2
        total = float(multipliers.sum())
        if total < smallest:
            return np.zeros_like(multipliers)
        if np.all(np.abs(loads - 1) * multipliers <= 1e-12 * total):
            return multipliers
    return _polished(problem, multipliers)


def _polished(problem: Bounds, start: Numbers) -> Numbers:
    """Climb the rest of the way, where analytes nearly agree and the rule is slow."""
    from scipy.optimize import minimize

    scale, level = float(start.max()), abs(problem.lowest(start)) or 1.0

    def fall(scaled: Numbers) -> tuple[float, Numbers]:
        loads = problem.loads(problem.counts(scaled * scale))
        return -problem.lowest(scaled * scale) / level, -(loads - 1) * scale / level

    found = minimize(
        fall,
        start / scale,
        jac=True,
        method="L-BFGS-B",
        bounds=[(0, None)] * len(start),
        options={"maxiter": 500, "ftol": 1e-15, "gtol": 1e-12},
    )
    climbed: Numbers = np.asarray(found.x, dtype=float) * scale
    return climbed if problem.lowest(climbed) >= problem.lowest(start) else start
