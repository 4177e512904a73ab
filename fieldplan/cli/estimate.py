"""``fieldplan estimate``: laboratory results meet their packet."""

import os
from collections.abc import Callable, Mapping
from dataclasses import replace
from difflib import get_close_matches
from functools import partial
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
    from fieldplan.estimate.model import Answers
    from fieldplan.plan.model import Plan
    from fieldplan.returns.matching import ConfirmedMatch
    from fieldplan.returns.several import Received


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


MOST_PROPOSALS = 20
"""How many are printed; all of them stand in the file."""
_A_FILE = click.Path(path_type=Path, dir_okay=False)


@click.command("estimate")
@packet_argument
@click.argument("lab_file", type=_A_FILE, metavar="LAB_FILE")
@click.option(
    "--analyte",
    metavar="ID",
    help="Estimate this analyte only; the one that decided n comes first unless given.",
)
@click.option("--field", "field_file", type=_A_FILE, help="The crew's return, filled in.")
@click.option("--matches", "matches_file", type=_A_FILE, help="matches.csv with your answers.")
@click.option(
    "--report-number",
    default="",
    metavar="TEXT",
    help="The laboratory's own number of its report, for the sheet.",
)
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
    "--mean-interval",
    type=click.Choice(["student-t", "skew-widened"]),
    help="Change this rule after results.",
)
@click.option(
    "--promised-class",
    type=click.Choice(["cv-up-to-1", "cv-up-to-2"]),
    help="Change this rule after results.",
)
@click.option(
    "--non-detects",
    type=click.Choice(
        [
            "bounds",
            "substitute-half",
            "kaplan-meier",
            "order-statistics",
            "lognormal-likelihood",
            "gamma-likelihood",
            "normal-likelihood",
            "by-share",
        ]
    ),
    help="Change this rule after results.",
)
@click.option(
    "--declared-shape",
    type=click.Choice(["lognormal", "gamma", "normal"]),
    help="Change this rule after results; for --non-detects by-share.",
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

    Design and rules are those on record in PACKET. LAB_FILE is CSV or XLSX with
    one result a row. Ids that are only like planned ones are written to matches.csv for you to
    answer, and nothing is estimated before. Results go into a new numbered folder. Analytes that
    did not decide n get a sentence each, and a sheet and a map of their own.
    """
    from fieldplan.lab import read_lab
    from fieldplan.packet.evidence import rely_on
    from fieldplan.packet.results_writer import write_results
    from fieldplan.plan.record import read_plan
    from fieldplan.returns import read_field_return, read_matches, reconcile_all

    quiet = options["quiet"] or options["as_json"]
    plan = read_plan(packet)
    for sentence in rely_on(packet, plan).others:
        say(wrapped(sentence), quiet=quiet)
    asked = _asked(plan, options["analyte"])
    table = read_lab(lab_file, plan.campaign, columns=columns, remedy=_run_again)
    given = read_field_return(field_file, plan) if field_file else ()
    confirmed = read_matches(matches_file) if matches_file else ()
    meet = partial(
        reconcile_all, lab_table=table, field_rows=given, confirmed=confirmed, analyte=asked
    )
    received = meet(plan)
    if received.needs_you:
        _ask(plan, received, confirmed=confirmed, folder=out or Path())
    answers = _answers(plan, received, overrides=_overrides(options), meet=meet)
    _say_received(plan, received, quiet=quiet)
    folder = (packet.parent.parent if packet.is_file() else packet).absolute()
    sources = [path for path in (lab_file, field_file, matches_file) if path]
    results = write_results(
        plan,
        answers,
        out or _beside(folder),
        sources=sources,
        report_number=options["report_number"],
        packet=packet,
        progress=lambda stage: say(f"  {stage} …", quiet=quiet),
    )
    _print(answers, results, options)


def _run_again(named: Mapping[str, str]) -> str:
    """Write the command that runs once more, with the columns that a person may have to name."""
    from fieldplan.lab.columns import column_options, quoted

    context = click.get_current_context()
    words, named = ["fieldplan", "estimate"], {**context.params["columns"], **named}
    for parameter in context.command.params:
        value = context.params[parameter.name or ""]
        if parameter.name == "columns" or value in (None, False, parameter.get_default(context)):
            continue
        words += [parameter.opts[0]] if isinstance(parameter, click.Option) else []
        words += [] if value is True else [quoted(str(value))]
    return f"run:\n  {' '.join(words)} {column_options(named)}"


def _beside(packet: Path) -> Path:
    """Name the folder that holds the packet, short where it is the current one."""
    parent = Path(os.path.normpath(packet)).parent
    return parent.relative_to(Path.cwd()) if parent.is_relative_to(Path.cwd()) else parent


def _overrides(options: dict[str, Any]) -> dict[str, str | float]:
    names = (
        "interval", "confidence", "mean_interval", "promised_class", "non_detects",
        "declared_shape", "duplicates", "single_result",
    )  # fmt: skip
    return {name: options[name] for name in names if options[name] is not None}


def _asked(plan: "Plan", written: str | None) -> str | None:
    """Find the analyte that was typed, by id or name; refuse another with what is near it."""
    if written is None:
        return None
    known = {analyte.name.casefold(): analyte.id for analyte in plan.campaign.analyte}
    known |= {analyte.id.casefold(): analyte.id for analyte in plan.campaign.analyte}
    if written.casefold() in known:
        return known[written.casefold()]
    near = get_close_matches(written.casefold(), [name for name in known if name], n=1, cutoff=0.5)
    ids = ", ".join(analyte.id for analyte in plan.campaign.analyte)
    hint = f" Did you mean {known[near[0]]}?" if near else ""
    message = f"'{written}' is no analyte of {plan.revision_name}; it has {ids}.{hint}"
    raise click.BadParameter(message, param_hint="--analyte")


def _answers(
    plan: "Plan",
    received: "Received",
    *,
    overrides: dict[str, str | float],
    meet: "Callable[[Plan], Received]",
) -> "Answers":
    """Estimate; where the rule for duplicates is changed, reconcile by it once more."""
    from fieldplan.estimate import estimate_all

    again = None
    if "duplicates" in overrides:
        rules = plan.campaign.rules.model_copy(update={"duplicates": overrides["duplicates"]})
        again = meet(replace(plan, campaign=plan.campaign.model_copy(update={"rules": rules})))
    return estimate_all(plan, received, overrides=overrides, received_changed=again)


def _counts(plan: "Plan", received: "Received") -> list[str]:
    """Say how many rows of each analyte were matched."""
    lines = []
    for returns in received.every:
        waiting = len({match.row for match in returns.needs_you})
        total = returns.matched + returns.extra + waiting
        name = plan.campaign.analyte_called(returns.analyte).label
        head = f"{name}: " if received.others else ""
        verb = "needs" if waiting == 1 else "need"
        end = f"; {waiting} {verb} you" if waiting else ""
        lines.append(f"{head}{returns.matched} of {total} laboratory rows matched{end}.")
    return lines


def _say_received(plan: "Plan", received: "Received", *, quiet: bool) -> None:
    """Say what came of each analyte; what holds for the whole file is said once."""
    said: set[str] = set()
    for line, returns in zip(_counts(plan, received), received.every, strict=True):
        say(line, quiet=quiet)
        for note in returns.notes:
            if note not in said:
                say(wrapped(f"- {note}"), quiet=quiet)
        said |= set(returns.notes)


def _ask(
    plan: "Plan", received: "Received", *, confirmed: "tuple[ConfirmedMatch, ...]", folder: Path
) -> None:
    """Write the proposals to answer, then stop."""
    from fieldplan.base.errors import LabError
    from fieldplan.base.files import write_atomically
    from fieldplan.lab.tables import capped
    from fieldplan.returns import matches_csv

    number, path = 1, folder / "matches.csv"
    while path.exists():
        number += 1
        path = folder / f"matches-{number:02d}.csv"
    content = matches_csv(received.needs_you, confirmed=confirmed)
    folder.mkdir(parents=True, exist_ok=True)
    write_atomically(path, f"\ufeff{content}")
    lines = [
        f"  row {match.row} '{match.as_written}' may be {match.proposed}: {match.why}"
        for match in received.needs_you
    ]
    raise LabError(
        *_counts(plan, received),
        *capped(lines, MOST_PROPOSALS + 1),
        f"Write yes or no into the column 'confirm' of {path} and your name into 'confirmed_by', "
        f"then run the command again with --matches {path}. Nothing was estimated.",
    )


def _print(answers: "Answers", results: Path, options: dict[str, Any]) -> None:
    from fieldplan.estimate.export import answers_json

    sheet, answer = results / "results_sheet.html", answers.main
    if options["as_json"]:
        folder = {"results": results.as_posix(), "sheet": sheet.as_posix()}
        print_json({**answers_json(answers), **folder})
    else:
        print_sentences(answer.sentences)
        if options["explain"]:
            click.echo()
            print_steps(answer.steps)
            click.echo()
            print_sentences([*answer.why_different, answer.coverage_sentence])
        if answers.sentences:
            click.echo()
            print_sentences(answers.sentences)
        click.echo(f"Open first: {sheet}")
    if options["open_it"]:
        click.launch(str(sheet))
