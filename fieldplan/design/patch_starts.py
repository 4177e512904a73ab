"""Grids started at random many times, to see how often a patch is hit on the true population."""

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from fieldplan.base.draws import Stream
from fieldplan.base.errors import DesignError
from fieldplan.design.grid import MOST_TRIES, SQUARE_GRID, TRIANGULAR_GRID, Grid
from fieldplan.design.patch import STEPS, Centres, Numbers, RandomPlaces, polygons_of
from fieldplan.design.patch_chance import PatchChance, PatchChances
from fieldplan.frame.model import Frame, Stratum
from fieldplan.stats.patches import Patch

STARTS = 256
CENTRES = 256
"""Patch centres for each start."""
MOST_NODES = 50_000
BATCH = 60_000
"""Nodes laid at a time."""
MOST_LAID = 500_000
"""Nodes laid in all to find starts with the exact count."""
FEWEST = 16
"""Starts with the exact count below which starts with any count are averaged."""
TURNS, TURNS_OF_NEEDLES = 2, 8
"""Directions of the patch within each start, where its direction is unknown; needles need more."""
_GOLDEN = 0.6180339887498949


@dataclass(frozen=True)
class GridStarts:
    """A grid with an origin and a rotation of its own in every stratum, started many times.

    Parameters
    ----------
    frame : Frame
        Of an area.
    patch : Patch
    direction : float or None
        Degrees clockwise from north.
    grid : Grid
    exact_count : bool
        Keep only starts that put exactly the count inside, as the layout does.
    losses : tuple of float
        Share of nodes in each stratum that yield nothing; dropped at random.
    starts : int
        How many to look at.

    Notes
    -----
    As the layout draws, but for the rounding of places to the centimetre, and with starts that
    are spread evenly. Each meets patch centres of its own.
    """

    frame: Frame
    patch: Patch
    direction: float | None
    grid: Grid
    exact_count: bool = True
    losses: tuple[float, ...] = ()
    starts: int = STARTS
    _known: dict[tuple[int, ...], tuple[Numbers, bool]] = field(default_factory=dict, repr=False)

    def chance(self, counts: Sequence[int], *, scale: float = 1.0) -> PatchChance:
        """Give the chance for so many nodes a stratum and a patch ``scale`` times as long."""
        distances, exact = self._distances(tuple(counts))
        shares = (distances <= scale).mean(axis=1)
        error = float(shares.std(ddof=1)) / math.sqrt(len(shares)) if len(shares) > 1 else 1.0
        error = max(error, 1 / distances.size)  # a start without a miss proves no more than that
        return PatchChance(float(shares.mean()), error, len(shares), exact)

    def smallest_scale(self, counts: Sequence[int], chance: float) -> float:
        """Give the smallest scale at which the patch is hit with this chance."""
        distances, _ = self._distances(tuple(counts))
        return float(np.quantile(distances, chance, method="higher"))

    def by_scale(self, counts: Sequence[int], scales: Sequence[float]) -> list[float]:
        """Give the chance for each of several scales, from the same starts."""
        return [self.chance(counts, scale=scale).chance for scale in scales]

    @cached_property
    def _centres(self) -> Centres:
        return Centres(shapely.union_all(polygons_of(self.frame)), self.patch, self.direction)

    def _distances(self, counts: tuple[int, ...]) -> tuple[Numbers, bool]:
        """Distance from each centre to the nearest node, 1 on the patch's edge; (starts, k)."""
        if counts in self._known:
            return self._known[counts]
        starts, exact = [], True
        for number, stratum in enumerate(self.frame.strata):
            found, as_asked = self._starts(number, stratum, counts[number])
            starts.append(found)
            exact = exact and as_asked
        rows = [
            self._one_start(number, np.concatenate(several))
            for number, several in enumerate(zip(*starts, strict=False))
        ]
        self._known[counts] = np.array(rows), exact
        return self._known[counts]

    def _one_start(self, number: int, nodes: Numbers) -> Numbers:
        """Distance from each centre of this start's block to the nearest node."""
        from scipy.spatial import KDTree

        block = self._centres.places[self._centres.block(number, CENTRES)]
        turning = self._centres.turning
        found = []
        turns = TURNS if self.patch.shape >= 0.25 else TURNS_OF_NEEDLES
        for part, places in enumerate(np.array_split(block, turns) if turning else [block]):
            angle = math.radians(self.direction or 0.0)
            if turning:
                angle = math.pi * ((0.5 + (number * turns + part) * _GOLDEN) % 1.0)
            tree = KDTree(self._stretched(nodes, angle))
            found.append(tree.query(self._stretched(places, angle))[0])
        return np.concatenate(found)

    def _stretched(self, places: Numbers, angle: float) -> Numbers:
        """Turn and stretch the plane so that the patch becomes a circle of radius 1."""
        sine, cosine = math.sin(angle), math.cos(angle)
        along = (places[:, 0] * sine + places[:, 1] * cosine) * (2 / self.patch.length)
        across = (places[:, 0] * cosine - places[:, 1] * sine) * (2 / self.patch.width)
        return np.stack([along, across], axis=1)

    def _starts(self, number: int, stratum: Stratum, count: int) -> tuple[list[Numbers], bool]:
        """Nodes inside the stratum for each start that is kept."""
        if count > MOST_NODES:
            message = (
                f"'{stratum.name}' would get {count} locations to hit a patch of "
                f"{self.patch.length:g} m by {self.patch.width:g} m; no more than {MOST_NODES} are "
                "looked at. Give a larger patch or a lower probability."
            )
            raise DesignError(message)
        wanted = min(self.starts, max(8, 400_000 // count))
        any_count: list[Numbers] = []
        kept: list[Numbers] = []
        polygon, side = polygons_of(self.frame)[number], self.grid.spacing(stratum.measure, count)
        for several in _laid(polygon, self.grid, side, even_starts(stratum.name, MOST_TRIES)):
            any_count += [nodes for nodes in several if len(nodes) >= 2]
            kept += [nodes for nodes in several if len(nodes) == count]
            if len(kept if self.exact_count else any_count) >= wanted:
                break
        exact = self.exact_count and len(kept) >= min(FEWEST, wanted)
        chosen = (kept if exact else any_count)[:wanted]
        return self._thinned(number, stratum, chosen), exact or not self.exact_count

    def _thinned(self, number: int, stratum: Stratum, starts: list[Numbers]) -> list[Numbers]:
        """Drop nodes at random, as many as are expected to yield nothing."""
        loss = self.losses[number] if self.losses else 0.0
        if loss == 0:
            return starts
        stream = Stream(1, "patch", stratum.name, "losses")
        return [nodes[stream.uniforms(len(nodes)) >= loss] for nodes in starts]


def even_starts(name: str, count: int) -> Numbers:
    """Give origins and turns of so many starts, spread evenly over all there may be.

    Parameters
    ----------
    name : str
        The stratum; those of another name come in another order.
    count : int

    Returns
    -------
    ndarray, shape (count, 3)
        Along and across the rows, and turn, as shares of 1.

    Notes
    -----
    Multiples of three irrational steps from a random first start, modulo 1 (Niederreiter 1992),
    in random order. Even starts scatter less than independent ones, so the standard error that is
    computed as if they were independent is on the careful side.

    Examples
    --------
    >>> even_starts("site", 2).shape
    (2, 3)
    """
    first = Stream(1, "patch", name, "first start").uniforms(3)
    order = np.array(Stream(1, "patch", name, "order of starts").permutation(count))
    return np.asarray((first + order[:, None] * STEPS) % 1.0)


def _laid(
    polygon: BaseGeometry, grid: Grid, side: float, uniforms: Numbers
) -> Iterator[list[Numbers]]:
    """Yield the nodes inside the polygon for batches of starts: along, across, turn in [0, 1)."""
    shapely.prepare(polygon)
    box = Slabs(polygon)
    rows = 2 * math.ceil(box.reach / (side * grid.row_distance)) + 3
    per_start = 2 * rows + 2 * box.area / (side * side * grid.row_distance)
    batch = max(1, int(BATCH / per_start))
    for first in range(0, min(len(uniforms), math.ceil(MOST_LAID / per_start)), batch):
        start, places = box.nodes(grid, side, uniforms[first : first + batch])
        inside = shapely.contains_xy(polygon, places[:, 0], places[:, 1])
        ends = np.searchsorted(start[inside], np.arange(1, len(uniforms[first : first + batch])))
        yield np.split(places[inside], ends)


class Slabs:
    """The narrowest box about a polygon, as two pairs of parallel lines that rows run into."""

    def __init__(self, polygon: BaseGeometry) -> None:
        box = shapely.minimum_rotated_rectangle(polygon)
        first, second, _, last = shapely.get_coordinates(box)[:4]
        sides = np.stack([second - first, last - first])
        lengths = np.hypot(*sides.T)
        self.middle: Numbers = shapely.get_coordinates(shapely.centroid(box))[0]
        self.normals: Numbers = sides / lengths[:, None]
        self.halves: Numbers = lengths / 2
        self.reach = float(np.hypot(*self.halves))
        self.area = float(lengths.prod())

    def nodes(
        self, grid: Grid, side: float, uniforms: Numbers
    ) -> tuple[NDArray[np.int64], Numbers]:
        """Return start and place of every grid node in the box, row by row.

        Parameters
        ----------
        grid : Grid
        side : float
            Spacing in metres.
        uniforms : ndarray, shape (starts, 3)
            Origin along and across the rows, and turn, as shares of 1.
        """
        along, across, turn = uniforms.T[:, :, None]
        last = math.ceil(self.reach / (side * grid.row_distance)) + 1
        row = np.arange(-last, last + 1)
        north = (row + across) * (side * grid.row_distance)
        shift = along + grid.row_shift * (row % 2)
        cosine, sine = np.cos(2 * math.pi * turn), np.sin(2 * math.pi * turn)
        low, high = np.full(north.shape, -np.inf), np.full(north.shape, np.inf)
        for (x, y), half in zip(self.normals, self.halves, strict=True):
            slope = cosine * x + sine * y
            slope = np.where(np.abs(slope) < 1e-12, 1e-12, slope)
            offset = north * (cosine * y - sine * x)
            ends = np.sort(np.stack([-half - offset, half - offset]) / slope, axis=0)
            low, high = np.maximum(low, ends[0]), np.minimum(high, ends[1])
        first = np.ceil(low / side - shift)
        counts = np.maximum(np.floor(high / side - shift) - first + 1, 0).astype(np.int64)
        start, line = np.nonzero(counts)
        several = counts[start, line]
        chosen = np.repeat(np.arange(len(several)), several)
        step = np.arange(len(chosen)) - np.repeat(np.cumsum(several) - several, several)
        start, line = start[chosen], line[chosen]
        a = (first[start, line] + step + shift[start, line]) * side
        b = north[start, line]
        turned = np.stack(
            [a * cosine[start, 0] - b * sine[start, 0], a * sine[start, 0] + b * cosine[start, 0]],
            axis=1,
        )
        return start, self.middle + turned


def patch_chances(
    layout: str,
    frame: Frame,
    patch: Patch,
    *,
    direction: float | None = None,
    exact_count: bool = True,
    losses: tuple[float, ...] = (),
    starts: int = STARTS,
) -> PatchChances:
    """Return what a layout makes of a patch on a population.

    Parameters
    ----------
    layout : str
        As in a campaign file.
    frame : Frame
        Of an area.
    patch : Patch
    direction : float, optional
        Degrees clockwise from north; None takes all directions as equally likely.
    exact_count : bool
        For grids.
    losses : tuple of float
        Share of locations in each stratum that yield nothing.
    starts : int
        For grids.

    Raises
    ------
    DesignError
        The layout visits a whole list.
    """
    grids = {grid.name: grid for grid in (SQUARE_GRID, TRIANGULAR_GRID)}
    if layout in grids:
        return GridStarts(frame, patch, direction, grids[layout], exact_count, losses, starts)
    if layout in ("simple-random", "stratified"):
        return RandomPlaces(frame, patch, direction)
    message = f'layout "{layout}" visits what is on a list; a patch lies in an area.'
    raise DesignError(message)
