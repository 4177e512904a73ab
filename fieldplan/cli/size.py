"""``fieldplan size``: how many, for a campaign file or for bare numbers."""

from dataclasses import asdict
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from fieldplan.base.errors import FieldplanError
from fieldplan.cli.option_words import answer_in_options, in_options
from fieldplan.cli.options import (
    campaign_argument,
    explain_option,
    json_option,
    print_json,
    print_sentences,
    print_steps,
    quiet_option,
    say,
    wrapped,
)
from fieldplan.cli.size_findings import print_finding, print_findings
from fieldplan.cli.size_options import BadOption, bare_number_options, given_names
from fieldplan.cli.typed_numbers import BareNumbers, refuse_unknown_question

if TYPE_CHECKING:
    from collections.abc import Callable, Collection

    from fieldplan.sizing.model import Size, StratumSize


EPILOG = """\b
Questions (--question; one without its keys names them):
  mean, all-clear, change, mean-and-background, mean-and-level, share,
  smallest-patch, upper-share, which-exceed
Layouts (--layout): simple-random, stratified, square-grid, triangular-grid,
  compact-strata, balanced-list, even-spacing, census
Topics (--more; a wrong one names those that have something to say):
  deciding-analytes, two-phase, being-wrong, patch, composites, parts,
  ranked-sets, near-normal, non-detects, time, bunched, strata, two-stages,
  frontier, mean-band, space, and the question asked
Keys (--with): docs/campaign-file.md. One page a question: docs/sizing.md.
"""
"""What stands below the options; typed here so that help loads nothing, and held by a test."""


@click.command("size", epilog=EPILOG)
@campaign_argument(required=False)
@bare_number_options
@click.option(
    "--more", multiple=True, metavar="TOPIC", help="Say one topic in full; 'all' says every one."
)
@json_option
@explain_option
@quiet_option
def command(
    campaign_file: Path | None,
    more: tuple[str, ...],
    as_json: bool,
    explain: bool,
    quiet: bool,
    **typed: Any,
) -> None:
    """Say how many locations the target needs.

    Give a campaign file (or its folder), or bare numbers:

    \b
      fieldplan size campaign.toml
      fieldplan size campaign.toml --more frontier
      fieldplan size --sigma 27.57 --standard-error 6 --pilot-n 8
      fieldplan size --stratum 0.64,18 --stratum 0.36,45 --standard-error 6
      fieldplan size --sigma 20 --standard-error 4 --with design.locations=12
      fieldplan size --question all-clear --with share=0.05
      fieldplan size --question share --with expected=0.15 --with margin=0.05
    """
    wanted = _wanted(more, everything=as_json or explain)
    answer = _answer(campaign_file, typed, wanted, alone=not more)
    if more:
        _refuse_unknown(more, answer, lambda: _answer(campaign_file, typed, "all", alone=False))
    if as_json:
        print_json(as_mapping(answer))
    elif quiet:
        click.echo(wrapped(answer.sentences[0]))
    else:
        print_answer(answer, explain=explain, more=more)


def _wanted(more: tuple[str, ...], *, everything: bool) -> "str | Collection[str]":
    if everything or "all" in more:
        return "all"
    return more or "quick"


def _answer(path: Path | None, typed: dict[str, Any], wanted: Any, *, alone: bool) -> "Size":
    """Size what was given: a campaign file, or numbers."""
    return _of_campaign(path, typed, wanted) if path else _of_numbers(typed, wanted, alone=alone)


def _refuse_unknown(more: tuple[str, ...], answer: "Size", whole: "Callable[[], Size]") -> None:
    """Refuse a topic that nobody knows, or that this campaign gives nothing to say about.

    ``whole`` sizes again with every topic, to name those that there are.
    """
    from fieldplan.sizing.beside import QUICK, THOROUGH

    found = [finding.topic for finding in answer.findings]
    for topic in more:
        if topic in found or topic == "all":
            continue
        here = ", ".join(finding.topic for finding in whole().findings)
        known = topic in (*QUICK, *THOROUGH)
        fault = "nothing given says anything about it" if known else "is no topic"
        start = f"--more {topic}: {fault}" if known else f"--more {topic} {fault}"
        message = f"{start}; {f'there are {here}, and all' if here else 'there are none'} here."
        raise BadOption(message)


def _of_campaign(path: Path, typed: dict[str, Any], wanted: Any) -> "Size":
    """Size a campaign file; bare numbers beside it would contradict it."""
    names = given_names(typed)
    if names:
        message = f"{names[0]} beside a campaign file: write it into {path}, or leave the file out."
        raise BadOption(message)
    from fieldplan.campaign import read_campaign
    from fieldplan.frame import read_frame
    from fieldplan.lab import read_spread
    from fieldplan.sizing import size

    read = read_campaign(path)
    frame = read_frame(read)
    return size(read.campaign, read_spread(read, frame), frame, beside=wanted)


def _of_numbers(typed: dict[str, Any], wanted: Any, *, alone: bool) -> "Size":
    """Size bare numbers; alone, for a mean, they need no more than arithmetic."""
    if alone and typed["question"] == "mean" and not typed["with_keys"]:
        from fieldplan.sizing.answer import answer

        numbers = BareNumbers(**typed)
        numbers.check_question()
        numbers.refuse_idle()
        return answer(numbers.as_question())
    from fieldplan.cli.bare_numbers import asked_of_numbers
    from fieldplan.cli.with_keys import options_first
    from fieldplan.sizing import size_asked

    refuse_unknown_question(typed["question"])
    typed = options_first(typed, click.get_current_context().command.params)
    try:
        return answer_in_options(size_asked(asked_of_numbers(typed), beside=wanted))
    except FieldplanError as fault:
        lines = [in_options(line) for line in fault.problems]
        raise type(fault)(*lines) from fault


def print_answer(answer: "Size", *, explain: bool, more: tuple[str, ...] = ()) -> None:
    """Print the answer in sentences; with ``explain`` the working and the conditions too."""
    click.echo(wrapped(answer.sentences[0]))
    following = [*answer.sentences[1:], *(other.sentence for other in answer.others)]
    if following:
        click.echo()
        print_sentences(following)
    asked = [f for f in answer.findings if f.topic in more or "all" in more]
    beside = [f for f in answer.findings if f.answer not in answer.sentences or f in asked]
    print_findings(beside, full=more, said=answer.sentences)
    if not explain:
        say("\n--explain shows the working, and under what condition it holds.")
        return
    click.echo("\nThe working\n")
    print_steps(answer.steps)
    click.echo("\nUnder what condition\n")
    print_sentences(answer.conditions)
    for finding in answer.findings:
        if finding.topic not in more and "all" not in more:
            print_finding(finding, said=answer.sentences)


def as_mapping(answer: "Size") -> dict[str, Any]:
    """Arrange the answer for ``--json``: n first, chances rounded to three decimals."""
    return {
        "question": answer.question,
        "n": answer.needed,
        "number_from": answer.number_from,
        "locations": answer.planned,
        "increments": answer.increments,
        "replicates": answer.replicates,
        "target": answer.target,
        "chance_enough": _three(answer.chance_needed),
        "n_by_assurance": {_share(entry.assurance): entry.n for entry in answer.assured},
        "assurance": answer.assurance if answer.assurance is not None else "plain",
        "plain_n": answer.plain_n,
        "plain_unrounded": answer.unrounded,
        "plain_chance_enough": _three(answer.chance_plain),
        "standard_error": answer.standard_error,
        "half_width": answer.half_width,
        "confidence": answer.confidence,
        "interval": answer.interval,
        "unit": answer.unit,
        "strata": [_stratum(entry) for entry in answer.strata],
        "qc": answer.qc,
        "cost": answer.cost,
        "currency": answer.currency,
        "sentences": answer.sentences,
        "others": [{**asdict(other), "chance": _three(other.chance)} for other in answer.others],
        "findings": {finding.topic: asdict(finding) for finding in answer.findings},
        "conditions": answer.conditions,
        "steps": answer.steps,
        "curve": answer.curve,
    }


def _stratum(entry: "StratumSize") -> dict[str, Any]:
    return {
        "stratum": entry.stratum,
        "weight": entry.weight,
        "sigma": entry.sigma,
        "n": entry.needed,
        "locations": entry.planned,
        "alternates": entry.alternates,
        "population": entry.population,
        "floor_applied": entry.floor_applied,
    }


def _three(chance: float | None) -> float | None:
    return None if chance is None else round(chance, 3)


def _share(assurance: float) -> str:
    """Write a share with two decimals, or with all that were typed."""
    return f"{assurance:.2f}" if round(assurance, 2) == assurance else f"{assurance:g}"
