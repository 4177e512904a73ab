"""Balanced list: places spread over the ground, in an order of which every first part is spread."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldplan.base.draws import Stream
from fieldplan.base.errors import DesignError
from fieldplan.design.area import Ground, KeptApart, Whole, centimetres
from fieldplan.design.local_pivotal import balanced_order, balanced_sample
from fieldplan.design.model import (
    DrawnPlace,
    DrawnPlaces,
    MeanEstimate,
    StratumCount,
    StratumValues,
)
from fieldplan.design.spread_estimate import SpreadRule, estimate_spread
from fieldplan.design.strata import area_places, drawn_strata, ground_of, list_places
from fieldplan.frame.model import Frame, ListUnit, Stratum
from fieldplan.stats.stratified import predicted_variance

DOUBLINGS = 3
"""A list in an area holds the planned number doubled so often, and at least SHORTEST places."""
SHORTEST = 64
SPOTS_PER_PLACE = 8
"""Raster spots for each place of the list."""
MOST_PLANNED = 2_000
MOST_SPOTS = 20_000_000

SPACING_NOTE = (
    "A minimum spacing of {spacing:g} m was kept within '{stratum}': a place of the list that "
    "stands closer to an earlier one is passed over ({passed} were). Places are then not exactly "
    "equally likely; the mean and its interval are computed as if they were."
)

Key = tuple[int, str, str]
"""Seed, design and stratum."""


@dataclass(frozen=True)
class BalancedList:
    """Places spread by the local pivotal method, numbered so that any first part is spread too.

    Parameters
    ----------
    variance : str
        ``neighbours`` or ``covariance``, fixed before results.
    """

    variance: SpreadRule = "neighbours"

    name = "balanced-list"

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
        """Draw a balanced list in every stratum; alternates are the next ones on it.

        Raises
        ------
        DesignError
            More places than can be drawn, a spacing that cannot be kept, or a spacing in a list.
        """
        places: list[DrawnPlace] = []
        notes: list[str] = []
        for stratum, count in drawn_strata(frame, counts):
            if count.planned < 1:
                message = f"stratum '{stratum.name}' would get {count.planned} places of a list."
                raise DesignError(message)
            key = (seed, design, stratum.name)
            one_stratum = _from_list if stratum.units else _from_area
            drawn, said = one_stratum(stratum, count, key, spacing_m=minimum_spacing_m)
            places += drawn
            notes += said
        realised = sum(place.location_class == "random" for place in places)
        return DrawnPlaces(tuple(places), realised, tuple(notes))

    def estimate(
        self, strata: Sequence[StratumValues], *, single_result: str = "refuse"
    ) -> MeanEstimate:
        """Weigh the stratum means; variance by the rule that was fixed before results."""
        return estimate_spread(
            strata, layout=self.name, rule=self.variance, single_result=single_result
        )


def list_length(planned: int) -> int:
    """Return how many places the list of an area stratum holds.

    Examples
    --------
    >>> list_length(20), list_length(3)
    (160, 96)
    """
    length: int = planned * 2**DOUBLINGS
    while length < SHORTEST:
        length *= 2
    return length


def balanced_places(ground: Ground, planned: int, key: Key) -> Whole:
    """Draw the whole list of an area stratum, in its order.

    Parameters
    ----------
    ground : Ground
    planned : int
        From 1 to 2,000; another number makes another list.
    key : (int, str, str)
        Seed, design and stratum.

    Returns
    -------
    ndarray of int, shape (``list_length(planned)``, 2)
        Easting and northing in centimetres.

    Raises
    ------
    DesignError
        ``planned`` is out of bounds, or the stratum too small or too ragged.

    Notes
    -----
    One spot is drawn uniformly in each square of a raster and kept if it lies inside: equally
    dense everywhere, along the edge too. The local pivotal method thins the spots to the list; the
    list is then halved down to the planned number and on to 1, which gives its order.

    Examples
    --------
    >>> import shapely
    >>> field = Ground("field", shapely.box(0, 0, 100, 50))
    >>> balanced_places(field, 2, (1, "main", "field"))[:2].tolist()
    [[1521, 2238], [8152, 2718]]
    """
    if not 1 <= planned <= MOST_PLANNED:
        message = (
            f"stratum '{ground.name}' would get {planned} places; a balanced list takes from 1 to "
            f"{MOST_PLANNED:,} a stratum. Ask for fewer, or use another layout."
        )
        raise DesignError(message)
    length = list_length(planned)
    spots = _raster_spots(ground, length * SPOTS_PER_PLACE, Stream(*key, "raster"))
    if len(spots) < length:
        message = (
            f"stratum '{ground.name}' ({ground.geometry.area:.4g} m²) is too small or too ragged "
            f"for a balanced list of {length} places. Ask for fewer locations, or use another "
            "layout."
        )
        raise DesignError(message)
    pairs = [(east, north) for east, north in spots.tolist()]
    drawn = balanced_sample(pairs, [length] * len(pairs), len(pairs), Stream(*key, "pivots"))
    listed = [pairs[i] for i in drawn]
    order = balanced_order(listed, Stream(*key, "halves"))
    return np.array([listed[i] for i in order], dtype=np.int64)


def _raster_spots(ground: Ground, wanted: int, stream: Stream) -> Whole:
    """Draw a spot in each square of a raster over the box; keep those inside, column by column."""
    box = ground.box
    step = max(1, math.floor(math.sqrt(ground.geometry.area * 1e4 / wanted)))
    columns, rows = (
        -(-side * 100 // step) for side in (box.east - box.west, box.north - box.south)
    )
    if columns * rows > MOST_SPOTS:
        message = (
            f"stratum '{ground.name}' fills too little of its box for a raster; give its parts as "
            "strata of their own."
        )
        raise DesignError(message)
    off = stream.uniforms(2 * columns * rows).reshape(-1, 2)
    column, row = np.divmod(np.arange(columns * rows), rows)
    east = box.west * 100 + column * step + np.floor(off[:, 0] * step).astype(np.int64)
    north = box.south * 100 + row * step + np.floor(off[:, 1] * step).astype(np.int64)
    inside = ground.holds(east, north)
    return np.stack([east[inside], north[inside]], axis=1)


def _from_area(
    stratum: Stratum, count: StratumCount, key: Key, *, spacing_m: float
) -> tuple[tuple[DrawnPlace, ...], list[str]]:
    places = balanced_places(ground_of(stratum, BalancedList.name), count.planned, key)
    wanted = count.planned + count.alternates
    if wanted > len(places):
        message = (
            f"the balanced list of '{stratum.name}' has {len(places)} places: {count.planned} "
            f"planned ones leave {len(places) - count.planned} alternates, and {count.alternates} "
            "were asked for. Ask for fewer."
        )
        raise DesignError(message)
    notes: list[str] = []
    if spacing_m:
        places, passed = _kept_apart(stratum, places, wanted, spacing_m)
        notes = [SPACING_NOTE.format(spacing=spacing_m, stratum=stratum.name, passed=passed)]
    rows = places[:wanted].tolist()
    chosen = area_places(stratum.name, rows[: count.planned], location_class="random")
    rest = area_places(
        stratum.name, rows[count.planned :], location_class="alternate", first=count.planned + 1
    )
    return chosen + rest, notes


def _kept_apart(
    stratum: Stratum, places: Whole, wanted: int, spacing_m: float
) -> tuple[Whole, int]:
    """Walk down the list and pass over what stands too close to a place before it."""
    kept = KeptApart(np.empty((0, 2), dtype=np.int64), round(spacing_m * 100))
    kept.accept(places, wanted)
    if len(kept.places) < wanted:
        roomy = (4 * 0.3 * stratum.measure / (np.pi * wanted)) ** 0.5
        message = (
            f"the balanced list of '{stratum.name}' ({stratum.measure:.4g} m²) has "
            f"{len(kept.places)} of {wanted} places, alternates among them, that stand "
            f"{spacing_m:g} m apart. Lower minimum_spacing_m (about {roomy:.2g} m should fit), or "
            "ask for fewer locations or alternates."
        )
        raise DesignError(message)
    last = kept.places[-1]
    walked = int(np.flatnonzero((places == last).all(axis=1))[0]) + 1
    return kept.places, walked - wanted


def _from_list(
    stratum: Stratum, count: StratumCount, key: Key, *, spacing_m: float
) -> tuple[tuple[DrawnPlace, ...], list[str]]:
    if spacing_m:
        message = (
            f"minimum_spacing_m is {spacing_m:g}, but '{stratum.name}' is a list of "
            f"{stratum.count} units whose places are given; leave the spacing out."
        )
        raise DesignError(message)
    order = balanced_units(stratum.units, count.planned, key)
    last = count.planned + count.alternates
    chosen = list_places(stratum.name, order[: count.planned], location_class="random")
    rest = list_places(
        stratum.name,
        order[count.planned : last],
        location_class="alternate",
        first=count.planned + 1,
    )
    if len(rest) == count.alternates:
        return chosen + rest, []
    note = (
        f"'{stratum.name}' has {stratum.count} units: {len(rest)} of {count.alternates} "
        "alternates are left after the draw."
    )
    return chosen + rest, [note]


def balanced_units(units: Sequence[ListUnit], planned: int, key: Key) -> tuple[ListUnit, ...]:
    """Put all units of a list in balanced order for a planned number.

    Parameters
    ----------
    units : sequence of ListUnit
        Their order in the file does not matter.
    planned : int
        From 1 to the number of units.
    key : (int, str, str)
        Seed, design and stratum.

    Returns
    -------
    tuple of ListUnit
        The first ``planned`` have probability n/N each.

    Notes
    -----
    The planned number is doubled as often as the list allows; the local pivotal method draws so
    many units, and they are halved back to the planned number and on to 1. The units that were
    not drawn follow in a balanced order of their own.

    Examples
    --------
    >>> wells = [ListUnit(f"MW-{i}", "site", 10.0 * i, 0.0, 0.0, 0.0) for i in range(1, 7)]
    >>> [u.unit_id for u in balanced_units(wells, 3, (3, "main", "site"))]
    ['MW-1', 'MW-3', 'MW-6', 'MW-2', 'MW-4', 'MW-5']
    """
    by_id = sorted(units, key=lambda unit: unit.unit_id)
    places = [(centimetres(unit.easting), centimetres(unit.northing)) for unit in by_id]
    length = planned
    while 2 * length <= len(by_id):
        length *= 2
    drawn = balanced_sample(places, [length] * len(places), len(places), Stream(*key, "pivots"))
    rest = sorted(set(range(len(places))) - set(drawn))
    order: list[int] = []
    for part, purpose in ((drawn, "halves"), (rest, "rest")):
        chosen = balanced_order([places[i] for i in part], Stream(*key, purpose))
        order += [part[i] for i in chosen]
    return tuple(by_id[i] for i in order)
