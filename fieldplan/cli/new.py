"""``fieldplan new``: a campaign file from a conversation, or from options."""

import math
import secrets
from dataclasses import replace
from datetime import date
from pathlib import Path
from typing import Any

import click

from fieldplan.base.bounds import magnitude_fault
from fieldplan.base.errors import CampaignError, FieldplanError
from fieldplan.base.files import write_atomically
from fieldplan.campaign.new import Answers, campaign_text
from fieldplan.campaign.outline import read_position
from fieldplan.campaign.read import Inspection, inspect_text
from fieldplan.campaign.schema import SCHEMA_NAME, is_our_schema, schema_text
from fieldplan.cli.answers import (
    OUTLINE_NAME,
    Start,
    circle_start,
    corners_start,
    read_assurance,
    read_file,
)
from fieldplan.cli.options import say, wrapped

SEED_BELOW = 10**9

_positive = click.FloatRange(min=0, min_open=True)
_OPTIONS = (
    click.option("--id", "plan_id", help="Short id; opens the name of every packet."),
    click.option("--title", help="Title printed on every page."),
    click.option("--prepared-by", help="Who prepares the plan."),
    click.option("--boundary", metavar="FILE", help="Outline of the site."),
    click.option("--stations", metavar="FILE", help="CSV of all stations; the frame is a list."),
    click.option("--corners", metavar="TEXT", help="'LAT, LON; LAT, LON; ...' round the site."),
    click.option("--around", metavar="LAT,LON", help="Centre of a circle; needs --radius-m."),
    click.option(
        "--radius-m", type=_positive, metavar="NUMBER", help="Radius of the circle in metres."
    ),
    click.option("--analyte", help="What the laboratory measures."),
    click.option("--unit", help="The laboratory's unit."),
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
        "--relative-half-width", type=_positive, metavar="NUMBER", help="The same as a share: 0.20."
    ),
    click.option("--budget", type=_positive, metavar="NUMBER", help="Money that may be spent."),
    click.option("--pilot", metavar="FILE", help="Pilot results, CSV or XLSX."),
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
    click.option("--assurance", help="Chance that n is enough, such as 0.80, or plain."),
    click.option("--chosen-by", help="Who chose the assurance."),
)
_TARGETS = ("standard_error", "half_width", "relative_half_width", "budget")
_PLACES = ("boundary", "stations", "corners", "around")


def _all_options(function: Any) -> Any:
    for option in reversed(_OPTIONS):
        function = option(function)
    return function


@click.command("new")
@_all_options
@click.option(
    "--seed", type=click.IntRange(0, 2**63 - 1), metavar="NUMBER", help="Seed of the draw."
)
@click.option(
    "--out",
    type=click.Path(path_type=Path),
    default=Path("campaign.toml"),
    show_default=True,
    help="The .toml file to write, or its folder; an existing file is never replaced.",
)
def command(seed: int | None, out: Path, **given: Any) -> None:
    """Answer a few questions and get a campaign file.

    With any answer given as an option no question is asked. What is not known is marked FILL IN
    in the file, and 'fieldplan check' lists it.
    """
    target = out if out.suffix == ".toml" and not out.is_dir() else out / "campaign.toml"
    _refuse_to_replace(target)
    chosen = secrets.randbelow(SEED_BELOW) if seed is None else seed
    known = Answers(seed=chosen, prepared_on=date.today())
    if any(value is not None for value in given.values()):
        start = _from_options(known, target.parent, given)
        say(wrapped(start.outline_words), quiet=not start.outline_words)
        _echo(start.answers, target.parent)
    else:
        from fieldplan.cli.conversation import converse

        start = converse(known, target.parent)
    text = campaign_text(start.answers)
    inspection = inspect_text(text, target)
    if inspection.problems:
        raise CampaignError(*inspection.problems, "Nothing was written.")
    _write(target, text, start.outline)
    _say_what_next(target, chosen, inspection)


def _from_options(known: Answers, folder: Path, given: dict[str, Any]) -> Start:
    """Turn options into answers."""
    targets = _at_most_one(given, _TARGETS)
    places = _at_most_one(given, _PLACES)
    _at_most_one(given, ("pilot", "sigma"))
    if (given["around"] is None) != (given["radius_m"] is None):
        message = "--around and --radius-m belong together; give both."
        raise click.UsageError(message)
    _refuse_magnitudes(given)
    for option in ("sigma_source", "sigma_results", "expected_mean"):
        if given[option] is not None and given["sigma"] is None:
            message = f"{_dashed(option)} needs --sigma."
            raise click.UsageError(message)
    for option in ("assurance", "chosen_by"):
        if given[option] is not None and targets == "budget":
            message = f"{_dashed(option)} has nothing to hold to beside --budget; leave it out."
            raise click.UsageError(message)
    assurance, pilot = given["assurance"], given["pilot"]
    answers = replace(
        known,
        **{key: given[key] for key in _SAME_NAME},
        from_results=given["sigma_results"],
        target_kind=targets,
        target=given[targets] if targets else None,
        pilot=read_file(pilot, folder) if pilot is not None else None,
        assurance=read_assurance(assurance) if assurance is not None else None,
    )
    return _placed(answers, folder, places, given)


_SAME_NAME = (
    "plan_id",
    "title",
    "prepared_by",
    "analyte",
    "unit",
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
        return Start(replace(answers, list_file=read_file(given[place], folder)))
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


def _echo(answers: Answers, folder: Path) -> None:
    """Say what the target means."""
    from fieldplan.cli.target_echo import echo_target

    for sentence in echo_target(answers, folder):
        say(wrapped(sentence))


def _refuse_to_replace(path: Path) -> None:
    """Stop when the file is there already."""
    if path.exists():
        message = f"{path} is there already and is never replaced. Name another file with --out."
        raise FieldplanError(message)


def _write(target: Path, text: str, outline: str | None) -> None:
    """Write the outline, the schema and the campaign file, the campaign last."""
    folder = target.parent
    files = {folder / SCHEMA_NAME: schema_text()}
    if outline is not None:
        _refuse_to_replace(folder / OUTLINE_NAME)
        files[folder / OUTLINE_NAME] = outline
    schema = folder / SCHEMA_NAME
    if schema.exists() and not is_our_schema(schema):
        message = f"{schema} is there already and is no schema of fieldplan. Move it away."
        raise FieldplanError(message)
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as fault:
        message = f"{folder} cannot be made ({fault.strerror or fault}). Name another with --out."
        raise FieldplanError(message) from fault
    for path, content in files.items():
        write_atomically(path, content)
    write_atomically(target, text)


def _say_what_next(path: Path, seed: int, inspection: Inspection) -> None:
    """Name the file, the seed, what is open, and the next command."""
    shown = f'"{path}"' if " " in str(path) else str(path)
    click.echo(f"{path} is written. The seed of the draw is {seed}.")
    count = len(inspection.fill_in)
    if count:
        keys = ", ".join(entry.key for entry in inspection.fill_in)
        noun = "entry is" if count == 1 else "entries are"
        click.echo(wrapped(f"{count} {noun} still to fill in: {keys}."))
    click.echo(f"Next: fieldplan check {shown}")
