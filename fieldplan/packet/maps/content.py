"""What a printed map shows: marks with their names, arrows, legend and lines of text."""

import math
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from fieldplan.design.model import Location, LocationClass
from fieldplan.design.names import plain_form
from fieldplan.packet.drawing import INK, LINE
from fieldplan.packet.exchange.plain_text import plain
from fieldplan.packet.maps.palette import MARKS
from fieldplan.packet.sheets.take import analysed_words, take_words
from fieldplan.plan.model import Plan

ARROW = "->"
"""The marker of a legend entry that explains arrows."""

LONGEST_OWN_ID = 12
"""Longest id of an owner that stands beside a mark."""


@dataclass(frozen=True)
class Pen:
    """How a mark is drawn; ``size_mm`` is its width."""

    marker: str
    face: str
    edge: str
    size_mm: float = 2.3
    edge_width: float = 0.8


@dataclass(frozen=True)
class Mark:
    """One place on the map: where, how it is drawn, the name beside it (empty for none)."""

    easting: float
    northing: float
    pen: Pen
    name: str = ""
    front: int = 0


@dataclass(frozen=True)
class Entry:
    """One line of the legend; ``brief`` serves where the legend is long."""

    pen: Pen
    words: str
    brief: str


@dataclass(frozen=True)
class Arrow:
    """From the planned place to where it was taken, in site metres."""

    from_easting: float
    from_northing: float
    to_easting: float
    to_northing: float

    @property
    def length(self) -> float:
        """Metres from tail to head."""
        return math.hypot(
            self.to_easting - self.from_easting, self.to_northing - self.from_northing
        )


@dataclass(frozen=True)
class MapContent:
    """Everything on a map that is not ground.

    Parameters
    ----------
    title : str
        Printed at the head.
    marks : tuple of Mark
    legend : tuple of Entry
    arrows : tuple of Arrow
    lines : tuple of str
        Sentences for the notes panel, most important first.
    before_field : bool
        Whether field work is still to come, so that what is open is said.
    """

    title: str
    marks: tuple[Mark, ...]
    legend: tuple[Entry, ...]
    arrows: tuple[Arrow, ...] = ()
    lines: tuple[str, ...] = ()
    before_field: bool = True

    @property
    def places(self) -> NDArray[np.float64]:
        """Easting and northing of all named marks, shape (n, 2)."""
        named = [(m.easting, m.northing) for m in self.marks if m.name]
        return np.array(named, dtype=float).reshape(-1, 2)

    def without_names(self) -> "MapContent":
        """Give the same marks, smaller and unnamed, for the key to several pages."""
        small = tuple(
            replace(m, name="", pen=replace(m.pen, size_mm=m.pen.size_mm * 0.6)) for m in self.marks
        )
        return replace(self, marks=small)


_SHAPES = {"circle": "o", "square": "s", "diamond": "D"}
CLASS_PENS: dict[LocationClass, Pen] = {
    name: Pen(
        _SHAPES[mark.shape],
        mark.fill,
        INK if mark.shape == "diamond" else mark.edge,  # seen in a grey copy
        2.3 if mark.shape != "diamond" else 2.0,
        1.1 if mark.fill == "#ffffff" else 0.5,
    )
    for name, mark in MARKS.items()
}
"""Disc, ring and diamond: shape and fill tell the class in grey too."""

CLASS_WORDS: dict[LocationClass, str] = {
    "random": "random location: enters the mean",
    "alternate": "alternate: only in place of a lost one",
    "targeted": "targeted place: never in the mean",
}

UNIT_PEN = Pen("o", LINE, LINE, 1.0, 0.0)


def plan_content(plan: Plan) -> MapContent:
    """Put a plan's locations, and the units of a list that were not drawn, on a map.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    MapContent
        Names are the short names that receivers show.
    """
    marks = list(unit_marks(plan))
    marks += [_mark(plan, place) for place in plan.locations.places]
    present = [name for name in CLASS_PENS if plan.locations.of_class(name)]
    legend = [
        Entry(
            CLASS_PENS[name],
            f"{CLASS_WORDS[name]} ({_count(plan, name)})",
            f"{name} ({_count(plan, name)})",
        )
        for name in present
    ]
    if plan.frame.kind == "list":
        legend.append(Entry(UNIT_PEN, "unit of the list, not drawn", "unit, not drawn"))
    take = f"Take at each location: {take_words(plan)}; for {analysed_words(plan)}."
    return MapContent(plan.campaign.plan.title, tuple(marks), tuple(legend), lines=(take,))


def unit_marks(plan: Plan) -> tuple[Mark, ...]:
    """Mark the units of a list that are no location of this plan."""
    drawn = {(place.easting, place.northing) for place in plan.locations.places}
    return tuple(
        Mark(unit.easting, unit.northing, UNIT_PEN)
        for stratum in plan.frame.strata
        for unit in stratum.units
        if (round(unit.easting, 2), round(unit.northing, 2)) not in drawn
    )


def label_of(plan: Plan, place: Location) -> str:
    """Give what a map calls a place: what stands on the well head, and what the receiver shows.

    Parameters
    ----------
    plan : Plan
    place : Location

    Returns
    -------
    str
        The owner's id alone where the short name is only its plain form (MW-20 is MW20 on the
        receiver); both where a name was made for a unit of a list, the short one where there is
        no room.
    """
    own = plain(place.location_id)
    of_the_owner = plan.frame.kind == "list" or place.location_class == "targeted"
    if not of_the_owner or len(own) > LONGEST_OWN_ID:
        return place.short_name
    if plain_form(own) == place.short_name:
        return own
    return f"{place.short_name} ({own})" if plan.frame.kind == "list" else place.short_name


def _mark(plan: Plan, place: Location) -> Mark:
    """Mark one location by its class; random ones lie on top."""
    front = {"alternate": 1, "targeted": 2, "random": 3}[place.location_class]
    pen = CLASS_PENS[place.location_class]
    return Mark(place.easting, place.northing, pen, label_of(plan, place), front)


def _count(plan: Plan, name: str) -> int:
    """Count the locations of a class."""
    return sum(place.location_class == name for place in plan.locations.places)
