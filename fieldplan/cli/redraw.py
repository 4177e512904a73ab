"""``fieldplan redraw``: draw an old packet again and compare."""

from pathlib import Path

import click

from fieldplan.cli.options import json_option, packet_argument, print_json, wrapped


@click.command("redraw")
@packet_argument
@click.option(
    "--out",
    type=click.Path(path_type=Path, file_okay=False),
    help="Folder for the one-page attachment; beside the packet unless given.",
)
@json_option
@click.pass_context
def command(ctx: click.Context, packet: Path, out: Path | None, as_json: bool) -> None:
    """Draw an old packet again from its record and compare.

    Nothing but the record inside the packet is used. The outcome is written as a one-page
    attachment; the packet itself is left alone. Exit code 1 when a place differs, when a file is
    not the one that was written, or when the record contradicts itself.
    """
    from fieldplan.packet.evidence import examine, packet_folder
    from fieldplan.packet.redraw_writer import write_redraw
    from fieldplan.plan.record import read_plan
    from fieldplan.plan.redraw import redraw

    plan = read_plan(packet)
    comparison = redraw(plan)
    folder = packet_folder(packet)
    evidence = examine(packet, plan)
    written = write_redraw(
        plan,
        comparison,
        out if out is not None else folder.absolute().parent,
        evidence=evidence,
    )
    if as_json:
        print_json(
            {
                "packet": folder.as_posix(),
                "places": comparison.places,
                "same": comparison.same,
                "largest_m": round(comparison.largest_m, 3),
                "differing": list(comparison.differing),
                "fingerprint": evidence.fingerprint,
                "differs": list(evidence.sentences),
                "attachment": written.as_posix(),
            }
        )
    else:
        click.echo(wrapped(comparison.sentence))
        for sentence in evidence.sentences:
            click.echo(wrapped(sentence))
        click.echo(f"Fingerprint of the packet: {evidence.fingerprint or 'none'}")
        click.echo(f"Attachment: {written}")
    ctx.exit(0 if comparison.agrees and not evidence.sentences else 1)
