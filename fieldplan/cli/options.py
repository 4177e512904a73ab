"""Options that several commands share, and how they print."""

import json
import textwrap
from collections.abc import Callable, Mapping, Sequence
from dataclasses import asdict, is_dataclass
from datetime import date
from pathlib import Path
from typing import Any, TypeVar

import click

from fieldplan.base.working import Step

Function = TypeVar("Function", bound=Callable[..., Any])


def _file_meant(_context: click.Context, _argument: click.Parameter, path: Path | None) -> Any:
    """Take the campaign file of a folder where the folder is named."""
    if path is None or not path.is_dir():
        return path
    from fieldplan.campaign.folder import campaign_in

    return campaign_in(path)


def campaign_argument(*, required: bool = True) -> Callable[[Function], Function]:
    """Name the campaign file, or its folder."""
    return click.argument(
        "campaign_file",
        type=click.Path(path_type=Path),
        callback=_file_meant,
        required=required,
        metavar="CAMPAIGN" if required else "[CAMPAIGN]",
    )


packet_argument = click.argument(
    "packet", type=click.Path(path_type=Path, file_okay=False), metavar="PACKET"
)
json_option = click.option("--json", "as_json", is_flag=True, help="Print the numbers as JSON.")
explain_option = click.option("--explain", is_flag=True, help="Print the working, step by step.")
quiet_option = click.option("--quiet", is_flag=True, help="Print nothing but the answer.")
open_option = click.option("--open", "open_it", is_flag=True, help="Open the result when done.")


def say(text: str = "", *, quiet: bool = False) -> None:
    """Talk to the person on stderr, so that stdout carries data only."""
    if not quiet:
        click.echo(text, err=True)


def wrapped(text: str, *, indent: str = "") -> str:
    """Wrap a sentence at 79 columns."""
    return textwrap.fill(
        text,
        width=79,
        initial_indent=indent,
        subsequent_indent=indent,
        break_long_words=False,
        break_on_hyphens=False,
    )


def print_sentences(sentences: Sequence[str]) -> None:
    """Print sentences on stdout, each wrapped to the terminal's usual width."""
    for sentence in sentences:
        click.echo(wrapped(sentence))


def print_steps(steps: Sequence[Step]) -> None:
    """Print numbered working: meaning, formula, inputs, value before and after rounding."""
    for number, step in enumerate(steps, start=1):
        click.echo(wrapped(f"{number}. {step.meaning}"))
        click.echo(wrapped(step.formula, indent="   "))
        for quantity in step.inputs:
            unit = f" {quantity.unit}" if quantity.unit else ""
            meaning = wrapped(f"({quantity.meaning})", indent="       ")
            value = wrapped(f"{quantity.symbol} = {quantity.value:.6g}{unit}", indent="     ")
            click.echo(f"{value}\n{meaning}")
        unit = f" {step.unit}" if step.unit else ""
        line = f"{step.symbol} = {step.unrounded:.6g}"
        if step.rounded != step.unrounded:
            line += f", rounded {step.rounded:.6g}"
        click.echo(wrapped(line + unit, indent="   "))
        if step.source:
            click.echo(wrapped(f"Source: {step.source}", indent="   "))


def print_json(content: Mapping[str, Any]) -> None:
    """Print one JSON object on stdout; dataclasses become objects, dates ISO strings."""

    def plain(thing: object) -> object:
        if is_dataclass(thing) and not isinstance(thing, type):
            return asdict(thing)
        if isinstance(thing, date | Path):
            return str(thing)
        message = f"{thing!r} has no JSON form"
        raise TypeError(message)

    click.echo(json.dumps(content, default=plain, indent=2, ensure_ascii=False))
