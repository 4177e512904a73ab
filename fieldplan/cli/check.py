"""``fieldplan check``: what was understood, what is wrong, what is still to fill in."""

from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import click

from fieldplan.base.errors import FieldplanError
from fieldplan.campaign.model import Campaign, Objective, ReadCampaign
from fieldplan.campaign.read import OpenEntry
from fieldplan.cli.options import campaign_argument, json_option, print_json, say, wrapped


@dataclass
class Findings:
    """All that ``check`` has to say about one campaign file."""

    understood: list[str] = field(default_factory=list)
    alarms: list[str] = field(default_factory=list)
    problems: list[str] = field(default_factory=list)
    fill_in: list[OpenEntry] = field(default_factory=list)
    exit_code: int = 0

    def refuse(self, fault: FieldplanError) -> None:
        """Keep the lines of an error and the exit code that goes with it."""
        self.problems += fault.problems
        self.exit_code = max(self.exit_code, fault.exit_code)


@click.command("check")
@campaign_argument
@json_option
@click.pass_context
def command(ctx: click.Context, campaign_file: Path, as_json: bool) -> None:
    """Read a campaign file and say what is wrong or still to fill in.

    Says how the campaign, its site and its pilot were understood. Exit code 2: something is
    typed wrong. 1: it cannot be done as it stands. 0: neither; something may still be open.
    """
    found = look_at(campaign_file)
    if as_json:
        print_json(_as_json(campaign_file, found))
    else:
        _print(found)
    ctx.exit(found.exit_code)


def look_at(path: Path) -> Findings:
    """Read a campaign file and everything that it names, as far as it goes."""
    from fieldplan.campaign import alarms, inspect_campaign

    found = Findings()
    try:
        inspection = inspect_campaign(path)
    except FieldplanError as fault:
        found.refuse(fault)
        return found
    found.problems += inspection.problems
    found.fill_in += inspection.fill_in
    found.exit_code = 2 if inspection.problems else 0
    if inspection.campaign is not None:
        found.understood += _asked(inspection.campaign.campaign)
        found.alarms += alarms(inspection.campaign.campaign)
        try:
            found.understood += _site_and_pilot(inspection.campaign, found)
        except FieldplanError as fault:
            found.refuse(fault)
    return found


def _site_and_pilot(read: ReadCampaign, found: Findings) -> list[str]:
    """Read the files of a campaign; sentences said before an error are kept in ``found``."""
    from fieldplan.campaign import input_files
    from fieldplan.frame import read_frame
    from fieldplan.lab import read_spread

    input_files(read)
    frame = read_frame(read)
    found.understood += [*frame.population.sentences, *frame.notes]
    spread = read_spread(read, frame)
    return [*spread.sentences, *spread.notes]


def _asked(campaign: Campaign) -> list[str]:
    """Say what the campaign asks, in sentences."""
    objective, analyte = campaign.deciding_objective, campaign.deciding_analyte
    what = analyte.label
    chosen = f" ({objective.assurance_chosen_by})" if objective.assurance_chosen_by else ""
    if objective.assurance is None:
        sure = "The budget decides n; no precision is asked for that it could miss."
    elif objective.assurance == "plain":
        sure = f"The bare formula decides n{chosen}: it is enough in about half of campaigns."
    else:
        sure = f"n shall be enough with a chance of {objective.assurance * 100:g} %{chosen}."
    layout = campaign.design[0].layout
    return [
        f"{campaign.plan.title} ({campaign.plan.id}).",
        f"Asked: the mean of {what} with {_target(objective, campaign, analyte.unit)}; "
        f"locations {_LAYOUTS[layout]}, seed {campaign.draw.seed}.",
        sure,
        *_also_asked(campaign),
    ]


def _also_asked(campaign: Campaign) -> list[str]:
    """Say what else is asked or measured, and that it does not decide n."""
    deciding = campaign.deciding_objective
    others = [o for o in campaign.objective if o is not deciding]
    asked = {objective.analyte for objective in campaign.objective}
    lines = []
    for objective in others:
        analyte = campaign.analyte_called(objective.analyte or campaign.deciding_analyte.id)
        target = _target(objective, campaign, analyte.unit)
        lines.append(
            f"Also asked: the mean of {analyte.label} with {target}; it does not decide n."
        )
    for analyte in campaign.analyte:
        if analyte.id not in asked and analyte.id != campaign.deciding_analyte.id:
            lines.append(f"Measured too, without a target: {analyte.label}.")
    return lines


_LAYOUTS = {
    "simple-random": "drawn at random",
    "stratified": "drawn at random in each stratum",
    "square-grid": "on a square grid with a random start",
    "triangular-grid": "on a triangular grid with a random start",
    "census": "are all members of the list",
}


def _target(objective: Objective, campaign: Campaign, unit: str) -> str:
    """Say the target of an objective."""
    rules = campaign.rules
    interval = f"{rules.confidence * 100:g} %, {rules.interval}"
    if objective.standard_error is not None:
        return f"a standard error of at most {objective.standard_error:g} {unit}"
    if objective.half_width is not None:
        return f"a half-width of at most {objective.half_width:g} {unit} ({interval})"
    if objective.relative_half_width is not None:
        share = objective.relative_half_width * 100
        return f"a half-width of at most {share:g} % of the mean ({interval})"
    currency = campaign.cost.currency if campaign.cost else ""
    return f"what {objective.budget:g} {currency} can buy"


def _print(found: Findings) -> None:
    """Print what was understood on stdout, and what is wrong on stderr, before what is open."""
    for sentence in found.understood:
        click.echo(wrapped(sentence))
    for alarm in found.alarms:
        click.echo(wrapped(f"ALARM: {alarm}"))
    for problem in found.problems:
        say(problem)
    if found.fill_in:
        click.echo("Still to fill in:")
        for entry in found.fill_in:
            click.echo(wrapped(f"line {entry.line}: {entry.key}: {entry.meaning}", indent="  "))
    elif not found.problems:
        click.echo("Nothing is left to fill in. Next: fieldplan size, then fieldplan pack.")


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
    }
