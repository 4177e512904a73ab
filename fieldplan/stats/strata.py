"""A population in strata, as the sharing of results sees it."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

from fieldplan.base.errors import DesignError
from fieldplan.stats.precision import MOST
from fieldplan.stats.stratified import predicted_variance


@dataclass(frozen=True)
class Strata:
    """What the sharing of results depends on; one entry a stratum in every tuple.

    Parameters
    ----------
    weights, sigmas : tuple of float
        Shares of the population (sum 1) and standard deviations, all above 0.
    populations : tuple of (int or None)
        N of a list; None for an area.
    floor : int
        Fewest results in any stratum; a list shorter than that is taken whole.
    least : tuple of int
        Fewest results by stratum, where more than the floor; empty for none.
    ceilings : tuple of (int or None)
        Most results by stratum, where fewer than the list; empty for none.
    costs : tuple of float
        Money for one result, above 0; empty where all cost alike.
    levelled : tuple of float
        What equal precision levels out: the spread of single results, absolute or as a share of
        the stratum's mean; empty for ``sigmas``.

    Raises
    ------
    DesignError
        A ceiling lies below its floor.
    """

    weights: tuple[float, ...]
    sigmas: tuple[float, ...]
    populations: tuple[int | None, ...]
    floor: int = 2
    least: tuple[int, ...] = ()
    ceilings: tuple[int | None, ...] = ()
    costs: tuple[float, ...] = ()
    levelled: tuple[float, ...] = ()

    def __post_init__(self) -> None:
        """Refuse bounds that cross."""
        for k, (low, high) in enumerate(zip(self.floors, self.caps, strict=True), start=1):
            if low > high:
                message = (
                    f"stratum {k} of {len(self.weights)} may have at most {high} results but must "
                    f"have at least {low}; raise the one or lower the other."
                )
                raise DesignError(message)

    @property
    def caps(self) -> tuple[int, ...]:
        """Most results a stratum can give."""
        ceilings = self.ceilings or (None,) * len(self.populations)
        return tuple(
            min(MOST if size is None else size, MOST if ceiling is None else ceiling)
            for size, ceiling in zip(self.populations, ceilings, strict=True)
        )

    @property
    def floors(self) -> tuple[int, ...]:
        """Fewest results a stratum must give."""
        least = self.least or (self.floor,) * len(self.populations)
        return tuple(
            max(self.floor, fewest) if size is None else min(max(self.floor, fewest), size)
            for size, fewest in zip(self.populations, least, strict=True)
        )

    @property
    def most(self) -> int:
        """All results that can be had."""
        return min(MOST, sum(self.caps))

    @property
    def unit_costs(self) -> tuple[float, ...]:
        """Money for one result of each stratum; 1 where all cost alike."""
        return self.costs or (1.0,) * len(self.weights)

    def variance(self, counts: Sequence[float]) -> float:
        """Variance of the mean from these counts."""
        return predicted_variance(self.weights, self.sigmas, counts, self.populations)

    def cost(self, counts: Sequence[float]) -> float:
        """Money for these counts."""
        return math.fsum(c * n for c, n in zip(self.unit_costs, counts, strict=True))
