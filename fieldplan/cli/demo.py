"""``fieldplan demo``: the whole job on an invented site."""

import shutil
from datetime import date
from pathlib import Path

import click

from fieldplan.base.errors import FieldplanError
from fieldplan.cli.options import open_option, quiet_option, say, wrapped

STAGES = 5


def demo_folder() -> Path:
    """Find the demo sites: inside an installed wheel, or beside the package in a checkout."""
    package = Path(__file__).resolve().parents[1]
    for candidate in (package / "demo_sites", package.parent / "demo_sites"):
        if candidate.is_dir():
            return candidate
    message = f"the demo sites are missing beside {package}; install fieldplan again."
    raise FieldplanError(message)


def site_names() -> list[str]:
    """Name the demo sites in alphabetical order."""
    return sorted(path.parent.name for path in demo_folder().glob("*/campaign.toml"))


def copy_site(name: str, out: Path) -> Path:
    """Copy one site into a new folder of ``out``; one that is there already stays as it is.

    What came back belongs to the first revision of a packet, so a second run begins anew, in
    ``hobbin-ley-2``.
    """
    source, target, number = demo_folder() / name, out / name, 1
    out.mkdir(parents=True, exist_ok=True)
    while True:
        try:
            target.mkdir()
            break
        except FileExistsError:
            number += 1
            target = out / f"{name}-{number}"
    for path in sorted(source.rglob("*")):
        goal = target / path.relative_to(source)
        if path.is_dir():
            goal.mkdir()
        else:
            shutil.copyfile(path, goal)
    return target


@click.command("demo")
@click.argument("name", required=False)
@click.option(
    "--out",
    type=click.Path(path_type=Path, file_okay=False),
    default=Path("fieldplan-demo"),
    show_default=True,
    help="Folder that receives the copied site, its packet and its results.",
)
@quiet_option
@open_option
def command(name: str | None, out: Path, quiet: bool, open_it: bool) -> None:
    """Run the whole job on an invented site.

    The site is copied, sized, packed and issued; then invented laboratory results come back and
    the site mean is estimated. NAME is one of the sites; the first is used unless it is given.
    """
    names = site_names()
    chosen = names[0] if name is None else name
    if chosen not in names:
        message = f"there is no demo site {chosen!r}; take one of: {', '.join(names)}."
        raise click.UsageError(message)
    try:
        folder = copy_site(chosen, out)
    except OSError as fault:
        message = f"{out} cannot be written ({fault.strerror or fault}); name a folder with --out."
        raise FieldplanError(message) from fault
    if folder.name != chosen:
        said = f"{out / chosen} is there already and stays as it is; this run goes into {folder}."
        say(wrapped(said), quiet=quiet)
    packet = _plan(folder, quiet=quiet)
    results = _results(folder, packet, quiet=quiet)
    click.echo(f"Open first: {packet / 'START_HERE.html'}")
    click.echo(f"Then:       {results / 'results_sheet.html'}")
    others = [other for other in names if other != chosen]
    if others:
        say(f"Another site: fieldplan demo {others[0]}", quiet=quiet)
    if open_it:
        click.launch(str(packet / "START_HERE.html"))


def _stage(number: int, text: str, *, quiet: bool) -> None:
    say(f"[{number}/{STAGES}] {text} …", quiet=quiet)


def _plan(folder: Path, *, quiet: bool) -> Path:
    """Size, pack and issue the campaign; return the issued packet."""
    from fieldplan.campaign import read_campaign
    from fieldplan.campaign.inputs import input_files
    from fieldplan.packet.issuing import issue_packet
    from fieldplan.packet.writer import next_revision, read_inputs, write_packet
    from fieldplan.plan.make import make_plan

    _stage(1, f"reading {folder / 'campaign.toml'}", quiet=quiet)
    read = read_campaign(folder / "campaign.toml")
    table = read.campaign.plan
    revision = next_revision(folder, plan_id=table.id, wanted=table.revision)
    today = table.prepared_on or date.today()
    _stage(2, "counting and drawing locations", quiet=quiet)
    plan = make_plan(read, made_on=today, revision=revision)
    click.echo(wrapped(plan.size.sentences[0]))
    _stage(3, "writing the packet: point files, maps, sheets", quiet=quiet)
    packet = write_packet(plan, folder, read_inputs(input_files(read)))
    _stage(4, f"issuing {packet.name}", quiet=quiet)
    issue_packet(packet, by=table.decides or "the demo", on=today)
    return packet


def _results(folder: Path, packet: Path, *, quiet: bool) -> Path:
    """Meet the invented returns with the packet; return the results folder."""
    from fieldplan.estimate import estimate_all
    from fieldplan.lab import read_lab
    from fieldplan.packet.results_writer import write_results
    from fieldplan.plan.record import read_plan
    from fieldplan.returns import read_field_return, read_matches, reconcile_all

    returned = folder / "returned"
    lab_file = next(returned.glob("lab_results.*"))
    field_file, matches_file = returned / "field_return.csv", returned / "matches.csv"
    _stage(5, f"meeting {lab_file.name} and {field_file.name} with the packet", quiet=quiet)
    plan = read_plan(packet)
    received = reconcile_all(
        plan,
        read_lab(lab_file, plan.campaign),
        read_field_return(field_file, plan),
        confirmed=read_matches(matches_file),
    )
    answers = estimate_all(plan, received)
    for sentence in (*answers.main.sentences[:3], *answers.sentences):
        click.echo(wrapped(sentence))
    return write_results(plan, answers, folder, sources=(lab_file, field_file, matches_file))
