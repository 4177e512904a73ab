"""The change of the mean between two rounds at the same places: pairs of results."""

from dataclasses import replace

from fieldplan.base.errors import DesignError
from fieldplan.base.working import Quantity, Step
from fieldplan.campaign.questions.change import Change
from fieldplan.sizing.asked.counting_claims import table_missing, takes_all
from fieldplan.sizing.asked.model import Answered, Asked
from fieldplan.sizing.counting import plain_counts
from fieldplan.sizing.model import Amount, Finding, Picture, Series
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Part, Question
from fieldplan.sizing.words import counted, figure, percent, typed, typed_percent, with_unit
from fieldplan.stats.allocation import first_that, share_total
from fieldplan.stats.distributions import normal_quantile, student_quantile
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.power import one_sample_n, power_at, sigma_of_change, smallest_shift
from fieldplan.stats.precision import whole
from fieldplan.stats.risks import check_risks

TITLE = "Change between two rounds"
PAIRED = "paired t test, exact power by the noncentral t; EPA QA/G-9 (2000), section 3.2.1"
SHOWN = (0.0, 0.3, 0.5, 0.7, 0.9)
"""Correlations that the table lists beside the one typed."""


def count(asked: Asked) -> Answered:
    """Count the places visited twice that show the change, or pin it down.

    Parameters
    ----------
    asked : Asked

    Returns
    -------
    Answered

    Raises
    ------
    DesignError
        The chances or the width cannot be had.
    """
    table = _table(asked)
    paired = _paired(asked, table)
    needed = _needed(paired, table)
    finding = _finding(asked, table, needed, _answer(asked, table, needed), _steps(asked, needed))
    unit = asked.question.unit
    if table.half_width is None:
        target = f"a change of {with_unit(typed(table.difference or 0.0), unit)}"
    else:
        target = f"the change to within {with_unit(typed(table.half_width), unit)}"
    return Answered(needed, target, finding)


def bought(asked: Asked, counts: tuple[int, ...]) -> Finding:
    """Say which change given counts show, or to within what they pin it down.

    Parameters
    ----------
    asked : Asked
    counts : tuple of int
        Places visited twice, by stratum.
    """
    table = _table(asked)
    answer = _answer(asked, table, counts)
    if table.half_width is None and not takes_all(asked, counts):
        least = with_unit(figure(_smallest(asked, table, counts)), asked.question.unit)
        sure = typed_percent(1 - (table.beta or 0.0))
        answer += f" The smallest change shown with {sure} is {least}."
    return _finding(asked, table, counts, answer, ())


def _paired(asked: Asked, table: Change, correlation: float | None = None) -> Question:
    """Give the question with the spread of differences in place of that of results."""
    parts = tuple(
        replace(part, sigma=_sigma(part.sigma, table, correlation)) for part in asked.question.parts
    )
    return replace(asked.question, parts=parts)


def _sigma(sigma: float, table: Change, correlation: float | None) -> float:
    if correlation is None and table.sigma_of_differences is not None:
        return table.sigma_of_differences
    rho = table.correlation if correlation is None else correlation
    return sigma_of_change(sigma, table.next_sigma or sigma, correlation=rho or 0.0)


def _sides(table: Change) -> int:
    return 2 if table.direction == "either-way" else 1


def _needed(paired: Question, table: Change) -> tuple[int, ...]:
    if table.half_width is not None:
        return tuple(plain_counts(replace(paired, target="half_width", value=table.half_width)))
    alpha, beta = table.alpha or 0.0, table.beta or 0.0
    check_risks(alpha, beta)
    if len(paired.parts) == 1:
        only = paired.parts[0]
        n = one_sample_n(
            table.difference or 0.0,
            only.sigma,
            alpha=alpha,
            beta=beta,
            sides=_sides(table),
            population=only.population,
        )
        return (max(n, *paired.strata.floors),)
    z = normal_quantile(1 - alpha / _sides(table)) + normal_quantile(1 - beta)
    # Known spreads need least: no counts of a larger variance can do.
    return tuple(
        first_that(
            paired.strata,
            lambda counts: _power(paired, table, tuple(counts)) >= 1 - beta,
            never_above=((table.difference or 0.0) / z) ** 2,
            allocation=paired.allocation,
        )
    )


def _power(
    paired: Question, table: Change, counts: tuple[int, ...], difference: float | None = None
) -> float:
    """Give the chance that the change is shown."""
    change = (table.difference or 0.0) if difference is None else difference
    precision = Precision(paired)
    error = precision.standard_error(counts)
    if error == 0:
        return 1.0 if change else table.alpha or 0.0
    known = max(precision.degrees_of_freedom(counts), 1.0)
    return power_at(change / error, known, alpha=table.alpha or 0.0, sides=_sides(table))


def _smallest(asked: Asked, table: Change, counts: tuple[int, ...]) -> float:
    """Give the change that the counts show with chance 1 − β."""
    precision = Precision(_paired(asked, table))
    known = max(precision.degrees_of_freedom(counts), 1.0)
    shift = smallest_shift(
        known, alpha=table.alpha or 0.0, beta=table.beta or 0.0, sides=_sides(table)
    )
    return precision.standard_error(counts) * shift


def _answer(asked: Asked, table: Change, counts: tuple[int, ...]) -> str:
    paired, unit = _paired(asked, table), asked.question.unit
    places = counted(sum(counts), _place(asked))
    if takes_all(asked, counts):
        return (
            f"All {places} of the list visited in both rounds: the change of their mean is known "
            "but for the laboratory's error."
        )
    if table.half_width is not None:
        reach = with_unit(figure(Precision(paired).half_width(counts)), unit)
        sure = typed_percent(asked.question.confidence)
        how = "±" if asked.question.interval == "two-sided" else ""
        kind = "interval" if asked.question.interval == "two-sided" else "limit"
        return (
            f"{places} visited in both rounds pin down the change of the mean: its {sure} {kind} "
            f"is expected to reach {how}{reach}."
        )
    change = with_unit(typed(table.difference or 0.0), unit)
    which = {"either-way": "change", "rise": "rise", "fall": "fall"}[table.direction]
    return (
        f"{places} visited in both rounds: if the mean changes by {change}, "
        f"{percent(_power(paired, table, counts))} of such campaigns show a {which}; if it does "
        f"not change, {typed_percent(table.alpha or 0.0)} do so wrongly."
    )


def _place(asked: Asked) -> str:
    return "location" if asked.population is None else "unit"


def _steps(asked: Asked, needed: tuple[int, ...]) -> tuple[Step, ...]:
    table = _table(asked)
    paired = _paired(asked, table)
    steps = []
    if table.sigma_of_differences is None:
        pairs = zip(asked.question.parts, paired.parts, strict=True)
        steps = [_spread_step(table, part, differs) for part, differs in pairs]
    return (*steps, _last_step(paired, table, needed))


def _spread_step(table: Change, part: Part, differs: Part) -> Step:
    other = table.next_sigma or part.sigma
    return Step(
        symbol="s_d",
        meaning=f"Standard deviation of the differences in {part.name}",
        formula="s_d = √(s1² + s2² − 2 r s1 s2)",
        inputs=(
            Quantity("s1", "standard deviation of single results", part.sigma),
            Quantity("s2", "the same in the other round", other),
            Quantity("r", "correlation of the two results of a place", table.correlation or 0.0),
        ),
        unrounded=differs.sigma,
        rounded=differs.sigma,
        source="variance of a difference",
    )


def _last_step(paired: Question, table: Change, needed: tuple[int, ...]) -> Step:
    precision, unit = Precision(paired), paired.unit
    error, known = precision.standard_error(needed), precision.degrees_of_freedom(needed)
    shared = (
        Quantity("n", "locations in both rounds", sum(needed), "locations"),
        Quantity("SE", "standard error of the change at this n", error, unit),
        Quantity("df", "degrees of freedom", known),
    )
    if table.half_width is not None:
        t = t_quantile(known, confidence=paired.confidence, kind=paired.interval)
        return Step(
            symbol="h",
            meaning="Half-width of the change: n is the smallest that keeps the target",
            formula="h = t · SE",
            inputs=(*shared, Quantity("t", "Student quantile", t)),
            unrounded=precision.half_width(needed),
            rounded=precision.half_width(needed),
            unit=unit,
            source="Cochran 1977, Sampling Techniques, 3rd ed., ch. 4",
        )
    power = _power(paired, table, needed)
    limit = student_quantile(1 - (table.alpha or 0.0) / _sides(table), max(known, 1.0))
    return Step(
        symbol="power",
        meaning="Chance to show the change: n is the smallest that keeps it at 1 − β or above",
        formula="P(T > t)"
        + (" + P(T < −t)" if _sides(table) == 2 else "")
        + ", T noncentral t with df "
        "and Δ / SE",
        inputs=(
            *shared,
            Quantity("t", "Student quantile that decides", limit),
            Quantity("Δ", "change that must not be missed", table.difference or 0.0, unit),
            Quantity("α", "chance to claim a change where there is none", table.alpha or 0.0),
            Quantity("β", "chance to miss the change", table.beta or 0.0),
        ),
        unrounded=power,
        rounded=power,
        source=PAIRED,
    )


def _finding(
    asked: Asked, table: Change, counts: tuple[int, ...], answer: str, steps: tuple[Step, ...]
) -> Finding:
    paired, unit = _paired(asked, table), asked.question.unit
    amounts = [
        Amount("n", "Locations visited in both rounds", sum(counts), "locations"),
        Amount("standard_error", "Expected standard error of the change",
               Precision(paired).standard_error(counts), unit),
    ]  # fmt: skip
    if table.half_width is None:
        amounts += [
            Amount("power", "Chance to show the change", _power(paired, table, counts)),
            Amount("smallest_change", f"Smallest change shown with "
                   f"{typed_percent(1 - (table.beta or 0.0))}",
                   _smallest(asked, table, counts), unit),
        ]  # fmt: skip
    else:
        width = Precision(paired).half_width(counts)
        amounts.append(Amount("half_width", "Expected half-width", width, unit))
    return Finding(
        topic="change",
        title=TITLE,
        answer=answer,
        amounts=tuple(amounts),
        columns=("correlation between rounds", "locations")
        if table.correlation is not None
        else (),
        rows=_rows(asked, table),
        steps=steps,
        assumptions=(
            "Both rounds take the same locations, depth, season, method and laboratory; a location "
            "that yields no result in one of them drops out of both.",
            "The mean of the differences is near normal; locations are drawn at random.",
        ),
        warnings=_warnings(asked, table),
        sources=(PAIRED,),
        picture=None if takes_all(asked, counts) else _picture(asked, table, counts),
    )


def _rows(asked: Asked, table: Change) -> tuple[tuple[str, ...], ...]:
    """List the numbers at other correlations: how much hangs on the one typed."""
    if table.correlation is None:
        return ()
    rows = []
    for correlation in sorted({*SHOWN, table.correlation}):
        needed = _needed(_paired(asked, table, correlation), table)
        rows.append((typed(correlation), str(sum(needed))))
    return tuple(rows)


def _warnings(asked: Asked, table: Change) -> tuple[str, ...]:
    lines = []
    if table.correlation is not None:
        apart = _needed(_paired(asked, table, 0.0), table)
        lines.append(
            f"The correlation of {typed(table.correlation)} between rounds carries the number: "
            f"were it 0, as with new places in the second round, about {sum(apart)} in each round "
            "would be needed."
        )
        if table.correlation < 0:
            lines.append("The correlation is negative: new places would do better than the same.")
    lines.append(
        "A change of the mean does not say why, nor that any one place has changed; a change of "
        "method or laboratory between rounds would look the same."
    )
    return tuple(lines)


def _picture(asked: Asked, table: Change, counts: tuple[int, ...]) -> Picture:
    paired, unit = _paired(asked, table), asked.question.unit
    if table.half_width is None:
        xs = [2 * (table.difference or 0.0) * k / 20 for k in range(21)]
        ys = [100 * _power(paired, table, counts, x) for x in xs]
        return Picture(
            kind="lines",
            caption="Chance to show a change, by its true size.",
            alternative=f"A rising line from {ys[0]:.0f} % at no change to {ys[-1]:.0f} % at "
            f"{with_unit(figure(xs[-1]), unit)}.",
            x_label=f"true change, {unit}" if unit else "true change",
            y_label="chance to show it, %",
            series=(Series(f"{sum(counts)} locations", tuple(xs), tuple(ys)),),
            marks=(("must not be missed", table.difference or 0.0),),
            levels=(("wanted", 100 * (1 - (table.beta or 0.0))),),
        )
    return _width_picture(paired, table, sum(counts))


def _width_picture(paired: Question, table: Change, n: int) -> Picture:
    least, most = sum(paired.strata.floors), paired.strata.most
    totals = sorted({max(least, whole(n * (0.4 + 1.6 * k / 24))) for k in range(25)} | {n})
    totals = [total for total in totals if total <= most]
    precision = Precision(paired)
    shares = [share_total(paired.strata, t, allocation=paired.allocation) for t in totals]
    ys = [precision.half_width(counts) for counts in shares]
    return Picture(
        kind="lines",
        caption="Expected half-width of the change, by locations visited in both rounds.",
        alternative=f"A falling line: {figure(ys[0])} at {totals[0]}, {figure(ys[-1])} at "
        f"{totals[-1]}.",
        x_label="locations in both rounds",
        y_label=f"half-width, {paired.unit}" if paired.unit else "half-width",
        series=(Series("expected half-width", tuple(float(t) for t in totals), tuple(ys)),),
        marks=((f"{n} locations", float(n)),),
        levels=(("target", table.half_width or 0.0),),
    )


def _table(asked: Asked) -> Change:
    table = asked.objective.change
    if table is None:
        raise table_missing(question="change")
    if table.sigma_of_differences is None and not asked.sigma_known:
        message = (
            "a correlation between rounds is of no use without the sigma of one of them; give it, "
            "or sigma_of_differences."
        )
        raise DesignError(message)
    return table
