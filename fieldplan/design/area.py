"""Places in an area: candidates from a box, kept when they lie inside, in whole centimetres."""

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from fieldplan.base.draws import Stream
from fieldplan.base.errors import DesignError

Whole = NDArray[np.int64]
PATIENCE = 10_000
"""Candidates in a row that may fall inside and yet find no room before the draw gives up."""
LARGEST_BATCH = 1_000_000
MOST_CANDIDATES = 100_000_000


@dataclass(frozen=True)
class Box:
    """A box in whole metres, chosen so that a small edit of the boundary seldom moves it."""

    west: int
    south: int
    east: int
    north: int

    @property
    def area(self) -> float:
        """Square metres."""
        return float((self.east - self.west) * (self.north - self.south))


@dataclass(frozen=True)
class Ground:
    """A stratum's polygon in whole millimetres, where "inside" has one exact answer.

    Parameters
    ----------
    name : str
        The stratum, for messages.
    geometry : BaseGeometry
        In site metres; its corners are rounded to the millimetre.

    Notes
    -----
    Whole numbers below 2**40 make every orientation test of the geometry library exact, so the
    answer does not depend on its version. A place on the line itself is not inside.
    """

    name: str
    geometry: BaseGeometry
    millimetres: BaseGeometry = field(init=False, repr=False)
    box: Box = field(init=False)

    def __post_init__(self) -> None:
        if self.geometry.is_empty or not self.geometry.area > 0:
            message = f"stratum '{self.name}' has no area to draw from; check its polygon."
            raise DesignError(message)
        whole = shapely.transform(self.geometry, lambda corners: np.rint(corners * 1000.0))
        shapely.prepare(whole)
        object.__setattr__(self, "millimetres", whole)
        object.__setattr__(self, "box", _snapped_box(whole))

    def holds(self, east_cm: Whole, north_cm: Whole) -> NDArray[np.bool_]:
        """Tell which places, in whole centimetres, lie strictly inside."""
        inside = shapely.contains_xy(self.millimetres, east_cm * 10.0, north_cm * 10.0)
        return np.asarray(inside, dtype=np.bool_)


def _snapped_box(millimetres: BaseGeometry) -> Box:
    low_x, low_y, high_x, high_y = (int(edge) for edge in millimetres.bounds)
    west, east = _snapped_side(low_x, high_x)
    south, north = _snapped_side(low_y, high_y)
    return Box(west, south, east, north)


def _snapped_side(low: int, high: int) -> tuple[int, int]:
    """Widen one side to multiples of a power of two: at most a quarter of it, at least 1 m."""
    quarter = (high - low) // 4000
    step = 1 << max(quarter.bit_length() - 1, 0)
    return low // (1000 * step) * step, -(-high // (1000 * step)) * step


class Kept:
    """Places accepted so far, in order; a candidate on the very same centimetre is passed over.

    Parameters
    ----------
    places : ndarray of int, shape (k, 2)
        What stands there already, in centimetres.
    """

    def __init__(self, places: Whole) -> None:
        self.places = places
        self.refused_in_a_row = 0

    def accept(self, candidates: Whole, most: int) -> None:
        """Append the candidates that find room, in their order, up to ``most`` in all."""
        together = np.concatenate([self.places, candidates])
        keys = together[:, 0] * 2**31 + together[:, 1]
        first = np.sort(np.unique(keys, return_index=True)[1])
        found = len(first) > len(self.places)
        self.refused_in_a_row = 0 if found else self.refused_in_a_row + len(candidates)
        self.places = together[first[:most]]


class KeptApart(Kept):
    """Places accepted so far, no two of them closer than the minimum spacing."""

    def __init__(self, places: Whole, spacing_cm: int) -> None:
        super().__init__(places)
        self._spacing_cm = spacing_cm
        self._cells: dict[tuple[int, int], list[tuple[int, int]]] = {}
        for east, north in places.tolist():
            self._cells.setdefault(self._cell(east, north), []).append((east, north))

    def accept(self, candidates: Whole, most: int) -> None:
        """Append the candidates that find room, in their order, up to ``most`` in all."""
        kept: list[tuple[int, int]] = []
        for east, north in candidates.tolist():
            if len(self.places) + len(kept) == most or self.refused_in_a_row >= PATIENCE:
                break
            if self._crowded(east, north):
                self.refused_in_a_row += 1
                continue
            self.refused_in_a_row = 0
            self._cells.setdefault(self._cell(east, north), []).append((east, north))
            kept.append((east, north))
        self.places = np.concatenate([self.places, _pairs(kept)])

    def _cell(self, east: int, north: int) -> tuple[int, int]:
        return east // self._spacing_cm, north // self._spacing_cm

    def _crowded(self, east: int, north: int) -> bool:
        column, row = self._cell(east, north)
        near = (
            place
            for i in (column - 1, column, column + 1)
            for j in (row - 1, row, row + 1)
            for place in self._cells.get((i, j), ())
        )
        nearest = self._spacing_cm**2
        return any((x - east) ** 2 + (y - north) ** 2 < nearest for x, y in near)


def draw_places(
    ground: Ground,
    count: int,
    stream: Stream,
    *,
    spacing_m: float = 0.0,
    taken: Sequence[tuple[int, int]] = (),
) -> Whole:
    """Draw places uniformly by area, in the order in which they were accepted.

    Parameters
    ----------
    ground : Ground
    count : int
        How many; the first k are the same for every count ≥ k.
    stream : Stream
        Read two uniforms a candidate: easting, then northing.
    spacing_m : float
        Least distance between any two; a candidate that stands closer is passed over.
    taken : sequence of (int, int)
        Places, in centimetres, that stand there already.

    Returns
    -------
    ndarray of int, shape (count, 2)
        Easting and northing in centimetres.

    Raises
    ------
    DesignError
        The places cannot fit at this spacing, or the polygon fills next to nothing of its box.

    Examples
    --------
    >>> field = Ground("field", shapely.box(0, 0, 100, 50))
    >>> draw_places(field, 2, Stream(1, "main", "field", "places")).tolist()
    [[8868, 4887], [1783, 2582]]
    """
    spacing_cm = round(spacing_m * 100)
    before = _pairs(taken)
    kept = KeptApart(before, spacing_cm) if spacing_cm else Kept(before)
    most, tried = len(before) + count, 0
    while len(kept.places) < most:
        wanted = most - len(kept.places)
        expected = wanted * ground.box.area / ground.geometry.area
        if kept.refused_in_a_row >= PATIENCE or expected + tried > MOST_CANDIDATES:
            raise DesignError(_no_room(ground, count, len(kept.places) - len(before), spacing_m))
        batch = int(min(expected * 1.1 + 64, LARGEST_BATCH))
        kept.accept(candidates_inside(ground, batch, stream), most)
        tried += batch
    return kept.places[len(before) :]


def centimetres(metres: float) -> int:
    """Turn a coordinate in metres into whole centimetres.

    Examples
    --------
    >>> centimetres(12.34)
    1234
    """
    return round(metres * 100)


def _pairs(places: Sequence[tuple[int, int]]) -> Whole:
    return np.array(places, dtype=np.int64).reshape(-1, 2)


def candidates_inside(ground: Ground, batch: int, stream: Stream) -> Whole:
    """Draw candidates in the box and keep those inside, in whole centimetres, shape (k, 2)."""
    box = ground.box
    uniforms = stream.uniforms(2 * batch).reshape(batch, 2)
    size_cm = np.array([(box.east - box.west) * 100.0, (box.north - box.south) * 100.0])
    corner_cm = np.array([box.west * 100, box.south * 100], dtype=np.int64)
    places = corner_cm + np.rint(uniforms * size_cm).astype(np.int64)
    return np.asarray(places[ground.holds(places[:, 0], places[:, 1])], dtype=np.int64)


def _no_room(ground: Ground, count: int, found: int, spacing_m: float) -> str:
    area = ground.geometry.area
    if spacing_m == 0:
        return (
            f"stratum '{ground.name}' has {area:.4g} m² within a box of {ground.box.area:.4g} m²: "
            f"only {found} of {count} places were found. Widen it, lower its inset, or ask for "
            "fewer locations."
        )
    roomy = (4 * 0.3 * area / (np.pi * count)) ** 0.5
    return (
        f"stratum '{ground.name}' ({area:.4g} m²) has room for {found} of {count} locations, "
        f"alternates among them, at a minimum spacing of {spacing_m:g} m. Lower minimum_spacing_m "
        f"(about {roomy:.2g} m should fit), or ask for fewer locations or alternates."
    )
