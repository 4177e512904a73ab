"""The site mean against that of a background area: results in each."""

from fieldplan.base.errors import DesignError
from fieldplan.base.working import Step
from fieldplan.campaign.questions.mean_and_background import MeanAndBackground
from fieldplan.sizing.asked.background_picture import background_picture
from fieldplan.sizing.asked.background_steps import (
    POOLED,
    RANKS,
    RULE,
    WELCH,
    background_steps,
    words_of_test,
)
from fieldplan.sizing.asked.counting_claims import table_missing
from fieldplan.sizing.asked.model import Answered, Asked
from fieldplan.sizing.asked.sure_words import sure_words
from fieldplan.sizing.asked.two_populations import OVERAGE, TwoPopulations
from fieldplan.sizing.model import Amount, Finding
from fieldplan.sizing.words import counted, figure, percent, typed, typed_percent, with_unit

TITLE = "Site mean and background mean"


def count(asked: Asked) -> Answered:
    """Count the site results that tell the difference, and name the background's.

    Parameters
    ----------
    asked : Asked

    Returns
    -------
    Answered

    Raises
    ------
    DesignError
        The difference cannot be told, e.g. because the background has too few results.
    """
    both = TwoPopulations(asked, _table(asked))
    sure = both.table.assurance
    needed = both.needed if sure == "plain" else both.assured(sure)
    finding = _finding(both, needed, _answer(both, needed), background_steps(both, needed))
    apart = with_unit(typed(both.table.difference), asked.question.unit)
    return Answered(needed, f"a difference of {apart} from the background", finding)


def bought(asked: Asked, counts: tuple[int, ...]) -> Finding:
    """Say how surely given counts tell the difference, and the smallest they tell.

    Parameters
    ----------
    asked : Asked
    counts : tuple of int
        Site results by stratum.
    """
    both = TwoPopulations(asked, _table(asked))
    least = with_unit(figure(both.smallest_difference(counts)), asked.question.unit)
    surely = typed_percent(1 - both.table.beta)
    extra = f" The smallest difference told with {surely} is {least}."
    if both.from_above:
        extra = (
            f" The smallest difference that means alike are shown to lie below with {surely} is "
            f"{least}."
        )
    return _finding(both, counts, _answer(both, counts) + extra, ())


def _answer(both: TwoPopulations, counts: tuple[int, ...]) -> str:
    table, unit = both.table, both.asked.question.unit
    there = "already there" if table.background_results is not None else "to be taken"
    apart = with_unit(typed(table.difference), unit)
    power, alpha = percent(both.power(counts)), typed_percent(table.alpha)
    opening = (
        f"{counted(sum(counts), 'site result')} and {both.background(counts)} background results "
        f"({there}), compared by {words_of_test(table)}: "
    )
    if table.assume == "above-background":
        return opening + (
            f"if the two means are alike, {power} of such campaigns show the site to lie less than "
            f"{apart} above the background; if it lies {apart} above, {alpha} do so wrongly."
        )
    if table.assume == "no-difference":
        return opening + (
            f"if the two means lie {apart} apart, {power} of such campaigns show them to differ; "
            f"if they are alike, {alpha} do so wrongly."
        )
    return opening + (
        f"if the site mean lies {apart} above the background mean, {power} of such campaigns show "
        f"it to lie above; if the two are alike, {alpha} do so wrongly."
    )


def _finding(
    both: TwoPopulations, counts: tuple[int, ...], answer: str, steps: tuple[Step, ...]
) -> Finding:
    asked, unit = both.asked, both.asked.question.unit
    ranks = both.table.test == "ranks"
    sources = (RULE, RANKS) if ranks else (POOLED if both.table.variances == "alike" else WELCH,)
    return Finding(
        topic="mean-and-background",
        title=TITLE,
        answer=answer,
        amounts=(
            Amount("site_results", "Site results", sum(counts), "results"),
            Amount("background_results", "Background results", both.background(counts), "results"),
            Amount("power", _power_words(both), both.power(counts)),
            Amount("chance_enough", "Chance that these are enough", both.chance_enough(counts)),
            Amount(
                "smallest_difference",
                _smallest_words(both),
                both.smallest_difference(counts),
                unit,
            ),
        ),
        columns=("true difference", _shown_words(both)),
        rows=tuple(
            (with_unit(figure(both.table.difference * f), unit),
             percent(both.shown(counts, both.table.difference * f)))
            for f in (0.0, 0.25, 0.5, 0.75, 1.0, 1.25, 1.5)
        ),
        steps=steps,
        assumptions=_assumptions(both),
        warnings=(_sure(both, counts, counting=bool(steps)), *_warnings(both, asked)),
        sources=sources,
        picture=background_picture(both, counts),
    )  # fmt: skip


def _shown_words(both: TwoPopulations) -> str:
    """Name what the table and the picture give the chance of."""
    if both.from_above:
        apart = with_unit(typed(both.table.difference), both.asked.question.unit)
        return f"chance to show the site to lie less than {apart} above"
    return "chance to tell it"


def _power_words(both: TwoPopulations) -> str:
    if both.from_above:
        return "Chance to show the site to lie less than the difference above, means being alike"
    return "Chance to tell the difference"


def _smallest_words(both: TwoPopulations) -> str:
    surely = typed_percent(1 - both.table.beta)
    if both.from_above:
        return f"Smallest difference that means alike are shown to lie below with {surely}"
    return f"Smallest difference told with {surely}"


def _sure(both: TwoPopulations, counts: tuple[int, ...], *, counting: bool) -> str:
    """Say how sure the number is, sigma being an estimate."""
    chance, more = both.chance_enough(counts), ""
    if chance is not None and counting:
        if counts == both.needed:
            found = [f"{sum(n)}" if n else "more than can be had" for n in _others(both)]
            more = f"for a chance of 80 % and 90 % the site takes {found[0]} and {found[1]}"
        else:
            few = percent(both.chance_enough(both.needed) or 0.0)
            more = f"sigma at face value asks for {sum(both.needed)} on the site, enough with {few}"
    return sure_words(both.asked.question, chance, more)


def _others(both: TwoPopulations) -> list[tuple[int, ...]]:
    """Count at other assurances; nothing where the background cannot carry one."""
    found: list[tuple[int, ...]] = []
    for assurance in (0.8, 0.9):
        try:
            found.append(both.assured(assurance))
        except DesignError:
            found.append(())
    return found


def _assumptions(both: TwoPopulations) -> tuple[str, ...]:
    table = both.table
    lines = [
        "Site and background are sampled alike: medium, depth, season, method and laboratory; "
        "places are drawn at random in both.",
    ]
    if table.test == "ranks":
        lines.append(
            "The two populations have one shape, shifted; numbers were reckoned for normal results."
        )
    elif table.variances == "alike":
        lines.append("Results are near normal and both spreads are truly alike.")
    else:
        lines.append("The two means are near normal; their spreads may differ.")
    if table.background_sigma is None:
        lines.append("The background spreads like the site; nobody gave its sigma.")
    return tuple(lines)


def _warnings(both: TwoPopulations, asked: Asked) -> tuple[str, ...]:
    table = both.table
    lines = []
    if table.background_results is None:
        lines.append(
            "The background results come from an area of their own, with its own boundary, packet "
            "and cost; none of them is in the numbers of locations here."
        )
    ranks = table.test == "ranks"
    if ranks and table.background_sigma not in (None, both.site_sigma):
        lines.append(
            "The rank sum test supposes like spreads; where they differ it errs more often than "
            "stated. Welch's t test does not."
        )
    overage = OVERAGE if table.overage is None else table.overage
    if ranks and table.background_results is None and overage:
        line = f"An overage of {typed_percent(overage)} for lost results is in the rule"
        if any(part.loss for part in asked.question.parts):
            line += "; the loss allowance of the campaign comes on top (overage = 0 takes it out)"
        lines.append(f"{line}.")
    lines.append(
        "Background is what the people who decide accept as such; a difference from it is no "
        "statement about any level."
    )
    return tuple(lines)


def _table(asked: Asked) -> MeanAndBackground:
    table = asked.objective.mean_and_background
    if table is None:
        raise table_missing(question="mean_and_background")
    return table
