"""Rules for non-detects: the designs that a method has evidence for, and what goes together."""

from collections.abc import Iterator
from typing import Any

from fieldplan.campaign.interval_checks import WIDENED
from fieldplan.campaign.problems import Problem, shown
from fieldplan.campaign.screen import is_fill_in
from fieldplan.campaign.table import tables

BY_SHARE, HALF, BOUNDS = "by-share", "substitute-half", "bounds"
MODELLED = (
    "kaplan-meier",
    "order-statistics",
    "lognormal-likelihood",
    "gamma-likelihood",
    "normal-likelihood",
)
SUITED = ("simple-random", "stratified", "square-grid", "triangular-grid")
"""Layouts whose results a method for non-detects may take for independent ones of a stratum."""

WHY = "methods for non-detects are simulated for independent results of one place each"

Data = dict[str, Any]


def non_detect_problems(data: Data) -> Iterator[Problem]:
    """Give what is wrong with the rule for non-detects.

    Parameters
    ----------
    data : dict
        The whole file, screened.
    """
    for rules in tables(data, "rules"):
        chosen = rules.get("non_detects", BOUNDS)
        if "declared_shape" in rules and chosen != BY_SHARE and not is_fill_in(chosen):
            text = (
                f'is read by non_detects = "{BY_SHARE}" only; a likelihood names its shape itself '
                f"(got {shown(chosen)}). Write that rule, or take this key out."
            )
            yield Problem(("rules", "declared_shape"), text)
        if chosen in (*MODELLED, BY_SHARE):
            yield from _designs(data, chosen)
        if chosen in (*MODELLED, BY_SHARE) and rules.get("mean_interval") == WIDENED:
            text = (
                f"brings an interval of its own, and {WIDENED} another (got {shown(chosen)}). "
                f'Write mean_interval = "student-t", or non_detects = "{BOUNDS}".'
            )
            yield Problem(("rules", "non_detects"), text)


def _designs(data: Data, chosen: str) -> Iterator[Problem]:
    """Refuse designs that no simulation speaks of, each with the reason."""
    for design in tables(data, "design"):
        layout = design.get("layout")
        if layout == "census":
            yield _unsuited("a census draws nothing", chosen)
        elif isinstance(layout, str) and layout not in SUITED and not is_fill_in(layout):
            yield _unsuited(f"layout {shown(layout)} does not draw them so", chosen)
        if design.get("increments", 1) != 1:
            yield _unsuited("this design takes composites", chosen)
        if "ranking_set_size" in design:
            yield _unsuited("this design ranks places", chosen)
    if any(sigma.get("correlation_between_visits") for sigma in tables(data, "sigma")):
        yield _unsuited("visits of this campaign resemble each other", chosen)


def _unsuited(why: str, chosen: str) -> Problem:
    text = f'{why}, and {WHY} (got {shown(chosen)}). Write "{BOUNDS}", or another design.'
    return Problem(("rules", "non_detects"), text)
