"""How many pages a map takes, at which scale, and which ground each page shows."""

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
import shapely
from numpy.typing import NDArray

from fieldplan.packet.maps.paper import DENOMINATORS, Box, Extent, PageLayout, extent_around

LOCATIONS_ON_ONE_PAGE = 60
LOCATIONS_ON_A_TILE = 50
MOST_PAGES = 30
_OVERLAP = 0.06
_FINEST = 50


@dataclass(frozen=True)
class Tile:
    """One page of an atlas: the ground it shows, and its place in the grid of pages."""

    page: int
    extent: Extent
    row: int
    column: int


@dataclass(frozen=True)
class Atlas:
    """The pages after the key, all at one scale."""

    denominator: int
    tiles: tuple[Tile, ...]

    def beside(self, tile: Tile, row: int, *, column: int) -> int | None:
        """Give the page that lies ``row`` up and ``column`` right of a tile, if there is one."""
        wanted = (tile.row + row, tile.column + column)
        return next((t.page for t in self.tiles if (t.row, t.column) == wanted), None)


@dataclass(frozen=True)
class PageSpec:
    """Which page this is, what ground it shows and at which scale."""

    layout: PageLayout
    extent: Extent
    denominator: int
    page: int = 1
    pages: int = 1
    atlas: Atlas | None = None
    tile: Tile | None = None

    @property
    def is_key(self) -> bool:
        """Whether this page shows where the other pages lie."""
        return self.atlas is not None and self.tile is None

    def answers_for(self, easting: float, northing: float) -> bool:
        """Tell whether a place is this page's own, and not only seen in the overlap."""
        if self.tile is None:
            return True
        edge_east = self.extent.width * _OVERLAP / 2
        edge_north = self.extent.height * _OVERLAP / 2
        own = Extent(
            self.extent.west + edge_east,
            self.extent.south + edge_north,
            self.extent.east - edge_east,
            self.extent.north - edge_north,
        )
        return own.holds(easting, northing)

    def on_paper(self, easting: float, northing: float) -> tuple[float, float]:
        """Give the millimetres on the page of a place on the ground."""
        box = self.layout.ground
        return (
            box.left + (easting - self.extent.west) * 1000 / self.denominator,
            box.bottom + (northing - self.extent.south) * 1000 / self.denominator,
        )


def crowded(places: NDArray[np.float64], metres_per_mm: float) -> bool:
    """Tell whether four places or more would share one spot of 2 mm on paper.

    Two or three wells of a nest are told apart by the lines to their names; a heap is not.
    Places that coincide to the centimetre count once, since no scale parts them.

    Parameters
    ----------
    places : array of shape (n, 2)
        Site metres.
    metres_per_mm : float
        The scale.

    Examples
    --------
    >>> nest = np.array([[0.0, 0.0], [1.0, 0.0], [2.0, 0.0], [0.0, 2.0]])
    >>> crowded(nest, 10.0), crowded(nest, 0.5), crowded(nest[:3], 10.0)
    (True, False, False)
    """
    points: Any = shapely.points(np.unique(np.round(places, 2), axis=0))
    _, centres = shapely.STRtree(points).query(
        points, predicate="dwithin", distance=2.0 * metres_per_mm
    )
    return bool(len(centres)) and int(np.bincount(centres).max()) >= 4


def atlas(
    places: NDArray[np.float64],
    ground: Box,
    *,
    whole: int,
    readable: Callable[[Atlas], bool] = lambda _book: True,
) -> Atlas:
    """Choose the scale and pages of an atlas: the coarsest scale on which each page can be read.

    Parameters
    ----------
    places : array of shape (n, 2)
        All named marks, site metres.
    ground : Box
        The frame of the map on paper.
    whole : int
        Denominator at which the whole site fits one page; tiles are finer.
    readable : callable
        Tells whether all names of an atlas find a place.

    Returns
    -------
    Atlas
        Pages with places only, in reading order, numbered from 2 (the key is page 1); at most
        30, at a coarser scale if need be.
    """
    best: Atlas | None = None
    for denominator in reversed([d for d in DENOMINATORS if _FINEST <= d < whole]):
        trial = _tiled(places, ground, denominator=denominator)
        if best is not None and len(trial.tiles) > MOST_PAGES:
            break
        best = trial
        full = max(_held(places, tile.extent) for tile in trial.tiles)
        clear = full <= LOCATIONS_ON_A_TILE and not crowded(places, denominator / 1000)
        if clear and readable(trial):
            break
    return best if best is not None else _tiled(places, ground, denominator=whole)


def _tiled(places: NDArray[np.float64], ground: Box, *, denominator: int) -> Atlas:
    """Cut the ground round all places into pages that overlap a little; keep those with places."""
    paper = extent_around((0.0, 0.0), ground, denominator=denominator)
    step_east, step_north = paper.width * (1 - _OVERLAP), paper.height * (1 - _OVERLAP)
    low, high = places.min(axis=0), places.max(axis=0)
    columns = max(1, math.ceil((high[0] - low[0]) / step_east + 1e-9))
    rows = max(1, math.ceil((high[1] - low[1]) / step_north + 1e-9))
    middle = (low + high) / 2
    west = middle[0] - columns * step_east / 2
    south = middle[1] - rows * step_north / 2
    column = np.clip(np.floor((places[:, 0] - west) / step_east), 0, columns - 1).astype(int)
    row = np.clip(np.floor((places[:, 1] - south) / step_north), 0, rows - 1).astype(int)
    cells = sorted(set(zip((-row).tolist(), column.tolist(), strict=True)))
    tiles = []
    for page, (minus_row, at) in enumerate(cells, start=2):
        centre = (west + (at + 0.5) * step_east, south + (0.5 - minus_row) * step_north)
        tiles.append(
            Tile(page, extent_around(centre, ground, denominator=denominator), -minus_row, at)
        )
    return Atlas(denominator, tuple(tiles))


def _held(places: NDArray[np.float64], extent: Extent) -> int:
    """Count the places that an extent shows."""
    east, north = places[:, 0], places[:, 1]
    inside = (east >= extent.west) & (east <= extent.east)
    return int((inside & (north >= extent.south) & (north <= extent.north)).sum())
