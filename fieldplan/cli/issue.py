"""``fieldplan issue``: from DRAFT to ISSUED."""

from datetime import datetime
from pathlib import Path

import click

from fieldplan.cli.options import (
    json_option,
    packet_argument,
    print_json,
    quiet_option,
    say,
    wrapped,
)
from fieldplan.cli.pack import date_option, day


@click.command("issue")
@packet_argument
@click.option("--by", required=True, help="Name of the person who issues it.")
@date_option
@json_option
@quiet_option
def command(packet: Path, by: str, on: datetime | None, as_json: bool, quiet: bool) -> None:
    """Mark a packet as issued; it never changes again.

    Every page is set again with the name and the date in place of DRAFT. Locations, samples and
    rules stay as they are. A later change needs a new revision.
    """
    from fieldplan.packet.evidence import packet_fingerprint
    from fieldplan.packet.issuing import issue_packet, issued_revisions

    def progress(stage: str) -> None:
        say(f"  {stage} …", quiet=quiet or as_json)

    final, plan = issue_packet(packet, by=by, on=day(on), progress=progress)
    held = [c.topic for c in plan.open_items if c.holds_work]
    fingerprint = packet_fingerprint(final)
    earlier = [
        old.revision_name
        for old in issued_revisions(final.parent, plan)
        if old.revision < plan.revision
    ]
    if as_json:
        print_json(
            {
                "packet": final.as_posix(),
                "status": plan.status,
                "fingerprint": fingerprint,
                "replaces": earlier,
                "holds_open": held,
            }
        )
        return
    click.echo(f"{final.name}: {plan.status}.")
    click.echo(
        wrapped(
            f"Fingerprint of the packet: {fingerprint}. Send it to somebody outside: it shows "
            "later that nothing was changed."
        )
    )
    if earlier:
        click.echo(
            wrapped(f"It replaces {', '.join(earlier)}, issued before: take that from the crew.")
        )
    if held:
        click.echo(f"Still OPEN, and holding the work: {', '.join(held)}.")
