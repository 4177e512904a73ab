"""Places spread over the site among the designs priced side by side, where a pilot predicts it."""

import math
from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from fieldplan.base.errors import DesignError
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.counting import planned_counts, total_cost
from fieldplan.sizing.frontier import POINTS, PricedDesign, Wanted, levels
from fieldplan.sizing.pilot_ground import PilotGround, cells_of, pilot_ground
from fieldplan.sizing.question import Part, Question
from fieldplan.sizing.words import counted
from fieldplan.stats.precision import meets, smallest
from fieldplan.stats.spatial import FEWEST_PLACES, Field, weigh_field
from fieldplan.stats.spread_layouts import layout_variance
from fieldplan.stats.summary import sample_skewness

LEANING = 1.0
"""Above this skewness of the pilot no prediction is trusted, as in the finding on space."""

MOST = 20_000
"""More places than any campaign visits."""


@lru_cache(maxsize=4)
def _field(places: bytes, values: bytes, extent: float) -> Field:
    return weigh_field(np.frombuffer(places).reshape(-1, 2), np.frombuffer(values), extent=extent)


def site_field(places: NDArray[np.float64], values: NDArray[np.float64], *, extent: float) -> Field:
    """Weigh the curves of likeness with distance once, however often they are asked for.

    Parameters
    ----------
    places : array of shape (n, 2)
    values : array of shape (n,)
    extent : float
        As in ``weigh_field``.

    Raises
    ------
    DesignError
        Too few places, or nothing varies.
    """
    return _field(
        np.ascontiguousarray(places, dtype=float).tobytes(),
        np.ascontiguousarray(values, dtype=float).tobytes(),
        extent,
    )


@dataclass(frozen=True)
class SpreadOut:
    """One random place in each of n compact parts of the site, as the pilot's positions predict."""

    question: Question
    field: Field
    area: float
    label: str = "places spread out"

    def priced(self, n: int) -> PricedDesign:
        """Price so many places."""
        question, error = self.question, math.sqrt(self._variance(n))
        planned = planned_counts(question, (n,))
        wanted = Wanted("half_width", 0.0, question.confidence, question.interval)
        prices = question.prices
        return PricedDesign(
            self.label,
            counted(n, "result"),
            results=n,
            locations=planned[0],
            standard_error=error,
            half_width=error * wanted.quantile(n - 1),
            cost=total_cost(question, planned) or 0.0,
            crew_days=prices.crew_days(planned[0] + question.targeted) if prices else 0,
        )

    def _variance(self, n: int) -> float:
        return layout_variance(self.field, n, layout="compact-strata", area=self.area)

    def cheapest(self, wanted: Wanted) -> PricedDesign | None:
        """Give the fewest places that reach a precision."""
        n = smallest(lambda k: meets(self._variance(k), wanted.variance(k - 1)), 2, MOST + 1)
        return None if n > MOST else self.priced(n)

    def most_precise(self, budget: float) -> PricedDesign | None:
        """Give the most places that a budget buys."""
        question = self.question

        def beyond(k: int) -> bool:
            return not meets(total_cost(question, planned_counts(question, (k,))) or 0.0, budget)

        n = smallest(beyond, 2, MOST + 1, back=0) - 1
        return None if n < 2 else self.priced(n)

    def row(self, wanted: Wanted, points: int = POINTS) -> list[PricedDesign]:
        """Trace numbers of places on either side of a precision."""
        ends = [self.cheapest(levels(wanted, points=points)[k]) for k in (0, -1)]
        low, high = (design.results if design else None for design in ends)
        if low is None or high is None:
            return []
        ratio = (high / low) ** (1 / (points - 1))
        return [self.priced(n) for n in sorted({round(low * ratio**k) for k in range(points)})]


def spread_out(asked: Asked, question: Question) -> SpreadOut | None:
    """Give places spread over the site as a kind of design.

    Parameters
    ----------
    asked : Asked
    question : Question
        About single samples.

    Returns
    -------
    SpreadOut or None
        None for a list or a part that is no ground, and where the pilot predicts nothing: fewer
        than 20 results with a position, one without, or skewness above 1.
    """
    frame = asked.frame
    if frame is None or frame.kind != "area":
        return None
    ground = pilot_ground(asked.entries, frame)
    if ground is None or not _predicts(ground):
        return None
    import shapely

    site = shapely.union_all([s.geometry for s in frame.strata if s.geometry is not None])
    cells = cells_of(site)
    try:
        field = site_field(ground.places, ground.values, extent=cells.extent)
    except DesignError:
        return None
    sigma = float(ground.values.std(ddof=1))
    loss = math.fsum(part.weight * part.loss for part in question.parts)
    extra = math.fsum(part.weight * part.extra_cost for part in question.parts)
    whole = Part("the whole", 1.0, sigma, None, None, loss, extra_cost=extra)
    return SpreadOut(replace(question, parts=(whole,)), field, cells.area)


def _predicts(ground: PilotGround) -> bool:
    if len(ground.values) < FEWEST_PLACES:
        return False
    return sample_skewness(ground.values.tolist()) <= LEANING
