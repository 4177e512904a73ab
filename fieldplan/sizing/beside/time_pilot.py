"""What the dated visits of a pilot say of each other, where the campaign declares nothing."""

import math
from typing import TYPE_CHECKING

from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.beside.time_words import (
    BAYLEY,
    LIST_OF_DAYS,
    MARRIOTT,
    TITLE,
    interval_words,
    pilot_assumptions,
)
from fieldplan.sizing.model import Amount, Finding, Size
from fieldplan.sizing.visit_series import VisitSeries
from fieldplan.sizing.words import counted, figure, percent, with_unit
from fieldplan.stats.time_series import sigma_of_series, visits_by_inflation, visits_needed

if TYPE_CHECKING:
    from fieldplan.stats.series_correlation import SeriesCorrelation


def of_pilot(asked: Asked, size: Size, series: VisitSeries, seen: "SeriesCorrelation") -> Finding:
    """Say what the pilot shows, and what n would be if the campaign counted it.

    Parameters
    ----------
    asked : Asked
    size : Size
    series : VisitSeries
    seen : SeriesCorrelation
    """
    classes = _classes(asked, series, seen)
    columns = ("class", "share of the whole", "share of the visits", "mean", "worth visits")
    return Finding(
        topic="time",
        title=TITLE,
        answer=_answer(size, seen),
        amounts=_amounts(size, seen),
        columns=columns if classes else (),
        rows=classes,
        assumptions=pilot_assumptions(asked),
        warnings=_pilot_warnings(asked, series, seen),
        sources=(MARRIOTT, BAYLEY),
    )


def _independent(size: Size, seen: "SeriesCorrelation", rho: float) -> float:
    """Give the independent visits that the target asks for once s is freed of what it hides.

    The long-run mean gets no credit for the length of a list of days, so that is taken off too.
    """
    plain = size.unrounded or float(size.needed)
    listed = sum(entry.population or 0 for entry in size.strata)
    if listed > plain:
        plain /= 1 - plain / listed
    return plain * sigma_of_series(1.0, seen.n, rho) ** 2


def _answer(size: Size, seen: "SeriesCorrelation") -> str:
    apart = f"{seen.n} visits of the pilot, usually {figure(seen.spacing_days)} days apart,"
    if seen.low <= 0:
        return (
            f"The {apart} show no clear correlation: {interval_words(seen)}. n takes visits as "
            "independent."
        )
    rho = max(seen.rho, 0.0)
    would = visits_by_inflation(_independent(size, seen, rho), rho)
    plain = math.ceil((size.unrounded or size.needed) - 1e-9)
    return (
        f"The {apart} resemble their neighbours by {interval_words(seen)}. n takes visits as "
        "independent; so spaced, the same precision of the long-run mean would take "
        f"{counted(would, 'visit')} instead of {plain}."
    )


def _amounts(size: Size, seen: "SeriesCorrelation") -> tuple[Amount, ...]:
    rho, high = max(seen.rho, 0.0), max(seen.high, 0.0)
    independent = _independent(size, seen, rho)
    sure = percent(seen.confidence)
    return (
        Amount("rho", "Correlation of neighbouring visits of the pilot", seen.rho),
        Amount("rho_low", f"Its lower end, {sure}", seen.low),
        Amount("rho_high", f"Its upper end, {sure}", seen.high),
        Amount("rho_observed", "Correlation as computed, too low in a short series", seen.observed),
        Amount("spacing_days", "Usual days between visits", seen.spacing_days, "days"),
        Amount(
            "visits_ends_counted",
            "Visits for the same precision",
            visits_needed(independent, rho),
            "visits",
        ),
        Amount(
            "visits_by_factor",
            "The same by the factor (1 + ρ)/(1 − ρ)",
            visits_by_inflation(independent, rho),
            "visits",
        ),
        Amount(
            "visits_high",
            "The same at the upper end of the correlation",
            visits_needed(_independent(size, seen, high), high),
            "visits",
        ),
    )


def _pilot_warnings(
    asked: Asked, series: VisitSeries, seen: "SeriesCorrelation"
) -> tuple[str, ...]:
    lines = []
    if seen.low > 0:
        lines.append(
            "Where the campaign is visits to one place, let n count this: write "
            f"correlation_between_visits = {seen.rho:.2f}, correlation_days = "
            f"{figure(seen.spacing_days)} and visit_spacing_days into its [[sigma]] table."
        )
        if asked.population is not None:
            lines.append(LIST_OF_DAYS)
    if line := _uneven_classes(asked, series):
        lines.append(line)
    return tuple(lines)


def _uneven_classes(asked: Asked, series: VisitSeries) -> str:
    """Notice visits that bunch in one season or flow: fair weather gives another mean."""
    parts = [part for part in asked.question.parts if part.mean is not None]
    if len(parts) < 2 or len(parts) < len(asked.question.parts):
        return ""
    shares = {part.name: len(series.days_in(part.name)) / len(series.days) for part in parts}
    part = max(parts, key=lambda each: shares[each.name] - each.weight)
    if shares[part.name] - part.weight < 0.10:
        return ""
    plain = sum(shares[each.name] * (each.mean or 0.0) for each in parts)
    weighed = sum(each.weight * (each.mean or 0.0) for each in parts)
    unit = asked.question.unit
    return (
        f"{percent(shares[part.name])} of the pilot's visits fell in {part.name}, which is "
        f"{percent(part.weight)} of the whole: their plain mean is "
        f"{with_unit(figure(plain), unit)}, weighed by share {with_unit(figure(weighed), unit)}."
    )


def _classes(
    asked: Asked, series: VisitSeries, seen: "SeriesCorrelation"
) -> tuple[tuple[str, ...], ...]:
    """Set share, visits, mean and worth of every season or flow class; empty for one."""
    parts = asked.question.parts
    if len(parts) < 2:
        return ()
    return tuple(
        (
            part.name,
            percent(part.weight),
            percent(len(series.days_in(part.name)) / len(series.days)),
            figure(part.mean or 0.0),
            figure(series.worth(part.name, seen.rho, spacing_days=seen.spacing_days)),
        )
        for part in parts
    )
