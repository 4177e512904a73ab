"""Compact strata: every stratum cut into cells of nearly equal area, one or two places in each."""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from fieldplan.base.draws import Stream
from fieldplan.base.errors import DesignError
from fieldplan.design.area import Ground, Kept, KeptApart, Whole, candidates_inside
from fieldplan.design.cell_estimate import VarianceRule, estimate_by_cells
from fieldplan.design.compact_cells import Cells, cell_polygons, compact_cells
from fieldplan.design.model import (
    DrawnPlace,
    DrawnPlaces,
    LocationClass,
    MeanEstimate,
    StratumCount,
    StratumValues,
)
from fieldplan.design.strata import drawn_strata, ground_of
from fieldplan.frame.model import Frame, Stratum
from fieldplan.stats.stratified import predicted_variance

PATIENCE_IN_CELLS = 500
"""Candidates in a row, in cells that still wait, that stand too close before the draw gives up."""
MOST_CANDIDATES = 20_000_000
SPACING_NOTE = (
    "A minimum spacing of {spacing:g} m was kept within '{stratum}'. Places along the lines "
    "between cells are then less likely than others, the more so the wider the spacing; the mean "
    "and its interval are computed as if all places of a cell were equally likely."
)


@dataclass(frozen=True)
class CutStratum:
    """One stratum cut into cells.

    Parameters
    ----------
    cells : Cells
    shares : ndarray of float, shape (k,)
        Area of each cell over that of the stratum.
    quotas : ndarray of int, shape (k,)
        Locations planned in each.
    polygons : tuple of geometry
        The cells in metres.
    """

    cells: Cells
    shares: NDArray[np.float64]
    quotas: Whole
    polygons: tuple[BaseGeometry, ...]

    def place(
        self, stratum: str, order: int, location_class: LocationClass, spot: Sequence[int]
    ) -> DrawnPlace:
        """Name the cell of one place, in whole centimetres."""
        east, north, cell = spot
        centre_east, centre_north = (self.cells.centres_cm[cell] / 100).tolist()
        return DrawnPlace(
            stratum,
            order,
            location_class,
            east / 100,
            north / 100,
            cell=cell + 1,
            cell_share=float(self.shares[cell]),
            cell_centre=(centre_east, centre_north),
        )


@lru_cache(maxsize=64)
def cut_stratum(ground: Ground, planned: int, *, per_cell: int) -> CutStratum:
    """Cut a stratum into as many cells as it gets locations, or half as many.

    Parameters
    ----------
    ground : Ground
    planned : int
        Locations, at least 1.
    per_cell : int
        1 or 2. With 2 and an odd number, cell 1 gets three.

    Returns
    -------
    CutStratum

    Raises
    ------
    DesignError
        The stratum is too small, too ragged, or asked for too many cells.

    Examples
    --------
    >>> cut = cut_stratum(Ground("field", shapely.box(0, 0, 200, 100)), 5, per_cell=2)
    >>> cut.quotas.tolist(), cut.shares.round(2).tolist()
    ([3, 2], [0.5, 0.5])
    """
    count = max(1, planned // per_cell)
    cells = compact_cells(ground, count)
    polygons = cell_polygons(ground, cells)
    areas = shapely.area(np.array(polygons, dtype=object))
    quotas = np.full(count, planned // count, dtype=np.int64)
    quotas[0] += planned - int(quotas.sum())
    return CutStratum(cells, areas / areas.sum(), quotas, polygons)


@dataclass(frozen=True)
class CompactStrata:
    """Compact cells of nearly equal area in every stratum, each with places of its own.

    Parameters
    ----------
    per_cell : int
        Locations in a cell: 1, or 2 for a variance that needs no model of the ground.
    variance : str
        ``pairs`` or ``covariance``, fixed before results.
    """

    per_cell: int = 1
    variance: VarianceRule = "pairs"

    name = "compact-strata"

    def predict_variance(
        self,
        *,
        weights: NDArray[np.float64],
        sigmas: NDArray[np.float64],
        counts: NDArray[np.int64],
        populations: Sequence[int | None],
    ) -> float:
        """Predict the variance as if the places were random in each stratum: no credit."""
        return predicted_variance(weights, sigmas, counts, populations)

    def draw(
        self,
        frame: Frame,
        counts: Sequence[StratumCount],
        *,
        seed: int,
        design: str,
        minimum_spacing_m: float = 0.0,
        exact_count: bool = True,  # noqa: ARG002
    ) -> DrawnPlaces:
        """Draw places uniformly in each cell; alternates too, in as many cells as there are.

        Raises
        ------
        DesignError
            The frame is a list, a stratum cannot be cut into so many cells, or the places do not
            fit at the minimum spacing.
        """
        places: list[DrawnPlace] = []
        notes: list[str] = []
        for stratum, count in drawn_strata(frame, counts):
            key = (seed, design, stratum.name)
            places += self._drawn(stratum, count, key, spacing_m=minimum_spacing_m)
            if minimum_spacing_m:
                notes.append(SPACING_NOTE.format(spacing=minimum_spacing_m, stratum=stratum.name))
        realised = sum(place.location_class == "random" for place in places)
        return DrawnPlaces(tuple(places), realised, tuple(notes))

    def _drawn(
        self, stratum: Stratum, count: StratumCount, key: tuple[int, str, str], *, spacing_m: float
    ) -> list[DrawnPlace]:
        if count.planned < 1:
            message = f"stratum '{stratum.name}' would get {count.planned} places in cells."
            raise DesignError(message)
        ground = ground_of(stratum, self.name)
        cut = cut_stratum(ground, count.planned, per_cell=self.per_cell)
        chosen = fill_cells(
            ground, cut.cells, cut.quotas, Stream(*key, "cell places"), spacing_m=spacing_m
        )
        layers = np.full(cut.cells.count, -(-count.alternates // cut.cells.count), dtype=np.int64)
        spare = fill_cells(
            ground,
            cut.cells,
            layers,
            Stream(*key, "cell alternates"),
            most=count.alternates,
            spacing_m=spacing_m,
            taken=chosen[:, :2],
        )
        rows: list[tuple[LocationClass, list[int]]] = [
            *(("random", row) for row in chosen.tolist()),
            *(("alternate", row) for row in spare.tolist()),
        ]
        return [
            cut.place(stratum.name, order, location_class, row)
            for order, (location_class, row) in enumerate(rows, start=1)
        ]

    def estimate(
        self, strata: Sequence[StratumValues], *, single_result: str = "refuse"
    ) -> MeanEstimate:
        """Weigh the cell means by the cells' shares; variance by the rule that was fixed."""
        return estimate_by_cells(strata, rule=self.variance, single_result=single_result)


def fill_cells(
    ground: Ground,
    cells: Cells,
    quotas: Whole,
    stream: Stream,
    *,
    most: int | None = None,
    spacing_m: float = 0.0,
    taken: Whole | None = None,
) -> Whole:
    """Draw places uniformly in cells: every cell gets one before any gets its next.

    Parameters
    ----------
    ground : Ground
    cells : Cells
    quotas : ndarray of int, shape (k,)
        How many each cell gets in the end.
    stream : Stream
        Read two uniforms a candidate, as in ``draw_places``.
    most : int, optional
        Stop after so many; all quotas are filled without it.
    spacing_m : float
        Least distance between any two.
    taken : ndarray of int, shape (m, 2), optional
        Places, in centimetres, that stand there already.

    Returns
    -------
    ndarray of int, shape (n, 3)
        Easting and northing in centimetres, and the position of the cell from 0; in the order in
        which they were accepted.

    Raises
    ------
    DesignError
        A cell has no room at this spacing.
    """
    before = np.empty((0, 2), dtype=np.int64) if taken is None else taken
    spacing_cm = round(spacing_m * 100)
    kept = KeptApart(before, spacing_cm) if spacing_cm else Kept(before)
    waiting = _Waiting(quotas, int(quotas.sum()) if most is None else most)
    tried = 0
    while waiting.missing:
        box_share = ground.box.area / ground.geometry.area
        batch = min(int(box_share * (waiting.missing * 8 + 64)), 200_000)
        found = candidates_inside(ground, batch, stream)
        tried += batch
        for place, cell in zip(found, cells.cell_of(found).tolist(), strict=True):
            if waiting.open[cell] and waiting.missing and kept.refused_in_a_row < PATIENCE_IN_CELLS:
                kept.accept(place[None, :], len(kept.places) + 1)
                if kept.refused_in_a_row == 0:
                    waiting.fill(cell)
        if waiting.missing and (
            kept.refused_in_a_row >= PATIENCE_IN_CELLS or tried > MOST_CANDIDATES
        ):
            raise DesignError(_no_room(ground, cells, waiting, spacing_m))
    filled = np.array(waiting.filled, dtype=np.int64)
    return np.column_stack([kept.places[len(before) :], filled]).reshape(-1, 3)


class _Waiting:
    """Which cells wait for a place in the current round, and how many places are missing."""

    def __init__(self, quotas: Whole, most: int) -> None:
        self.left = quotas.tolist()
        self.open = [left > 0 for left in self.left]
        self.round = sum(self.open)
        self.missing = most
        self.filled: list[int] = []

    def fill(self, cell: int) -> None:
        """Note a place in a cell; when no cell waits any more, the next round begins."""
        self.filled.append(cell)
        self.left[cell] -= 1
        self.open[cell] = False
        self.missing -= 1
        self.round -= 1
        if self.round == 0:
            self.open = [left > 0 for left in self.left]
            self.round = sum(self.open)


def _no_room(ground: Ground, cells: Cells, waiting: _Waiting, spacing_m: float) -> str:
    found, wanted = len(waiting.filled), len(waiting.filled) + waiting.missing
    side = (ground.geometry.area / cells.count) ** 0.5
    return (
        f"stratum '{ground.name}' has room for {found} of {wanted} places in its {cells.count} "
        f"cells at a minimum spacing of {spacing_m:g} m; a cell is about {side:.3g} m across. "
        f"Lower minimum_spacing_m (about {0.4 * side:.2g} m should fit), or ask for fewer "
        "locations or alternates."
    )
