"""The pilot on the ground: where its places lie, and the site as equal cells."""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    from shapely.geometry.base import BaseGeometry

    from fieldplan.frame.model import Frame
    from fieldplan.lab.model import StratumSpread

Floats = NDArray[np.float64]
MOST_CELLS = 700
"""Cells of a site: fine enough that more change no weight by 1 %, few enough for all pairs."""


@dataclass(frozen=True)
class PilotGround:
    """Places and values of a pilot in the site's plane.

    Parameters
    ----------
    places : array of shape (n, 2)
        Metres, no two the same.
    values : array of shape (n,)
        Results of one spot averaged.
    strata : tuple of str
        Of each place.
    """

    places: Floats
    values: Floats
    strata: tuple[str, ...]

    def within(self, stratum: str) -> "PilotGround":
        """Keep the places of one stratum."""
        chosen = np.array([name == stratum for name in self.strata], dtype=bool)
        kept = tuple(name for name in self.strata if name == stratum)
        return PilotGround(self.places[chosen], self.values[chosen], kept)


def pilot_ground(entries: "Sequence[StratumSpread]", frame: "Frame") -> PilotGround | None:
    """Put the pilot's results where they were taken.

    Parameters
    ----------
    entries : sequence of StratumSpread
        By stratum.
    frame : Frame

    Returns
    -------
    PilotGround or None
        None where a result has no position, or where nothing was measured.
    """
    from fieldplan.frame.projection import to_site

    spots: dict[tuple[float, float], list[tuple[float, str]]] = {}
    for entry in entries:
        if len(entry.positions) != len(entry.values):
            return None
        for position, value in zip(entry.positions, entry.values, strict=True):
            if position is None:
                return None
            easting, northing = to_site(frame.projection, *position)
            spot = (round(float(easting), 2), round(float(northing), 2))
            spots.setdefault(spot, []).append((value, entry.stratum))
    if not spots:
        return None
    return PilotGround(
        places=np.array(list(spots), dtype=float),
        values=np.array([math.fsum(v for v, _ in found) / len(found) for found in spots.values()]),
        strata=tuple(found[0][1] for found in spots.values()),
    )


@dataclass(frozen=True)
class Cells:
    """Equal square cells that cover a site.

    Parameters
    ----------
    centres : array of shape (m, 2)
    side : float
        Metres; the root of the site's area over m, so that cells and site have one area.
    extent : float
        Side of the square that holds the site, metres.
    area : float
        Square metres of the site.
    """

    centres: Floats
    side: float
    extent: float
    area: float


def cells_of(geometry: "BaseGeometry", *, most: int = MOST_CELLS) -> Cells:
    """Cover a polygon with about ``most`` equal cells.

    Parameters
    ----------
    geometry : BaseGeometry
        Polygon or several, in metres.
    most : int

    Returns
    -------
    Cells
    """
    import shapely

    left, low, right, top = geometry.bounds
    area = float(geometry.area)
    step = math.sqrt(area / most)
    while True:
        across, up = (
            grid.ravel()
            for grid in np.meshgrid(
                np.arange(left + step / 2, right, step), np.arange(low + step / 2, top, step)
            )
        )
        inside = shapely.contains_xy(geometry, across, up)
        if inside.sum() >= most / 2 or len(across) > 1000 * most:
            break
        step /= 1.5  # a thin site may slip between the centres
    centres = np.column_stack([across[inside], up[inside]])
    side = math.sqrt(area / max(len(centres), 1))
    return Cells(centres, side, max(right - left, top - low), area)
