"""``fieldplan pack``: the packet for crew and office."""

from datetime import date, datetime
from pathlib import Path
from typing import TYPE_CHECKING

import click

from fieldplan.cli.options import (
    campaign_argument,
    json_option,
    open_option,
    print_json,
    quiet_option,
    say,
    wrapped,
)

if TYPE_CHECKING:
    from fieldplan.plan.model import Plan

date_option = click.option(
    "--date",
    "on",
    type=click.DateTime(formats=["%Y-%m-%d"]),
    help="Date printed on the pages; today unless given.",
)


def day(on: datetime | None) -> date:
    """Turn the option into a date; the clock is read here and nowhere deeper."""
    return on.date() if on is not None else date.today()


@click.command("pack")
@campaign_argument()
@click.option(
    "--out",
    type=click.Path(path_type=Path, file_okay=False),
    help="Folder that receives the packet; beside the campaign file unless given.",
)
@date_option
@json_option
@quiet_option
@open_option
def command(
    campaign_file: Path,
    out: Path | None,
    on: datetime | None,
    as_json: bool,
    quiet: bool,
    open_it: bool,
) -> None:
    """Write the packet for crew and office.

    The packet is a new numbered folder, such as HL-r01. An earlier one is never replaced. It
    says DRAFT on every page until you issue it.
    """
    from fieldplan.campaign import read_campaign
    from fieldplan.campaign.inputs import input_files
    from fieldplan.packet.writer import next_revision, read_inputs, write_packet
    from fieldplan.plan.make import make_plan

    def progress(stage: str) -> None:
        say(f"  {stage} …", quiet=quiet or as_json)

    read = read_campaign(campaign_file)
    parent = out if out is not None else read.folder
    table = read.campaign.plan
    revision = next_revision(parent, read.folder, plan_id=table.id, wanted=table.revision)
    inputs = read_inputs(input_files(read))
    plan = make_plan(read, made_on=day(on), revision=revision, progress=progress)
    packet = write_packet(plan, parent, inputs, progress=progress)
    start = packet / "START_HERE.html"
    held = [c.topic for c in plan.open_items if c.holds_work]
    if as_json:
        print_json(
            {
                "packet": packet.as_posix(),
                "start": start.as_posix(),
                "revision": plan.revision_name,
                "status": plan.status,
                "needed": plan.size.needed,
                "locations": len(plan.locations.of_class("random")),
                "alternates": len(plan.locations.of_class("alternate")),
                "targeted": len(plan.locations.of_class("targeted")),
                "samples": len(plan.samples.samples),
                "holds_open": held,
                "open": [c.topic for c in plan.open_items],
            }
        )
    else:
        _say_what_matters(plan_sentences(plan), start, held)
    if open_it:
        click.launch(str(start))


def plan_sentences(plan: "Plan") -> list[str]:
    """Say how many places and samples a plan has, in the words of its sheet."""
    from fieldplan.packet.sheets.amounts import counted, listed
    from fieldplan.packet.sheets.plan_words import sample_sentence

    of_class = plan.locations.of_class
    places = [
        f"{counted(len(of_class('random')), 'location')} to visit for {plan.size.needed} results"
    ]
    if targeted := len(of_class("targeted")):
        places.append(counted(targeted, "targeted place"))
    if alternates := len(of_class("alternate")):
        places.append(counted(alternates, "alternate"))
    return [
        f"{plan.revision_name} ({plan.status}): {listed(places)}. {sample_sentence(plan)}",
        *plan.size.sentences[:1],
    ]


def _say_what_matters(sentences: list[str], start: Path, held: list[str]) -> None:
    for sentence in sentences:
        click.echo(wrapped(sentence))
    click.echo(f"Open first: {start}")
    if held:
        click.echo(wrapped(f"Work is held until these are cleared: {'; '.join(held)}."))
