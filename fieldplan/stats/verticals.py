"""Where verticals stand in a cross-section: equal widths, or centroids of equal discharge."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

Numbers = NDArray[np.float64]


def equal_width_verticals(left_edge: float, right_edge: float, count: int) -> Numbers:
    """Return the middles of equal widths between two edges of water.

    Parameters
    ----------
    left_edge, right_edge : float
        Distances along the tape from one fixed point, metres; they may run either way.
    count : int
        Verticals, at least 1.

    Returns
    -------
    ndarray of float, shape (count,)
        Distances along the tape, from the left edge on.

    Raises
    ------
    ValueError
        No width, or no vertical.

    Notes
    -----
    The first stands half a width from the edge, the others a width apart: the equal-width-increment
    method (U.S. Geological Survey, National Field Manual, ch. A4; from memory). The
    stream moves through each with its own velocity, so that samples are taken at one transit rate.

    Examples
    --------
    >>> equal_width_verticals(2.0, 12.0, 5).tolist()
    [3.0, 5.0, 7.0, 9.0, 11.0]
    """
    _check_count(count)
    if not np.isfinite([left_edge, right_edge]).all() or left_edge == right_edge:
        message = f"edges of water at {left_edge:g} and {right_edge:g} m leave no width."
        raise ValueError(message)
    return left_edge + (right_edge - left_edge) * (np.arange(count) + 0.5) / count


def station_discharges(distances: ArrayLike, depths: ArrayLike, velocities: ArrayLike) -> Numbers:
    """Return the discharge of the section around each station of a gauging, m³/s.

    Parameters
    ----------
    distances : array of float, shape (n,)
        Stations along the tape in metres, all one way, both edges of water among them; 3 or more.
    depths, velocities : array of float, shape (n,)
        Metres, and mean velocity of the vertical in metres a second; 0 or more.

    Raises
    ------
    ValueError
        Stations out of order, negative or missing numbers, or no water at all.

    Notes
    -----
    Mid-section method: a section reaches half-way to the neighbours, at an edge to the edge itself
    (ISO 748, *Hydrometry*; Rantz 1982, USGS Water-Supply Paper 2175, ch. 5; from memory).

    Examples
    --------
    >>> station_discharges([0, 2, 4, 6], [0, 1.0, 2.0, 0], [0, 0.5, 1.0, 0]).tolist()
    [0.0, 1.0, 4.0, 0.0]
    """
    places, deep, fast = _stations(distances, depths, velocities)
    steps = np.abs(np.diff(places))
    widths = np.concatenate([[0.0], steps]) / 2 + np.concatenate([steps, [0.0]]) / 2
    found = widths * deep * fast
    if not found.sum() > 0:
        message = "depths and velocities leave no discharge; nothing can be shared equally."
        raise ValueError(message)
    return np.asarray(found, dtype=np.float64)


def equal_discharge_verticals(
    distances: ArrayLike, depths: ArrayLike, velocities: ArrayLike, count: int
) -> Numbers:
    """Return the centroids of equal shares of a discharge.

    Parameters
    ----------
    distances, depths, velocities : array of float, shape (n,)
        A gauging, as for `station_discharges`.
    count : int
        Verticals, at least 1; each stands for 1/count of the discharge.

    Returns
    -------
    ndarray of float, shape (count,)
        Distances along the tape at which the discharge summed from the first station is
        (i − ½)/count of the whole.

    Raises
    ------
    ValueError
        As for `station_discharges`, or no vertical.

    Notes
    -----
    Discharge is summed over sections whose borders lie half-way between stations and taken as even
    within a section: the equal-discharge-increment method, its centroids read off the curve of
    cumulative discharge (U.S. Geological Survey, National Field Manual, ch. A4; from memory).
    Samples of equal volume at each then weigh by discharge.

    Examples
    --------
    >>> even = equal_discharge_verticals([0, 5, 10, 15, 20], [0, 1, 1, 1, 0], [0, 1, 1, 1, 0], 3)
    >>> even.tolist()
    [5.0, 10.0, 15.0]
    """
    _check_count(count)
    flows = station_discharges(distances, depths, velocities)
    places = np.asarray(distances, dtype=np.float64)
    borders = np.concatenate([[places[0]], (places[:-1] + places[1:]) / 2, [places[-1]]])
    total = np.concatenate([[0.0], np.cumsum(flows)]) / flows.sum()
    shares = (np.arange(count) + 0.5) / count
    # Where no water flows the curve is level: the place is where it starts to rise again.
    section = np.clip(np.searchsorted(total, shares, side="right") - 1, 0, len(flows) - 1)
    within = (shares - total[section]) * flows.sum() / flows[section]
    return np.asarray(
        borders[section] + within * (borders[section + 1] - borders[section]), dtype=np.float64
    )


def _check_count(count: int) -> None:
    if count < 1:
        message = f"{count} verticals were asked for; a cross-section needs at least 1."
        raise ValueError(message)


def _stations(
    distances: ArrayLike, depths: ArrayLike, velocities: ArrayLike
) -> tuple[Numbers, Numbers, Numbers]:
    """Check a gauging."""
    places, deep, fast = (np.asarray(v, dtype=np.float64) for v in (distances, depths, velocities))
    if places.size < 3 or deep.shape != places.shape or fast.shape != places.shape:
        message = (
            f"{places.size} distances, {deep.size} depths and {fast.size} velocities; a gauging "
            "needs the same number of each, 3 or more, both edges of water among them."
        )
        raise ValueError(message)
    for name, values in (("distance", places), ("depth", deep), ("velocity", fast)):
        bad = ~np.isfinite(values) | ((values < 0) & (name != "distance"))
        if bad.any():
            at = int(np.flatnonzero(bad)[0])
            message = f"station {at + 1} has a {name} of {values[at]:g}; it must be 0 or more."
            raise ValueError(message)
    steps = np.diff(places)
    if not ((steps > 0).all() or (steps < 0).all()):
        at = int(np.flatnonzero(np.sign(steps) != np.sign(steps[0]))[0]) if steps[0] else 0
        message = (
            f"station {at + 2} at {places[at + 1]:g} m is out of order after {places[at]:g} m; "
            "list stations from one edge of water to the other, each once."
        )
        raise ValueError(message)
    return places, deep, fast
