"""Rules for the interval of the mean: its class, and the designs that there is evidence for."""

from collections.abc import Iterator
from typing import Any

from fieldplan.campaign.problems import Problem, shown
from fieldplan.campaign.screen import is_fill_in
from fieldplan.campaign.table import tables

WIDENED = "skew-widened"
CLASSES = ("cv-up-to-1", "cv-up-to-2")
SUITED = ("simple-random", "square-grid", "triangular-grid")
ALLOWED = ("bounds", "substitute-half")
"""What non-detects may stand as: values, of which the interval is set."""

LEAST, MOST = 0.90, 0.99
"""Confidence between which coverage has been simulated."""

WHY = "its coverage is simulated for independent results of one population and for nothing else"

Data = dict[str, Any]


def interval_problems(data: Data) -> Iterator[Problem]:
    """Give what is wrong with the interval that the rules fix for the mean.

    Parameters
    ----------
    data : dict
        The whole file, screened.
    """
    for rules in tables(data, "rules"):
        chosen = rules.get("mean_interval", "student-t")
        if chosen == WIDENED:
            yield from _class_and_confidence(rules)
            yield from _designs(data)
            yield from _sigmas(data)
            yield from _several(data)
        elif chosen == "student-t" and "promised_class" in rules:
            text = (
                f'belongs to mean_interval = "{WIDENED}"; Student\'s t promises nothing for a '
                f"class (got {shown(rules['promised_class'])}). Write that, or take this key out."
            )
            yield Problem(("rules", "promised_class"), text)


def _class_and_confidence(rules: Data) -> Iterator[Problem]:
    if "promised_class" not in rules:
        listed = " or ".join(f'"{name}"' for name in CLASSES)
        text = (
            f"missing; no interval keeps its confidence for every population, so {WIDENED} needs "
            f"the class that it is promised for. Write {listed}."
        )
        yield Problem(("rules", "promised_class"), text)
    method = rules.get("non_detects", "bounds")
    if isinstance(method, str) and method not in ALLOWED and not is_fill_in(method):
        text = (
            f"this method brings an interval of its own, and {WIDENED} is another (got "
            f'{shown(method)}). Write non_detects = "bounds", or mean_interval = "student-t".'
        )
        yield Problem(("rules", "non_detects"), text)
    confidence = rules.get("confidence", 0.95)
    if isinstance(confidence, int | float) and not LEAST <= confidence <= MOST:
        text = (
            f"{WIDENED} is simulated for {LEAST:g} to {MOST:g} (got {shown(confidence)}). Write "
            'one of these, or mean_interval = "student-t".'
        )
        yield Problem(("rules", "confidence"), text)


def _designs(data: Data) -> Iterator[Problem]:
    """Refuse designs that the simulations do not speak of, each with the reason."""
    for design in tables(data, "design"):
        layout = design.get("layout")
        if layout == "census":
            yield _unsuited(f"a census draws nothing (got layout {shown(layout)})")
        elif layout == "stratified" or any("strata" in frame for frame in tables(data, "frame")):
            yield _unsuited("this design has strata")
        elif isinstance(layout, str) and layout not in SUITED and not is_fill_in(layout):
            yield _unsuited(f"layout {shown(layout)} does not draw them so")
        if design.get("increments", 1) != 1:
            yield _unsuited("its classes are of single results, and this design takes composites")
        if "ranking_set_size" in design:
            yield _unsuited("this design ranks places")


def _unsuited(why: str) -> Problem:
    text = f'{why}, and {WHY} (got "{WIDENED}"). Write "student-t", or another design.'
    return Problem(("rules", "mean_interval"), text)


def _sigmas(data: Data) -> Iterator[Problem]:
    if any(sigma.get("correlation_between_visits") for sigma in tables(data, "sigma")):
        yield _unsuited("visits of this campaign resemble each other")


def _several(data: Data) -> Iterator[Problem]:
    """Refuse half-widths of several deciding objectives: n is found jointly by t there."""
    marked = [o for o in tables(data, "objective") if o.get("decides_n") is True]
    widths = [o for o in marked if "half_width" in o or "relative_half_width" in o]
    if len(marked) > 1 and widths:
        text = (
            "several objectives decide n together, and a half-width among them is then found by "
            f'Student\'s t (got "{WIDENED}"). Let one decide, or ask for standard errors.'
        )
        yield Problem(("rules", "mean_interval"), text)
