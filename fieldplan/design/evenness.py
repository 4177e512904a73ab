"""How evenly places lie: how close neighbours stand, and how wide the largest gap is."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from fieldplan.base.errors import DesignError
from fieldplan.design.layouts import LAYOUTS
from fieldplan.design.model import DrawnPlaces, Layout, StratumCount
from fieldplan.frame.cutting import joined
from fieldplan.frame.model import Frame

Coordinates = NDArray[np.float64]


@dataclass(frozen=True)
class Evenness:
    """One draw of one layout, measured.

    Parameters
    ----------
    layout : str
    locations : int
        Random locations drawn.
    closest_m, typical_m : float
        Smallest and median distance from a location to its nearest neighbour, metres.
    farthest_m : float
        Largest distance, in metres, from any spot of the population to its nearest location.
    problem : str
        Why the layout could not be drawn; the numbers are then 0.
    """

    layout: str
    locations: int
    closest_m: float
    typical_m: float
    farthest_m: float
    problem: str = ""


def compare_layouts(
    frame: Frame,
    counts: Sequence[StratumCount],
    *,
    seed: int,
    design: str,
    minimum_spacing_m: float = 0.0,
) -> tuple[Evenness, ...]:
    """Draw every layout that fits the frame once, and measure how evenly its places lie.

    Parameters
    ----------
    frame : Frame
        An area.
    counts : sequence of StratumCount
        Alternates are left out.
    seed : int
    design : str
        Part of the key.
    minimum_spacing_m : float

    Raises
    ------
    DesignError
        The frame is a list, whose places are given.
    """
    if frame.kind == "list":
        message = "a list has its places already; layouts can be compared for areas only."
        raise DesignError(message)
    if frame.kind == "line":
        message = "layouts can be compared for areas only, and this frame is of lines."
        raise DesignError(message)
    unfit = {"census", "even-spacing", "simple-random" if len(frame.strata) > 1 else "stratified"}
    wanted = [StratumCount(count.stratum, count.planned, 0) for count in counts]
    measured = []
    for layout in LAYOUTS:
        if layout.name in unfit:
            continue
        try:
            drawn = layout.draw(
                frame, wanted, seed=seed, design=design, minimum_spacing_m=minimum_spacing_m
            )
        except DesignError as refused:
            measured.append(Evenness(layout.name, 0, 0.0, 0.0, 0.0, str(refused)))
        else:
            measured.append(_measured(layout, frame, drawn))
    return tuple(measured)


def _measured(layout: Layout, frame: Frame, drawn: DrawnPlaces) -> Evenness:
    places = np.array([(place.easting, place.northing) for place in drawn.places])
    near = nearest_neighbours(places)
    whole = joined([s.geometry for s in frame.strata if s.geometry is not None], "the strata")
    return Evenness(
        layout.name,
        len(places),
        float(near.min()),
        float(np.median(near)),
        largest_gap(whole, places),
    )


def nearest_neighbours(places: Coordinates) -> Coordinates:
    """Return the distance from each place to its nearest neighbour.

    Parameters
    ----------
    places : ndarray, shape (n, 2)
        Metres; at least two.

    Returns
    -------
    ndarray, shape (n,)

    Examples
    --------
    >>> nearest_neighbours(np.array([[0.0, 0.0], [3.0, 4.0], [3.0, 5.0]])).tolist()
    [5.0, 1.0, 1.0]
    """
    if len(places) < 2:
        message = f"{len(places)} location has no neighbour; ask for at least 2."
        raise DesignError(message)
    from scipy.spatial import KDTree

    distances = np.asarray(KDTree(places).query(places, k=2)[0], dtype=np.float64)
    return distances[:, 1]


def largest_gap(geometry: BaseGeometry, places: Coordinates) -> float:
    """Return the largest distance from any spot of an area to its nearest place.

    Parameters
    ----------
    geometry : BaseGeometry
    places : ndarray, shape (n, 2)
        Metres.

    Notes
    -----
    Exact. Distance to one point is convex, so over the part of the area that belongs to a place
    (its Voronoi cell) it is largest at a corner of that part: a corner of the area, a corner of
    the cell, or a crossing of their sides. All of these are tried. Qhull's diagram is used, as
    GEOS's had overlapping cells on grids rounded to the centimetre.

    Examples
    --------
    >>> largest_gap(shapely.box(0, 0, 8, 6), np.array([[0.0, 0.0]]))
    10.0
    """
    from scipy.spatial import KDTree, Voronoi

    west, south, east, north = geometry.bounds
    far = 10.0 * max(east - west, north - south)
    guards = [(west - far, south), (east + far, south), (west, south - far), (east, north + far)]
    diagram = Voronoi(np.concatenate([places, guards]))
    inner = shapely.contains_xy(geometry, diagram.vertices[:, 0], diagram.vertices[:, 1])
    ridges = [diagram.vertices[ends] for ends in diagram.ridge_vertices if min(ends) >= 0]
    crossings = shapely.intersection(shapely.multilinestrings(ridges), geometry.boundary)
    corners = [
        shapely.get_coordinates(geometry),
        diagram.vertices[inner],
        shapely.get_coordinates(crossings),
    ]
    return float(np.max(KDTree(places).query(np.concatenate(corners))[0]))
