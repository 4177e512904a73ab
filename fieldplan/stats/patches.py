"""The chance that a layout finds a patch: a circle or an ellipse somewhere on endless ground."""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldplan.base.errors import DesignError
from fieldplan.stats.precision import MOST, whole
from fieldplan.stats.tolerance import check_share

Numbers = NDArray[np.float64]

_DIRECTIONS = 512
"""Directions of a patch that are averaged where its direction is unknown; good to 1e-6."""


@dataclass(frozen=True)
class Patch:
    """A circle or an ellipse of contaminated ground, of which one location inside tells.

    Parameters
    ----------
    length, width : float
        Full longer and shorter axis, in one unit; equal for a circle.

    Raises
    ------
    DesignError
        A size is not above 0, or the width exceeds the length.

    Examples
    --------
    >>> round(Patch(20.0, 10.0).area, 1), Patch(20.0, 10.0).shape
    (157.1, 0.5)
    """

    length: float
    width: float

    def __post_init__(self) -> None:
        for name, value in (("length", self.length), ("width", self.width)):
            if not (value > 0 and math.isfinite(value)):
                message = f"the {name} of the patch is {value!r}; it must be above 0."
                raise DesignError(message)
        if self.width > self.length:
            message = (
                f"the patch is {self.width:g} wide and {self.length:g} long; the length is the "
                "longer axis, so exchange the two."
            )
            raise DesignError(message)

    @property
    def area(self) -> float:
        """Area of the ellipse."""
        return math.pi * self.length * self.width / 4

    @property
    def shape(self) -> float:
        """Width over length, 1 for a circle."""
        return self.width / self.length

    def scaled(self, factor: float) -> "Patch":
        """Return the patch of the same shape, ``factor`` times as long."""
        return Patch(self.length * factor, self.width * factor)

    def shrunk(self, error: float) -> "Patch":
        """Return the part that is hit however far, up to ``error``, each location is off.

        Parameters
        ----------
        error : float
            Largest distance between a location as planned and the place where it was taken, at
            least 0 and below half the width.

        Notes
        -----
        A location planned at least ``error`` inside the edge is taken inside, wherever within
        ``error`` that is and however the errors hang together. The ellipse of the same shape whose
        width is smaller by twice the error keeps that distance all round: the distance between
        tangents is (1 − error/b) h + error ≤ h, since no tangent is nearer to the centre than b.
        So the chance of planning a location into it is a lower bound of the chance of hitting.

        Examples
        --------
        >>> Patch(20.0, 10.0).shrunk(1.0)
        Patch(length=16.0, width=8.0)
        """
        if not 0 <= error < self.width / 2:
            message = (
                f"a position error of {error:g} leaves nothing of a patch {self.width:g} wide; it "
                f"must lie between 0 and {self.width / 2:g}."
            )
            raise DesignError(message)
        return self.scaled(1 - 2 * error / self.width)


@dataclass(frozen=True)
class Lattice:
    """Grid nodes for a spacing of 1 along the rows.

    Parameters
    ----------
    row_distance : float
        Between rows, above 0.
    row_shift : float
        How far each row is moved along itself against the one below it.

    Examples
    --------
    >>> Lattice(2.0).spacing(800.0, 25)  # places 4 apart, rows 8 apart
    4.0
    """

    row_distance: float
    row_shift: float = 0.0

    def __post_init__(self) -> None:
        if not (self.row_distance > 0 and math.isfinite(self.row_distance)):
            message = f"the distance between rows is {self.row_distance!r}; it must be above 0."
            raise DesignError(message)

    def spacing(self, area: float, count: float) -> float:
        """Return the spacing at which ``count`` nodes fall on ``area``, on average."""
        return math.sqrt(_positive(area, "area") / (self.row_distance * _positive(count, "count")))

    def count(self, area: float, spacing: float) -> float:
        """Return the average number of nodes on ``area``, not rounded."""
        return _positive(area, "area") / (self.row_distance * _positive(spacing, "spacing") ** 2)


SQUARE = Lattice(1.0)
TRIANGULAR = Lattice(math.sqrt(0.75), 0.5)


def chance_on_grid(
    patch: Patch, spacing: float, *, lattice: Lattice = SQUARE, angle: float | None = None
) -> float:
    """Give the chance that at least one node of a grid with a random origin hits the patch.

    Parameters
    ----------
    patch : Patch
        Lengths in the unit of ``spacing``.
    spacing : float
        Between nodes along a row, above 0.
    lattice : Lattice
        ``SQUARE``, ``TRIANGULAR``, or ``Lattice(k)`` for rows k times as far apart as nodes.
    angle : float, optional
        Degrees between the long axis and the rows; None takes every direction as equally likely,
        as it is for a grid laid in a random direction.

    Raises
    ------
    DesignError
        The spacing is not above 0.

    Notes
    -----
    The copies of the patch around all nodes cover a share of the ground, and that share is the
    chance: Singer & Wickman (1969), Mineral Industries Experiment Station, special publication
    1-69; Gilbert (1987), *Statistical Methods for Environmental Pollution Monitoring*, ch. 10.
    While copies cannot overlap it is the area of the patch over that of a cell.

    For every size it is worked out exactly here. A stretch along and across the patch makes it a
    circle of radius r and the grid another lattice. Ground is covered where its nearest node is
    within r. The places nearest to one node form a hexagon whose corners all lie at the
    circumradius R of the triangle of three neighbouring nodes, no angle of it obtuse. From r = R
    on the chance is 1; below, the circle crosses the six sides but holds no corner, so that it
    loses six segments that do not overlap.

    Examples
    --------
    >>> round(chance_on_grid(Patch(10.0, 10.0), 10.0), 4)
    0.7854
    >>> round(chance_on_grid(Patch(18.0, 9.0), 10.0, angle=0.0), 3)
    0.851
    >>> round(chance_on_grid(Patch(10.0, 10.0), 10.0, lattice=TRIANGULAR), 4)
    0.9069
    """
    _positive(spacing, "spacing")
    if angle is not None:
        angles = np.array([math.radians(angle)])
    elif patch.length == patch.width:
        angles = np.zeros(1)
    else:  # a mirror image of the grid is the grid, so a quarter turn holds every case
        angles = (np.arange(_DIRECTIONS) + 0.5) * (math.pi / 2 / _DIRECTIONS)
    return float(_covered_share(patch, spacing, lattice, angles).mean())


def _covered_share(patch: Patch, spacing: float, lattice: Lattice, angles: Numbers) -> Numbers:
    """Share of the ground within the patch around some node, for each angle."""
    along, across = spacing * 2 / patch.length, spacing * 2 / patch.width
    cosine, sine = np.cos(angles), np.sin(angles)
    first = np.stack([along * cosine, -across * sine])
    x, y = lattice.row_shift, lattice.row_distance
    second = np.stack([along * (x * cosine + y * sine), across * (y * cosine - x * sine)])
    cell = along * across * lattice.row_distance
    sides = _triangle_sides(first, second)
    kept = math.pi - 2 * _segment(sides / 2).sum(axis=0)
    circumradius = sides.prod(axis=0) / (2 * cell)
    return np.where(circumradius <= 1, 1.0, np.minimum(kept / cell, 1.0))


def _triangle_sides(first: Numbers, second: Numbers) -> Numbers:
    """Sides, shape (3, k), of the triangles of neighbouring nodes; none has an obtuse angle.

    Gauss's reduction: the longer vector loses the shorter one as often as shortens it.
    """
    while True:
        swap = (first**2).sum(axis=0) > (second**2).sum(axis=0)
        first, second = np.where(swap, second, first), np.where(swap, first, second)
        times = np.rint((first * second).sum(axis=0) / (first**2).sum(axis=0))
        # A product of one half exactly may be taken off and put back for ever.
        if not (np.abs((first * second).sum(axis=0) / (first**2).sum(axis=0)) > 0.5 + 1e-12).any():
            break
        second = second - times * first
    third = np.where((first * second).sum(axis=0) > 0, first - second, first + second)
    sides: Numbers = np.sqrt(np.stack([(v**2).sum(axis=0) for v in (first, second, third)]))
    return sides


def _segment(distance: Numbers) -> Numbers:
    """Area that a line at this distance from the centre cuts off a circle of radius 1."""
    near = np.minimum(distance, 1.0)
    return np.asarray(np.arccos(near) - near * np.sqrt(1 - near**2))


def spacing_for_chance(
    patch: Patch, chance: float, *, lattice: Lattice = SQUARE, angle: float | None = None
) -> float:
    """Give the widest spacing at which a grid hits the patch with at least this chance.

    Parameters
    ----------
    patch : Patch
    chance : float
        Inside (0, 1).
    lattice : Lattice
    angle : float, optional
        As in :func:`chance_on_grid`.

    Returns
    -------
    float
        In the unit of the patch.

    Examples
    --------
    >>> round(spacing_for_chance(Patch(200.0, 200.0), 0.9), 1)
    179.4
    """
    check_share(chance, "the chance of hitting the patch")
    high = math.sqrt(patch.area / (chance * lattice.row_distance))
    if _meets(patch, high, lattice, angle, chance):  # copies do not overlap yet
        return high
    low = high
    while not _meets(patch, low, lattice, angle, chance):
        high, low = low, low / 2
    for _ in range(60):
        middle = (low + high) / 2
        if high - low <= 1e-12 * high:
            break
        low, high = (
            (middle, high) if _meets(patch, middle, lattice, angle, chance) else (low, middle)
        )
    return low


def _meets(
    patch: Patch, spacing: float, lattice: Lattice, angle: float | None, chance: float
) -> bool:
    return chance_on_grid(patch, spacing, lattice=lattice, angle=angle) >= chance * (1 - 1e-14)


def smallest_on_grid(
    spacing: float,
    chance: float,
    *,
    shape: float = 1.0,
    lattice: Lattice = SQUARE,
    angle: float | None = None,
) -> Patch:
    """Give the smallest patch of a shape that a grid hits with this chance.

    Parameters
    ----------
    spacing : float
        Between nodes along a row, above 0.
    chance : float
        Inside (0, 1).
    shape : float
        Width over length, in (0, 1].
    lattice : Lattice
    angle : float, optional
        As in :func:`chance_on_grid`.

    Examples
    --------
    >>> round(smallest_on_grid(10.0, 0.95).length, 2)
    11.98
    """
    unit = Patch(1.0, shape)
    widest = spacing_for_chance(unit, chance, lattice=lattice, angle=angle)
    return unit.scaled(_positive(spacing, "spacing") / widest)


def chance_at_random(patch: Patch, area: float, count: int) -> float:
    """Give the chance that at least one of so many random places hits a patch well inside.

    Parameters
    ----------
    patch : Patch
    area : float
        Of the ground from which the places are drawn, above the patch's own.
    count : int
        Independent places, at least 0.

    Notes
    -----
    1 − (1 − a/A)ⁿ. Direction and shape of the patch do not matter, its area does.

    Examples
    --------
    >>> round(chance_at_random(Patch(20.0, 20.0), 10_000.0, 40), 3)
    0.721
    """
    return -math.expm1(count * math.log1p(-_share_of(patch, area)))


def count_at_random(patch: Patch, area: float, chance: float) -> int:
    """Count the random places that hit the patch with at least this chance.

    Examples
    --------
    >>> count_at_random(Patch(20.0, 20.0), 10_000.0, 0.95)
    94
    """
    check_share(chance, "the chance of hitting the patch")
    share = _share_of(patch, area)
    places = math.log1p(-chance) / math.log1p(-share)
    if places > MOST:
        message = (
            f"a patch of {share:.2g} of the ground takes {places:.3g} random places, more than "
            f"{MOST}; give a larger patch or a lower chance."
        )
        raise DesignError(message)
    return whole(places)


def smallest_at_random(area: float, count: int, chance: float, *, shape: float = 1.0) -> Patch:
    """Give the smallest patch of a shape that so many random places hit with this chance.

    Examples
    --------
    >>> round(smallest_at_random(10_000.0, 94, 0.95).length, 2)
    19.98
    """
    check_share(chance, "the chance of hitting the patch")
    share = -math.expm1(math.log1p(-chance) / _positive(count, "count"))
    unit = Patch(1.0, shape)
    return unit.scaled(math.sqrt(share * _positive(area, "area") / unit.area))


def _share_of(patch: Patch, area: float) -> float:
    if not patch.area < area:
        message = (
            f"a patch of {patch.area:.4g} square units is no smaller than the ground of {area:.4g} "
            "that it lies in; give a smaller patch."
        )
        raise DesignError(message)
    return patch.area / area


def _positive(value: float, name: str) -> float:
    if not (value > 0 and math.isfinite(value)):
        message = f"the {name} is {value!r}; it must be above 0."
        raise DesignError(message)
    return value
