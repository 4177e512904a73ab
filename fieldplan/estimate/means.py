"""The mean under one set of rules, with non-detects at 0, at half and at their limit."""

from dataclasses import dataclass, replace
from typing import Literal

import numpy as np

from fieldplan.campaign.model import Rules
from fieldplan.design import layout_of
from fieldplan.design.model import MeanEstimate, PlannedCell, StratumValues
from fieldplan.estimate.model import Bracket, Interval
from fieldplan.estimate.modelled import Modelled, modelled, reported_mean, rule_in_force
from fieldplan.estimate.widened import is_widened, refuse_unsuited, widened_ends
from fieldplan.plan.model import Plan
from fieldplan.returns.model import Returns
from fieldplan.stats.intervals import IntervalKind, t_interval

Bound = Literal["low", "half", "high"]


@dataclass(frozen=True)
class Means:
    """Three means by the recorded layout, and the intervals that the rules ask for.

    Parameters
    ----------
    low, half, high : MeanEstimate
        With non-detects at 0, at half and at their limit; all the same without non-detects.
    values : tuple of StratumValues
        What went into ``half``.
    rules : Rules
    censored : int
        Number of location values in the mean with a non-detect behind them.
    analyte : str
        Its id.
    values_low, values_high : tuple of StratumValues
        What went into ``low`` and ``high``.
    modelled : Modelled or None
        The answer by a method for non-detects; None where they stand as bounds.
    reason : str
        Why ``by-share`` left them as bounds; else empty.
    """

    low: MeanEstimate
    half: MeanEstimate
    high: MeanEstimate
    values: tuple[StratumValues, ...]
    rules: Rules
    censored: int
    analyte: str
    values_low: tuple[StratumValues, ...] = ()
    values_high: tuple[StratumValues, ...] = ()
    modelled: Modelled | None = None
    reason: str = ""

    @property
    def reported(self) -> MeanEstimate:
        """The mean that is the answer: by the method in force, else that at half."""
        return reported_mean(self.half, self.modelled)

    @property
    def upper_bound(self) -> bool:
        """Whether the mean that is reported is the largest that non-detects leave open."""
        return self.modelled is not None and self.modelled.whole.upper_bound

    @property
    def as_bounds(self) -> bool:
        """Whether the answer at 0, half and the limit stand for each other."""
        return self.modelled is None and self.rules.non_detects != "substitute-half"

    def reported_interval(self, kind: IntervalKind) -> Interval:
        """Set an interval of this kind about the mean that is reported."""
        if self.modelled is None:
            return self.interval_about(self.half, kind)
        found = self.modelled.of_kind(kind, self.rules.confidence)
        return Interval(kind, self.rules.confidence, found.low, found.high)

    def values_behind(self, mean: MeanEstimate) -> tuple[StratumValues, ...]:
        """Give what went into one of the means."""
        others = {id(self.low): self.values_low, id(self.high): self.values_high}
        return others.get(id(mean), ()) or self.values

    def interval_about(self, mean: MeanEstimate, kind: IntervalKind) -> Interval:
        """Set an interval of this kind about one of the means."""
        if is_widened(self.rules):
            low, high = widened_ends(mean, self.values_behind(mean)[0], self.rules, kind)
        else:
            low, high = t_interval(
                mean.mean,
                mean.standard_error,
                mean.degrees_of_freedom,
                confidence=self.rules.confidence,
                kind=kind,
            )
        return Interval(kind, self.rules.confidence, low, high)

    @property
    def interval(self) -> Interval:
        """The interval of the kind that the rules declare."""
        return self.reported_interval(self.rules.interval)

    @property
    def other_interval(self) -> Interval:
        """A limit where an interval was declared, an interval where a limit was."""
        two_sided = self.rules.interval == "two-sided"
        return self.reported_interval("upper-limit" if two_sided else "two-sided")

    @property
    def bracket(self) -> Bracket | None:
        """The answer at 0, half and the limit; None when everything was detected."""
        if not self.censored:
            return None
        kind = self.rules.interval
        return Bracket(
            mean_low=self.low.mean,
            mean_half=self.half.mean,
            mean_high=self.high.mean,
            interval_low=self.interval_about(self.low, kind),
            interval_half=self.interval_about(self.half, kind),
            interval_high=self.interval_about(self.high, kind),
        )


def means_by(plan: Plan, returns: Returns, rules: Rules) -> Means:
    """Estimate the mean by the plan's layout at the three bounds.

    Parameters
    ----------
    plan : Plan
    returns : Returns
    rules : Rules
        The recorded ones, or those changed after results.

    Returns
    -------
    Means

    Raises
    ------
    DesignError
        A stratum has too few results for the rule, or the interval or the method for non-detects
        that the rules fix is not made for the design.
    """
    refuse_unsuited(plan, rules)
    layout = layout_of(plan.campaign.design[0])

    def mean_at(bound: Bound) -> MeanEstimate:
        values = stratum_values(plan, returns, bound)
        return layout.estimate(values, single_result=rules.single_result)

    return Means(
        low=mean_at("low"),
        half=mean_at("half"),
        high=mean_at("high"),
        values=stratum_values(plan, returns, "half"),
        values_low=stratum_values(plan, returns, "low"),
        values_high=stratum_values(plan, returns, "high"),
        rules=rules,
        censored=sum(result.used and not result.detected for result in returns.results),
        analyte=returns.analyte,
        modelled=modelled(plan, returns, rules),
        reason=rule_in_force(rules, returns).reason,
    )


def stratum_values(plan: Plan, returns: Returns, bound: Bound) -> tuple[StratumValues, ...]:
    """Give the used results of every stratum, one a location, at one bound.

    Parameters
    ----------
    plan : Plan
    returns : Returns
    bound : str
        ``low``, ``half`` or ``high``.

    Returns
    -------
    tuple of StratumValues
        In the frame's order, empty ones included.
    """
    places = {place.location_id: place for place in plan.locations.places}
    found = []
    for stratum in plan.frame.strata:
        used = [r for r in returns.results if r.used and r.stratum == stratum.name]
        here = [places[r.location_id] for r in used if r.location_id in places]
        spots = np.array([(place.easting, place.northing) for place in here]).reshape(-1, 2)
        own = StratumValues(
            stratum=stratum.name,
            weight=stratum.weight,
            values=np.array([getattr(r, bound) for r in used], dtype=np.float64),
            population=stratum.count,
            coordinates=spots if len(here) == len(used) else None,
            measure=stratum.measure,
        )
        cut = planned_cells(plan, stratum.name)
        if cut:
            cells = np.array([place.cell for place in here], dtype=np.int64)
            own = replace(own, cells=cells, cut=cut)
        if any(place.start for place in plan.locations.places):
            starts = [places[result.location_id].start for result in used]
            own = replace(own, starts=np.array(starts, dtype=np.int64))
        found.append(own)
    return tuple(found)


def planned_cells(plan: Plan, stratum: str) -> tuple[PlannedCell, ...]:
    """Give the cells that a stratum was cut into, by their numbers.

    Parameters
    ----------
    plan : Plan
    stratum : str

    Returns
    -------
    tuple of PlannedCell
        Empty where the layout cut none.
    """
    cells = {
        place.cell: PlannedCell(place.cell, place.cell_share, *place.cell_centre)
        for place in plan.locations.of_class("random")
        if place.stratum == stratum and place.cell_centre is not None
    }
    return tuple(cells[number] for number in sorted(cells))
