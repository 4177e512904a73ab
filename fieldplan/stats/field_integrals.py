"""Mean correlations over squares and sites: what a place knows of the ground round it."""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from fieldplan.stats.spatial import CurveShape, Places, correlation_at, distances


@lru_cache(maxsize=1)
def _nodes() -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Nodes on (0, 1) that crowd at 0, where correlation falls fastest, and their weights."""
    node, weight = np.polynomial.legendre.leggauss(24)
    near = (node + 1) / 2
    return near**2, weight * near


@lru_cache(maxsize=4096)
def correlation_in_square(side: float, practical_range: float, *, shape: CurveShape) -> float:
    """Average the correlation over all pairs of places in a square.

    Parameters
    ----------
    side, practical_range : float
        Above 0, same unit.
    shape : str

    Returns
    -------
    float

    Notes
    -----
    ∫∫ C(a·√(x² + y²)) 4 (1 − x)(1 − y) dx dy over the unit square, the density of the offset of
    two random places of a square of side a: Matérn (1960), ch. 2; by Gauss–Legendre quadrature.

    Examples
    --------
    >>> round(correlation_in_square(1e-9, 1.0, shape="smooth"), 6)
    1.0
    """
    at, weight = _nodes()
    density = 2 * weight * (1 - at)
    apart = side * np.hypot(at[:, None], at[None, :])
    return float(density @ correlation_at(apart, practical_range, shape=shape) @ density)


@lru_cache(maxsize=4096)
def correlation_to_centre(side: float, practical_range: float, *, shape: CurveShape) -> float:
    """Average the correlation of a square's centre with all of its places.

    Parameters
    ----------
    side, practical_range : float
        Above 0, same unit.
    shape : str

    Returns
    -------
    float

    Examples
    --------
    >>> square = correlation_in_square(1.0, 1.0, shape="exponential")
    >>> correlation_to_centre(1.0, 1.0, shape="exponential") > square
    True
    """
    at, weight = _nodes()
    apart = side / 2 * np.hypot(at[:, None], at[None, :])
    return float(weight @ correlation_at(apart, practical_range, shape=shape) @ weight)


@dataclass(frozen=True)
class PairDistances:
    """How far apart the places of a site lie, over all pairs of equal cells.

    Parameters
    ----------
    distances : array of shape (b,)
        Mean distance in each class; centre to centre.
    shares : array of shape (b,)
        Share of all pairs of cells in it; with ``own_share`` they sum to 1.
    own_share : float
        Share of the pairs that lie in one cell, 1/m.
    cell_side : float
    """

    distances: NDArray[np.float64]
    shares: NDArray[np.float64]
    own_share: float
    cell_side: float


def pair_distances(cells: Places, cell_side: float, *, classes: int = 1000) -> PairDistances:
    """Sort all pairs of cells into classes of distance, once for all curves.

    Parameters
    ----------
    cells : array of shape (m, 2)
        Centres of equal cells that cover the site.
    cell_side : float
        Above 0, same unit.
    classes : int

    Returns
    -------
    PairDistances

    Examples
    --------
    >>> pairs = pair_distances(np.array([[0.0, 0.0], [3.0, 4.0]]), 1.0)
    >>> pairs.distances.tolist(), pairs.shares.tolist(), pairs.own_share
    ([5.0], [0.5], 0.5)
    """
    m = len(cells)
    apart = np.concatenate([distances(cells[k : k + 1], cells[k + 1 :])[0] for k in range(m - 1)])
    longest = float(apart.max(initial=0.0)) or 1.0
    kind = np.minimum((apart / longest * classes).astype(np.int64), classes - 1)
    count = np.bincount(kind)
    held = count > 0
    means = np.bincount(kind, apart)[held] / count[held]
    return PairDistances(means, 2 * count[held] / m**2, 1 / m, cell_side)


def correlation_in_region(
    pairs: PairDistances, practical_range: float, *, shape: CurveShape
) -> float:
    """Average the correlation over all pairs of places of a site.

    Parameters
    ----------
    pairs : PairDistances
    practical_range : float
        Above 0, same unit as the distances.
    shape : str

    Returns
    -------
    float
        Pairs within one cell are integrated, pairs of cells taken from centre to centre.

    Examples
    --------
    >>> pairs = pair_distances(np.array([[0.0, 0.0], [3.0, 4.0]]), 1.0)
    >>> round(correlation_in_region(pairs, 1e9, shape="exponential"), 6)
    1.0
    """
    between = correlation_at(pairs.distances, practical_range, shape=shape)
    own = correlation_in_square(pairs.cell_side, practical_range, shape=shape)
    return float(pairs.shares @ between) + pairs.own_share * own
