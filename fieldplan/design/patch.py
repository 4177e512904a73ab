"""The chance of hitting a patch on the true population: its edges, holes and strata count."""

import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from fieldplan.base.errors import DesignError
from fieldplan.design.patch_chance import PatchChance
from fieldplan.frame.model import Frame
from fieldplan.stats.patches import Patch

Numbers = NDArray[np.float64]

CORNERS = 64
"""Of the polygon that stands for an ellipse; it has the ellipse's own area."""
DIRECTIONS = 16
"""Averaged for one set of locations where the direction of an ellipse is unknown."""
MOST_CENTRES = 32_768
MOST_CANDIDATES = 400_000
CENTRES = 2048
"""Patch centres over which the closed form of random places is averaged: good to 0.0005."""
FEW_CENTRES = 256
"""The same for a curve over sizes: good to 0.005."""

STEPS = 1.2207440846057596 ** -np.arange(1.0, 4.0)
"""Powers of the root of x⁴ = x + 1: their multiples fill three dimensions evenly."""


def polygons_of(frame: Frame) -> list[BaseGeometry]:
    """Return the polygon of every stratum.

    Raises
    ------
    DesignError
        The frame is a list.
    """
    found = [stratum.geometry for stratum in frame.strata if stratum.geometry is not None]
    if len(found) < len(frame.strata):
        message = (
            f"a list of {sum(s.count or 0 for s in frame.strata)} units has no area that a patch "
            "could lie in; ask about patches on a frame that is an area."
        )
        raise DesignError(message)
    return found


def check_fits(frame: Frame, patch: Patch) -> None:
    """Refuse a patch that is larger or longer than the population, and a frame without area.

    Raises
    ------
    DesignError
        As said.

    Examples
    --------
    >>> from tests.factories import make_frame
    >>> check_fits(make_frame(), Patch(20.0, 20.0))
    """
    whole = shapely.union_all(polygons_of(frame))
    across = 2 * float(shapely.minimum_bounding_radius(whole))
    if patch.area >= whole.area or patch.length > across:
        message = (
            f"a patch of {patch.length:g} m by {patch.width:g} m ({patch.area:.0f} m²) does not "
            f"fit into a population of {whole.area:.0f} m² that is {across:.0f} m across; give a "
            "smaller patch."
        )
        raise DesignError(message)


def share_hit(
    locations: Numbers, population: BaseGeometry, patch: Patch, *, direction: float | None = None
) -> float:
    """Give the share of patch centres for which at least one of these very locations hits.

    Parameters
    ----------
    locations : ndarray of float, shape (n, 2)
        Easting and northing in metres; at least one.
    population : BaseGeometry
        Where the centre of the patch may lie, all places equally likely.
    patch : Patch
    direction : float, optional
        Of the long axis, degrees clockwise from north; None averages over all directions.

    Notes
    -----
    A patch is hit where its centre lies in the patch-shaped disc around a location: the union of
    these discs, cut by the population, over the population's area.

    Examples
    --------
    >>> site = shapely.box(0, 0, 100, 100)
    >>> round(share_hit(np.array([[50.0, 50.0], [0.0, 0.0]]), site, Patch(20.0, 20.0)), 4)
    0.0393
    """
    angles = directions(patch, direction, DIRECTIONS)
    found = []
    for ring in rings(patch, angles):
        discs = shapely.polygons(np.asarray(locations, dtype=float)[:, None, :] + ring)
        found.append(shapely.intersection(shapely.union_all(discs), population).area)
    return float(np.mean(found) / population.area)


def directions(patch: Patch, direction: float | None, count: int) -> Numbers:
    """Give one direction where it is known or nothing depends on it, else ``count`` even ones."""
    if direction is not None:
        return np.array([float(direction)])
    if patch.length == patch.width:
        return np.zeros(1)
    return np.linspace(0.0, 180.0, count, endpoint=False)


def rings(patch: Patch, angles: Numbers) -> Numbers:
    """Give the corners of the patch about the origin for each direction, shape (k, 64, 2)."""
    turns = 2 * math.pi * np.arange(CORNERS) / CORNERS
    swell = math.sqrt(math.pi / (CORNERS / 2 * math.sin(2 * math.pi / CORNERS)))
    along, across = (
        patch.length / 2 * swell * np.cos(turns),
        patch.width / 2 * swell * np.sin(turns),
    )
    sine, cosine = (f(np.radians(angles))[:, None] for f in (np.sin, np.cos))
    corners = np.stack([along * sine + across * cosine, along * cosine - across * sine], axis=-1)
    return np.asarray(corners, dtype=np.float64)


class Centres:
    """Patch centres spread evenly over a population, each with a direction.

    Parameters
    ----------
    population : BaseGeometry
    patch : Patch
    direction : float or None

    Notes
    -----
    Multiples of three irrational steps, taken modulo 1, fill a box and half a turn evenly, any
    stretch of them as well as all (Niederreiter 1992, *Random Number Generation and Quasi-Monte
    Carlo Methods*, ch. 3). Those inside the population are kept, in their order.
    """

    def __init__(self, population: BaseGeometry, patch: Patch, direction: float | None) -> None:
        shapely.prepare(population)
        box = shapely.minimum_rotated_rectangle(population)
        corner, first, _, last = shapely.get_coordinates(box)[:4]
        filled = population.area / box.area
        count = int(min(MOST_CENTRES / filled, MOST_CANDIDATES))
        shares = (0.5 + np.arange(1, count + 1)[:, None] * STEPS) % 1.0
        places = corner + shares[:, :1] * (first - corner) + shares[:, 1:2] * (last - corner)
        inside = shapely.contains_xy(population, places[:, 0], places[:, 1])
        self.places: Numbers = places[inside]
        self.turning = direction is None and patch.length > patch.width
        still = np.full(len(self.places), direction or 0.0)
        self.angles: Numbers = 180.0 * shares[inside, 2] if self.turning else still

    def block(self, number: int, size: int) -> slice:
        """Return the stretch of this number; the last ones start over."""
        blocks = max(len(self.places) // size, 1)
        return slice(number % blocks * size, (number % blocks + 1) * size)


@dataclass(frozen=True)
class RandomPlaces:
    """Simple random places in every stratum.

    Parameters
    ----------
    frame : Frame
        Of an area.
    patch : Patch
    direction : float or None
        Degrees clockwise from north.

    Notes
    -----
    1 − Π (1 − a(c)/A)ⁿ over the strata, averaged over patch centres c; a(c) is the area of the
    stratum within the patch, so that a patch across an edge, a hole or a border counts as it lies.
    A minimum spacing is not counted.

    Examples
    --------
    >>> from tests.factories import make_frame
    >>> places = RandomPlaces(make_frame(), Patch(20.0, 20.0), None)
    >>> round(places.chance([20, 20]).chance, 2)
    0.38
    """

    frame: Frame
    patch: Patch
    direction: float | None = None
    _known: dict[tuple[float, int], Numbers] = field(default_factory=dict, repr=False)

    def chance(self, counts: Sequence[int], *, scale: float = 1.0) -> PatchChance:
        """Give the chance for so many locations a stratum and a patch ``scale`` times as long."""
        return PatchChance(self._mean(counts, scale, CENTRES))

    def smallest_scale(self, counts: Sequence[int], chance: float) -> float:
        """Give the smallest scale at which the patch is hit with this chance, to 1 in 1000.

        The logarithm of the chance to miss goes nearly with the patch's area.
        """
        scale = 1.0
        for centres in (FEW_CENTRES,) * 6 + (CENTRES,):
            found = min(max(self._mean(counts, scale, centres), 1e-12), 1 - 1e-12)
            change = math.sqrt(math.log1p(-chance) / math.log1p(-found))
            if centres == CENTRES or abs(change - 1) > 1e-3:
                scale *= change
        return scale

    def by_scale(self, counts: Sequence[int], scales: Sequence[float]) -> list[float]:
        """Give the chance for each of several scales, over fewer centres."""
        return [self._mean(counts, scale, FEW_CENTRES) for scale in scales]

    def _mean(self, counts: Sequence[int], scale: float, centres: int) -> float:
        """Average the chance over the first so many patch centres."""
        missed = np.prod((1 - self._shares(scale, centres)) ** np.asarray(counts), axis=1)
        return float(1 - missed.mean())

    @cached_property
    def _centres(self) -> Centres:
        return Centres(shapely.union_all(polygons_of(self.frame)), self.patch, self.direction)

    @cached_property
    def _grounds(self) -> list[BaseGeometry]:
        """Polygons with no more corners than the patch can feel, prepared."""
        coarse = [shapely.simplify(p, self.patch.width / 500) for p in polygons_of(self.frame)]
        for polygon in coarse:
            shapely.prepare(polygon)
        return coarse

    def _shares(self, scale: float, count: int) -> Numbers:
        """Share of each stratum within the patch about each centre, shape (k, strata)."""
        if (scale, count) not in self._known:
            patch, centres = self.patch.scaled(scale), self._centres
            places, angles = centres.places[:count], centres.angles[:count]
            about = rings(patch, angles if centres.turning else angles[:1])
            discs = np.asarray(shapely.polygons(places[:, None, :] + about))
            grounds = zip(self._grounds, self.frame.strata, strict=True)
            shares = [_shared_area(ground, discs, patch) / s.measure for ground, s in grounds]
            self._known[scale, count] = np.clip(np.stack(shares, axis=1), 0.0, 1.0)
        return self._known[scale, count]


def _shared_area(ground: BaseGeometry, discs: NDArray[np.object_], patch: Patch) -> Numbers:
    """Area of the ground within each disc."""
    areas = np.where(shapely.contains(ground, discs), patch.area, 0.0)
    cut = shapely.intersects(ground, discs) & (areas == 0)
    areas[cut] = shapely.area(shapely.intersection(ground, discs[cut]))
    return areas
