"""None of the results may exceed the level: how many notice a share, or units, that do."""

import math

from fieldplan.base.errors import DesignError
from fieldplan.base.working import Quantity, Step
from fieldplan.campaign.questions.all_clear import AllClear
from fieldplan.sizing.asked.counting_claims import (
    HYPERGEOMETRIC,
    WILKS,
    chance_noticed,
    claim_holds,
    claimed_share,
    counting_assumptions,
    counts_that_notice,
    exceeding_units,
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
from fieldplan.stats.lots import n_to_find, unrounded_to_find
from fieldplan.stats.precision import smallest
from fieldplan.stats.tolerance import n_by_counting

TITLE = "None may exceed the level"


def count(asked: Asked) -> Answered:
    """Count the results of which one at least exceeds the level, with the stated chance.

    Parameters
    ----------
    asked : Asked

    Returns
    -------
    Answered

    Raises
    ------
    DesignError
        The share or the units cannot be noticed.
    """
    table = _table(asked)
    share = _share(asked, table)
    near, unrounded = _near(asked, share, table.confidence)
    needed = counts_that_notice(asked, share, table.confidence, allowed=0, near=near)
    finding = _finding(asked, needed, _answer(asked, needed), _step(asked, needed, unrounded))
    return Answered(needed, f"none of the results above {level_words(asked)}", finding, unrounded)


def bought(asked: Asked, counts: tuple[int, ...]) -> Finding:
    """Say how likely given counts are to notice the share, and what they could claim.

    Parameters
    ----------
    asked : Asked
    counts : tuple of int
        Results by stratum.
    """
    table = _table(asked)
    if takes_all(asked, counts):
        answer = (
            f"All {asked.population} units of the list are looked at: none of them exceeds "
            f"{level_words(asked)} if no result does."
        )
        return _finding(asked, counts, answer, None)
    chance = chance_noticed(asked, counts, _share(asked, table), allowed=0)
    claim = _claimed(asked, counts, table.confidence)
    answer = (
        f"If none of {counted(sum(counts), 'result')} exceeds {level_words(asked)}, it can be "
        f"claimed with {typed_percent(table.confidence)} confidence that {claim}. Were "
        f"{_unnoticed(asked, table)} above it, one at least would show in {percent(chance)} of "
        "such campaigns."
    )
    return _finding(asked, counts, answer, None)


def _near(asked: Asked, share: float, confidence: float) -> tuple[int, float]:
    """Give the number for one stratum, and the closed form before rounding."""
    if asked.population is None:
        n = n_by_counting(1 - share, confidence)
        return n, math.log1p(-confidence) / math.log1p(-share)
    exceeding = exceeding_units(asked, share)
    n = n_to_find(exceeding, confidence, units=asked.population)
    return n, unrounded_to_find(exceeding, confidence, units=asked.population)


def _answer(asked: Asked, counts: tuple[int, ...]) -> str:
    table = _table(asked)
    total, level = sum(counts), level_words(asked)
    if takes_all(asked, counts):
        return (
            f"All {total} units of the list must be looked at to notice {_unnoticed(asked, table)} "
            f"above {level} with {typed_percent(table.confidence)} confidence."
        )
    if asked.population is not None and exceeding_units(asked, _share(asked, table)) == 1:
        left = counted(asked.population - total, "unit")
        return (
            f"{total} of the {asked.population} units of the list must be looked at to notice "
            f"{_unnoticed(asked, table)} above {level} with {typed_percent(table.confidence)} "
            f"confidence; of the {left} left nothing is known."
        )
    return (
        f"{counted(total, 'result')}, none of them above {level}, would show with "
        f"{typed_percent(table.confidence)} confidence that {_claim(asked, table)}."
    )


def _claim(asked: Asked, table: AllClear) -> str:
    if asked.population is None:
        share = typed_percent(_share(asked, table))
        return f"less than {share} of {population_words(asked)} exceed it"
    exceeding = exceeding_units(asked, _share(asked, table))
    return f"fewer than {exceeding} of {population_words(asked)} exceed it"


def _claimed(asked: Asked, counts: tuple[int, ...], confidence: float) -> str:
    """Say what so many results could claim at the stated confidence."""
    noticed = _smallest_noticed(asked, counts, confidence)
    if asked.population is None:
        share = typed_percent(claimed_share(noticed, up=True))
        return f"less than {share} of {population_words(asked)} exceed it"
    most = round(noticed) - 1
    if most == 0:
        left = counted((asked.population or 0) - sum(counts), "unit")
        return f"none of {population_words(asked)} exceeds it, though {left} stay unseen"
    return f"no more than {most} of {population_words(asked)} exceed it"


def _smallest_noticed(asked: Asked, counts: tuple[int, ...], confidence: float) -> float:
    """Give the smallest share above the level, or units of a list, noticed with the confidence."""

    def seen(share: float) -> bool:
        return claim_holds(asked, counts, share, allowed=0, confidence=confidence)

    if asked.population is not None:
        units = asked.population
        return smallest(lambda k: seen(k / units), 1, units + 1, back=0)
    low, high = 0.0, 1.0
    for _ in range(50):
        middle = (low + high) / 2
        low, high = (low, middle) if seen(middle) else (middle, high)
    return high


def _unnoticed(asked: Asked, table: AllClear) -> str:
    if asked.population is None:
        return f"{typed_percent(_share(asked, table))} of {population_words(asked)}"
    exceeding = exceeding_units(asked, _share(asked, table))
    return f"{counted(exceeding, 'unit')} of {asked.population}"


def _step(asked: Asked, counts: tuple[int, ...], unrounded: float) -> Step:
    table = _table(asked)
    share = _share(asked, table)
    confidence = Quantity("C", "confidence", table.confidence)
    if asked.population is None:
        return Step(
            symbol="n",
            meaning="Results of which at least one exceeds the level with the stated chance",
            formula="n = ln(1 − C) / ln(1 − p)",
            inputs=(confidence, Quantity("p", "share that must not stay unnoticed", share)),
            unrounded=unrounded,
            rounded=float(sum(counts)),
            unit="results",
            source=WILKS,
        )
    return Step(
        symbol="n",
        meaning="Units of which at least one exceeds with the stated chance; first pass "
        "(1 − (1 − C)^(1/D)) (N − (D − 1)/2), then counted exactly",
        formula="smallest n with 1 − C(N − D, n) / C(N, n) ≥ C",
        inputs=(
            confidence,
            Quantity("D", "units that must not stay unnoticed", exceeding_units(asked, share)),
            Quantity("N", "units in the list", asked.population, "units"),
        ),
        unrounded=unrounded,
        rounded=float(sum(counts)),
        unit="results",
        source=f"{HYPERGEOMETRIC}; first pass Cannon & Roe 1982, Livestock Disease Surveys "
        "(from memory)",
    )


def _finding(asked: Asked, counts: tuple[int, ...], answer: str, step: Step | None) -> Finding:
    table = _table(asked)
    share = _share(asked, table)
    rows = [
        (s, 1 - chance_noticed(asked, counts, s, allowed=0)) for s in _shares_shown(asked, share)
    ]
    chance = chance_noticed(asked, counts, share, allowed=0)
    return Finding(
        topic="all-clear",
        title=TITLE,
        answer=answer,
        amounts=(
            Amount("n", "Results, none of which may exceed", sum(counts), "results"),
            Amount("chance_to_notice", "Chance to notice what must not stay unnoticed", chance),
            _noticed_amount(asked, counts, table.confidence),
        ),
        columns=("truly above the level", "chance that no result exceeds"),
        rows=tuple((_row_words(asked, s), percent(unseen)) for s, unseen in rows),
        steps=() if step is None else (step,),
        assumptions=counting_assumptions(asked, allowed=0),
        warnings=_warnings(asked, counts, share),
        sources=(WILKS,) if asked.population is None else (HYPERGEOMETRIC,),
        picture=None
        if takes_all(asked, counts)
        else _picture(asked, counts, share, table.confidence),
    )


def _noticed_amount(asked: Asked, counts: tuple[int, ...], confidence: float) -> Amount:
    noticed = _smallest_noticed(asked, counts, confidence)
    sure = typed_percent(confidence)
    if asked.population is None:
        return Amount(
            "smallest_share_noticed", f"Smallest share above the level noticed with {sure}", noticed
        )
    return Amount(
        "most_units_unseen",
        f"Most units that may exceed unseen, at {sure}",
        round(noticed) - 1,
        "units",
    )


def _shares_shown(asked: Asked, share: float) -> list[float]:
    shares = [share * factor for factor in (0.1, 0.2, 0.5, 1.0, 2.0) if share * factor < 1]
    if asked.population is None:
        return shares
    units = sorted({exceeding_units(asked, s) for s in shares})
    return [k / asked.population for k in units]


def _row_words(asked: Asked, share: float) -> str:
    if asked.population is None:
        return typed_percent(share)
    return f"{exceeding_units(asked, share)} of {asked.population}"


def _warnings(asked: Asked, counts: tuple[int, ...], share: float) -> tuple[str, ...]:
    lines = [*level_warning(asked), *limit_warning(asked), "It says nothing about the mean."]
    if not takes_all(asked, counts):
        few = share / 5 if asked.population is None else 1 / asked.population
        unseen = 1 - chance_noticed(asked, counts, few, allowed=0)
        lines[-1] = (
            f"It says nothing about the mean, nor that no {_place(asked)} exceeds "
            f"{level_words(asked)}: {_row_words(asked, few)} above it would stay unseen in "
            f"{percent(unseen)} of such campaigns and spoil the claim in {percent(1 - unseen)}."
        )
    lines += uneven_warning(asked, counts, _near(asked, share, _table(asked).confidence)[0])
    lines.append(
        "One result above the level ends the claim: it is neither dropped nor sampled away. What "
        "follows is for the people who set the level to say."
    )
    return tuple(lines)


def _place(asked: Asked) -> str:
    return "place" if asked.population is None else "unit"


def _picture(asked: Asked, counts: tuple[int, ...], share: float, confidence: float) -> Picture:
    top = min(2 * share, 0.999)
    xs = [top * k / 60 for k in range(61)]
    if asked.population is not None:
        most = exceeding_units(asked, top)
        xs = sorted({round(most * k / 60) / asked.population for k in range(61)})
    ys = [1 - chance_noticed(asked, counts, x, allowed=0) if x else 1.0 for x in xs]
    total = sum(counts)
    return Picture(
        kind="lines",
        caption=f"How often none of {total} results exceeds the level, by what is truly above it.",
        alternative=f"A falling line from 100 % at no share above the level to {percent(ys[-1])} "
        f"at {percent(xs[-1])}.",
        x_label="truly above the level, %",
        y_label="chance that no result exceeds, %",
        series=(
            Series(f"{total} results", tuple(100 * x for x in xs), tuple(100 * y for y in ys)),
        ),
        marks=(("must not stay unnoticed", 100 * share),),
        levels=(("1 − confidence", 100 * (1 - confidence)),),
    )


def _share(asked: Asked, table: AllClear) -> float:
    """Give the share that must not stay unnoticed; units of a list as their share."""
    if table.units is None:
        return table.share or 0.0
    if asked.population is None:
        message = (
            "units are counted in a list, and this population is an area; write share instead."
        )
        raise DesignError(message)
    if table.units > asked.population:
        message = (
            f"{table.units} units must not stay unnoticed, and the list has {asked.population}; "
            "write a smaller number."
        )
        raise DesignError(message)
    return table.units / asked.population


def _table(asked: Asked) -> AllClear:
    table = asked.objective.all_clear
    if table is None:
        raise table_missing(question="all_clear")
    return table
