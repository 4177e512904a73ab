"""``fieldplan estimate``: laboratory results meet their packet."""

import os
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from fieldplan.cli.options import (
    explain_option,
    json_option,
    open_option,
    packet_argument,
    print_json,
    print_sentences,
    print_steps,
    quiet_option,
    say,
    wrapped,
)

if TYPE_CHECKING:
    from fieldplan.estimate.model import Estimate
    from fieldplan.lab.model import LabTable
    from fieldplan.plan.model import Plan
    from fieldplan.returns.field import FieldReturn
    from fieldplan.returns.matching import ConfirmedMatch
    from fieldplan.returns.model import Returns


def _columns(
    _context: click.Context, _parameter: click.Parameter, given: tuple[str, ...]
) -> dict[str, str]:
    """Part ``ours=theirs``."""
    columns = {}
    for text in given:
        ours, equals, theirs = text.partition("=")
        if not (equals and ours.strip() and theirs.strip()):
            message = f"'{text}' must be OURS=THEIRS, such as as_reported=Result."
            raise click.BadParameter(message)
        if ours.strip() in columns:
            message = f"'{ours.strip()}' is given twice."
            raise click.BadParameter(message)
        columns[ours.strip()] = theirs.strip()
    return columns


_A_FILE = click.Path(path_type=Path, dir_okay=False)


@click.command("estimate")
@packet_argument
@click.argument("lab_file", type=_A_FILE, metavar="LAB_FILE")
@click.option("--field", "field_file", type=_A_FILE, help="The crew's return, filled in.")
@click.option("--matches", "matches_file", type=_A_FILE, help="matches.csv with your answers.")
@click.option(
    "--column",
    "columns",
    multiple=True,
    callback=_columns,
    metavar="OURS=THEIRS",
    help="Our name for a column of LAB_FILE; may be repeated.",
)
@click.option(
    "--interval",
    type=click.Choice(["two-sided", "upper-limit", "lower-limit"]),
    help="Change this rule after results; both answers are printed.",
)
@click.option(
    "--confidence",
    type=click.FloatRange(0.5, 1, min_open=True, max_open=True),
    help="Change this rule after results.",
)
@click.option(
    "--duplicates",
    type=click.Choice(["average", "first"]),
    help="Change this rule after results.",
)
@click.option(
    "--single-result",
    type=click.Choice(["refuse", "borrow-spread"]),
    help="Change this rule after results.",
)
@click.option(
    "--out",
    type=click.Path(path_type=Path, file_okay=False),
    help="Folder that receives the results; beside the packet unless given.",
)
@json_option
@explain_option
@quiet_option
@open_option
def command(
    packet: Path,
    lab_file: Path,
    field_file: Path | None,
    matches_file: Path | None,
    columns: dict[str, str],
    out: Path | None,
    **options: Any,
) -> None:
    """Meet laboratory results with their packet: the mean and its interval.

    Design and rules are those recorded in PACKET before any result. LAB_FILE is CSV or XLSX with
    one result a row. Ids that are only like planned ones are written to matches.csv for you to
    answer, and nothing is estimated before. Results go into a new numbered folder.
    """
    from fieldplan.lab import read_lab
    from fieldplan.packet.results_writer import write_results
    from fieldplan.plan.record import read_plan
    from fieldplan.returns import read_field_return, read_matches, reconcile

    quiet = options["quiet"] or options["as_json"]
    plan = read_plan(packet)
    table = read_lab(lab_file, plan.campaign, columns=columns)
    given = read_field_return(field_file, plan) if field_file else ()
    confirmed = read_matches(matches_file) if matches_file else ()
    returns = reconcile(plan, table, given, confirmed=confirmed)
    if returns.needs_you:
        _ask(returns, confirmed, out or Path())
    answer = _answer(plan, table, given, confirmed, (returns, _overrides(options)))
    say(_received(returns), quiet=quiet)
    for note in returns.notes:
        say(wrapped(f"- {note}"), quiet=quiet)
    folder = (packet.parent.parent if packet.is_file() else packet).absolute()
    sources = [path for path in (lab_file, field_file, matches_file) if path]
    results = write_results(
        plan,
        answer,
        out or _beside(folder),
        sources=sources,
        progress=lambda stage: say(f"  {stage} …", quiet=quiet),
    )
    _print(answer, results, options)


def _beside(packet: Path) -> Path:
    """Name the folder that holds the packet, short where it is the current one."""
    parent = Path(os.path.normpath(packet)).parent
    return parent.relative_to(Path.cwd()) if parent.is_relative_to(Path.cwd()) else parent


def _overrides(options: dict[str, Any]) -> dict[str, str | float]:
    names = ("interval", "confidence", "duplicates", "single_result")
    return {name: options[name] for name in names if options[name] is not None}


def _answer(
    plan: "Plan",
    table: "LabTable",
    given: "FieldReturn | tuple[()]",
    confirmed: "tuple[ConfirmedMatch, ...]",
    basis: "tuple[Returns, dict[str, str | float]]",
) -> "Estimate":
    """Estimate; where the rule for duplicates is changed, reconcile by it once more."""
    from fieldplan.estimate import estimate
    from fieldplan.returns import reconcile

    returns, overrides = basis
    again = None
    if "duplicates" in overrides:
        rules = plan.campaign.rules.model_copy(update={"duplicates": overrides["duplicates"]})
        changed = replace(plan, campaign=plan.campaign.model_copy(update={"rules": rules}))
        again = reconcile(changed, table, given, confirmed=confirmed)
    return estimate(plan, returns, overrides=overrides, returns_changed=again)


def _received(returns: "Returns") -> str:
    total = returns.matched + returns.extra + len({match.row for match in returns.needs_you})
    waiting = len({match.row for match in returns.needs_you})
    end = f"; {waiting} need you" if waiting else ""
    return f"{returns.matched} of {total} laboratory rows matched{end}."


def _ask(returns: "Returns", confirmed: "tuple[ConfirmedMatch, ...]", folder: Path) -> None:
    """Write the proposals to answer, then stop."""
    from fieldplan.base.errors import LabError
    from fieldplan.base.files import write_atomically
    from fieldplan.returns import matches_csv

    number, path = 1, folder / "matches.csv"
    while path.exists():
        number += 1
        path = folder / f"matches-{number:02d}.csv"
    content = matches_csv(returns.needs_you, confirmed=confirmed)
    folder.mkdir(parents=True, exist_ok=True)
    write_atomically(path, f"\ufeff{content}")
    lines = [
        f"  row {match.row} '{match.as_written}' may be {match.proposed}: {match.why}"
        for match in returns.needs_you
    ]
    raise LabError(
        _received(returns),
        *lines,
        f"Write yes or no into the column 'confirm' of {path}, then run the command again with "
        f"--matches {path}. Nothing was estimated.",
    )


def _print(answer: "Estimate", results: Path, options: dict[str, Any]) -> None:
    from fieldplan.estimate.export import estimate_json

    sheet = results / "results_sheet.html"
    if options["as_json"]:
        folder = {"results": results.as_posix(), "sheet": sheet.as_posix()}
        print_json({**estimate_json(answer), **folder})
    else:
        print_sentences(answer.sentences)
        if options["explain"]:
            click.echo()
            print_steps(answer.steps)
            click.echo()
            print_sentences([*answer.why_different, answer.coverage_sentence])
        click.echo(f"Open first: {sheet}")
    if options["open_it"]:
        click.launch(str(sheet))
