"""Rules for strata: what shares are made of, bounds by stratum, several analytes that decide."""

from collections.abc import Iterator
from typing import Any

from fieldplan.campaign.problems import Problem, shown
from fieldplan.campaign.table import tables

Data = dict[str, Any]

BY_STRATUM = (
    ("design", "least"),
    ("design", "most"),
    ("cost", "per_location_by_stratum"),
    ("cost", "per_analysis_by_stratum"),
)
"""Tables of names of strata; the frame says later whether it has them."""


def strata_problems(data: Data) -> Iterator[Problem]:
    """Give what is wrong with shares, bounds and prices by stratum, and with several that decide.

    Parameters
    ----------
    data : dict
        The whole file, screened.
    """
    frames = tables(data, "frame")
    without = frames and frames[0].get("kind") == "area" and "strata" not in frames[0]
    for table, key in BY_STRATUM:
        members = tables(data, table)
        for i, member in enumerate(members):
            if member.get(key) and without:
                path = (table, i, key) if table == "design" else (table, key)
                text = "the frame has no strata. Give frame.strata its file, or take this out."
                yield Problem(path, text)
    for i, design in enumerate(tables(data, "design")):
        yield from _shares(data, design, i)
        yield from _crossed(design, i)
    yield from _several(data)


def _shares(data: Data, design: Data, i: int) -> Iterator[Problem]:
    allocation = design.get("allocation", "proportional")
    if allocation == "cost-optimal" and "cost" not in data:
        text = "weighs what results cost. Add [cost] with per_location and per_analysis."
        yield Problem(("design", i, "allocation"), text)
    if "equal_in" in design and allocation != "equal-precision":
        text = (
            f'belongs to allocation = "equal-precision" (got {shown(allocation)}). '
            "Take this key out, or change the allocation."
        )
        yield Problem(("design", i, "equal_in"), text)


def _crossed(design: Data, i: int) -> Iterator[Problem]:
    least, most = design.get("least"), design.get("most")
    if not isinstance(most, dict):
        return
    for name, cap in most.items():
        own = least.get(name, 0) if isinstance(least, dict) else 0
        floors = [n for n in (own, design.get("floor", 2)) if isinstance(n, int)]
        if isinstance(cap, int) and floors and cap < max(floors):
            text = (
                f"at most {cap} locations, below the fewest of {max(floors)} (got {shown(cap)}). "
                "Raise it, or lower floor or least."
            )
            yield Problem(("design", i, "most", name), text)


def _several(data: Data) -> Iterator[Problem]:
    """Let only precisions of means in one design decide n together."""
    objectives = tables(data, "objective")
    marked = [i for i, entry in enumerate(objectives) if entry.get("decides_n") is True]
    if len(marked) < 2:
        return
    first = objectives[marked[0]]
    for i in marked:
        entry = objectives[i]
        if entry.get("question", "mean") != "mean":
            text = (
                "several objectives decide n together only where each asks for a mean (got "
                f"{shown(entry.get('question'))}). Mark one, or take decides_n out here."
            )
            yield Problem(("objective", i, "decides_n"), text)
        elif "budget" in entry:
            text = "a budget decides n alone. Take decides_n out here, or out of the others."
            yield Problem(("objective", i, "decides_n"), text)
        elif entry.get("design") != first.get("design"):
            text = (
                f"decides n with an objective of the design {shown(first.get('design'))}, but "
                f"belongs to {shown(entry.get('design'))}. Mark one."
            )
            yield Problem(("objective", i, "decides_n"), text)
