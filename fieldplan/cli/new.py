"""``fieldplan new``: a campaign file from a conversation, or from options."""

import secrets
from datetime import date
from pathlib import Path
from typing import Any

import click

from fieldplan.base.errors import CampaignError, FieldplanError
from fieldplan.base.files import write_atomically
from fieldplan.campaign.answers import Answers
from fieldplan.campaign.new import campaign_text
from fieldplan.campaign.read import Inspection, inspect_text
from fieldplan.campaign.schema import SCHEMA_NAME, is_our_schema, schema_text
from fieldplan.cli.answers import OUTLINE_NAME, Start, is_none
from fieldplan.cli.new_options import answer_options, from_options
from fieldplan.cli.options import say, wrapped

SEED_BELOW = 10**9

_WAITING = (
    "Worth typing too, where it is known: field dates, method and contact, control samples, "
    "losses, costs, what is left out of the site. Their lines wait behind a # in the file."
)


@click.command("new")
@answer_options
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
    _refuse_foreign_schema(target.parent)
    chosen = secrets.randbelow(SEED_BELOW) if seed is None else seed
    known = Answers(seed=chosen, prepared_on=date.today())
    if any(value not in (None, ()) for value in given.values()):
        start = from_options(known, target.parent, given)
        say(wrapped(start.outline_words), quiet=not start.outline_words)
        _echo(start, target.parent)
    else:
        start = _conversation(known, target)
    text = campaign_text(start.answers)
    inspection = inspect_text(text, target)
    if inspection.problems:
        raise CampaignError(*inspection.problems, "Nothing was written.")
    _write(target, text, start.outline)
    _say_what_next(target, chosen, inspection)


def _conversation(known: Answers, target: Path) -> Start:
    """Talk; where the talk is cut short, offer to keep what was said."""
    from fieldplan.cli.conversation import Unfinished, converse

    try:
        return converse(known, target.parent)
    except Unfinished as stop:
        if stop.answered:
            _offer_to_keep(stop.start, target)
        raise click.Abort from stop


def _offer_to_keep(start: Start, target: Path) -> None:
    """Write what was answered under a name of its own, unless the person says no."""
    from fieldplan.cli.conversation import ask

    place = _free_name(target)
    try:
        reply = ask(f"Keep what was answered so far in {place}? Enter keeps it, 'no' does not.")
    except (click.Abort, KeyboardInterrupt, EOFError):
        return
    if is_none(reply):
        return
    text = campaign_text(start.answers)
    _write(place, text, start.outline)
    say(f"\n{place} is written.")
    _say_what_is_open(inspect_text(text, place))
    say(f"Go on in an editor. Next: fieldplan check {_quoted(place)}")


def _free_name(target: Path) -> Path:
    """Name the unfinished file so that nothing is replaced."""
    numbers = ("", *(f"-{k}" for k in range(2, 1000)))
    names = (target.with_name(f"{target.stem}-unfinished{k}.toml") for k in numbers)
    return next(name for name in names if not name.exists())


def _quoted(path: Path) -> str:
    return f'"{path}"' if " " in str(path) else str(path)


def _echo(start: Start, folder: Path) -> None:
    """Say what the target means."""
    from fieldplan.cli.target_echo import echo_target

    for sentence in echo_target(start.answers, folder, drawn=start.outline is None):
        say(wrapped(sentence))


def _refuse_to_replace(path: Path) -> None:
    """Stop when the file is there already."""
    if path.exists():
        message = f"{path} is there already and is never replaced. Name another file with --out."
        raise FieldplanError(message)


def _refuse_foreign_schema(folder: Path) -> None:
    """Stop when somebody else's file has the name of the schema."""
    schema = folder / SCHEMA_NAME
    if schema.exists() and not is_our_schema(schema):
        message = f"{schema} is there already and is no schema of fieldplan. Move it away."
        raise FieldplanError(message)


def _write(target: Path, text: str, outline: str | None) -> None:
    """Write the outline, the schema and the campaign file, the campaign last."""
    folder = target.parent
    files = {folder / SCHEMA_NAME: schema_text()}
    if outline is not None:
        _refuse_to_replace(folder / OUTLINE_NAME)
        files[folder / OUTLINE_NAME] = outline
    _refuse_foreign_schema(folder)
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
    click.echo(f"{path} is written. The seed of the draw is {seed}.")
    _say_what_is_open(inspection)
    say(wrapped(_WAITING))
    click.echo(f"Next: fieldplan check {_quoted(path)}")


def _say_what_is_open(inspection: Inspection) -> None:
    """List the keys that are still to fill in."""
    count = len(inspection.fill_in)
    if count:
        keys = ", ".join(entry.key for entry in inspection.fill_in)
        noun = "entry is" if count == 1 else "entries are"
        click.echo(wrapped(f"{count} {noun} still to fill in: {keys}."))
