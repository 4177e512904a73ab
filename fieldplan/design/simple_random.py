"""Simple random: every place of one population is equally likely, independently of the others."""

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from fieldplan.base.draws import Stream
from fieldplan.base.errors import DesignError
from fieldplan.design.along_lines import course_of, draw_along, line_places
from fieldplan.design.area import draw_places
from fieldplan.design.listing import units_in_drawn_order
from fieldplan.design.model import (
    DrawnPlace,
    DrawnPlaces,
    MeanEstimate,
    StratumCount,
    StratumValues,
)
from fieldplan.design.strata import (
    area_places,
    drawn_strata,
    ground_of,
    list_places,
    weighted_mean,
)
from fieldplan.frame.model import Frame, Stratum
from fieldplan.stats.stratified import predicted_variance

SPACING_NOTE = (
    "A minimum spacing of {spacing:g} m was kept within '{stratum}'. Places are then no longer "
    "exactly equally likely: those along {edge} have fewer neighbours and are drawn more often, "
    "the more so the wider the spacing. The mean and its interval are computed as if all were "
    "equally likely."
)


class SimpleRandom:
    """One stratum, drawn by simple random sampling: an area with, a list without replacement."""

    name = "simple-random"

    def predict_variance(
        self,
        *,
        weights: NDArray[np.float64],
        sigmas: NDArray[np.float64],
        counts: NDArray[np.int64],
        populations: Sequence[int | None],
    ) -> float:
        """Predict σ²/n, times 1 − n/N for a list (Cochran 1977, theorem 2.2)."""
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
        """Draw the places of the only stratum; alternates are the next ones on its list.

        Raises
        ------
        DesignError
            The frame has several strata, or the places do not fit.
        """
        if len(frame.strata) > 1:
            names = ", ".join(stratum.name for stratum in frame.strata)
            message = (
                f'layout "simple-random" draws from one population, and this frame has strata '
                f'({names}). Write layout = "stratified", or leave the strata out of the frame.'
            )
            raise DesignError(message)
        return draw_strata(
            frame, counts, seed=seed, design=design, minimum_spacing_m=minimum_spacing_m
        )

    def estimate(
        self, strata: Sequence[StratumValues], *, single_result: str = "refuse"
    ) -> MeanEstimate:
        """Average the results; variance s²/n, times 1 − n/N for a list (Cochran 1977, ch. 2)."""
        if len(strata) > 1:
            message = f"a simple random layout has one stratum, and results came for {len(strata)}."
            raise DesignError(message)
        listed = bool(strata) and strata[0].population is not None
        method = "Simple random sampling: the plain mean, its variance s²/n" + (
            " times (1 − n/N), since the list is finite." if listed else "."
        )
        return weighted_mean(strata, single_result=single_result, method=method)


def draw_strata(
    frame: Frame,
    counts: Sequence[StratumCount],
    *,
    seed: int,
    design: str,
    minimum_spacing_m: float,
) -> DrawnPlaces:
    """Draw every stratum by simple random sampling, on streams of its own."""
    places: list[DrawnPlace] = []
    notes: list[str] = []
    for stratum, count in drawn_strata(frame, counts):
        if stratum.reaches:
            drawn, said = _draw_line(stratum, count, seed, design, minimum_spacing_m)
        elif stratum.geometry is None:
            drawn, said = _draw_list(stratum, count, seed, design, minimum_spacing_m)
        else:
            drawn, said = _draw_area(stratum, count, seed, design, minimum_spacing_m)
        places += drawn
        notes += said
    realised = sum(place.location_class == "random" for place in places)
    return DrawnPlaces(tuple(places), realised, tuple(notes))


def _draw_area(
    stratum: Stratum, count: StratumCount, seed: int, design: str, spacing_m: float
) -> tuple[tuple[DrawnPlace, ...], list[str]]:
    stream = Stream(seed, design, stratum.name, "places")
    ground = ground_of(stratum, "simple-random")
    drawn = draw_places(ground, count.planned + count.alternates, stream, spacing_m=spacing_m)
    chosen = area_places(stratum.name, drawn[: count.planned].tolist(), location_class="random")
    rest = area_places(
        stratum.name,
        drawn[count.planned :].tolist(),
        location_class="alternate",
        first=count.planned + 1,
    )
    return chosen + rest, _spacing_notes(stratum, spacing_m, "the edge")


def _spacing_notes(stratum: Stratum, spacing_m: float, edge: str) -> list[str]:
    if not spacing_m:
        return []
    return [SPACING_NOTE.format(spacing=spacing_m, stratum=stratum.name, edge=edge)]


def _draw_line(
    stratum: Stratum, count: StratumCount, seed: int, design: str, spacing_m: float
) -> tuple[tuple[DrawnPlace, ...], list[str]]:
    stream = Stream(seed, design, stratum.name, "places")
    course = course_of(stratum, "simple-random")
    drawn = draw_along(course, count.planned + count.alternates, stream, spacing_m=spacing_m)
    chosen = line_places(stratum.name, drawn[: count.planned], location_class="random")
    rest = line_places(
        stratum.name,
        drawn[count.planned :],
        location_class="alternate",
        first=count.planned + 1,
    )
    return chosen + rest, _spacing_notes(stratum, spacing_m, "the ends of reaches")


def _draw_list(
    stratum: Stratum, count: StratumCount, seed: int, design: str, spacing_m: float
) -> tuple[tuple[DrawnPlace, ...], list[str]]:
    if spacing_m:
        message = (
            f"minimum_spacing_m is {spacing_m:g}, but '{stratum.name}' is a list of "
            f"{stratum.count} units whose places are given; leave the spacing out."
        )
        raise DesignError(message)
    order = units_in_drawn_order(stratum.units, seed=seed, design=design, stratum=stratum.name)
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
