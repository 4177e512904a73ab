"""Which units of a list exceed the level: every unit sampled, pools tested first."""

from collections.abc import Iterator

from fieldplan.base.errors import CampaignError, DesignError
from fieldplan.base.working import Quantity, Step
from fieldplan.campaign.questions.which_exceed import WhichExceed
from fieldplan.sizing.asked.model import Answered, Asked
from fieldplan.sizing.model import Amount, Finding, Picture, Series
from fieldplan.sizing.words import counted, figure, typed, typed_percent, with_unit
from fieldplan.stats.pooling import analyses_of_units, best_pool, expected_tests, largest_pool

TOPIC = "which-exceed"
DORFMAN = "Dorfman 1943, Annals of Mathematical Statistics 14:436 (from memory)"


def count(asked: Asked) -> Answered:
    """Take every unit of the list, and say how few analyses tell which exceed.

    Parameters
    ----------
    asked : Asked

    Returns
    -------
    Answered

    Raises
    ------
    DesignError
        The population is no list, or the reporting limit is above the level.
    """
    units = tuple(part.population or 0 for part in asked.question.parts)
    if 0 in units:
        message = (
            'question "which-exceed" asks about the units of a list, and this population is an '
            'area; write kind = "list" with a list_file, or ask another question.'
        )
        raise DesignError(message)
    return Answered(units, f"every unit above {_level(asked)} found", bought(asked, units))


def bought(asked: Asked, counts: tuple[int, ...]) -> Finding:
    """Say how many analyses tell which of so many units exceed.

    Parameters
    ----------
    asked : Asked
    counts : tuple of int
        Units sampled, by stratum.
    """
    table = _table(asked)
    units, cap = sum(counts), _cap(asked, table)
    size, tests = _best(table.share, cap, units)
    return Finding(
        topic=TOPIC,
        title="Which units exceed",
        answer=_answer(asked, units, size, tests),
        amounts=(
            Amount("pool_size", "Units in a pool", size, "units"),
            Amount("expected_analyses", "Analyses to expect", tests, "analyses"),
            Amount("analyses_per_unit", "The same for each unit", tests / units),
            Amount("largest_pool", "Most units that a pool may hold", cap, "units"),
        ),
        columns=("Units in a pool", "Analyses for each unit"),
        rows=tuple(_rows(table.share, size, cap)),
        steps=_steps(table.share, size, units, tests),
        assumptions=(
            "Units exceed the level independently of each other, each with the stated chance; "
            "where they come in clusters, pools of neighbours need fewer analyses.",
            "The analysis of a pool is never wrong. A pool takes an equal part of each jar, and "
            "the rest is kept for single analyses within its holding time.",
            "Every unit has a jar of its own; which jars make a pool is agreed with the "
            "laboratory, and no form of this version says it.",
        ),
        warnings=tuple(_warnings(asked, size, cap)),
        sources=(DORFMAN,),
        picture=_picture(table.share, size, cap) if size > 1 else None,
    )


def _best(share: float, cap: int | None, units: int) -> tuple[int, float]:
    """Give the best pool and its analyses; single analyses where it saves less than one of them."""
    size = best_pool(share, largest=cap)
    tests = analyses_of_units(share, size, units)
    return (size, tests) if tests <= units - 1 else (1, float(units))


def _table(asked: Asked) -> WhichExceed:
    table = asked.objective.which_exceed
    if table is None:
        message = "[objective.which_exceed] is missing; write share below [[objective]]."
        raise CampaignError(message)
    return table


def _level(asked: Asked) -> str:
    if asked.level is None:
        return "the level"
    return with_unit(typed(asked.level), asked.question.unit)


def _cap(asked: Asked, table: WhichExceed) -> int | None:
    """Give the most units of a pool: as typed, and so that dilution leaves one unit visible."""
    caps = [table.largest_pool] if table.largest_pool is not None else []
    if asked.level is not None and asked.analyte.reporting_limit is not None:
        caps.append(largest_pool(asked.level, asked.analyte.reporting_limit))
    return min(caps, default=None)


def _answer(asked: Asked, units: int, size: int, tests: float) -> str:
    share = typed_percent(_table(asked).share)
    if size == 1:
        return (
            f"With {share} of units expected above {_level(asked)} no pool saves an analysis "
            f"in {units}: all of them are analysed one by one."
        )
    line = (
        f"Pools of {size}, and single analyses where a pool shows something, tell which of "
        f"{counted(units, 'unit')} exceed {_level(asked)} with about {tests:.0f} analyses in place "
        f"of {units}, if {share} of units do."
    )
    prices = asked.question.prices
    if prices is None or not prices.per_analysis:
        return line
    saved = (units - tests) * prices.per_analysis
    return f"{line} That saves about {saved:.0f} {prices.currency} of the expected cost."


def _rows(share: float, size: int, cap: int | None) -> Iterator[tuple[str, ...]]:
    for units in sorted({1, 2, 3, 4, 5, 8, 10, 15, 20, 30, size}):
        if cap is None or units <= cap:
            yield f"{units}", figure(expected_tests(share, units))


def _steps(share: float, size: int, units: int, tests: float) -> tuple[Step, ...]:
    if size == 1:
        return ()
    each = expected_tests(share, size)
    return (
        Step(
            symbol="e",
            meaning="Analyses to expect for each unit",
            formula="e = 1/m + 1 − (1 − p)^m",
            inputs=(
                Quantity("m", "units in a pool, the size with the fewest analyses", size, "units"),
                Quantity("p", "share of units expected above the level", share),
            ),
            unrounded=each,
            rounded=each,
            unit="analyses",
            source=DORFMAN,
        ),
        Step(
            symbol="analyses",
            meaning="Analyses to expect in all; a last, smaller pool with its own",
            formula="analyses = e · N",
            inputs=(Quantity("N", "units of the list", units, "units"),),
            unrounded=tests,
            rounded=tests,
            unit="analyses",
            source=DORFMAN,
        ),
    )


def _warnings(asked: Asked, size: int, cap: int | None) -> Iterator[str]:
    limit, level = asked.analyte.reporting_limit, asked.level
    if size > 1 and level is not None and limit is not None:
        reach = with_unit(figure(level / size), asked.question.unit)
        yield (
            f"In a pool of {size} a single unit at the level among units of nothing gives {reach}; "
            "single analyses follow every pool that is not below that, and the laboratory reports "
            f"from {with_unit(typed(limit), asked.question.unit)}."
        )
    elif size > 1:
        yield (
            "Dilution is not looked at: give the action level and the reporting limit, for a unit "
            f"at the level gives 1/{size} of it in a pool of {size}."
        )
    if cap is not None and best_pool(_table(asked).share) > cap:
        yield (
            f"Larger pools would need fewer analyses, but {cap} units are the most that one may "
            "hold."
        )


def _picture(share: float, size: int, cap: int | None) -> Picture:
    most = min(max(2 * size + 2, 10), cap or 10**6)
    sizes = tuple(range(1, most + 1))
    return Picture(
        kind="lines",
        caption="Analyses for each unit against the size of a pool. Above 1 pools cost more.",
        alternative=f"Analyses for each unit fall to {expected_tests(share, size):.2f} at {size} "
        "units in a pool and rise again.",
        x_label="units in a pool",
        y_label="analyses for each unit",
        series=(
            Series("expected", sizes, tuple(expected_tests(share, m) for m in sizes), "points"),
        ),
        marks=((f"{size} chosen", float(size)),),
        levels=(("one analysis a unit", 1.0),),
    )
