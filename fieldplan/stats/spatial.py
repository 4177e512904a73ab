"""How results fade into each other with distance, weighed over many curves, not one fitted."""

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from fieldplan.base.errors import DesignError

CurveShape = Literal["exponential", "smooth"]
SHAPES: tuple[CurveShape, ...] = ("exponential", "smooth")
"""Sharp at the origin as on patchy ground, or rounded as over gentle gradients."""

RANGE_SHARES = tuple(0.04 * 1.6**k for k in range(9))
"""Practical ranges that are tried, as shares of the site's extent: 0.04 to 1.72."""
NUGGET_SHARES = (0.0, 0.1, 0.25, 0.4, 0.6, 0.8, 0.95)
"""Shares of the variance without any structure that are tried."""
FEWEST_PLACES = 20
"""A pilot of fewer places cannot weigh curves against each other (measured, see the docs)."""
MOST_PLACES = 250
"""Larger pilots are thinned at random: more change little and take minutes."""

Places = NDArray[np.float64]


@dataclass(frozen=True)
class Field:
    """All curves that were tried and how likely the pilot makes each.

    Parameters
    ----------
    shapes : tuple of str, length k
    ranges : array of shape (k,)
        Practical range, at which 5 % of the correlation is left; in the unit of the places.
    nuggets : array of shape (k,)
        Share of the variance that even neighbours do not have in common.
    variances : array of shape (k,)
        Variance of single places over all fields of this kind, the pilot's best for the curve.
    weights : array of shape (k,)
        Sum to 1.
    places : int
        That were weighed.
    """

    shapes: tuple[CurveShape, ...]
    ranges: NDArray[np.float64]
    nuggets: NDArray[np.float64]
    variances: NDArray[np.float64]
    weights: NDArray[np.float64]
    places: int

    @property
    def typical_range(self) -> float:
        """The practical range that half of the weight lies below."""
        order = np.argsort(self.ranges, kind="stable")
        half = int(np.searchsorted(np.cumsum(self.weights[order]), 0.5))
        return float(self.ranges[order][min(half, len(order) - 1)])

    @property
    def typical_nugget(self) -> float:
        """The nugget's share of the variance, averaged by weight."""
        return float(self.weights @ self.nuggets)


def correlation_at(
    distance: NDArray[np.float64] | float, practical_range: float, *, shape: CurveShape
) -> NDArray[np.float64]:
    """Give the correlation of two places, nugget apart, from their distance.

    Parameters
    ----------
    distance : float or array
        0 or more.
    practical_range : float
        Where 5 % of the correlation is left; above 0, same unit.
    shape : str
        ``exponential``, or ``smooth`` for Matérn's curve of order 3/2.

    Returns
    -------
    array
        Of the shape of ``distance``.

    Notes
    -----
    exp(−3h/r), and (1 + u) exp(−u) with u = 4.744 h/r: Webster & Oliver (2007), Geostatistics for
    Environmental Scientists, ch. 5; Matérn (1960), Spatial Variation, ch. 2.

    Examples
    --------
    >>> [round(float(correlation_at(60.0, 60.0, shape=shape)), 3) for shape in SHAPES]
    [0.05, 0.05]
    """
    h = np.asarray(distance, dtype=float) / practical_range
    if shape == "exponential":
        return np.asarray(np.exp(-3 * h))
    return np.asarray((1 + 4.744 * h) * np.exp(-4.744 * h))


def distances(first: Places, second: Places) -> NDArray[np.float64]:
    """Give the distance of every place of one set to every place of another.

    Parameters
    ----------
    first : array of shape (n, 2)
    second : array of shape (m, 2)

    Returns
    -------
    array of shape (n, m)
    """
    apart = first[:, None, :] - second[None, :, :]
    return np.asarray(np.hypot(apart[..., 0], apart[..., 1]))


def weigh_field(places: Places, values: NDArray[np.float64], *, extent: float) -> Field:
    """Weigh every curve by how likely it makes the pilot's values.

    Parameters
    ----------
    places : array of shape (n, 2)
        Metres; no two the same. Of more than 250, so many are taken at random, always the same.
    values : array of shape (n,)
        One value a place.
    extent : float
        Side of the square that holds the site, metres.

    Returns
    -------
    Field

    Raises
    ------
    DesignError
        Fewer than 20 places, two places in one spot, or values that are all the same.

    Notes
    -----
    Gaussian field of unknown level and variance; both are integrated out, which gives the
    restricted likelihood (Patterson & Thompson 1971, Biometrika 58:545; Diggle & Ribeiro 2007,
    Model-based Geostatistics, ch. 5 and 7). Ranges are spaced evenly in their logarithm, all
    equally likely beforehand.

    Examples
    --------
    >>> across, up = np.meshgrid(np.arange(6.0), np.arange(6.0))
    >>> places = np.column_stack([across.ravel(), up.ravel()])
    >>> field = weigh_field(places, np.sin(places[:, 0]), extent=6.0)
    >>> round(float(field.weights.sum()), 9), field.typical_nugget < 0.1
    (1.0, True)
    """
    _check_pilot(places, values, extent)
    if len(values) > MOST_PLACES:
        kept = np.sort(np.random.default_rng(0).permutation(len(values))[:MOST_PLACES])
        places, values = places[kept], values[kept]
    apart = distances(places, places)
    # A common shift and scale change no weight; without them large values would lose digits.
    scale = float(values.std(ddof=1))
    even = (values - values.mean()) / scale
    tried = [(shape, share * extent) for shape in SHAPES for share in RANGE_SHARES]
    nuggets = np.array(NUGGET_SHARES)
    heights, variances = [], []
    for shape, reach in tried:
        height, variance = _likelihoods(correlation_at(apart, reach, shape=shape), even, nuggets)
        heights.append(height)
        variances.append(variance * scale**2)
    flat = np.concatenate(heights)
    weights = np.exp(flat - flat.max())
    return Field(
        shapes=tuple(shape for shape, _ in tried for _ in nuggets),
        ranges=np.repeat([reach for _, reach in tried], len(nuggets)),
        nuggets=np.tile(nuggets, len(tried)),
        variances=np.concatenate(variances),
        weights=weights / weights.sum(),
        places=len(values),
    )


def _check_pilot(places: Places, values: NDArray[np.float64], extent: float) -> None:
    if len(values) < FEWEST_PLACES:
        message = (
            f"a pilot of {len(values)} places cannot show how results fade with distance; it takes "
            f"{FEWEST_PLACES} or more, better 30."
        )
        raise DesignError(message)
    if not (extent > 0 and np.isfinite(places).all() and np.isfinite(values).all()):
        message = f"places, values and extent must be numbers, the extent above 0, not {extent!r}."
        raise DesignError(message)
    spread = float(np.ptp(values))
    if spread <= 1e-12 * float(np.abs(values).max()):
        message = f"all {len(values)} results are {values[0]:g}; they show no structure."
        raise DesignError(message)
    if len(np.unique(places, axis=0)) < len(places):
        message = "two places of the pilot are in one spot; bring them down to one value first."
        raise DesignError(message)


def _likelihoods(
    correlation: NDArray[np.float64], values: NDArray[np.float64], nuggets: NDArray[np.float64]
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Give, for every nugget, the log of the restricted likelihood and the variance."""
    n = len(values)
    # Libraries spread decompositions over threads, which wait for each other on a busy machine:
    # small pilots take the factors that they leave on one.
    whiten = _factored if n <= FEW else _decomposed
    x, one, spread = whiten(correlation, np.column_stack([values, np.ones(n)]), nuggets)
    ones = (one**2).sum(axis=1)
    rest = (x**2).sum(axis=1) - (x * one).sum(axis=1) ** 2 / ones
    rest = np.maximum(rest, 1e-300)
    height = -0.5 * (spread + np.log(ones) + (n - 1) * np.log(rest))
    return height, rest / (n - 1)


Whitened = tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]
"""Values and ones made independent, each (k, n) for k nuggets, and log determinants (k,)."""

FEW = 100
_FLOOR = 1e-10
"""The smooth curve at long ranges is singular to the last digit; so much keeps its order."""


def _factored(
    correlation: NDArray[np.float64], columns: NDArray[np.float64], nuggets: NDArray[np.float64]
) -> Whitened:
    """Make independent by the Cholesky factor of each matrix."""
    own = (nuggets + _FLOOR)[:, None, None] * np.eye(len(columns))
    lower = np.linalg.cholesky((1 - nuggets)[:, None, None] * correlation + own)
    free = np.linalg.solve(lower, np.broadcast_to(columns, (len(nuggets), *columns.shape)))
    logs = np.log(np.diagonal(lower, axis1=1, axis2=2))
    return free[:, :, 0], free[:, :, 1], 2 * logs.sum(axis=1)


def _decomposed(
    correlation: NDArray[np.float64], columns: NDArray[np.float64], nuggets: NDArray[np.float64]
) -> Whitened:
    """Make independent by one eigenvalue decomposition for all nuggets."""
    own, turned = np.linalg.eigh(correlation)
    x, one = (turned.T @ columns).T
    parts = (1 - nuggets)[:, None] * np.maximum(own, 0.0) + (nuggets + _FLOOR)[:, None]
    roots = np.sqrt(parts)
    return x / roots, one / roots, np.log(parts).sum(axis=1)
