"""The change of the mean between two rounds at the same places: pairs of results."""

from fieldplan.base.working import Quantity, Step
from fieldplan.campaign.questions.change import Change
from fieldplan.sizing.asked.counting_claims import table_missing, takes_all
from fieldplan.sizing.asked.model import Answered, Asked
from fieldplan.sizing.asked.paired_rounds import PairedRounds
from fieldplan.sizing.asked.sure_words import sure_words
from fieldplan.sizing.model import Amount, Finding, Picture, Series
from fieldplan.sizing.question import Part
from fieldplan.sizing.words import counted, figure, percent, typed, typed_percent, with_unit
from fieldplan.stats.allocation import share_total
from fieldplan.stats.distributions import student_quantile
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.precision import whole

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
    pairs = _pairs(asked)
    table, unit = pairs.table, asked.question.unit
    needed = pairs.needed if table.assurance == "plain" else pairs.assured(table.assurance)
    finding = _finding(pairs, needed, _answer(pairs, needed), _steps(pairs, needed))
    if table.half_width is None:
        target = f"a change of {with_unit(typed(pairs.difference), unit)}"
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
    pairs = _pairs(asked)
    answer = _answer(pairs, counts)
    if pairs.table.half_width is None and not takes_all(asked, counts):
        least = with_unit(figure(pairs.smallest_change(counts)), asked.question.unit)
        answer += f" The smallest change shown with {typed_percent(1 - pairs.risks[1])} is {least}."
    return _finding(pairs, counts, answer, ())


def _pairs(asked: Asked) -> PairedRounds:
    table = asked.objective.change
    if table is None:
        raise table_missing(question="change")
    return PairedRounds(asked, table)


def _answer(pairs: PairedRounds, counts: tuple[int, ...]) -> str:
    table, question = pairs.table, pairs.question
    places = counted(sum(counts), "location" if pairs.asked.population is None else "unit")
    if takes_all(pairs.asked, counts):
        return (
            f"All {places} of the list visited in both rounds: the change of their mean is known "
            "but for the laboratory's error."
        )
    if table.half_width is not None:
        reach = with_unit(figure(pairs.precision.half_width(counts)), question.unit)
        sure, two = typed_percent(question.confidence), question.interval == "two-sided"
        return (
            f"{places} visited in both rounds pin down the change of the mean: its {sure} "
            f"{'interval' if two else 'limit'} is expected to reach {'±' if two else ''}{reach}."
        )
    change = with_unit(typed(pairs.difference), question.unit)
    which = {"either-way": "change", "rise": "rise", "fall": "fall"}[table.direction]
    verb = {"either-way": "changes", "rise": "rises", "fall": "falls"}[table.direction]
    return (
        f"{places} visited in both rounds: if the mean {verb} by {change}, "
        f"{percent(pairs.power(counts))} of such campaigns show a {which}; if it does not change, "
        f"{typed_percent(pairs.risks[0])} do so wrongly."
    )


def _steps(pairs: PairedRounds, needed: tuple[int, ...]) -> tuple[Step, ...]:
    steps = []
    if pairs.table.sigma_of_differences is None:
        parts = zip(pairs.asked.question.parts, pairs.question.parts, strict=True)
        steps = [_spread_step(pairs.table, part, differs) for part, differs in parts]
    last = _power_step if pairs.table.half_width is None else _width_step
    return (*steps, last(pairs, needed))


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


def _shared_inputs(pairs: PairedRounds, needed: tuple[int, ...]) -> tuple[Quantity, ...]:
    error = pairs.precision.standard_error(needed)
    return (
        Quantity("n", "locations in both rounds", sum(needed), "locations"),
        Quantity("SE", "standard error of the change at this n", error, pairs.question.unit),
        Quantity("df", "degrees of freedom", pairs.precision.degrees_of_freedom(needed)),
    )


def _width_step(pairs: PairedRounds, needed: tuple[int, ...]) -> Step:
    question, width = pairs.question, pairs.precision.half_width(needed)
    t = t_quantile(pairs.known(needed), confidence=question.confidence, kind=question.interval)
    return Step(
        symbol="h",
        meaning="Half-width of the change: n is the smallest that keeps the target",
        formula="h = t · SE",
        inputs=(*_shared_inputs(pairs, needed), Quantity("t", "Student quantile", t)),
        unrounded=width,
        rounded=width,
        unit=question.unit,
        source="Cochran 1977, Sampling Techniques, 3rd ed., ch. 4",
    )


def _power_step(pairs: PairedRounds, needed: tuple[int, ...]) -> Step:
    power, (alpha, beta) = pairs.power(needed), pairs.risks
    limit = student_quantile(1 - alpha / pairs.sides, pairs.known(needed))
    return Step(
        symbol="power",
        meaning="Chance to show the change: n is the smallest that keeps it at 1 − β or above"
        + (", with the assurance chosen" if pairs.table.assurance != "plain" else ""),
        formula="P(T > t)"
        + (" + P(T < −t)" if pairs.sides == 2 else "")
        + ", T noncentral t with df and Δ / SE",
        inputs=(
            *_shared_inputs(pairs, needed),
            Quantity("t", "Student quantile that decides", limit),
            Quantity("Δ", "change that must not be missed", pairs.difference, pairs.question.unit),
            Quantity("α", "chance to claim a change where there is none", alpha),
            Quantity("β", "chance to miss the change", beta),
        ),
        unrounded=power,
        rounded=power,
        source=PAIRED,
    )


def _finding(
    pairs: PairedRounds, counts: tuple[int, ...], answer: str, steps: tuple[Step, ...]
) -> Finding:
    whole_list = takes_all(pairs.asked, counts)
    correlated = pairs.table.correlation is not None
    sure = () if whole_list else (_sure(pairs, counts, counting=bool(steps)),)
    return Finding(
        topic="change",
        title=TITLE,
        answer=answer,
        amounts=_amounts(pairs, counts),
        columns=("correlation between rounds", "locations") if correlated else (),
        rows=_rows(pairs),
        steps=steps,
        assumptions=(
            "Both rounds take the same locations, depth, season, method and laboratory; a location "
            "that yields no result in one of them drops out of both.",
            "The mean of the differences is near normal; locations are drawn at random.",
        ),
        warnings=(*sure, *_warnings(pairs)),
        sources=(PAIRED,),
        picture=None if whole_list else _picture(pairs, counts),
    )


def _amounts(pairs: PairedRounds, counts: tuple[int, ...]) -> tuple[Amount, ...]:
    unit, error = pairs.question.unit, pairs.precision.standard_error(counts)
    enough = pairs.chance_enough(counts)
    amounts = [
        Amount("n", "Locations visited in both rounds", sum(counts), "locations"),
        Amount("standard_error", "Expected standard error of the change", error, unit),
        Amount("chance_enough", "Chance that these are enough", enough),
    ]
    if pairs.table.half_width is not None:
        width = pairs.precision.half_width(counts)
        return (*amounts, Amount("half_width", "Expected half-width", width, unit))
    least = pairs.smallest_change(counts)
    surely = typed_percent(1 - pairs.risks[1])
    return (
        *amounts,
        Amount("power", "Chance to show the change", pairs.power(counts)),
        Amount("smallest_change", f"Smallest change shown with {surely}", least, unit),
    )


def _rows(pairs: PairedRounds) -> tuple[tuple[str, ...], ...]:
    """List the numbers at other correlations: how much hangs on the one typed."""
    if pairs.table.correlation is None:
        return ()
    correlations = sorted({*SHOWN, pairs.table.correlation})
    return tuple(
        (typed(rho), str(sum(PairedRounds(pairs.asked, pairs.table, rho).needed)))
        for rho in correlations
    )


def _sure(pairs: PairedRounds, counts: tuple[int, ...], *, counting: bool) -> str:
    """Say how sure the number is, the spread of differences being an estimate."""
    chance, more = pairs.chance_enough(counts), ""
    if chance is not None and counting:
        if counts == pairs.needed:
            found = [sum(pairs.assured(share)) for share in (0.8, 0.9)]
            more = f"for a chance of 80 % and 90 % it takes {found[0]} and {found[1]}"
        else:
            few = percent(pairs.chance_enough(pairs.needed) or 0.0)
            more = f"sigma at face value asks for {sum(pairs.needed)}, enough with {few}"
    return sure_words(pairs.question, chance, more)


def _warnings(pairs: PairedRounds) -> tuple[str, ...]:
    lines, rho = [], pairs.table.correlation
    if rho is not None:
        apart = sum(PairedRounds(pairs.asked, pairs.table, 0.0).needed)
        lines.append(
            f"The correlation of {typed(rho)} between rounds carries the number: were it 0, as "
            f"with new places in the second round, about {apart} in each round would be needed."
        )
        if rho < 0:
            lines.append("The correlation is negative: new places would do better than the same.")
    lines.append(
        "A change of the mean does not say why, nor that any one place has changed; a change of "
        "method or laboratory between rounds would look the same."
    )
    return tuple(lines)


def _picture(pairs: PairedRounds, counts: tuple[int, ...]) -> Picture:
    if pairs.table.half_width is not None:
        return _width_picture(pairs, sum(counts))
    unit = pairs.question.unit
    xs = [2 * pairs.difference * k / 20 for k in range(21)]
    ys = [100 * pairs.power(counts, x) for x in xs]
    return Picture(
        kind="lines",
        caption="Chance to show a change, by its true size.",
        alternative=f"A rising line from {ys[0]:.0f} % at no change to {ys[-1]:.0f} % at "
        f"{with_unit(figure(xs[-1]), unit)}.",
        x_label=f"true change, {unit}" if unit else "true change",
        y_label="chance to show it, %",
        series=(Series(f"{sum(counts)} locations", tuple(xs), tuple(ys)),),
        marks=(("must not be missed", pairs.difference),),
        levels=((f"wanted {typed_percent(1 - pairs.risks[1])}", 100 * (1 - pairs.risks[1])),),
    )


def _width_picture(pairs: PairedRounds, n: int) -> Picture:
    question, precision = pairs.question, pairs.precision
    least, most = sum(question.strata.floors), question.strata.most
    totals = sorted({max(least, whole(n * (0.4 + 1.6 * k / 24))) for k in range(25)} | {n})
    totals = [total for total in totals if total <= most]
    shares = [share_total(question.strata, t, allocation=question.allocation) for t in totals]
    ys = [precision.half_width(counts) for counts in shares]
    reach = pairs.table.half_width or 0.0
    return Picture(
        kind="lines",
        caption="Expected half-width of the change, by locations visited in both rounds.",
        alternative=f"A falling line: {figure(ys[0])} at {totals[0]}, {figure(ys[-1])} at "
        f"{totals[-1]}.",
        x_label="locations in both rounds",
        y_label=f"half-width, {question.unit}" if question.unit else "half-width",
        series=(Series("expected half-width", tuple(float(t) for t in totals), tuple(ys)),),
        marks=((f"{n} locations", float(n)),),
        levels=((f"target {with_unit(typed(reach), question.unit)}", reach),),
    )
