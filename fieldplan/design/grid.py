"""Systematic grids, square or triangular, with a random origin and a random rotation."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldplan.base.draws import Stream
from fieldplan.base.errors import DesignError
from fieldplan.design.area import Ground, Whole, draw_places
from fieldplan.design.model import (
    DrawnPlace,
    DrawnPlaces,
    MeanEstimate,
    StratumCount,
    StratumValues,
)
from fieldplan.design.strata import area_places, drawn_strata, ground_of, weighted_mean
from fieldplan.frame.model import Frame, Stratum
from fieldplan.stats.stratified import predicted_variance

HALF_ROOT_3 = 0.8660254037844386
"""Distance between the rows of a triangular grid of spacing 1."""
MOST_TRIES = 1000
FINEST_M = 0.02
"""Nodes at least this far apart stay apart when they are rounded to the centimetre."""

CAUTION = (
    "The grid gets no credit in this interval: it is computed by the formula for random places, "
    "and is usually too wide. Only where the ground repeats itself at the grid's own spacing can "
    "it be too narrow."
)
EXACT_NOTE = (
    "The grid of '{stratum}' was started anew {tries} times until exactly {count} places fell "
    "inside. Keeping only such starts can make places along the edge slightly less likely than "
    "others, most so on narrow sites with few places."
)


@dataclass(frozen=True)
class Grid:
    """Places on a grid in every stratum, each with an origin and a rotation of its own.

    Parameters
    ----------
    name : str
        ``square-grid`` or ``triangular-grid``.
    row_distance : float
        Distance between rows for a spacing of 1.
    row_shift : float
        How far every other row is moved along itself, for a spacing of 1.
    """

    name: str
    row_distance: float
    row_shift: float

    def spacing(self, area: float, count: int) -> float:
        """Return the spacing in metres, to the millimetre, that yields ``count`` places on average.

        Notes
        -----
        √(A/n) for squares, √(A/(0.866 n)) for triangles: MARSSIM (2000), section 5.5.2.5.

        Examples
        --------
        >>> TRIANGULAR_GRID.spacing(10_000.0, 20), SQUARE_GRID.spacing(10_000.0, 25)
        (24.028, 20.0)
        """
        return round(1000.0 * math.sqrt(area / (self.row_distance * count))) / 1000.0

    def predict_variance(
        self,
        *,
        weights: NDArray[np.float64],
        sigmas: NDArray[np.float64],
        counts: NDArray[np.int64],
        populations: Sequence[int | None],
    ) -> float:
        """Predict the variance as if the places were random: no credit for the grid."""
        return predicted_variance(weights, sigmas, counts, populations)

    def draw(
        self,
        frame: Frame,
        counts: Sequence[StratumCount],
        *,
        seed: int,
        design: str,
        minimum_spacing_m: float = 0.0,
        exact_count: bool = True,
    ) -> DrawnPlaces:
        """Lay a grid in every stratum; alternates are simple random places besides.

        Raises
        ------
        DesignError
            The frame is a list, no grid of exactly the count was found, or the grid would be
            finer than the minimum spacing.
        """
        places: list[DrawnPlace] = []
        notes: list[str] = []
        for stratum, count in drawn_strata(frame, counts):
            ground = ground_of(stratum, self.name)
            side = self._checked_spacing(stratum, count, minimum_spacing_m)
            stream = Stream(seed, design, stratum.name, "grid")
            wanted = count.planned if exact_count else None
            nodes, tries = self._nodes_inside(ground, side, stream, wanted)
            notes += _count_notes(stratum, count, len(nodes), tries)
            order = Stream(seed, design, stratum.name, "grid order").permutation(len(nodes))
            chosen = nodes[order]
            places += area_places(stratum.name, chosen.tolist(), location_class="random")
            spare = draw_places(
                ground,
                count.alternates,
                Stream(seed, design, stratum.name, "alternates"),
                spacing_m=minimum_spacing_m,
                taken=[(east, north) for east, north in chosen.tolist()],
            )
            places += area_places(
                stratum.name, spare.tolist(), location_class="alternate", first=len(chosen) + 1
            )
        realised = sum(place.location_class == "random" for place in places)
        return DrawnPlaces(tuple(places), realised, tuple(notes))

    def estimate(
        self, strata: Sequence[StratumValues], *, single_result: str = "refuse"
    ) -> MeanEstimate:
        """Estimate as if the places were random in each stratum, and say that they were not."""
        method = (
            "Systematic grid with a random start: the plain mean, its variance s²/n by the formula "
            "for simple random places."
            if len(strata) == 1
            else "Systematic grid with a random start in each stratum: stratum means weighed by "
            "their shares, variance Σ W²·s²/n by the formula for random places, degrees of "
            "freedom by Satterthwaite's formula."
        )
        return weighted_mean(strata, single_result=single_result, method=method, caution=CAUTION)

    def _checked_spacing(
        self, stratum: Stratum, count: StratumCount, minimum_spacing_m: float
    ) -> float:
        if count.planned < 1:
            message = f"stratum '{stratum.name}' would get {count.planned} places on a grid."
            raise DesignError(message)
        side = self.spacing(stratum.measure, count.planned)
        least = "minimum_spacing_m" if minimum_spacing_m > FINEST_M else "the finest grid"
        if side < max(minimum_spacing_m, FINEST_M):
            message = (
                f"{count.planned} places on a {self.name} in '{stratum.name}' stand {side:g} m "
                f"apart, closer than {least} = {max(minimum_spacing_m, FINEST_M):g} m. Ask for "
                "fewer locations."
            )
            raise DesignError(message)
        return side

    def _nodes_inside(
        self, ground: Ground, side: float, stream: Stream, wanted: int | None
    ) -> tuple[Whole, int]:
        """Return the nodes inside, by easting then northing, and how many starts it took."""
        seen: list[int] = []
        for tries in range(1, MOST_TRIES + 1):
            nodes = self._one_grid(ground, side, stream)
            seen.append(len(nodes))
            if len(nodes) == wanted or (wanted is None and len(nodes) >= 2):
                return nodes[np.lexsort((nodes[:, 1], nodes[:, 0]))], tries
        raise DesignError(_never_exact(ground.name, wanted, seen))

    def _one_grid(self, ground: Ground, side: float, stream: Stream) -> Whole:
        box, row_side = ground.box, side * self.row_distance
        along, across = stream.uniforms(2).tolist()
        cosine, sine = random_direction(stream)
        corners = [(x, y) for x in (0, box.east - box.west) for y in (0, box.north - box.south)]
        columns = [(x * cosine + y * sine) / side for x, y in corners]
        rows = [(y * cosine - x * sine) / row_side for x, y in corners]
        i = np.arange(math.floor(min(columns)) - 2, math.ceil(max(columns)) + 3)
        j = np.arange(math.floor(min(rows)) - 2, math.ceil(max(rows)) + 3)
        column, row = np.meshgrid(i, j)
        a = (column + along + self.row_shift * (row % 2)) * side
        b = (row + across) * row_side
        east = box.west * 100 + np.rint((a * cosine - b * sine) * 100).astype(np.int64).ravel()
        north = box.south * 100 + np.rint((a * sine + b * cosine) * 100).astype(np.int64).ravel()
        inside = ground.holds(east, north)
        return np.stack([east[inside], north[inside]], axis=1)


def random_direction(stream: Stream) -> tuple[float, float]:
    """Draw a direction, all equally likely, as (cosine, sine).

    Notes
    -----
    A point uniform in a square is kept when it lies in the unit disc, and its distance divided
    out (von Neumann 1951). Products, sums and one square root give the same digits on every
    platform; sines from a mathematics library need not.

    Examples
    --------
    >>> cosine, sine = random_direction(Stream(1, "main", "site", "grid"))
    >>> round(cosine**2 + sine**2, 12)
    1.0
    """
    while True:
        x, y = (2.0 * u - 1.0 for u in stream.uniforms(2).tolist())
        square = x * x + y * y
        if 0.0 < square <= 1.0:
            length = math.sqrt(square)
            return x / length, y / length


def _count_notes(stratum: Stratum, count: StratumCount, found: int, tries: int) -> list[str]:
    if found != count.planned:
        passed = f" Starts with fewer than 2 were passed over ({tries - 1})." if tries > 1 else ""
        return [
            f"{found} places of the grid fell inside '{stratum.name}'; {count.planned} were "
            f"asked for. Every place is equally likely; the number is left to chance.{passed}"
        ]
    if tries > 1:
        return [EXACT_NOTE.format(stratum=stratum.name, tries=tries - 1, count=found)]
    return []


def _never_exact(name: str, wanted: int | None, seen: Sequence[int]) -> str:
    if wanted is None:
        return f"no grid of {len(seen)} put 2 places inside '{name}'; ask for more locations."
    nearest = sorted(set(seen), key=lambda found: (abs(found - wanted), found))[:3]
    found = ", ".join(str(number) for number in sorted(nearest))
    return (
        f"no grid of {len(seen)} put exactly {wanted} places inside '{name}' (nearest: {found}). "
        "Write exact_count = false, ask for another number, or choose a random layout."
    )


SQUARE_GRID = Grid("square-grid", row_distance=1.0, row_shift=0.0)
TRIANGULAR_GRID = Grid("triangular-grid", row_distance=HALF_ROOT_3, row_shift=0.5)
