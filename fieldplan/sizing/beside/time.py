"""Visits to one place: how far they resemble each other, and what n of them are worth."""

import math
from typing import TYPE_CHECKING

from fieldplan.base.working import Step
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.beside.time_pilot import of_pilot
from fieldplan.sizing.beside.time_words import (
    BAYLEY,
    LIST_OF_DAYS,
    TITLE,
    carried_step,
    estimate_words,
    factor_step,
    interval_words,
    raised_step,
    visit_assumptions,
    worth_step,
)
from fieldplan.sizing.model import Amount, Finding, Picture, Series, Size
from fieldplan.sizing.visit_series import series_of
from fieldplan.sizing.visits import ABOUT_MEANS, unhidden_sigma
from fieldplan.sizing.words import counted, figure, with_unit
from fieldplan.stats.period_mean import period_variance_share
from fieldplan.stats.planned_visits import planned_factor
from fieldplan.stats.time_series import (
    rho_at,
    visits_by_inflation,
    visits_needed,
)

if TYPE_CHECKING:
    from fieldplan.lab.model import StratumSpread
    from fieldplan.stats.series_correlation import SeriesCorrelation

_SPACINGS = (0.5, 1.0, 2.0, 3.0, 4.0, 6.0)
"""Times the planned days between visits."""


def finding(asked: Asked, size: Size) -> Finding | None:
    """Say what n visits in a row are worth, by the campaign's correlation or by the pilot's.

    Parameters
    ----------
    asked : Asked
    size : Size

    Returns
    -------
    Finding or None
        None where no mean is asked for, a whole list is visited, and where neither the campaign
        declares a correlation nor the pilot is a series of dated visits to one place.
    """
    if size.question not in ABOUT_MEANS or not asked.sigma_known or asked.question.census:
        return None
    entries = asked.entries
    series = series_of(entries)
    seen = series.correlation() if series else None
    if any(entry.visits is not None for entry in entries):
        return _declared(asked, size, seen)
    if series is None or seen is None:
        return None
    return of_pilot(asked, size, series, seen)


def _declared(asked: Asked, size: Size, seen: "SeriesCorrelation | None") -> Finding:
    """Say what the visits that n counts are worth."""
    worth = {
        entry.stratum: _worth(entry, stratum.needed)
        for entry, stratum in zip(asked.entries, size.strata, strict=True)
    }
    first = next(entry for entry in asked.entries if entry.visits is not None)
    rows = _spacing_rows(first, size) if len(size.strata) == 1 else _stratum_rows(asked, size)
    columns = (
        "days between visits",
        "correlation",
        "visits for the same precision",
        "from first to last",
    )
    if len(size.strata) > 1:
        columns = ("stratum", "correlation", "visits", "worth independent visits")
    return Finding(
        topic="time",
        title=TITLE,
        answer=(
            f"{counted(size.needed, 'visit')} tell as much of the long-run mean as "
            f"{figure(sum(worth.values()))} independent ones would: neighbouring visits resemble "
            f"each other by {_rhos(asked)}.{_period_words(asked, size)}"
        ),
        amounts=_amounts(asked, size, sum(worth.values())),
        columns=columns if rows else (),
        rows=rows,
        steps=_steps(asked, size),
        assumptions=visit_assumptions(asked),
        warnings=_warnings(asked, size, seen),
        sources=(BAYLEY,),
        picture=_picture(first, size) if len(size.strata) == 1 else None,
    )


def _worth(entry: "StratumSpread", visits: int) -> float:
    rho = entry.visits.planned_rho if entry.visits else 0.0
    return visits / planned_factor(rho)


def _rhos(asked: Asked) -> str:
    """Name the correlations of all strata that have one."""
    found = [
        (f"{entry.visits.planned_rho:.2g}", entry.stratum)
        for entry in asked.entries
        if entry.visits
    ]
    if len({rho for rho, _ in found}) == 1:
        return found[0][0]
    return ", ".join(f"{rho} in {name}" for rho, name in found)


def _independent(entry: "StratumSpread", size: Size) -> float:
    """Give the independent visits that the target asks for, or that n is worth without one."""
    if size.unrounded is not None and size.needed == size.plain_n and entry.visits is not None:
        return size.unrounded / planned_factor(entry.visits.planned_rho)
    rho = entry.visits.planned_rho if entry.visits else 0.0
    return size.needed / planned_factor(rho)


def _amounts(asked: Asked, size: Size, worth: float) -> tuple[Amount, ...]:
    found = [
        Amount("visits", "Visits that n counts", size.needed, "visits"),
        Amount("worth", "Independent visits that they are worth, by the factor", worth, "visits"),
    ]
    if len(size.strata) > 1:
        return tuple(found)
    entry = asked.entries[0]
    rho = entry.visits.planned_rho if entry.visits else 0.0
    independent = _independent(entry, size)
    return (
        Amount("rho", "Correlation of neighbouring planned visits", rho),
        Amount(
            "factor",
            "Visits for one independent visit, (1 + ρ)/(1 − ρ) and 1 at least",
            planned_factor(rho),
        ),
        *found,
        Amount("independent", _asked_words(size), independent, "visits"),
        Amount(
            "visits_by_factor",
            "Visits by the factor",
            visits_by_inflation(independent, max(rho, 0.0)),
            "visits",
        ),
        Amount(
            "visits_ends_counted",
            "Visits by the whole sum, the two ends of the series counted",
            visits_needed(independent, rho),
            "visits",
        ),
        *_of_the_period(asked, size),
    )


def _asked_words(size: Size) -> str:
    """Say what the independent visits are: the target's, or those that a fixed number is worth."""
    if size.number_from == "target":
        return "Independent visits asked for"
    return "Independent visits that these are worth, by the factor"


def _period_words(asked: Asked, size: Size) -> str:
    """Say how near the same visits come to the mean of the very period; empty where unknown."""
    found = _of_the_period(asked, size) if len(size.strata) == 1 else ()
    if not found:
        return ""
    error = with_unit(figure(float(found[0].value or 0.0)), asked.question.unit)
    long_run = with_unit(figure(size.standard_error or 0.0), asked.question.unit)
    return (
        " Spread evenly over the period they are taken in, they tell its own mean with a standard "
        f"error of {error}, against {long_run} for the long run."
    )


def _of_the_period(asked: Asked, size: Size) -> tuple[Amount, ...]:
    """Give the standard error for the mean of the very period that the visits are spread over."""
    entry = asked.entries[0]
    if entry.visits is None or not entry.visits.planned_rho > 0:
        return ()
    share = period_variance_share(size.needed, entry.visits.planned_rho)
    error = unhidden_sigma(entry.sigma, entry) * math.sqrt(share)
    meaning = "Standard error for the mean of the very period, visits spread evenly over it"
    return (Amount("period_standard_error", meaning, error, asked.question.unit),)


def _steps(asked: Asked, size: Size) -> tuple[Step, ...]:
    steps: list[Step] = []
    for entry, stratum in zip(asked.entries, size.strata, strict=True):
        if entry.visits is None:
            continue
        if entry.visits.planned_rho != entry.visits.rho:
            steps.append(carried_step(entry))
        steps += [factor_step(entry), raised_step(entry, asked), worth_step(entry, stratum.needed)]
    return tuple(steps)


def _warnings(asked: Asked, size: Size, seen: "SeriesCorrelation | None") -> tuple[str, ...]:
    """Say where the declared correlation is at odds with the pilot, the list or the estimate."""
    lines = []
    for entry in asked.entries:
        visits = entry.visits
        if visits is None or seen is None or len(asked.entries) > 1:
            continue
        there = visits.rho
        if visits.days is not None and there >= 0:
            there = rho_at(there, from_days=visits.days, to_days=seen.spacing_days)
        if not seen.low <= there <= seen.high:
            lines.append(
                f"The pilot's {seen.n} visits speak against the declared {there:.2g}: they show "
                f"{interval_words(seen)} at {figure(seen.spacing_days)} days."
            )
    if asked.population is not None:
        lines.append(f"These visits are sized for the long-run mean. {LIST_OF_DAYS}")
    lines.append(estimate_words(asked, size))
    return tuple(lines)


def _stratum_rows(asked: Asked, size: Size) -> tuple[tuple[str, ...], ...]:
    return tuple(
        (
            entry.stratum,
            "0" if entry.visits is None else f"{entry.visits.planned_rho:.2g}",
            str(stratum.needed),
            figure(_worth(entry, stratum.needed)),
        )
        for entry, stratum in zip(asked.entries, size.strata, strict=True)
    )


def _spacings(entry: "StratumSpread", size: Size) -> list[tuple[float, float, int]]:
    """Give days, correlation and visits for spacings round the planned one."""
    visits = entry.visits
    if visits is None or visits.planned_days is None or not visits.planned_rho > 0:
        return []
    independent = _independent(entry, size)
    found = []
    for times in _SPACINGS:
        days = times * visits.planned_days
        rho = rho_at(visits.planned_rho, from_days=visits.planned_days, to_days=days)
        found.append((days, rho, visits_needed(independent, rho)))
        if rho < 0.005:
            break
    return found


def _spacing_rows(entry: "StratumSpread", size: Size) -> tuple[tuple[str, ...], ...]:
    return tuple(
        (figure(days), f"{rho:.2f}", str(n), _span((n - 1) * days))
        for days, rho, n in _spacings(entry, size)
    )


def _span(days: float) -> str:
    return f"{figure(days)} days" if days < 730 else f"{days / 365.25:.1f} years"


def _picture(entry: "StratumSpread", size: Size) -> Picture | None:
    spaced = _spacings(entry, size)
    if not spaced or entry.visits is None or entry.visits.planned_days is None:
        return None
    return Picture(
        kind="lines",
        caption="Visits that keep the same precision, by the days between them.",
        alternative=f"A falling line from {spaced[0][2]} visits {figure(spaced[0][0])} days apart "
        f"to {spaced[-1][2]} visits {figure(spaced[-1][0])} days apart.",
        x_label="days between visits",
        y_label="visits",
        series=(
            Series(
                "visits",
                tuple(days for days, _, _ in spaced),
                tuple(float(n) for _, _, n in spaced),
            ),
        ),
        marks=(("planned", entry.visits.planned_days),),
    )
