"""A share of places or units: how many results pin it down, or tell it from another share."""

import math

from fieldplan.base.errors import DesignError
from fieldplan.base.working import Quantity, Step
from fieldplan.campaign.questions.share import ShareTable
from fieldplan.sizing.asked.counting_claims import (
    HYPERGEOMETRIC,
    found_warning,
    level_words,
    population_words,
    table_missing,
    takes_all,
)
from fieldplan.sizing.asked.model import Answered, Asked
from fieldplan.sizing.asked.share_comparison import compared, count_compared
from fieldplan.sizing.asked.weighted_share import counts_worth, weighting_words, worth
from fieldplan.sizing.model import Amount, Finding, Picture, Series
from fieldplan.sizing.words import counted, figure, typed, typed_percent
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.precision import whole
from fieldplan.stats.proportions import (
    expected_reach,
    n_for_expected_reach,
    n_for_margin,
    unrounded_for_listed_share,
    unrounded_for_margin,
)

TITLE = "A share of the population"
COCHRAN = "Cochran 1977, Sampling Techniques, 3rd ed., sec. 4.4"
CLOPPER = "Clopper & Pearson 1934, Biometrika 26:404 (from memory)"


def count(asked: Asked) -> Answered:
    """Count the results that pin the share down, or tell it from another.

    Parameters
    ----------
    asked : Asked

    Returns
    -------
    Answered

    Raises
    ------
    DesignError
        The margin or the comparison asks for more than can be had.
    """
    table = _table(asked)
    if table.margin is None:
        return count_compared(asked, table)
    margin, expected = table.margin, _expected(table)
    confidence, kind = asked.question.confidence, asked.question.interval
    counting = n_for_margin if table.method == "normal" else n_for_expected_reach
    total = counting(expected, margin, confidence=confidence, kind=kind, units=asked.population)
    needed = counts_worth(asked, total)
    reach = _reach(asked, table, needed)
    answer = (
        f"{counted(sum(needed), 'result')} pin down the share of {population_words(asked)} "
        f"{_what(asked)}: {_reach_words(asked, reach)}, if the share is near "
        f"{typed_percent(expected)}."
    )
    finding = _finding(asked, table, needed, answer, _steps(asked, table, needed))
    endless = unrounded_for_margin(expected, margin, confidence=confidence, kind=kind)
    target = f"a share to within {typed(100 * margin)} points"
    return Answered(needed, target, finding, endless)


def bought(asked: Asked, counts: tuple[int, ...]) -> Finding:
    """Say to within what given counts pin the share down, or what they tell apart.

    Parameters
    ----------
    asked : Asked
    counts : tuple of int
        Results by stratum.
    """
    table = _table(asked)
    if table.margin is None:
        return compared(asked, table, counts)
    if takes_all(asked, counts):
        answer = (
            f"All {sum(counts)} units of the list are looked at, so the share of them "
            f"{_what(asked)} is known but for the laboratory's error."
        )
        return _finding(asked, table, counts, answer, ())
    reach = _reach(asked, table, counts)
    answer = (
        f"{counted(sum(counts), 'result')} pin down the share of {population_words(asked)} "
        f"{_what(asked)}: {_reach_words(asked, reach)}, if the share is near "
        f"{typed_percent(_expected(table))}."
    )
    return _finding(asked, table, counts, answer, ())


def _expected(table: ShareTable) -> float:
    return 0.5 if table.expected is None else table.expected


def _what(asked: Asked) -> str:
    if asked.level is not None:
        return f"above {level_words(asked)}"
    return "that have it" if asked.frame is None else f"with {asked.analyte.label} found in them"


def _reach_words(asked: Asked, reach: float) -> str:
    question = asked.question
    sure, points = typed_percent(question.confidence), f"{figure(100 * reach)} points"
    if question.interval == "two-sided":
        return f"the {sure} interval is expected to reach {points} to either side"
    side = "above" if question.interval == "upper-limit" else "below"
    return f"the {sure} limit is expected {points} {side} the share"


def _reach(asked: Asked, table: ShareTable, counts: tuple[int, ...]) -> float:
    """Give the width to expect: exact interval, or the normal formula the other way round."""
    question, expected, n = asked.question, _expected(table), worth(asked, counts)
    if table.method == "exact":
        return expected_reach(
            expected,
            n,
            confidence=question.confidence,
            kind=question.interval,
            units=asked.population,
        )
    z = t_quantile(math.inf, confidence=question.confidence, kind=question.interval)
    units = asked.population
    left = 1.0 if units is None else max(units - n, 0) / max(units - 1, 1)
    return z * math.sqrt(expected * (1 - expected) * left / n)


def _steps(asked: Asked, table: ShareTable, counts: tuple[int, ...]) -> tuple[Step, ...]:
    question, expected = asked.question, _expected(table)
    margin = table.margin or 0.0
    z = t_quantile(math.inf, confidence=question.confidence, kind=question.interval)
    first = unrounded_for_margin(
        expected, margin, confidence=question.confidence, kind=question.interval
    )
    steps = [
        Step(
            symbol="n0",
            meaning="Results for the margin by the normal formula",
            formula="n0 = z² p (1 − p) / d²",
            inputs=(
                Quantity("z", f"normal quantile, {question.interval}", z),
                Quantity("p", "share to expect", expected),
                Quantity("d", "margin", margin),
            ),
            unrounded=first,
            rounded=float(whole(first)),
            unit="results",
            source=COCHRAN,
        )
    ]
    if asked.population is not None:
        steps.append(_listed(first, asked.population))
    if table.method == "exact":
        steps.append(_exact(asked, table, counts))
    return tuple(steps)


def _listed(first: float, units: int) -> Step:
    listed = unrounded_for_listed_share(first, units)
    return Step(
        symbol="n",
        meaning="The same for a list of N units",
        formula="n = n0 / (1 + (n0 − 1) / N)",
        inputs=(
            Quantity("n0", "results from an endless population, unrounded", first),
            Quantity("N", "units in the list", units, "units"),
        ),
        unrounded=listed,
        rounded=float(min(whole(listed), units)),
        unit="results",
        source=COCHRAN,
    )


def _exact(asked: Asked, table: ShareTable, counts: tuple[int, ...]) -> Step:
    reach = _reach(asked, table, counts)
    listed = asked.population is not None
    return Step(
        symbol="d(n)",
        meaning="Width to expect of the exact interval, as a mean over every count; n is the "
        "smallest that keeps the margin",
        formula="d(n) = Σ P(X = x) · half the width of the exact interval at x"
        if asked.question.interval == "two-sided"
        else "d(n) = Σ P(X = x) · distance from p to the exact limit at x",
        inputs=(
            Quantity("n", "results, as of one simple sample", worth(asked, counts), "results"),
            Quantity("p", "share to expect", _expected(table)),
            *(
                (Quantity("N", "units in the list", asked.population or 0, "units"),)
                if listed
                else ()
            ),
        ),
        unrounded=reach,
        rounded=reach,
        source=HYPERGEOMETRIC if listed else CLOPPER,
    )


def _finding(
    asked: Asked,
    table: ShareTable,
    counts: tuple[int, ...],
    answer: str,
    steps: tuple[Step, ...],
) -> Finding:
    total, expected = sum(counts), _expected(table)
    question = asked.question
    normal = n_for_margin(
        expected,
        table.margin or 0.0,
        confidence=question.confidence,
        kind=question.interval,
        units=asked.population,
    )
    return Finding(
        topic="share",
        title=TITLE,
        answer=answer,
        amounts=(
            Amount("n", "Results", total, "results"),
            Amount(
                "expected_reach", "Expected reach of the interval", _reach(asked, table, counts)
            ),
            Amount("n_normal", "Results by the normal formula", normal, "results"),
        ),
        columns=("if the share is", "expected reach at this n, points"),
        rows=tuple(
            (typed_percent(p), figure(100 * _reach(asked, _at(table, p), counts)))
            for p in sorted({0.02, 0.05, 0.1, 0.2, 0.5, expected})
        ),
        steps=steps,
        assumptions=assumptions(asked),
        warnings=(*weighting_words(asked, counts), *_warnings(asked, table)),
        sources=(COCHRAN, HYPERGEOMETRIC if asked.population is not None else CLOPPER),
        picture=None if takes_all(asked, counts) else _picture(asked, table, total),
    )


def _at(table: ShareTable, expected: float) -> ShareTable:
    return table.model_copy(update={"expected": expected})


def assumptions(asked: Asked) -> tuple[str, ...]:
    """Say what sizing a share takes for granted."""
    lines = [
        "Every place or unit is as likely to be drawn as any other; each result is yes or no, and "
        "right.",
    ]
    if len(asked.question.parts) > 1:
        lines.append(
            "Counted as one simple random sample: strata sampled in proportion do no worse. Out of "
            "proportion, the share is taken to be alike in all strata."
        )
    return tuple(lines)


def _warnings(asked: Asked, table: ShareTable) -> tuple[str, ...]:
    lines = list(found_warning(asked))
    if table.expected is None:
        lines.append("No share was expected, so 50 % was taken, which asks for the most results.")
    if table.margin is not None and table.margin > _room(asked, table):
        lines.append(_runs_out(asked, table.margin))
    if table.method == "normal" and table.margin is not None:
        question = asked.question
        exact = n_for_expected_reach(
            _expected(table),
            table.margin,
            confidence=question.confidence,
            kind=question.interval,
            units=asked.population,
        )
        lines.append(
            "The normal formula forgets that counts are whole; for the exact interval to be "
            f"expected within the margin it takes {exact}."
        )
    return tuple(lines)


def _room(asked: Asked, table: ShareTable) -> float:
    """Give how far the interval, or its one limit, can reach before it runs into an end."""
    expected = _expected(table)
    above, below = 1 - expected, expected
    rooms = {"two-sided": min(above, below), "upper-limit": above, "lower-limit": below}
    return rooms[asked.question.interval]


def _runs_out(asked: Asked, margin: float) -> str:
    points = f"The margin of {typed(100 * margin)} points"
    if asked.question.interval == "upper-limit":
        return f"{points} reaches beyond 100 % from the share expected: the limit will run into it."
    if asked.question.interval == "lower-limit":
        return f"{points} is wider than the share expected: the limit will run into 0 %."
    return f"{points} is wider than the share expected: the interval will run into 0 or 100 %."


def _picture(asked: Asked, table: ShareTable, n: int) -> Picture:
    steps = sorted({max(2, whole(n * (0.4 + 0.2 * k))) for k in range(9)} | {n})
    if asked.population is not None:
        steps = [m for m in steps if m <= asked.population]
    if len(asked.question.parts) > 1:
        steps = [m for m in steps if sum(asked.shared(m)) == m]
    ys = [100 * _reach(asked, table, asked.shared(m)) for m in steps]
    return Picture(
        kind="lines",
        caption="Expected reach of the interval about the share, by the number of results.",
        alternative=f"A falling line: {figure(ys[0])} points at {steps[0]} results, "
        f"{figure(ys[-1])} at {steps[-1]}.",
        x_label="results",
        y_label="expected reach, points",
        series=(Series("exact interval" if table.method == "exact" else "normal formula",
                       tuple(float(m) for m in steps), tuple(ys)),),
        marks=((f"{n} results", float(n)),),
        levels=(("margin", 100 * (table.margin or 0.0)),),
    )  # fmt: skip


def _table(asked: Asked) -> ShareTable:
    table = asked.objective.share
    if table is None:
        raise table_missing(question="share")
    if asked.population is not None and asked.population < 2:
        message = f"a list of {asked.population} unit has no share to estimate; look at it."
        raise DesignError(message)
    return table
