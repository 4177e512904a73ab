"""The working and the conditions of visits that resemble each other."""

import math
from typing import TYPE_CHECKING

from fieldplan.base.working import Quantity, Step
from fieldplan.lab.model import VisitCorrelation
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.model import Size
from fieldplan.sizing.visits import unhidden_sigma
from fieldplan.sizing.words import percent
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.planned_visits import planned_factor, share_held_as_independent
from fieldplan.stats.time_series import (
    effective_number,
)

if TYPE_CHECKING:
    from fieldplan.lab.model import StratumSpread
    from fieldplan.stats.series_correlation import SeriesCorrelation

BAYLEY = "Bayley & Hammersley 1946, Supplement to the JRSS 8:184 (from memory)"
TITLE = "Visits that resemble each other"
MARRIOTT = "Marriott & Pope 1954, Biometrika 41:390 (from memory)"

LIST_OF_DAYS = (
    "Where the list holds all days that the mean shall speak for, and days are drawn at random "
    "from it, correlation costs nothing: leave correlation_between_visits out."
)


def _where(entry: "StratumSpread") -> str:
    return "" if entry.stratum == "site" else f"({entry.stratum})"


def carried_step(entry: "StratumSpread") -> Step:
    """Show the correlation carried over to the planned spacing."""
    visits = entry.visits or VisitCorrelation(0.0)
    return Step(
        symbol=f"ρ{_where(entry)}",
        meaning="Correlation at the planned spacing",
        formula="ρ = ρ0^(d / d0)",
        inputs=(
            Quantity("ρ0", "correlation as declared", visits.rho),
            Quantity("d0", "days between the visits it belongs to", visits.days or 0.0, "days"),
            Quantity("d", "days between planned visits", visits.planned_days or 0.0, "days"),
        ),
        unrounded=visits.planned_rho,
        rounded=visits.planned_rho,
        source="correlation that fades by the same share every day",
    )


def factor_step(entry: "StratumSpread") -> Step:
    """Show the factor of a long series."""
    rho = entry.visits.planned_rho if entry.visits else 0.0
    return Step(
        symbol=f"f{_where(entry)}",
        meaning="Visits for one independent visit in a long series",
        formula="f = (1 + ρ) / (1 − ρ), and 1 at least",
        inputs=(Quantity("ρ", "correlation of neighbouring visits", rho),),
        unrounded=planned_factor(rho),
        rounded=planned_factor(rho),
        source=BAYLEY,
    )


def raised_step(entry: "StratumSpread", asked: Asked) -> Step:
    """Show sigma as n uses it."""
    rho = entry.visits.planned_rho if entry.visits else 0.0
    own = unhidden_sigma(entry.sigma, entry)
    raised = own * math.sqrt(planned_factor(rho))
    meaning = "standard deviation of single visits"
    if own != entry.sigma:
        meaning += f"; s = {entry.sigma:.5g} of visits in a row, with what it hides"
    return Step(
        symbol=f"s{_where(entry)}",
        meaning="Standard deviation as n uses it, so that n counts visits",
        formula="s = σ · √f",
        inputs=(
            Quantity("σ", meaning, own, asked.question.unit),
            Quantity("f", "visits for one independent visit", planned_factor(rho)),
        ),
        unrounded=raised,
        rounded=raised,
        unit=asked.question.unit,
        source=BAYLEY,
    )


def worth_step(entry: "StratumSpread", visits: int) -> Step:
    """Show the effective number by the whole sum."""
    rho = entry.visits.planned_rho if entry.visits else 0.0
    worth = effective_number(visits, rho)
    return Step(
        symbol=f"n'{_where(entry)}",
        meaning="Independent visits that n visits are worth, the ends of the series counted",
        formula="n' = n / (1 + 2 Σ (1 − k/n) ρ^k), k = 1 … n − 1",
        inputs=(
            Quantity("n", "visits", visits, "visits"),
            Quantity("ρ", "correlation of neighbouring visits", rho),
        ),
        unrounded=worth,
        rounded=worth,
        unit="visits",
        source=BAYLEY,
    )


def estimate_words(asked: Asked, size: Size) -> str:
    """Say what the interval after the laboratory is worth: it takes results as independent."""
    rhos = [entry.visits.planned_rho for entry in asked.entries if entry.visits]
    rho = max(rhos, key=abs)
    opening = "The estimate after the laboratory takes results as independent"
    if rho <= 0:
        return f"{opening}; for visits that alternate its interval is wider than it need be."
    if len(asked.question.parts) > 1:
        return f"{opening}; for visits in a row its interval is too narrow."
    confidence, kind = asked.question.confidence, asked.question.interval
    known = max(1, size.needed - 1)
    t = t_quantile(known, confidence=confidence, kind=kind)
    held = share_held_as_independent(rho, t, known)
    if kind == "two-sided":
        held = 2 * held - 1
    return (
        f"{opening}: at a correlation of {rho:.2g} its {percent(confidence)} interval or limit, "
        f"and a decision by it, hold in about {percent(held)} of campaigns only."
    )


def visit_assumptions(asked: Asked) -> tuple[str, ...]:
    """Say under what conditions visits are worth what is said."""
    lines = [
        "n counts visits to one place, evenly spaced; the correlation of visits k apart is ρ^k.",
        "The long-run mean is asked for. The mean of the very period in which the visits are made "
        "is known far better: what lies between two like visits is known from them. That holds "
        "for what varies in the water or ground, not for errors of the laboratory.",
        "The factor (1 + ρ)/(1 − ρ) decides n where ρ is above 0; it neglects the ends of the "
        "series and asks for a visit or two more than the whole sum. A ρ below 0 gets no credit.",
    ]
    if asked.question.target_half_width is not None:
        lines.append(
            "Student's t has n − 1 degrees of freedom, a little more than visits in a row give."
        )
    if len(asked.question.parts) > 1:
        lines.append("Visits of different strata are taken as unrelated.")
    return tuple(lines)


def pilot_assumptions(asked: Asked) -> tuple[str, ...]:
    """Say under what conditions the pilot's correlation holds."""
    lines = [
        "Season and trend look like correlation; where they are known, make seasons strata, whose "
        "means are taken out first.",
        "The correlation of visits k apart is ρ^k; the usual r is lifted by what a short series "
        "hides, (n r + 1)/(n − 4), for even visits.",
    ]
    if len(asked.question.parts) > 1:
        lines.append("Means of the strata are taken out before; that hides a little more of it.")
    return tuple(lines)


def interval_words(seen: "SeriesCorrelation") -> str:
    """Say a correlation with its interval."""
    return f"{seen.rho:.2f} ({percent(seen.confidence)} interval {seen.low:.2f} to {seen.high:.2f})"
