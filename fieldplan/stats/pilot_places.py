"""Where the places of a pilot lie: bunched together or not, along a slope or not."""

import math

import numpy as np
from numpy.typing import NDArray

from fieldplan.base.errors import DesignError
from fieldplan.stats.spatial import Places

RANDOM_DRAWS = 199
RARE = 0.01
"""A pilot counts as bunched where fewer than 1 in 100 random pilots are (house rule)."""


def area_weights(places: Places, cells: Places) -> NDArray[np.float64]:
    """Weigh every place by the part of the site that lies nearest to it.

    Parameters
    ----------
    places : array of shape (n, 2)
        At least 2.
    cells : array of shape (m, 2)
        Centres of equal cells that cover the site.

    Returns
    -------
    array of shape (n,)
        Sum to 1; 0 for a place to which no cell is nearest.

    Raises
    ------
    DesignError
        Fewer than 2 places, or no cells.

    Notes
    -----
    Areas of influence, the polygons of Thiessen (1911), Monthly Weather Review 39:1082, cut off
    at the site's boundary and counted in cells; against bunched data: Isaaks & Srivastava (1989),
    Applied Geostatistics, ch. 10.

    Examples
    --------
    >>> cells = np.column_stack([np.arange(10) + 0.5, np.zeros(10)])
    >>> area_weights(np.array([[0.0, 0.0], [4.0, 0.0]]), cells).tolist()
    [0.2, 0.8]
    """
    from scipy.spatial import cKDTree

    if len(places) < 2 or len(cells) == 0:
        message = (
            f"n = {len(places)} and {len(cells)} cells cannot share out a site; it takes 2 places."
        )
        raise DesignError(message)
    nearest = cKDTree(places).query(cells)[1]
    return np.bincount(nearest, minlength=len(places)) / len(cells)


def worth_of_weights(weights: NDArray[np.float64]) -> float:
    """Give how many equally weighed places tell as much as these.

    Parameters
    ----------
    weights : array of shape (n,)

    Returns
    -------
    float
        (Σ w)² / Σ w²: Kish (1965), Survey Sampling, sec. 11.7.

    Examples
    --------
    >>> worth_of_weights(np.array([0.5, 0.25, 0.25]))
    2.6666666666666665
    """
    return float(weights.sum() ** 2 / (weights**2).sum())


def is_bunched(places: Places, cells: Places, *, seed: int = 0) -> bool:
    """Tell whether places are bunched together more than random ones would be.

    Parameters
    ----------
    places : array of shape (n, 2)
    cells : array of shape (m, 2)
        Centres of equal cells that cover the site; at least as many as places.
    seed : int
        Of the random pilots that it is compared with.

    Returns
    -------
    bool
        True where the areas of influence are less even than in 99 of 100 random pilots.

    Examples
    --------
    >>> across, up = np.meshgrid(np.arange(20.0), np.arange(20.0))
    >>> cells = np.column_stack([across.ravel(), up.ravel()])
    >>> is_bunched(cells[::13], cells), is_bunched(cells[:30], cells)
    (False, True)
    """
    if len(cells) < len(places):
        message = f"{len(cells)} cells are too few to compare {len(places)} places with."
        raise DesignError(message)
    found = worth_of_weights(area_weights(places, cells))
    random = np.random.default_rng(seed)
    lower = 0
    for _ in range(RANDOM_DRAWS):
        drawn = cells[random.choice(len(cells), len(places), replace=False)]
        lower += worth_of_weights(area_weights(drawn, cells)) <= found
        if lower + 1 > RARE * (RANDOM_DRAWS + 1):
            return False
    return True


def weighed_spread(
    values: NDArray[np.float64], weights: NDArray[np.float64]
) -> tuple[float, float]:
    """Give mean and standard deviation of a pilot with each value weighed by its area.

    Parameters
    ----------
    values, weights : array of shape (n,)

    Returns
    -------
    mean, sigma : float
        The divisor is 1 − Σ w², which makes σ² right on average for independent values.

    Raises
    ------
    DesignError
        One place holds all the weight.

    Examples
    --------
    >>> weighed_spread(np.array([2.0, 4.0]), np.array([0.5, 0.5]))
    (3.0, 1.4142135623730951)
    """
    shares = weights / weights.sum()
    left = 1 - float((shares**2).sum())
    if left <= 1e-12:
        message = "one place of the pilot stands for the whole site; a spread needs 2."
        raise DesignError(message)
    mean = float(shares @ values)
    return mean, math.sqrt(float(shares @ (values - mean) ** 2) / left)


def slope_share(places: Places, values: NDArray[np.float64]) -> float:
    """Give the share of the pilot's variance that a straight slope across the site explains.

    Parameters
    ----------
    places : array of shape (n, 2)
        At least 4.
    values : array of shape (n,)

    Returns
    -------
    float
        R² of the plane through the values, corrected for its two slopes; never below 0.

    Raises
    ------
    DesignError
        Fewer than 4 places, or values that are all the same.

    Notes
    -----
    1 − (1 − R²)(n − 1)/(n − 3): Draper & Smith (1998), Applied Regression Analysis, ch. 5.

    Examples
    --------
    >>> places = np.array([[0, 0], [1, 0], [0, 1], [1, 1], [2, 3]], dtype=float)
    >>> round(slope_share(places, 3 + 2 * places[:, 0] - places[:, 1]), 9)
    1.0
    """
    n = len(values)
    off = values - values.mean()
    total = float(off @ off)
    if n < 4 or total <= 0:
        message = (
            f"{n} values that spread by {total:g} cannot show a slope; it takes 4 that differ."
        )
        raise DesignError(message)
    plane = places - places.mean(axis=0)
    slopes = np.linalg.lstsq(plane, off, rcond=None)[0]
    rest = off - plane @ slopes
    return max(0.0, 1 - float(rest @ rest) / total * (n - 1) / (n - 3))
