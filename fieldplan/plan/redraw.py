"""Draw a recorded plan again and set the places side by side."""

from dataclasses import dataclass
from math import hypot

from fieldplan.design import locate
from fieldplan.design.model import Location, Locations, StratumCount
from fieldplan.plan.model import Plan


@dataclass(frozen=True)
class Comparison:
    """What a second drawing gave.

    Parameters
    ----------
    places : int
        Places in the record, drawn by chance (targeted places are not drawn).
    same : int
        Places with the same id, class and position to the centimetre.
    largest_m : float
        Largest distance between a recorded place and its second drawing.
    differing : tuple of str
        Ids of the places that differ, are missing or are new.
    locations : Locations
        The second drawing.
    """

    places: int
    same: int
    largest_m: float
    differing: tuple[str, ...]
    locations: Locations

    @property
    def agrees(self) -> bool:
        """Whether every place was found again to the centimetre."""
        return not self.differing and self.same == self.places

    @property
    def sentence(self) -> str:
        """The outcome in one sentence."""
        if self.agrees:
            return f"All {self.places} places were drawn again, to the centimetre."
        shown = ", ".join(self.differing[:8]) + (" …" if len(self.differing) > 8 else "")
        return (
            f"{self.same} of {self.places} places were drawn again; {len(self.differing)} differ "
            f"({shown}), by {self.largest_m:.2f} m at most."
        )


def redraw(plan: Plan) -> Comparison:
    """Draw the plan's locations again from its record alone.

    Parameters
    ----------
    plan : Plan
        From ``read_plan``.

    Returns
    -------
    Comparison

    Raises
    ------
    DesignError
        The recorded design cannot be drawn.
    """
    counts = [StratumCount(s.stratum, s.planned, s.alternates) for s in plan.size.strata]
    second = locate(plan.campaign, plan.frame, counts)
    return _compare(plan.locations, second)


def _compare(first: Locations, second: Locations) -> Comparison:
    recorded = {p.location_id: p for p in first.places if p.location_class != "targeted"}
    drawn = {p.location_id: p for p in second.places if p.location_class != "targeted"}
    differing = sorted(set(recorded) ^ set(drawn))
    largest = 0.0
    same = 0
    for name in sorted(set(recorded) & set(drawn)):
        distance = _distance(recorded[name], drawn[name])
        largest = max(largest, distance)
        if distance < 0.005 and recorded[name].location_class == drawn[name].location_class:
            same += 1
        else:
            differing.append(name)
    return Comparison(len(recorded), same, largest, tuple(differing), second)


def _distance(one: Location, other: Location) -> float:
    return hypot(one.easting - other.easting, one.northing - other.northing)
