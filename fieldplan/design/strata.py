"""What the layouts share about strata: places in list order, and the weighted mean."""

from collections.abc import Iterable, Sequence

import numpy as np

from fieldplan.base.errors import DesignError
from fieldplan.design.area import Ground
from fieldplan.design.model import (
    DrawnPlace,
    LocationClass,
    MeanEstimate,
    StratumCount,
    StratumEstimate,
    StratumValues,
)
from fieldplan.frame.model import Frame, ListUnit, Stratum
from fieldplan.stats.stratified import pooled_variance, stratified_mean


def drawn_strata(
    frame: Frame, counts: Sequence[StratumCount]
) -> tuple[tuple[Stratum, StratumCount], ...]:
    """Pair each stratum of the frame with its count, in the frame's order.

    Parameters
    ----------
    frame : Frame
    counts : sequence of StratumCount
        Exactly one for each stratum of the frame.

    Raises
    ------
    DesignError
        A stratum has no count, a count names no stratum, or a list is asked for more than it has.
    """
    asked = {count.stratum: count for count in counts}
    names = [stratum.name for stratum in frame.strata]
    problems = [
        f"stratum '{name}' has no number of locations; give it one, or take it out of the frame."
        for name in names
        if name not in asked
    ]
    problems += [
        f"a number of locations is given for '{name}', but the frame's strata are "
        f"{', '.join(names)}."
        for name in asked
        if name not in names
    ]
    pairs = tuple((s, asked[s.name]) for s in frame.strata if s.name in asked)
    problems += [
        f"stratum '{stratum.name}' has {stratum.count} units, {count.planned} were asked for; "
        f"ask for {stratum.count} at most."
        for stratum, count in pairs
        if stratum.count is not None and count.planned > stratum.count
    ]
    if problems:
        raise DesignError(*problems)
    return pairs


def ground_of(stratum: Stratum, layout: str) -> Ground:
    """Return the polygon of an area stratum, ready to draw from.

    Raises
    ------
    DesignError
        The stratum is a list.
    """
    if stratum.geometry is None:
        message = (
            f"layout '{layout}' needs an area, and stratum '{stratum.name}' is a list of "
            f"{stratum.count} units; use simple-random, stratified or census."
        )
        raise DesignError(message)
    if stratum.reaches:
        message = (
            f"layout '{layout}' needs an area, and stratum '{stratum.name}' is "
            f"{stratum.measure:.4g} m of lines; use simple-random, stratified or even-spacing."
        )
        raise DesignError(message)
    return Ground(stratum.name, stratum.geometry)


def area_places(
    stratum: str,
    places_cm: Iterable[Sequence[int]],
    *,
    location_class: LocationClass,
    first: int = 1,
) -> tuple[DrawnPlace, ...]:
    """Turn places in whole centimetres into drawn places numbered from ``first``."""
    return tuple(
        DrawnPlace(stratum, order, location_class, int(east) / 100, int(north) / 100)
        for order, (east, north) in enumerate(places_cm, start=first)
    )


def list_places(
    stratum: str,
    units: Iterable[ListUnit],
    *,
    location_class: LocationClass,
    first: int = 1,
) -> tuple[DrawnPlace, ...]:
    """Turn list units into drawn places numbered from ``first``."""
    return tuple(
        DrawnPlace(stratum, order, location_class, unit.easting, unit.northing, unit.unit_id)
        for order, unit in enumerate(units, start=first)
    )


def weighted_mean(
    strata: Sequence[StratumValues], *, single_result: str, method: str, caution: str = ""
) -> MeanEstimate:
    """Weigh the stratum means by the strata's shares of the population.

    Parameters
    ----------
    strata : sequence of StratumValues
    single_result : str
        ``refuse``, or ``borrow-spread``: a stratum left with one result takes the pooled
        within-stratum variance of the others.
    method, caution : str
        Sentences for the sheet.

    Raises
    ------
    DesignError
        A stratum has no result, or one result that the rule refuses.
    """
    _refuse_what_has_no_answer(strata, single_result)
    counts = np.array([s.values.size for s in strata])
    means = np.array([s.values.mean() for s in strata])
    variances = np.array([s.values.var(ddof=1) if s.values.size > 1 else 0.0 for s in strata])
    populations = [s.population for s in strata]
    weights = np.array([s.weight for s in strata])
    lone = [s.stratum for s in strata if needs_spread(s)]
    if lone:
        variances = np.where(
            [s.stratum in lone for s in strata], pooled_variance(variances, counts), variances
        )
        caution = " ".join(filter(None, (caution, _borrowed(lone))))
    mean, error, known = stratified_mean(means, variances, counts, weights, populations)
    parts = tuple(
        StratumEstimate(
            stratum=s.stratum,
            n=int(s.values.size),
            mean=float(m),
            sd=float(v) ** 0.5,
            weight=s.weight,
            variance_of_mean=float(v) / s.values.size * (1 - s.values.size / _size(s)),
            variance_borrowed=s.stratum in lone,
        )
        for s, m, v in zip(strata, means, variances, strict=True)
    )
    return MeanEstimate(int(counts.sum()), mean, error, known, parts, method, caution)


def needs_spread(stratum: StratumValues) -> bool:
    """Tell whether one result must speak for more than itself."""
    return stratum.values.size == 1 and stratum.population != 1


def _size(stratum: StratumValues) -> float:
    return float("inf") if stratum.population is None else float(stratum.population)


def _refuse_what_has_no_answer(strata: Sequence[StratumValues], single_result: str) -> None:
    problems = [
        f"stratum '{s.stratum}' has no result, and no rule can stand in for it. Collect one from "
        "its alternates, or redefine the population without it and say so."
        for s in strata
        if s.values.size == 0
    ]
    if single_result == "refuse":
        problems += [
            f"stratum '{s.stratum}' has 1 result ({s.values[0]:g}); a variance needs 2. Collect "
            'another from its alternates; the rule single_result = "borrow-spread" would have '
            "taken the spread of the other strata."
            for s in strata
            if needs_spread(s)
        ]
    if not problems and any(map(needs_spread, strata)) and all(s.values.size < 2 for s in strata):
        problems = ["no stratum has 2 results, so there is no spread to borrow; collect more."]
    if problems or not strata:
        raise DesignError(*(problems or ["no stratum was given, so there is no mean."]))


def _borrowed(names: Sequence[str]) -> str:
    those = ", ".join(f"'{name}'" for name in names)
    return (
        f"Only 1 result in {those}: its spread was borrowed from the other strata, and the "
        "interval holds only if it spreads as they do."
    )
