"""A share told from a stated one: results, and the count among them that decides."""

from fieldplan.base.errors import DesignError
from fieldplan.base.working import Quantity, Step
from fieldplan.campaign.questions.share import ShareTable
from fieldplan.sizing.asked.counting_claims import (
    EVEN,
    HYPERGEOMETRIC,
    evenness,
    exceeding_units,
    found_warning,
    level_words,
    population_words,
)
from fieldplan.sizing.asked.model import Answered, Asked
from fieldplan.sizing.model import Amount, Finding, Picture, Series
from fieldplan.sizing.words import counted, percent, typed_percent
from fieldplan.stats.lots import chance_of_at_most, n_and_allowed_of_list
from fieldplan.stats.precision import smallest
from fieldplan.stats.tolerance import SLACK, chance_of_exceedances, n_and_allowed

TITLE = "A share told from a stated one"
BINOMIAL = (
    "exact binomial test; Conover 1999, Practical Nonparametric Statistics, ch. 3 (from memory)"
)


def count_compared(asked: Asked, table: ShareTable) -> Answered:
    """Count the results that tell the expected share from the stated one.

    Parameters
    ----------
    asked : Asked
    table : ShareTable

    Raises
    ------
    DesignError
        The two shares are too near to each other for any number of results.
    """
    stated, expected, power = _turned(table)
    if asked.population is None:
        total = n_and_allowed(
            1 - stated, 1 - (table.alpha or 0.0), share_above=expected, power=power
        )[0]
    else:
        total = n_and_allowed_of_list(
            exceeding_units(asked, stated),
            1 - (table.alpha or 0.0),
            units=asked.population,
            expected=round(expected * asked.population),
            power=power,
        )[0]
    needed = asked.shared(total)
    if evenness(asked, needed) < EVEN:
        message = (
            "a count that decides gives every result the same say, and these strata are not "
            'sampled in proportion to their size; write allocation = "proportional".'
        )
        raise DesignError(message)
    finding = compared(asked, table, needed, decides=True)
    side = "below" if _below(table) else "above"
    return Answered(needed, f"a share {side} {typed_percent(table.compare_with or 0.0)}", finding)


def compared(
    asked: Asked, table: ShareTable, counts: tuple[int, ...], *, decides: bool = False
) -> Finding:
    """Say which count decides at given counts, and how often it comes out so.

    Parameters
    ----------
    asked : Asked
    table : ShareTable
    counts : tuple of int
        Results by stratum.
    decides : bool
        These counts are the answer, so that the working belongs beside it.
    """
    total = sum(counts)
    expected = _turned(table)[1]
    allowed = _critical(asked, table, total)
    power = 0.0 if allowed is None else _at_most(asked, allowed, total, expected)
    return Finding(
        topic="share",
        title=TITLE,
        answer=_answer(asked, table, total, allowed),
        amounts=(
            Amount("n", "Results", total, "results"),
            Amount("decides_at", "Count that decides", _decides_at(table, total, allowed)),
            Amount("power", "Chance to tell the expected share from the stated one", power),
            Amount(
                "alpha",
                f"Chance to do so where {_null_words(asked, table)}",
                0.0 if allowed is None else _at_most(asked, allowed, total, _null(asked, table)),
            ),
        ),
        steps=(_step(asked, table, total),) if decides else (),
        assumptions=(
            "Every place or unit is as likely to be drawn as any other; each result is yes or no, "
            "and right.",
            "The count that decides follows from the number of results that come in: it is fixed "
            "by the table of the test, not chosen afterwards.",
        ),
        warnings=(*found_warning(asked), *_warnings(asked, counts)),
        sources=(BINOMIAL if asked.population is None else HYPERGEOMETRIC,),
        picture=_picture(asked, table, total, allowed),
    )


def _below(table: ShareTable) -> bool:
    """Tell whether the expected share lies below the stated one."""
    return (table.expected or 0.0) < (table.compare_with or 0.0)


def _turned(table: ShareTable) -> tuple[float, float, float]:
    """Give stated share, expected share and power, turned so that the expected one is smaller."""
    stated, expected = table.compare_with or 0.0, table.expected or 0.0
    if not _below(table):
        stated, expected = 1 - stated, 1 - expected
    return stated, expected, 1 - (table.beta or 0.0)


def _null(asked: Asked, table: ShareTable) -> float:
    """Give the turned share where alpha is kept: as stated, of a list the next whole unit."""
    stated = _turned(table)[0]
    return stated if asked.population is None else exceeding_units(asked, stated) / asked.population


def _null_units(asked: Asked, table: ShareTable) -> int:
    """Count the units of a list that the stated share still allows: most, or fewest, of them."""
    counted_from_here = exceeding_units(asked, _turned(table)[0])
    units = asked.population or 0
    return counted_from_here if _below(table) else units - counted_from_here


def _expected_units(asked: Asked, table: ShareTable) -> int:
    """Count the units of a list that the expected share comes nearest to."""
    units = asked.population or 0
    turned = round(_turned(table)[1] * units)
    return turned if _below(table) else units - turned


def _null_words(asked: Asked, table: ShareTable) -> str:
    if asked.population is None:
        return "the stated share is true"
    bound = "no fewer than" if _below(table) else "no more than"
    return f"{bound} {_null_units(asked, table)} of {asked.population} have it"


def _at_most(asked: Asked, allowed: int, n: int, share: float) -> float:
    """Give P(X ≤ allowed) where just this share has what is counted."""
    if asked.population is None:
        return chance_of_exceedances(n, share, allowed=allowed)
    having = round(share * asked.population)
    return chance_of_at_most(allowed, n=n, exceeding=having, units=asked.population)


def _critical(asked: Asked, table: ShareTable, n: int) -> int | None:
    """Give the largest count that still speaks against the stated share; None where none does."""
    stated = _null(asked, table)

    def too_many(count: int) -> bool:
        return _at_most(asked, count, n, stated) > (table.alpha or 0.0) + SLACK

    first = smallest(too_many, 0, n + 1, back=0)
    return first - 1 if first else None


def _decides_at(table: ShareTable, n: int, allowed: int | None) -> int | None:
    if allowed is None:
        return None
    return allowed if _below(table) else n - allowed


def _answer(asked: Asked, table: ShareTable, n: int, allowed: int | None) -> str:
    stated, expected = table.compare_with or 0.0, table.expected or 0.0
    what = f"above {level_words(asked)}"
    if asked.level is None:
        what = "having it" if asked.frame is None else f"with {asked.analyte.label} found"
    side = "below" if _below(table) else "above"
    if allowed is None:
        return (
            f"{counted(n, 'result')} cannot show the share {what} to be {side} "
            f"{typed_percent(stated)}, however they fall."
        )
    decides = _decides_at(table, n, allowed)
    how = f"no more than {decides}" if _below(table) else f"at least {decides}"
    power = _at_most(asked, allowed, n, _turned(table)[1])
    shown, true = f"{side} {typed_percent(stated)}", f"it is {typed_percent(expected)}"
    if asked.population is not None:
        bound, units = "fewer" if _below(table) else "more", asked.population
        shown += f", that is {bound} than {_null_units(asked, table)} of {units}"
        having = "have it" if asked.level is None else "exceed it"
        true = f"{_expected_units(asked, table)} of {units} {having}"
    return (
        f"{counted(n, 'result')}, {how} of them {what}, would show the share of "
        f"{population_words(asked)} to be {shown}; if {true}, that happens in {percent(power)} of "
        "such campaigns."
    )


def _step(asked: Asked, table: ShareTable, n: int) -> Step:
    stated, expected, power = _turned(table)
    law = "binomial" if asked.population is None else "hypergeometric"
    inputs = [
        Quantity(
            "p0", "stated share (counted from the other side where it is the smaller)", stated
        ),
        Quantity("p1", "expected share, counted likewise", expected),
        Quantity("α", "chance to tell them apart where p0 is true", table.alpha or 0.0),
        Quantity("power", "chance to tell them apart where p1 is true", power),
    ]
    if asked.population is not None:
        inputs.append(Quantity("N", "units in the list", asked.population, "units"))
    return Step(
        symbol="n",
        meaning="Results with the largest count c that keeps α; the first whose power is enough",
        formula=f"P(X ≤ c | p0) ≤ α and P(X ≤ c | p1) ≥ power, X {law}",
        inputs=tuple(inputs),
        unrounded=float(n),
        rounded=float(n),
        unit="results",
        source=BINOMIAL if asked.population is None else HYPERGEOMETRIC,
    )


def _warnings(asked: Asked, counts: tuple[int, ...]) -> tuple[str, ...]:
    lines = [
        "With a few results more the chance can fall a little before it rises, because counts are "
        "whole.",
    ]
    if evenness(asked, counts) < EVEN:
        lines.append(
            "These strata are not sampled in proportion to their size: the count of all results "
            "together decides nothing."
        )
    elif len(asked.question.parts) > 1:
        lines.append(
            "Counted as one simple random sample: sample the strata in proportion to their size."
        )
    return tuple(lines)


def _picture(asked: Asked, table: ShareTable, n: int, allowed: int | None) -> Picture:
    stated, expected = table.compare_with or 0.0, table.expected or 0.0
    low, high = sorted((stated, expected))
    spread = high - low
    xs = [min(max(low - spread + 3 * spread * k / 60, 0.0), 1.0) for k in range(61)]
    if asked.population is not None:
        xs = sorted({round(x * asked.population) / asked.population for x in xs})
        stated = _null_units(asked, table) / asked.population
        expected = _expected_units(asked, table) / asked.population
    turned = [x if _below(table) else 1 - x for x in xs]
    ys = [0.0 if allowed is None else _at_most(asked, allowed, n, x) for x in turned]
    side = "below" if _below(table) else "above"
    return Picture(
        kind="lines",
        caption=f"How often the share comes out {side} the stated one, by the true share.",
        alternative=f"A line from {percent(ys[0])} at the smallest share shown to "
        f"{percent(ys[-1])} at the largest.",
        x_label="true share, %",
        y_label=f"comes out {side}, %",
        series=(Series(f"{n} results", tuple(100 * x for x in xs), tuple(100 * y for y in ys)),),
        marks=(("stated", 100 * stated), ("expected", 100 * expected)),
    )
