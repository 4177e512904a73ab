"""The results map: values where they were taken, and nothing drawn between them."""

from fieldplan.design.model import Location
from fieldplan.estimate.model import Estimate
from fieldplan.frame.projection import to_site
from fieldplan.packet.drawing import INK
from fieldplan.packet.maps.classes import class_bounds, class_of, class_words
from fieldplan.packet.maps.content import (
    ARROW,
    Arrow,
    Entry,
    MapContent,
    Mark,
    Pen,
    label_of,
    unit_marks,
)
from fieldplan.packet.maps.printed import PrintedMap, print_content
from fieldplan.plan.model import Plan
from fieldplan.returns.model import LocationResult

_COLOURS = ("#fde737", "#b5a877", "#7c7b78", "#414d6b", "#00224e")
"""Five steps of a scale from light to dark that the colour-blind read (cividis, Nuñez 2018)."""

_SIZES_MM = (2.1, 2.6, 3.1, 3.6, 4.1)
_NOT_USED = Pen("X", "white", INK, 2.7, 0.7)
_LOST = Pen("s", "white", INK, 2.2, 0.9)
_MOVED = Pen(ARROW, INK, INK)


def results_map(plan: Plan, estimate: Estimate) -> PrintedMap:
    """Draw the results on the plan's ground, where they were taken.

    Parameters
    ----------
    plan : Plan
    estimate : Estimate
        Its returns are drawn: size and shade by value, non-detects hollow, results outside the
        mean crossed, moved locations with an arrow from planned to actual, lost ones marked.

    Returns
    -------
    PrintedMap
        On the campaign's paper.
    """
    return print_content(plan, results_content(plan, estimate))


def results_content(plan: Plan, estimate: Estimate) -> MapContent:
    """Put results on a map.

    Parameters
    ----------
    plan : Plan
    estimate : Estimate

    Returns
    -------
    MapContent
        Names are short names with the value as reported.
    """
    results = estimate.returns.results
    analyte = plan.campaign.analyte_called(estimate.analyte)
    level = analyte.action_level
    bounds = class_bounds([r.half for r in results if r.detected], level)
    places = {place.location_id: place for place in plan.locations.places}
    marks = list(unit_marks(plan))
    arrows = []
    for result in results:
        mark, arrow = _result_marks(plan, result, place=places[result.location_id], bounds=bounds)
        marks += mark
        arrows += arrow
    lost = {entry.location_id for entry in estimate.returns.lost}
    marks += [
        Mark(p.easting, p.northing, _LOST, f"{label_of(plan, p)} lost", 4)
        for p in places.values()
        if p.location_id in lost
    ]
    return MapContent(
        f"Results for {analyte.label}: {plan.campaign.plan.title}",
        tuple(marks),
        _legend(estimate, bounds, level=level),
        tuple(arrows),
        _lines(estimate, level),
        before_field=False,
    )


def _result_marks(
    plan: Plan, result: LocationResult, *, place: Location, bounds: tuple[float, ...]
) -> tuple[list[Mark], list[Arrow]]:
    """Mark one result where it was taken; cross it when it is not in the mean."""
    easting, northing = place.easting, place.northing
    arrows = []
    if result.actual_latitude is not None and result.actual_longitude is not None:
        actual = to_site(plan.frame.projection, result.actual_latitude, result.actual_longitude)
        arrows = [Arrow(easting, northing, float(actual[0]), float(actual[1]))]
        easting, northing = float(actual[0]), float(actual[1])
    value = ", ".join(dict.fromkeys(result.as_reported))
    pen = _value_pen(result, bounds)
    marks = [Mark(easting, northing, pen, f"{label_of(plan, place)} {value}", 1)]
    if not result.used:
        marks.append(Mark(easting, northing, _NOT_USED, "", 2))
    return marks, arrows if (result.moved_m or 0.0) > 0 else []


def _value_pen(result: LocationResult, bounds: tuple[float, ...]) -> Pen:
    """Choose shade and size by class; a non-detect is a small hollow ring."""
    if not result.detected:
        return Pen("o", "white", INK, _SIZES_MM[0], 1.0)
    return _class_pen(class_of(result.half, bounds), len(bounds) + 1)


def _class_pen(number: int, classes: int) -> Pen:
    """Spread the classes in use over the whole scale of shades."""
    at = round(number * (len(_COLOURS) - 1) / max(classes - 1, 1))
    return Pen("o", _COLOURS[at], INK, _SIZES_MM[at], 0.6)


def _legend(
    estimate: Estimate, bounds: tuple[float, ...], *, level: float | None
) -> tuple[Entry, ...]:
    """Explain classes and signs that the map uses."""
    returns = estimate.returns
    entries = [
        Entry(_class_pen(number, len(bounds) + 1), words, _brief(words, number, unit=estimate.unit))
        for number, words in enumerate(class_words(bounds, estimate.unit, action_level=level))
        if any(r.detected for r in returns.results)
    ]
    if any(not r.detected for r in returns.results):
        pen = Pen("o", "white", INK, _SIZES_MM[0], 1.0)
        entries.append(Entry(pen, "not detected, shown as reported", "not detected"))
    if any(not r.used for r in returns.results):
        entries.append(Entry(_NOT_USED, "crossed: not in the mean", "not in the mean"))
    if returns.lost:
        entries.append(Entry(_LOST, "hollow square: lost, no result", "lost"))
    if any(r.moved_m for r in returns.results):
        words = "from planned to actual place, if 3 mm or more"
        entries.append(Entry(_MOVED, words, "moved, planned to actual"))
    return tuple(entries)


def _brief(words: str, number: int, *, unit: str) -> str:
    """Shorten the words of a class; the first keeps the unit."""
    short = words.replace(" (action level)", "")
    return short if number == 0 else short.replace(f" {unit}", "")


def _lines(estimate: Estimate, level: float | None) -> tuple[str, ...]:
    """Say the answer, and why nothing is drawn between the places."""
    lines = list(estimate.sentences[:1])
    if level is not None and estimate.level_sentence:
        lines.append(estimate.level_sentence)
    lines.append(
        "Values stand where they were taken. No surface is drawn between them: these results "
        "speak for means, not for the ground in between."
    )
    return tuple(lines)
