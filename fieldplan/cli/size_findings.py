"""Findings on the screen: a sentence each, and one topic in full where it is asked for."""

import math
from collections.abc import Collection, Sequence
from typing import TYPE_CHECKING

import click

from fieldplan.cli.options import print_sentences, print_steps, say, wrapped
from fieldplan.cli.screen_table import table_lines

if TYPE_CHECKING:
    from fieldplan.sizing.model import Amount, Finding


def print_findings(
    findings: "Sequence[Finding]", *, full: Collection[str] = (), said: Collection[str] = ()
) -> None:
    """Print the answer of each finding; those named in ``full`` with all that is behind them.

    Parameters
    ----------
    findings : sequence of Finding
    full : collection of str
        Topics; ``all`` stands for every one.
    said : collection of str
        Sentences that stand on the screen already.
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
            print_finding(finding, said=said)


def print_finding(finding: "Finding", *, said: Collection[str] = ()) -> None:
    """Print one finding: title, answer, numbers, table, working, conditions, sources.

    Parameters
    ----------
    finding : Finding
    said : collection of str
        Sentences that stand on the screen already; they are not said twice.
    """
    click.echo(f"\n{finding.title}")
    above = " ".join(said)
    new = [line for line in (finding.answer, *finding.warnings) if line not in above]
    if new:
        click.echo()
        print_sentences(new)
    if finding.amounts:
        click.echo()
    for amount in finding.amounts:
        click.echo(wrapped(f"{amount.meaning}: {amount_words(amount)}", indent="  "))
    if finding.columns:
        click.echo()
        for line in table_lines(finding.columns, finding.rows):
            click.echo(line)
    if finding.steps:
        click.echo()
        print_steps(finding.steps)
    if finding.assumptions:
        click.echo()
        print_sentences(finding.assumptions)
    if finding.sources:
        click.echo()
        click.echo(wrapped("Sources: " + "; ".join(finding.sources) + "."))


_SHARES = {"chance", "share", "shares", "held", "reach", "power", "confidence", "alpha", "beta"}
_ALSO_SHARES = {"mean_above", "mean_below"}


def amount_words(amount: "Amount") -> str:
    """Write a number with four digits that count, and a share as a percentage.

    Examples
    --------
    >>> from fieldplan.sizing.model import Amount
    >>> amount_words(Amount("chance_of_hit", "Chance of hitting the patch", 0.890559))
    '89.06 %'
    >>> amount_words(Amount("saved", "Saved", 28196.43, "EUR"))
    '28196 EUR'
    """
    value = amount.value
    if value is None:
        return "not known"
    words = {*amount.name.split("_"), *amount.meaning.lower().split()}
    is_share = bool(words & _SHARES) or amount.name in _ALSO_SHARES
    if isinstance(value, float) and not amount.unit and 0 <= value <= 1 and is_share:
        return _percent(value)
    return f"{value if isinstance(value, int) else _four_digits(value)} {amount.unit}".rstrip()


def _percent(share: float) -> str:
    """Write a share; one that is nearly all or nothing is not rounded to it."""
    if 0.9999 < share < 1:
        return "above 99.99 %"
    return "below 0.01 %" if 0 < share < 0.0001 else f"{_four_digits(100 * share)} %"


def _four_digits(value: float) -> str:
    """Write four digits that count, all of those before the point, and no power of ten."""
    if abs(value) >= 1000 or value == 0:
        return f"{value:.0f}"
    places = 3 - math.floor(math.log10(abs(value)))
    text = f"{value:.{places}f}"
    return text.rstrip("0").rstrip(".")
