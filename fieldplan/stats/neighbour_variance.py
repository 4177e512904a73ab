"""The variance of a mean of well-spread places, from what sets results apart from neighbours."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldplan.base.errors import DesignError
from fieldplan.stats.spatial import Places, distances

Floats = NDArray[np.float64]

NEIGHBOURS = 4
"""Places of a neighbourhood, its own one among them, before it is made mutual."""
_ROUNDS = 500
_CLOSE = 1e-10


@dataclass(frozen=True)
class NeighbourVariance:
    """The variance of a mean, and how well it is known.

    Parameters
    ----------
    variance : float
    degrees_of_freedom : float
    """

    variance: float
    degrees_of_freedom: float


def neighbour_weights(places: Places) -> Floats:
    """Weigh the neighbours of each place: less by rank of distance, and fairly all round.

    Parameters
    ----------
    places : array of shape (n, 2)
        n at least 2.

    Returns
    -------
    array of shape (n, n)
        0 outside a neighbourhood; rows sum to 1, columns nearly so.

    Raises
    ------
    DesignError
        Fewer than 2 places.

    Notes
    -----
    Neighbours are the place itself and its three nearest; where one counts another, the other
    counts it. The weight falls evenly with the rank of distance, and is then adjusted until each
    place gets as much weight from all neighbourhoods as it gives: Stevens & Olsen (2003),
    Variance estimation for spatially balanced samples of environmental resources,
    Environmetrics 14:593 (from memory).

    Examples
    --------
    >>> neighbour_weights(np.array([[0.0, 0.0], [1.0, 0.0]])).round(2).tolist()
    [[0.67, 0.33], [0.33, 0.67]]
    """
    n = len(places)
    if n < 2:
        message = f"{n} place has no neighbour; a variance needs 2."
        raise DesignError(message)
    order = np.argsort(distances(places, places) + 0.0, axis=1, kind="stable")
    rank = np.empty((n, n), dtype=np.int64)
    np.put_along_axis(rank, order, np.broadcast_to(np.arange(n), (n, n)), axis=1)
    rank[np.arange(n), np.arange(n)] = -1  # itself first, whoever stands on the same spot
    near = rank < NEIGHBOURS
    near |= near.T
    # rank within the neighbourhood, the place itself 0
    within = np.argsort(np.argsort(np.where(near, rank, 2 * n), axis=1, kind="stable"), axis=1)
    sizes = near.sum(axis=1)[:, None]
    weights = np.where(near, (sizes - within) / sizes, 0.0)
    for _ in range(_ROUNDS):
        sums = weights.sum(axis=0)
        weights /= sums
        weights /= weights.sum(axis=1)[:, None]
        if np.abs(sums - 1).max() < _CLOSE:
            break
    return np.asarray(weights, dtype=np.float64)


def neighbour_variance(values: Floats, places: Places) -> NeighbourVariance:
    """Estimate the variance of a plain mean from the spread among neighbours.

    Parameters
    ----------
    values : array of shape (n,)
        One a place; n at least 2.
    places : array of shape (n, 2)
        Drawn by a layout that keeps neighbours apart. Random places must not be given: their
        neighbours differ less than chance lets the mean wander.

    Returns
    -------
    NeighbourVariance

    Raises
    ------
    DesignError
        Fewer than 2 values, or not one a place.

    Notes
    -----
    The mean of weighed variances in all neighbourhoods, over n: Stevens & Olsen (2003), sec. 3
    (from memory). Each is divided by 1 − Σw², which that formula leaves out, so that the whole is
    unbiased where results have nothing in common with their neighbours. Degrees of freedom are
    those of this quadratic form for such results: (tr Q)² / tr Q² (Satterthwaite 1946, Biometrics
    Bulletin 2:110).

    Examples
    --------
    >>> two = neighbour_variance(np.array([1.0, 3.0]), np.array([[0.0, 0.0], [9.0, 0.0]]))
    >>> round(two.variance, 6), round(two.degrees_of_freedom, 6)
    (1.0, 1.0)
    """
    if len(values) != len(places):
        message = f"{len(values)} values came with {len(places)} places; give one for each."
        raise DesignError(message)
    form = neighbour_form(places)
    even = values - values.mean()
    variance = float(even @ form @ even) / len(values)
    known = float(np.trace(form) ** 2 / (form**2).sum())
    return NeighbourVariance(max(variance, 0.0), known)


def neighbour_form(places: Places) -> Floats:
    """Give the matrix Q of the neighbours' variance of single places, s² = z′Qz.

    Parameters
    ----------
    places : array of shape (n, 2)

    Returns
    -------
    array of shape (n, n)
        Its trace is 1 but for rounding, its rows sum to 0.
    """
    weights = neighbour_weights(places)
    own = 1.0 / (1.0 - (weights**2).sum(axis=1)) / len(places)
    spread = np.diag(own @ weights)
    return np.asarray(spread - (weights * own[:, None]).T @ weights, dtype=np.float64)
