"""At least a stated share of the population does not exceed the level: counted, or bounded."""

import math
from dataclasses import replace

from fieldplan.base.working import Quantity, Step
from fieldplan.campaign.questions.upper_share import UpperShare
from fieldplan.sizing.asked import normal_bound
from fieldplan.sizing.asked.counting_claims import (
    HYPERGEOMETRIC,
    WILKS,
    chance_noticed,
    claim_holds,
    claimed_share,
    counting_assumptions,
    counts_that_notice,
    level_warning,
    level_words,
    limit_warning,
    population_words,
    table_missing,
    takes_all,
    uneven_warning,
)
from fieldplan.sizing.asked.model import Answered, Asked
from fieldplan.sizing.model import Amount, Finding, Picture, Series
from fieldplan.sizing.words import counted, percent, typed_percent
from fieldplan.stats.lots import n_and_allowed_of_list, n_to_find
from fieldplan.stats.precision import smallest
from fieldplan.stats.tolerance import n_and_allowed, n_by_counting

TITLE = "A stated share lies below the level"
SHOWN = 5
"""Numbers allowed that the table lists."""


def count(asked: Asked) -> Answered:
    """Count the results that show the share with the stated confidence.

    Parameters
    ----------
    asked : Asked

    Returns
    -------
    Answered

    Raises
    ------
    DesignError
        The share cannot be shown, whatever the number of results.
    """
    table = _table(asked)
    if table.method == "normal":
        return normal_bound.count(asked, table)
    allowed = _allowed(asked, table)
    needed = _needed(asked, table, allowed)
    total = sum(needed)
    answer = (
        f"{counted(total, 'result')}, {_allowed_words(allowed)} above {level_words(asked)}, would "
        f"show with {typed_percent(table.confidence)} confidence that {_claim(asked, table)}."
    )
    if table.expected_above is not None:
        chance = _comes_out(asked, needed, table.expected_above, allowed)
        answer += (
            f" If {_expected_words(asked, table)} exceed it, the claim comes out in "
            f"{percent(chance)} of such campaigns."
        )
    finding = _finding(asked, needed, allowed, answer, (_step(asked, table, total, allowed),))
    target = f"at least {typed_percent(table.share)} at or below {level_words(asked)}"
    unrounded = math.log1p(-table.confidence) / math.log(table.share)
    plain = asked.population is None and allowed == 0
    return Answered(needed, target, finding, unrounded if plain else None)


def bought(asked: Asked, counts: tuple[int, ...]) -> Finding:
    """Say what given counts could claim, and how many of them may exceed.

    Parameters
    ----------
    asked : Asked
    counts : tuple of int
        Results by stratum.
    """
    table = _table(asked)
    if table.method == "normal":
        return normal_bound.bought(asked, table, counts)
    total, sure = sum(counts), typed_percent(table.confidence)
    allowed = _permitted(asked, table, counts)
    claimed = asked
    if takes_all(asked, counts):
        answer = (
            f"All {total} units of the list are looked at: no more than {allowed} of them may "
            f"exceed {level_words(asked)} for the claim to be true."
        )
    elif allowed is None:
        share = claimed_share(_share_shown(asked, table, counts), up=False)
        claimed = _about(asked, table, share)
        answer = (
            f"{counted(total, 'result')} are too few for the claim: with none of them above "
            f"{level_words(asked)} it can be claimed with {sure} confidence that "
            f"{_claim(claimed, _table(claimed))}."
        )
    else:
        answer = (
            f"{counted(total, 'result')}, {_allowed_words(allowed)} above {level_words(asked)}, "
            f"show with {sure} confidence that {_claim(asked, table)}."
        )
    return _finding(claimed, counts, allowed or 0, answer, ())


def _about(asked: Asked, table: UpperShare, share: float) -> Asked:
    """Give the same question about the share that is left to claim."""
    left = table.model_copy(update={"share": share})
    return replace(asked, objective=asked.objective.model_copy(update={"upper_share": left}))


def _allowed(asked: Asked, table: UpperShare) -> int:
    """Give the number allowed: typed, or the smallest that lets the claim come out."""
    if table.expected_above is None or table.power is None:
        return table.allowed or 0
    if asked.population is None:
        return n_and_allowed(
            table.share, table.confidence, share_above=table.expected_above, power=table.power
        )[1]
    return n_and_allowed_of_list(
        _spoiling(asked, table),
        table.confidence,
        units=asked.population,
        expected=_units_above(asked, table.expected_above),
        power=table.power,
    )[1]


def _needed(asked: Asked, table: UpperShare, allowed: int) -> tuple[int, ...]:
    near = _near(asked, table, allowed)
    return counts_that_notice(
        asked, _spoils(asked, table), table.confidence, allowed=allowed, near=near
    )


def _near(asked: Asked, table: UpperShare, allowed: int) -> int:
    """Give the number without strata; 1 where so many may exceed that the list shows nothing."""
    if asked.population is None:
        return n_by_counting(table.share, table.confidence, rank=allowed + 1)
    spoiling = _spoiling(asked, table)
    if spoiling <= allowed:
        return 1
    return n_to_find(spoiling, table.confidence, units=asked.population, allowed=allowed)


def _spoils(asked: Asked, table: UpperShare) -> float:
    """Give the smallest share above the level that makes the claim untrue."""
    if asked.population is None:
        return 1 - table.share
    return _spoiling(asked, table) / asked.population


def _spoiling(asked: Asked, table: UpperShare) -> int:
    """Count the fewest units above the level that make the claim untrue."""
    return math.floor((1 - table.share) * (asked.population or 0) + 1e-9) + 1


def _permitted(asked: Asked, table: UpperShare, counts: tuple[int, ...]) -> int | None:
    """Give how many of the counts may exceed while the claim stands; None where none may."""

    def too_many(allowed: int) -> bool:
        spoils, sure = _spoils(asked, table), table.confidence
        return not claim_holds(asked, counts, spoils, allowed=allowed, confidence=sure)

    first = smallest(too_many, 0, sum(counts) + 1, back=0)
    return first - 1 if first else None


def _share_shown(asked: Asked, table: UpperShare, counts: tuple[int, ...]) -> float:
    """Give the share that the counts show to lie at or below the level when none exceeds it."""
    low, high = 0.0, 1.0
    for _ in range(50):
        middle = (low + high) / 2
        sure = claim_holds(asked, counts, middle, allowed=0, confidence=table.confidence)
        low, high = (low, middle) if sure else (middle, high)
    return 1 - high


def _comes_out(asked: Asked, counts: tuple[int, ...], above: float, allowed: int) -> float:
    """Give the chance that no more than the allowed exceed, where ``above`` truly do."""
    if not above:
        return 1.0
    if asked.population is not None:
        units = _units_above(asked, above)
        if units <= allowed:
            return 1.0
        above = units / asked.population
    return 1 - chance_noticed(asked, counts, above, allowed=allowed)


def _units_above(asked: Asked, above: float) -> int:
    """Count the units of a list that a share of it comes nearest to, one at least."""
    return max(1, round(above * (asked.population or 0)))


def _expected_words(asked: Asked, table: UpperShare) -> str:
    """Name what may be expected above the level; of a list in whole units."""
    if asked.population is None:
        return typed_percent(_expected(table))
    return f"{_units_above(asked, _expected(table))} of {asked.population}"


def _allowed_words(allowed: int) -> str:
    return "none of them" if allowed == 0 else f"no more than {allowed} of them"


def _claim(asked: Asked, table: UpperShare) -> str:
    if asked.population is None:
        share = typed_percent(table.share)
        return f"at least {share} of {population_words(asked)} do not exceed it"
    most = _spoiling(asked, table) - 1
    return f"no more than {most} of {population_words(asked)} exceed it"


def _step(asked: Asked, table: UpperShare, total: int, allowed: int) -> Step:
    inputs = [
        Quantity("C", "confidence", table.confidence),
        Quantity("c", "results that may exceed", allowed, "results"),
    ]
    if asked.population is None:
        formula = "smallest n with P(X ≤ c) ≤ 1 − C, X binomial with n and 1 − p"
        source = WILKS
        inputs.append(Quantity("p", "share that shall not exceed the level", table.share))
        if allowed == 0:
            formula = "n = ln(1 − C) / ln p"
    else:
        formula = "smallest n with P(X ≤ c) ≤ 1 − C, X hypergeometric with n, D and N"
        source = HYPERGEOMETRIC
        exceeding = _spoiling(asked, table)
        inputs.append(Quantity("D", "fewest units that would spoil the claim", exceeding, "units"))
        inputs.append(Quantity("N", "units in the list", asked.population, "units"))
    plain = asked.population is None and allowed == 0
    unrounded = math.log1p(-table.confidence) / math.log(table.share) if plain else float(total)
    return Step(
        symbol="n",
        meaning="Results that show the share"
        + ("; strata take the worst case" if len(asked.question.parts) > 1 else ""),
        formula=formula,
        inputs=tuple(inputs),
        unrounded=unrounded,
        rounded=float(total),
        unit="results",
        source=source,
    )


def _finding(
    asked: Asked, counts: tuple[int, ...], allowed: int, answer: str, steps: tuple[Step, ...]
) -> Finding:
    table = _table(asked)
    reached = chance_noticed(asked, counts, _spoils(asked, table), allowed=allowed)
    return Finding(
        topic="upper-share",
        title=TITLE,
        answer=answer,
        amounts=(
            Amount("n", "Results", sum(counts), "results"),
            Amount("allowed", "Results that may exceed the level", allowed, "results"),
            Amount("confidence", "Confidence reached", reached),
            Amount(
                "chance_at_a_fifth",
                "Chance that the claim comes out where a fifth of the share exceeds",
                _comes_out(asked, counts, (1 - table.share) / 5, allowed),
            ),
        ),
        columns=("may exceed", "results at least", *_chance_heads(asked, table)),
        rows=_rows(asked, table),
        steps=steps,
        assumptions=counting_assumptions(asked, allowed=allowed),
        warnings=_warnings(asked, counts, allowed),
        sources=(WILKS,) if asked.population is None else (HYPERGEOMETRIC,),
        picture=None if takes_all(asked, counts) else _picture(asked, counts, allowed),
    )


def _expected(table: UpperShare) -> float:
    return (1 - table.share) / 5 if table.expected_above is None else table.expected_above


def _chance_heads(asked: Asked, table: UpperShare) -> tuple[str]:
    return (f"comes out if {_expected_words(asked, table)} exceed",)


def _rows(asked: Asked, table: UpperShare) -> tuple[tuple[str, ...], ...]:
    """List numbers allowed with the results they take and how often the claim comes out."""
    rows = []
    for allowed in range(SHOWN):
        if asked.population is not None and _spoiling(asked, table) <= allowed:
            break
        counts = _needed(asked, table, allowed)
        chance = _comes_out(asked, counts, _expected(table), allowed)
        rows.append((str(allowed), str(sum(counts)), percent(chance)))
    return tuple(rows)


def _warnings(asked: Asked, counts: tuple[int, ...], allowed: int) -> tuple[str, ...]:
    table = _table(asked)
    place = "place" if asked.population is None else "unit"
    chance = _comes_out(asked, counts, _expected(table), allowed)
    rest = typed_percent(1 - table.share)
    if asked.population is not None:
        rest = f"{_spoiling(asked, table) - 1} of {asked.population}"
    lines = [
        *level_warning(asked),
        *limit_warning(asked),
        *uneven_warning(asked, counts, _near(asked, table, allowed)),
        f"It says nothing about the mean, nor that no {place} exceeds {level_words(asked)}: up to "
        f"{rest} may, by any amount.",
    ]
    if table.expected_above is None and chance < 0.8:
        lines.append(
            f"Even where only {_expected_words(asked, table)} exceed, the claim fails in "
            f"{percent(1 - chance)} of such campaigns. Taking more results and allowing some of "
            "them above the level helps (expected_above with power)."
        )
    return tuple(lines)


def _picture(asked: Asked, counts: tuple[int, ...], allowed: int) -> Picture:
    table = _table(asked)
    top = min(2 * (1 - table.share), 0.999)
    xs = [top * k / 60 for k in range(61)]
    if asked.population is not None:
        xs = sorted({round(x * asked.population) / asked.population for x in xs})
    ys = [_comes_out(asked, counts, x, allowed) for x in xs]
    total, at = sum(counts), _spoils(asked, table)
    edge = _comes_out(asked, counts, at, allowed)
    spoils = typed_percent(1 - table.share)
    if asked.population is not None:
        spoils = f"{_spoiling(asked, table)} of {asked.population}"
    return Picture(
        kind="lines",
        caption="How often the claim comes out, by what is truly above the level.",
        alternative=f"A falling line: 100 % where nothing exceeds, {percent(edge)} where just "
        f"{spoils} exceed.",
        x_label="truly above the level, %",
        y_label="chance that the claim comes out, %",
        series=(
            Series(f"{total} results", tuple(100 * x for x in xs), tuple(100 * y for y in ys)),
        ),
        marks=(("claim untrue from here", 100 * at),),
        levels=(("1 − confidence", 100 * (1 - table.confidence)),),
    )


def _table(asked: Asked) -> UpperShare:
    table = asked.objective.upper_share
    if table is None:
        raise table_missing(question="upper_share")
    return table
