"""The variance of a mean from one or two places in each compact cell of a population."""

import math
from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldplan.base.errors import DesignError
from fieldplan.stats.field_integrals import correlation_in_square
from fieldplan.stats.spatial import FEWEST_PLACES, CurveShape, Places, distances, weigh_field

Floats = NDArray[np.float64]
Numbers = NDArray[np.int64]

MOST_PLACES = 400
"""Above this many results pairs know as much, and weighing curves takes seconds (measured)."""


def cells_joined(held: Numbers, centres: Places) -> Numbers:
    """Join every cell without a result to the nearest cell that has one.

    Parameters
    ----------
    held : array of int, shape (k,)
        Results in each cell.
    centres : array of shape (k, 2)

    Returns
    -------
    array of int, shape (k,)
        For each cell the cell that stands for it; its own number where it has a result.

    Raises
    ------
    DesignError
        No cell has a result.

    Examples
    --------
    >>> centres = np.array([[0.0, 0.0], [1.0, 0.0], [5.0, 0.0]])
    >>> cells_joined(np.array([1, 0, 1]), centres).tolist()
    [0, 0, 2]
    """
    full = np.flatnonzero(held)
    if len(full) == 0:
        message = f"none of {len(held)} cells has a result, so there is no mean."
        raise DesignError(message)
    stands = np.arange(len(held))
    empty = np.flatnonzero(held == 0)
    stands[empty] = full[np.argmin(distances(centres[empty], centres[full]), axis=1)]
    return stands


def neighbour_groups(held: Numbers, centres: Places) -> Numbers:
    """Put cells with one result each in pairs of neighbours; cells with more stand alone.

    Parameters
    ----------
    held : array of int, shape (k,)
        Results in each cell, at least 1.
    centres : array of shape (k, 2)

    Returns
    -------
    array of int, shape (k,)
        The number of each cell's group, from 0.

    Raises
    ------
    DesignError
        One cell with one result in all.

    Notes
    -----
    The closest two cells with one result that are in no pair yet become one, again and again; the
    last one left over, or one that has a cell with more results closer by, joins that group.
    Results play no part. Collapsed strata: Cochran (1977), Sampling Techniques, 3rd ed., sec.
    5A.12.

    Examples
    --------
    >>> centres = np.array([[0.0, 0.0], [1.0, 0.0], [5.0, 0.0], [6.0, 0.0], [9.0, 0.0]])
    >>> neighbour_groups(np.ones(5, dtype=int), centres).tolist()
    [0, 0, 1, 1, 1]
    """
    count = len(held)
    if int(held.sum()) < 2:
        message = "one result in all; a variance needs 2."
        raise DesignError(message)
    group = np.where(held > 1, np.arange(count), -1)
    alone = held == 1
    apart = distances(centres, centres)
    first, second = np.triu_indices(count, 1)
    either = alone[first] | alone[second]
    first, second = first[either], second[either]
    for at in np.argsort(apart[first, second], kind="stable").tolist():
        one, two = int(first[at]), int(second[at])
        if group[one] < 0 and group[two] < 0:
            group[one] = group[two] = one
        elif group[one] < 0 and not alone[two]:
            group[one] = group[two]
        elif group[two] < 0 and not alone[one]:
            group[two] = group[one]
    for left in np.flatnonzero(group < 0).tolist():
        near = np.argsort(apart[left], kind="stable")
        group[left] = group[next(k for k in near.tolist() if group[k] >= 0)]
    return np.unique(group, return_inverse=True)[1].astype(np.int64)


@dataclass(frozen=True)
class VariancePart:
    """One term of an estimated variance: the cells it comes from, and what it is worth.

    Parameters
    ----------
    cells : tuple of int
        Positions of the cells, from 0; empty where the term comes from all of them.
    variance : float
    degrees_of_freedom : float
    """

    cells: tuple[int, ...]
    variance: float
    degrees_of_freedom: float


def pair_parts(
    values: Floats, cell_of: Numbers, shares: Floats, groups: Numbers
) -> tuple[VariancePart, ...]:
    """Estimate the variance of the weighed mean of cell means, group by group.

    Parameters
    ----------
    values : array of shape (n,)
    cell_of : array of int, shape (n,)
        The cell of each value, from 0 to k − 1; none is empty.
    shares : array of shape (k,)
        Of the population, sum 1.
    groups : array of int, shape (k,)
        As from ``neighbour_groups``.

    Returns
    -------
    tuple of VariancePart
        Their sum is the variance.

    Notes
    -----
    s² Σ a²/n over the cells of a group, s² among all of its results, a the share of a cell. For a
    cell alone this is unbiased: Cochran (1977), Sampling Techniques, 3rd ed., sec. 5.4. In a pair
    of cells s² holds the difference between the cells too, so that it overstates: sec. 5A.12.

    Examples
    --------
    >>> parts = pair_parts(np.array([1.0, 3.0, 10.0, 14.0]), np.array([0, 0, 1, 1]),
    ...                    np.array([0.5, 0.5]), np.array([0, 1]))
    >>> [(part.variance, part.degrees_of_freedom) for part in parts]
    [(0.25, 1.0), (1.0, 1.0)]
    """
    held = np.bincount(cell_of, minlength=len(shares))
    own = shares**2 / held
    parts = []
    for number in range(int(groups.max()) + 1):
        cells = np.flatnonzero(groups == number)
        inside = values[np.isin(cell_of, cells)]
        variance = float(own[cells].sum() * inside.var(ddof=1))
        parts.append(VariancePart(tuple(cells.tolist()), variance, float(len(inside) - 1)))
    return tuple(parts)


def freedom_of_small_parts(parts: Iterable[float], degrees_of_freedom: Iterable[float]) -> float:
    """Give the effective degrees of freedom of a sum of variances that each know very little.

    Parameters
    ----------
    parts : iterable of float
        Estimated terms of the sum.
    degrees_of_freedom : iterable of float
        Of each term.

    Returns
    -------
    float
        At least 1; infinite when every part is 0.

    Notes
    -----
    Satterthwaite (1946), Biometrics Bulletin 2:110, with V² of the sum and v² of the terms taken
    without bias: E v² is (1 + 2/f) times the square of what it estimates, so that f = 1, a pair,
    would give a third of the degrees of freedom there are. (Σ v)² / Σ (v²/(f + 2)) − 2 gives back
    Σ f where all terms are alike (derived here).

    Examples
    --------
    >>> freedom_of_small_parts([1.0], [7])
    7.0
    """
    pairs = [(float(v), float(f)) for v, f in zip(parts, degrees_of_freedom, strict=True)]
    largest = max((v for v, _ in pairs), default=0.0)
    if largest <= 0:
        return math.inf
    total = math.fsum(v / largest for v, _ in pairs)
    squares = math.fsum((v / largest) ** 2 / (f + 2) for v, f in pairs)
    return min(max(total**2 / squares - 2, 1.0), math.fsum(f for _, f in pairs))


@dataclass(frozen=True)
class CurveVariance:
    """The variance of a mean averaged over curves of likeness with distance.

    Parameters
    ----------
    variance : float
    degrees_of_freedom : float
    practical_range : float
        Half of the weight lies below it.
    nugget : float
        Share of the variance without structure, averaged by weight.
    sigma : float
        Root of the variance of single places, averaged by weight.
    inside : float
        Correlation of two places of one cell, averaged by weight.
    """

    variance: float
    degrees_of_freedom: float
    practical_range: float
    nugget: float
    sigma: float
    inside: float


def curve_variance(
    values: Floats, places: Places, cell_of: Numbers, shares: Floats, *, area: float
) -> CurveVariance:
    """Estimate the variance of the weighed mean of cell means from how results fade with distance.

    Parameters
    ----------
    values : array of shape (n,)
        From 20 to 400.
    places : array of shape (n, 2)
        Metres.
    cell_of : array of int, shape (n,)
        The cell of each value, from 0 to k − 1; none is empty.
    shares : array of shape (k,)
        Of the population, sum 1.
    area : float
        Of the population, square metres.

    Returns
    -------
    CurveVariance

    Raises
    ------
    DesignError
        Too few or too many values, or values that are all the same.

    Notes
    -----
    For each curve Σ a²/n · σ² (ν + (1 − ν)(1 − c)), c the mean correlation in a square of the
    cell's area: Matérn (1960), Spatial Variation, ch. 5; averaged on the log scale over the curves
    of ``fieldplan.stats.spatial`` by how likely the results make each. n − 3 degrees of freedom:
    level, range and nugget come from the results (house rule; measured, see the docs).
    """
    if len(values) > MOST_PLACES:
        message = f"{len(values)} results; curves are weighed for {MOST_PLACES} at most."
        raise DesignError(message)
    extent = float(np.ptp(places, axis=0).max(initial=0.0))
    field = weigh_field(places, values, extent=max(extent, math.sqrt(area)))
    own = shares**2 / np.bincount(cell_of, minlength=len(shares))
    sides, same = np.unique(np.round(np.sqrt(area * shares), 2), return_inverse=True)
    of_side = np.bincount(same, own).astype(np.float64)
    pairs = dict.fromkeys(zip(field.shapes, field.ranges.tolist(), strict=True))
    inside = {pair: _correlation_inside(np.asarray(sides), of_side, pair) for pair in pairs}
    common = np.array([inside[p] for p in zip(field.shapes, field.ranges.tolist(), strict=True)])
    left = field.variances * (field.nuggets + (1 - field.nuggets) * (1 - common))
    return CurveVariance(
        variance=float(own.sum() * math.exp(field.weights @ np.log(left))),
        degrees_of_freedom=float(len(values) - 3),
        practical_range=field.typical_range,
        nugget=field.typical_nugget,
        sigma=math.sqrt(float(field.weights @ field.variances)),
        inside=float(field.weights @ common),
    )


def can_weigh_curves(values: Floats) -> bool:
    """Tell whether so many results, not all alike, can weigh curves against each other."""
    return FEWEST_PLACES <= len(values) <= MOST_PLACES and float(np.ptp(values)) > 0


def _correlation_inside(sides: Floats, weights: Floats, pair: tuple[CurveShape, float]) -> float:
    """Average the correlation in squares of several sides by their part in the variance."""
    shape, reach = pair
    each = [correlation_in_square(float(side), reach, shape=shape) for side in sides]
    return float(weights @ np.array(each) / weights.sum())
