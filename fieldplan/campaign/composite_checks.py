"""Rules for composites, ranked sets and the parts of sigma."""

from collections.abc import Iterator
from typing import Any

from fieldplan.campaign.problems import Problem, shown
from fieldplan.campaign.table import tables

OF_SINGLE_PLACES = ("all-clear", "share", "upper-share", "smallest-patch", "which-exceed")
"""Questions about single places, which a composite averages away."""

PLACES = "between-locations"
SMALLER = ("sampling", "analysis")

Data = dict[str, Any]


def composite_problems(data: Data) -> Iterator[Problem]:
    """Give what is wrong with composites, ranked sets and parts of sigma.

    Parameters
    ----------
    data : dict
        The whole file, screened.
    """
    for i, design in enumerate(tables(data, "design")):
        if design.get("increments", 1) == 1:
            yield from _idle(design, i)
        else:
            yield from _composites(data, design, i)
        yield from _ranking(design, i)
    for analyte in {str(entry.get("analyte")) for entry in tables(data, "sigma")}:
        yield from _parts(data, analyte)


def _idle(design: Data, i: int) -> Iterator[Problem]:
    """Refuse keys of composites where there are none."""
    for key in ("increments_at", "replicates"):
        if key in design and design[key] != "choose":
            text = (
                f"belongs to composites, and increments is 1 (got {shown(design[key])}). Write how "
                "many increments a composite has, or take this key out."
            )
            yield Problem(("design", i, key), text)


def _composites(data: Data, design: Data, i: int) -> Iterator[Problem]:
    increments = design["increments"]
    frames = tables(data, "frame")
    if frames and frames[0].get("kind") == "list":
        text = (
            f"composites are sized for areas; a member of a list gives one result (got "
            f"{shown(increments)}). Take this key out."
        )
        yield Problem(("design", i, "increments"), text)
    if "locations" in design:
        text = (
            f"with composites the number fixed by hand is that of replicates (got "
            f"{shown(design['locations'])}). Write replicates in its place."
        )
        yield Problem(("design", i, "locations"), text)
    for k, objective in enumerate(tables(data, "objective")):
        question = objective.get("question", "mean")
        if question in OF_SINGLE_PLACES:
            text = (
                f"{shown(question)} asks about single places, and a composite averages them. Take "
                "design.increments out, or ask for the mean."
            )
            yield Problem(("objective", k, "question"), text)
        yield from _beside(objective, k)
    if increments == "choose":
        yield from _choosing(data, design, i)


def _beside(objective: Data, k: int) -> Iterator[Problem]:
    """Refuse the table of a question about single places below an objective that asks another."""
    for question in OF_SINGLE_PLACES:
        table = question.replace("-", "_")
        if table in objective and question != objective.get("question", "mean"):
            text = (
                "asks about single places, and a composite averages them: one below the level "
                "proves nothing of its increments. Take this table or design.increments out."
            )
            yield Problem(("objective", k, table), text)


def _choosing(data: Data, design: Data, i: int) -> Iterator[Problem]:
    """Ask for what the choice depends on: the question of a mean, and prices or replicates."""
    questions = [o.get("question", "mean") for o in tables(data, "objective")]
    if questions and "mean" not in questions:
        text = (
            'the number is chosen for question = "mean" only (got "choose"). Write a number of '
            "increments."
        )
        yield Problem(("design", i, "increments"), text)
    if design.get("replicates", "choose") != "choose":
        return
    costs = tables(data, "cost")
    if not any(cost.get("per_increment") for cost in costs):
        text = (
            "increments are chosen by cost, and cost.per_increment is missing or 0 (got "
            '"choose"). Add it to [cost], or write a number of increments or of replicates.'
        )
        yield Problem(("design", i, "increments"), text)


def _ranking(design: Data, i: int) -> Iterator[Problem]:
    pair = ("ranking_set_size", "ranking_correlation")
    given = [key for key in pair if key in design]
    if len(given) == 1:
        other = pair[1 - pair.index(given[0])]
        text = f"{given[0]} needs {other} beside it, and it is missing. Give it, or leave both out."
        yield Problem(("design", i, other), text)


def _parts(data: Data, analyte: str) -> Iterator[Problem]:
    """Hold the parts of one analyte's sigma together."""
    entries = [
        (k, entry)
        for k, entry in enumerate(tables(data, "sigma"))
        if str(entry.get("analyte")) == analyte
    ]
    whole = {entry.get("stratum", "") for _, entry in entries if _part(entry) == "total"}
    places = {entry.get("stratum", "") for _, entry in entries if _part(entry) == PLACES}
    for k, entry in entries:
        part = _part(entry)
        if part == PLACES and entry.get("stratum", "") in whole:
            text = (
                f"sigma of {analyte} is given whole as well, so this part follows (got "
                f"{shown(part)}). Keep one of the two."
            )
            yield Problem(("sigma", k, "part"), text)
        if part in SMALLER and not whole and not places:
            text = (
                f"sigma of {analyte} has this part alone (got {shown(part)}). Add a [[sigma]] for "
                f"the whole, or with part = {shown(PLACES)}."
            )
            yield Problem(("sigma", k, "part"), text)
        for key in ("expected_mean", "skewness"):
            if part in SMALLER and key in entry:
                text = (
                    f"belongs to the whole sigma or to part = {shown(PLACES)} (got "
                    f"{shown(entry[key])}). Move it there."
                )
                yield Problem(("sigma", k, key), text)


def _part(entry: Data) -> str:
    return str(entry.get("part", "total"))
