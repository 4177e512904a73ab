"""The options of ``fieldplan new``: the same answers as in the conversation, for scripts."""

import math
from dataclasses import replace
from pathlib import Path
from typing import Any

import click

from fieldplan.base.bounds import magnitude_fault
from fieldplan.campaign.answers import Answers
from fieldplan.campaign.outline import read_position
from fieldplan.cli.answers import (
    Start,
    circle_start,
    corners_start,
    read_assurance,
    read_column,
    read_depth,
    read_file,
    read_target,
)
from fieldplan.cli.named_files import look_at_site

_TARGETS = ("standard_error", "half_width", "relative_half_width", "budget")
_PLACES = ("boundary", "stations", "corners", "around")
_positive = click.FloatRange(min=0, min_open=True)
OPTIONS = (
    click.option("--id", "plan_id", help="Short id; opens the name of every packet."),
    click.option("--title", help="Title printed on every page."),
    click.option("--site", help="What the site is called."),
    click.option("--prepared-by", help="Who prepares the plan."),
    click.option("--decision", help="The decision that waits for the result, in a sentence."),
    click.option("--decides", help="Who decides."),
    click.option("--boundary", metavar="FILE", help="Outline of the site."),
    click.option("--stations", metavar="FILE", help="CSV of all stations; the frame is a list."),
    click.option("--corners", metavar="TEXT", help="'LAT, LON; LAT, LON; ...' round the site."),
    click.option("--around", metavar="LAT,LON", help="Centre of a circle; needs --radius-m."),
    click.option(
        "--radius-m", type=_positive, metavar="NUMBER", help="Radius of the circle in metres."
    ),
    click.option("--strata", metavar="FILE", help="An outline for each part that differs."),
    click.option("--depth", metavar="TEXT", help="What is sampled: '0 to 15 cm'."),
    click.option("--analyte", help="What the laboratory measures."),
    click.option("--unit", help="The laboratory's unit."),
    click.option(
        "--action-level",
        type=_positive,
        metavar="NUMBER",
        help="The level that the mean is compared with.",
    ),
    click.option("--action-level-source", help="Document and date of that level."),
    click.option(
        "--standard-error",
        type=_positive,
        metavar="NUMBER",
        help="Largest standard error of the mean.",
    ),
    click.option(
        "--half-width", type=_positive, metavar="NUMBER", help="Largest half-width of the interval."
    ),
    click.option(
        "--relative-half-width", metavar="SHARE", help="The same as a share: 0.20 or 20 %."
    ),
    click.option("--budget", type=_positive, metavar="NUMBER", help="Money that may be spent."),
    click.option("--pilot", metavar="FILE", help="Pilot results, CSV or XLSX."),
    click.option(
        "--column",
        multiple=True,
        metavar="OURS=THEIRS",
        help="What a column of the pilot is called there; may be repeated.",
    ),
    click.option(
        "--sigma", type=_positive, metavar="NUMBER", help="Standard deviation of single results."
    ),
    click.option("--sigma-source", help="Where sigma comes from; ASSUMED for a guess."),
    click.option(
        "--sigma-results", type=click.IntRange(min=2), metavar="COUNT", help="Results behind sigma."
    ),
    click.option(
        "--expected-mean", type=_positive, metavar="NUMBER", help="The mean that is expected."
    ),
    click.option("--assurance", help="Chance that n is enough, such as 80 %, or plain."),
    click.option("--chosen-by", help="Who chose the assurance."),
)
"""In the order of the conversation."""


def answer_options(function: Any) -> Any:
    """Give a command all options that answer a question."""
    for option in reversed(OPTIONS):
        function = option(function)
    return function


def from_options(known: Answers, folder: Path, given: dict[str, Any]) -> Start:
    """Turn options into answers.

    Parameters
    ----------
    known : Answers
        The seed and the date.
    folder : Path
        Of the campaign file.
    given : dict
        Options by the name of their parameter; None where one was not given.

    Raises
    ------
    UsageError
        Two options exclude each other, or one lacks another.
    CampaignError
        A value that cannot be read, or a file that is not there.
    """
    targets = _at_most_one(given, _TARGETS)
    places = _at_most_one(given, _PLACES)
    _at_most_one(given, ("pilot", "sigma"))
    if (given["around"] is None) != (given["radius_m"] is None):
        message = "--around and --radius-m belong together; give both."
        raise click.UsageError(message)
    _refuse_magnitudes(given)
    _refuse_loose_ends(given, targets)
    readers = {"assurance": read_assurance, "depth": read_depth}
    read: dict[str, Any] = {
        key: reader(given[key]) for key, reader in readers.items() if given[key] is not None
    }
    files: dict[str, Any] = {
        key: read_file(given[key], folder) for key in ("pilot", "strata") if given[key]
    }
    answers = replace(
        known,
        **{key: given[key] for key in _SAME_NAME},
        **files,
        from_results=given["sigma_results"],
        target_kind=targets,
        target=_target(given, targets),
        assurance=read.get("assurance"),
        depth_m=read.get("depth"),
        pilot_columns=dict(read_column(text) for text in given["column"]),
    )
    return _placed(answers, folder, places, given)


def _target(given: dict[str, Any], kind: str | None) -> float | None:
    """Give the amount of the target; a share may be typed in per cent."""
    if kind == "relative_half_width":
        return read_target(given[kind])[1]
    return given[kind] if kind else None


_NEEDS = {
    "sigma_source": ("sigma",),
    "sigma_results": ("sigma",),
    "expected_mean": ("sigma",),
    "action_level_source": ("action_level",),
    "column": ("pilot",),
    "strata": ("boundary", "corners", "around"),
    "depth": ("boundary", "corners", "around"),
}


def _refuse_loose_ends(given: dict[str, Any], targets: str | None) -> None:
    """Refuse an option that would do nothing without another, or beside it."""
    for option, needed in _NEEDS.items():
        if given[option] and all(given[other] is None for other in needed):
            message = f"{_dashed(option)} needs {' or '.join(map(_dashed, needed))}."
            raise click.UsageError(message)
    for option in ("assurance", "chosen_by"):
        if given[option] is not None and targets == "budget":
            message = f"{_dashed(option)} has nothing to hold to beside --budget; leave it out."
            raise click.UsageError(message)


_SAME_NAME = (
    "plan_id",
    "title",
    "site",
    "prepared_by",
    "decision",
    "decides",
    "analyte",
    "unit",
    "action_level",
    "action_level_source",
    "sigma",
    "sigma_source",
    "expected_mean",
    "chosen_by",
)


def _placed(answers: Answers, folder: Path, place: Any, given: dict[str, Any]) -> Start:
    """Add where the campaign takes place."""
    if place == "boundary":
        return Start(replace(answers, boundary=read_file(given[place], folder)))
    if place == "stations":
        answers = replace(answers, list_file=read_file(given[place], folder))
        _, strata = look_at_site(answers, folder, drawn=True)
        return Start(replace(answers, list_in_strata=len(strata) > 1))
    if place == "corners":
        return corners_start(answers, given[place])
    if place == "around":
        return circle_start(answers, read_position(given[place]), given["radius_m"])
    return Start(answers)


def _at_most_one(given: dict[str, Any], names: tuple[str, ...]) -> Any:
    """Return the one option that was given, or None; refuse two."""
    used = [name for name in names if given[name] is not None]
    if len(used) > 1:
        message = f"{' and '.join(map(_dashed, used))} exclude each other; give one."
        raise click.UsageError(message)
    return used[0] if used else None


def _refuse_magnitudes(given: dict[str, Any]) -> None:
    """Refuse numbers with which the echo of the target could not be reckoned."""
    for name, value in given.items():
        finite = isinstance(value, float) and math.isfinite(value)
        fault = magnitude_fault(value) if finite else ""
        if fault:
            message = f"{_dashed(name)} {value:g} is {fault}; check it and its unit."
            raise click.UsageError(message)


def _dashed(name: str) -> str:
    return "--" + name.replace("_", "-")
