"""Stratified random: simple random sampling in every stratum, weighed by its share."""

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from fieldplan.design.model import DrawnPlaces, MeanEstimate, StratumCount, StratumValues
from fieldplan.design.simple_random import draw_strata
from fieldplan.design.strata import weighted_mean
from fieldplan.frame.model import Frame
from fieldplan.stats.stratified import predicted_variance


class Stratified:
    """Every stratum is drawn on its own, so that none is missed and each has its own spread."""

    name = "stratified"

    def predict_variance(
        self,
        *,
        weights: NDArray[np.float64],
        sigmas: NDArray[np.float64],
        counts: NDArray[np.int64],
        populations: Sequence[int | None],
    ) -> float:
        """Predict Σ W²σ²/n, each term times 1 − n/N for a list (Cochran 1977, theorem 5.3)."""
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
        """Draw every stratum; alternates are the next ones on its list.

        Raises
        ------
        DesignError
            A count is missing or too large, or the places do not fit.
        """
        return draw_strata(
            frame, counts, seed=seed, design=design, minimum_spacing_m=minimum_spacing_m
        )

    def estimate(
        self, strata: Sequence[StratumValues], *, single_result: str = "refuse"
    ) -> MeanEstimate:
        """Weigh the stratum means; variance Σ W²s²/n, degrees of freedom by Satterthwaite."""
        method = (
            "Stratified random sampling: stratum means weighed by their shares of the population, "
            "variance Σ W²·s²/n, degrees of freedom by Satterthwaite's formula."
        )
        if any(stratum.population is not None for stratum in strata):
            method += " Each term is multiplied by (1 − n/N), since the list is finite."
        return weighted_mean(strata, single_result=single_result, method=method)
