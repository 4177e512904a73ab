"""Census: every unit of the list is visited, so that no chance decides which."""

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from fieldplan.base.errors import DesignError
from fieldplan.design.model import DrawnPlaces, MeanEstimate, StratumCount, StratumValues
from fieldplan.design.strata import drawn_strata, list_places, weighted_mean
from fieldplan.frame.model import Frame

ALL_VISITED = "Every unit was visited, so no error comes from choosing places."
REMAINS = (
    "Error from the time of sampling, from taking the sample and from the laboratory remains, and "
    "is not in this interval."
)


class Census:
    """All units of a list, in the order of the file."""

    name = "census"

    def predict_variance(
        self,
        *,
        weights: NDArray[np.float64],
        sigmas: NDArray[np.float64],
        counts: NDArray[np.int64],
        populations: Sequence[int | None],
    ) -> float:
        """Predict 0: nothing is left to chance when n = N in every stratum.

        Raises
        ------
        DesignError
            The counts are not the whole list.
        """
        if not len(weights) == len(sigmas) == len(counts) == len(populations):
            message = "weights, sigmas, counts and populations differ in length."
            raise DesignError(message)
        for count, population in zip(counts, populations, strict=True):
            if population is None or int(count) != population:
                _refuse_partial("a stratum", int(count), population)
        return 0.0

    def draw(
        self,
        frame: Frame,
        counts: Sequence[StratumCount],
        *,
        seed: int,  # noqa: ARG002
        design: str,  # noqa: ARG002
        minimum_spacing_m: float = 0.0,
        exact_count: bool = True,  # noqa: ARG002
    ) -> DrawnPlaces:
        """List every unit; there is nothing to draw, hence no alternates.

        Raises
        ------
        DesignError
            The frame is an area, fewer units were asked for, or a minimum spacing was set.
        """
        if minimum_spacing_m:
            message = f"minimum_spacing_m is {minimum_spacing_m:g}; a census cannot keep one."
            raise DesignError(message)
        pairs = drawn_strata(frame, counts)
        for stratum, count in pairs:
            if stratum.count != count.planned:
                _refuse_partial(f"stratum '{stratum.name}'", count.planned, stratum.count)
        places = tuple(
            place
            for stratum, _ in pairs
            for place in list_places(stratum.name, stratum.units, location_class="random")
        )
        spare = sum(count.alternates for _, count in pairs)
        notes = ("A census leaves no alternates: every unit is visited.",) if spare else ()
        return DrawnPlaces(places, len(places), notes)

    def estimate(
        self, strata: Sequence[StratumValues], *, single_result: str = "refuse"
    ) -> MeanEstimate:
        """Average all units; standard error 0 when none is missing.

        With units missing, those reached are taken as if they were a random part of the list,
        with the factor 1 − n/N, and the caution says that nobody drew them so.
        """
        whole = sum(s.population or 0 for s in strata)
        reached = sum(int(s.values.size) for s in strata)
        complete = all(s.population == s.values.size for s in strata)
        method = "Census: the mean of all units, no error from choosing places."
        caution = f"{ALL_VISITED} {REMAINS}"
        if not complete:
            method = (
                "Census with units missing: the mean of the units reached, variance as if they "
                "were a simple random part of each stratum, times (1 − n/N)."
            )
            caution = (
                f"{whole - reached} of {whole} units gave no result, and no draw decided which. "
                "Standard error and interval are those that the units reached would have, had "
                "they been drawn at random from the list; they do not know why the others are "
                "missing. If these differ, the mean is off by more than the interval says. "
                f"{REMAINS}"
            )
        return weighted_mean(strata, single_result=single_result, method=method, caution=caution)


def _refuse_partial(where: str, count: int, population: int | None) -> None:
    if population is None:
        message = f"a census needs a list of units; {where} is an area. Choose another layout."
    else:
        message = (
            f"a census visits all {population} units of {where}; {count} were asked for. "
            'Ask for all, or write layout = "simple-random".'
        )
    raise DesignError(message)
