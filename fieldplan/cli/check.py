"""``fieldplan check``: what was understood, what is wrong, what is still to fill in."""

import sys
from pathlib import Path
from typing import Any

import click

from fieldplan.cli.findings import Findings, look_at
from fieldplan.cli.options import json_option, print_json, say, wrapped


@click.command("check")
@click.argument("campaign_file", type=click.Path(path_type=Path), metavar="CAMPAIGN")
@json_option
@click.pass_context
def command(ctx: click.Context, campaign_file: Path, as_json: bool) -> None:
    """Read a campaign file and say what is wrong or still to fill in.

    Says how the campaign, its site and its pilot were understood, tries everything that a packet
    decides, and ends with the number of locations. CAMPAIGN may be the folder of the file. Exit
    code 2: something is typed wrong. 1: it cannot be done as it stands. 0: neither; something may
    still be open.
    """
    from fieldplan.campaign.folder import campaign_in

    path = campaign_in(campaign_file)
    found = look_at(path)
    if as_json:
        print_json(_as_json(path, found))
    else:
        _print(path, found)
    ctx.exit(found.exit_code)


def _print(path: Path, found: Findings) -> None:
    """Print what was understood, what is wrong on stderr, what is open, and last the answer."""
    for sentence in found.understood:
        click.echo(wrapped(sentence))
    for alarm in found.alarms:
        click.echo(wrapped(f"ALARM: {alarm}"))
    for problem in found.problems:
        say(wrapped(problem) if sys.stderr.isatty() else problem)
    if found.fill_in:
        click.echo("Still to fill in:")
        for entry in found.fill_in:
            click.echo(wrapped(f"line {entry.line}: {entry.key}: {entry.meaning}", indent="  "))
    elif not found.problems:
        shown = f'"{path}"' if " " in str(path) else str(path)
        click.echo(f"\n{wrapped(found.answer)}")
        click.echo(f"Nothing is left to fill in. Next: fieldplan pack {shown}")


def _as_json(path: Path, found: Findings) -> dict[str, Any]:
    """Set the findings as one JSON object."""
    return {
        "campaign": path.as_posix(),
        "understood": found.understood,
        "alarms": found.alarms,
        "problems": found.problems,
        "fill_in": [
            {"line": entry.line, "key": entry.key, "meaning": entry.meaning}
            for entry in found.fill_in
        ],
        "answer": found.answer,
    }
