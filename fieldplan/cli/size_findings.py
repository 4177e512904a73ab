"""Findings on the screen: a sentence each, and one topic in full where it is asked for."""

from collections.abc import Collection, Sequence
from typing import TYPE_CHECKING

import click

from fieldplan.cli.options import print_sentences, print_steps, say, wrapped

if TYPE_CHECKING:
    from fieldplan.sizing.model import Finding


def print_findings(findings: "Sequence[Finding]", *, full: Collection[str] = ()) -> None:
    """Print the answer of each finding; those named in ``full`` with all that is behind them.

    Parameters
    ----------
    findings : sequence of Finding
    full : collection of str
        Topics; ``all`` stands for every one.
    """
    short = [f for f in findings if f.topic not in full and "all" not in full]
    if short:
        click.echo()
        print_sentences([line for f in short for line in (f.answer, *f.warnings)])
        say(
            f"\n--more {short[0].topic} says that in full; so does --more with "
            f"{', '.join(f.topic for f in short[1:])}."
            if len(short) > 1
            else f"\n--more {short[0].topic} says that in full."
        )
    for finding in findings:
        if finding not in short:
            print_finding(finding)


def print_finding(finding: "Finding") -> None:
    """Print one finding: title, answer, numbers, table, working, conditions, sources."""
    click.echo(f"\n{finding.title}\n")
    print_sentences([finding.answer, *finding.warnings])
    if finding.amounts:
        click.echo()
    for amount in finding.amounts:
        value = "not known" if amount.value is None else f"{amount.value:.6g}"
        click.echo(wrapped(f"{amount.meaning}: {value} {amount.unit}".rstrip(), indent="  "))
    if finding.columns:
        click.echo()
        _print_table(finding.columns, finding.rows)
    if finding.steps:
        click.echo()
        print_steps(finding.steps)
    if finding.assumptions:
        click.echo()
        print_sentences(finding.assumptions)
    if finding.sources:
        click.echo()
        click.echo(wrapped("Sources: " + "; ".join(finding.sources) + "."))


def _print_table(columns: Sequence[str], rows: Sequence[Sequence[str]]) -> None:
    """Print a table: the first column flush left, the others flush right."""
    cells = [columns, *rows]
    wide = [max(len(row[k]) for row in cells) for k in range(len(columns))]
    for row in cells:
        first, *others = (text for text in row)
        line = first.ljust(wide[0])
        for text, width in zip(others, wide[1:], strict=True):
            line += "  " + text.rjust(width)
        click.echo("  " + line.rstrip())
