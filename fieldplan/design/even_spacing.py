"""Even spacing along lines, from one random start or from several independent ones."""

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from fieldplan.base.draws import Stream
from fieldplan.base.errors import DesignError
from fieldplan.base.units import length_in_words
from fieldplan.design.along_lines import Course, LinePlace, course_of, draw_along, line_places
from fieldplan.design.model import (
    DrawnPlace,
    DrawnPlaces,
    MeanEstimate,
    StartVariance,
    StratumCount,
    StratumValues,
)
from fieldplan.design.strata import drawn_strata, needs_spread, weighted_mean
from fieldplan.frame.model import Frame, Stratum
from fieldplan.stats.random_starts import freedom_of_parts, variance_between_starts
from fieldplan.stats.stratified import predicted_variance

ONE_START = (
    "Even spacing from one random start: the plain mean of each stratum, its variance s²/n by the "
    "formula for simple random places."
)
NO_CREDIT = (
    "Even spacing gets no credit in this interval: it is computed by the formula for random "
    "places, and is usually too wide. Only where the line repeats itself at the spacing's own "
    "length can it be too narrow."
)
SEVERAL = (
    "Even spacing from {starts} independent random starts: the plain mean of each stratum, its "
    "variance from how the means of the starts differ, Σ m·(mean of the start − mean)²/(n·(k − 1)) "
    "with m results of a start and k starts; k − 1 degrees of freedom a stratum."
)
FEW_STARTS = (
    "{starts} starts leave {known:.3g} degrees of freedom, so that the interval is wide; five "
    "starts or more narrow it."
)
COMPARISON = (
    "For comparison only, no credit for the layout: the formula for simple random places gives a "
    "standard error {times:.2f} times as large."
)
LONE = (
    "A stratum kept a single result, so that no stratum gets credit for its starts: mean and "
    "interval are computed by the formula for random places."
)


@dataclass(frozen=True)
class EvenSpacing:
    """Places evenly spaced along the lines of every stratum.

    Parameters
    ----------
    starts : int
        Independent random starts, at least 1. Each has its share of the places, evenly spaced over
        the whole stratum.
    """

    starts: int = 1
    name = "even-spacing"

    def predict_variance(
        self,
        *,
        weights: NDArray[np.float64],
        sigmas: NDArray[np.float64],
        counts: NDArray[np.int64],
        populations: Sequence[int | None],
    ) -> float:
        """Predict the variance as if the places were random: no credit for the spacing."""
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
        """Space places evenly along every stratum; alternates are simple random ones besides.

        Raises
        ------
        DesignError
            The frame has no lines, a stratum has fewer places than starts, or the spacing is
            closer than the minimum.
        """
        places: list[DrawnPlace] = []
        for stratum, count in drawn_strata(frame, counts):
            course = course_of(stratum, self.name)
            self._check(stratum, count, minimum_spacing_m)
            places += self._draw_one(course, count, seed, design, minimum_spacing_m)
        realised = sum(place.location_class == "random" for place in places)
        return DrawnPlaces(tuple(places), realised, self._notes(frame, counts))

    def estimate(
        self, strata: Sequence[StratumValues], *, single_result: str = "refuse"
    ) -> MeanEstimate:
        """Estimate from how the starts differ; from one start as if the places were random."""
        plain = weighted_mean(
            strata, single_result=single_result, method=ONE_START, caution=NO_CREDIT
        )
        if any(needs_spread(stratum) for stratum in strata):
            return replace(plain, caution=f"{LONE} {plain.caution}")
        found = [_between_starts(stratum) for stratum in strata]
        kept = [entry for entry in found if entry is not None]
        if len(kept) < len(strata):
            return plain
        weights = np.array([stratum.weight for stratum in strata])
        parts = weights**2 * np.array([entry.variance for entry in kept])
        known = np.array([entry.degrees_of_freedom for entry in kept])
        error = math.sqrt(math.fsum(parts.tolist()))
        freedom = freedom_of_parts(parts, known)
        starts = min(len(entry.means) for entry in kept)
        cautions = [] if freedom >= 4 else [FEW_STARTS.format(starts=starts, known=freedom)]
        if error > 0:
            cautions.append(COMPARISON.format(times=plain.standard_error / error))
        return replace(
            plain,
            standard_error=error,
            degrees_of_freedom=freedom,
            strata=tuple(
                replace(entry, variance_of_mean=start.variance)
                for entry, start in zip(plain.strata, kept, strict=True)
            ),
            method=SEVERAL.format(starts=starts),
            caution=" ".join(cautions),
            start_variances=tuple(kept),
        )

    def _check(self, stratum: Stratum, count: StratumCount, minimum_spacing_m: float) -> None:
        """Refuse what cannot be spaced."""
        if self.starts > 1 and minimum_spacing_m:
            message = (
                f"{self.starts} starts are independent, so that their places may fall closer than "
                f"minimum_spacing_m = {minimum_spacing_m:g}; take one of the two out."
            )
            raise DesignError(message)
        if count.planned < self.starts:
            message = (
                f"stratum '{stratum.name}' gets {count.planned} locations for {self.starts} "
                "starts; each start needs one. Lower starts, or raise the floor."
            )
            raise DesignError(message)
        spacing = stratum.measure / count.planned
        if spacing < minimum_spacing_m:
            most = int(stratum.measure / minimum_spacing_m)
            message = (
                f"{count.planned} places on the {length_in_words(stratum.measure)} of "
                f"'{stratum.name}' stand {spacing:.4g} m apart, closer than minimum_spacing_m = "
                f"{minimum_spacing_m:g}: {most} fit at most. Ask for fewer locations, or lower it."
            )
            raise DesignError(message)

    def _draw_one(
        self, course: Course, count: StratumCount, seed: int, design: str, spacing_m: float
    ) -> tuple[DrawnPlace, ...]:
        spaced, starts = self._spaced(course, count.planned, seed, design)
        order = Stream(seed, design, course.name, "even order").permutation(len(spaced))
        chosen = [spaced[at] for at in order]
        spare = draw_along(
            course,
            count.alternates,
            Stream(seed, design, course.name, "alternates"),
            spacing_m=spacing_m,
            taken=chosen,
        )
        turns = [at % self.starts + 1 for at in range(len(spare))]
        return line_places(
            course.name, chosen, location_class="random", starts=[starts[at] for at in order]
        ) + line_places(
            course.name, spare, location_class="alternate", first=len(chosen) + 1, starts=turns
        )

    def _spaced(
        self, course: Course, planned: int, seed: int, design: str
    ) -> tuple[list[LinePlace], list[int]]:
        """Space the places of each start in turn; earlier starts take what is left over."""
        stream = Stream(seed, design, course.name, "starts")
        places, starts = [], []
        for number in range(1, self.starts + 1):
            share = planned // self.starts + (number <= planned % self.starts)
            offset = float(stream.uniforms(1)[0])
            for step in range(share):
                at = min(int((step + offset) * course.total / share), course.total - 1)
                places.append(course.place(at))
                starts.append(number)
        return places, starts

    def _notes(self, frame: Frame, counts: Sequence[StratumCount]) -> tuple[str, ...]:
        planned = {count.stratum: count.planned for count in counts}
        told = []
        for stratum in frame.strata:
            count, length = planned[stratum.name], stratum.measure
            if self.starts == 1:
                how = f"{count} places, one every {length / count:.4g} m along the lines"
            else:
                low, more = divmod(count, self.starts)
                each = f"{low} or {low + 1}" if more else f"{low}"
                how = (
                    f"{count} places from {self.starts} starts with {each} each, evenly spaced "
                    f"over {length_in_words(length)} of line"
                )
            told.append(f"'{stratum.name}': {how}; reaches left out take no room.")
        return tuple(told)


def _between_starts(stratum: StratumValues) -> StartVariance | None:
    """Give the variance of a stratum's mean from its starts; None with fewer than two."""
    if stratum.starts is None:
        return None
    numbers = [number for number in np.unique(stratum.starts).tolist() if number]
    if len(numbers) < 2:
        return None
    groups = [stratum.values[stratum.starts == number] for number in numbers]
    counts = np.array([group.size for group in groups])
    means = np.array([group.mean() for group in groups])
    return StartVariance(
        stratum=stratum.stratum,
        counts=tuple(counts.tolist()),
        means=tuple(means.tolist()),
        variance=variance_between_starts(means, counts),
        degrees_of_freedom=len(numbers) - 1,
    )
