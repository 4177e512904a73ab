"""Which share of the planned results will lie below the reporting limit, by model."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

from fieldplan.base.errors import DesignError
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Part, Question
from fieldplan.sizing.shapes import part_mean, pilot_values
from fieldplan.stats.censored_fit import FEWEST_DETECTS, MODELS, Model, fit_censored
from fieldplan.stats.censoring_forecast import share_below, substituted
from fieldplan.stats.distributions import normal_share
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.stratified import variance_factors

NEGATIVE = 0.01
"""A normal population with more than this share below 0 is no model of amounts."""


@dataclass(frozen=True)
class Population:
    """One part of the site under one model: mean and CV, and the share below the limit."""

    mean: float
    cv: float
    below: float


@dataclass(frozen=True)
class Forecast:
    """One model over all parts: the share of the planned results that lie below the limit.

    Parameters
    ----------
    model : str
    parts : tuple of Population
    share : float
    wider : float
        Width of the interval from non-detects at 0 to non-detects at the limit, over that
        without a limit; for a limit alone, its distance from the mean over that.
    gap : float
        Distance between the means at 0 and at the limit.
    """

    model: Model
    parts: tuple[Population, ...]
    share: float
    wider: float
    gap: float


def reporting_limit(asked: Asked) -> float | None:
    """Give the analyte's reporting limit, else the largest of the pilot's non-detects."""
    if asked.analyte.reporting_limit is not None:
        return asked.analyte.reporting_limit
    limits = [limit for entry in asked.entries for limit in pilot_values(entry)[1]]
    return max(limits, default=None)


def rough_share(asked: Asked, limit: float) -> float:
    """Give the largest share below the limit by mean and CV alone, or in the pilot, unfitted."""
    question = asked.question
    shares = [0.0]
    for part in question.parts:
        mean = part_mean(question, part)
        if mean > 0 and part.sigma > 0:
            cv = part.sigma / mean
            shares += [share_below(model, limit, mean=mean, cv=cv) for model in MODELS]
    seen = pilot_share(asked)
    return max(*shares, seen[0] / seen[1] if seen else 0.0)


def pilot_share(asked: Asked) -> tuple[int, int] | None:
    """Count non-detects and results of the pilot."""
    seen = [flag for entry in asked.entries for flag in entry.detected]
    return (seen.count(False), len(seen)) if seen else None


def forecast(asked: Asked, counts: Sequence[int], limit: float) -> tuple[Forecast, ...]:
    """Forecast under each model that every part allows.

    Parameters
    ----------
    asked : Asked
    counts : sequence of int
        Results by stratum.
    limit : float
        In the analyte's unit.

    Returns
    -------
    tuple of Forecast
        Lognormal, gamma, normal; empty where a part has no mean.
    """
    question = asked.question
    entries = {entry.stratum: entry for entry in asked.entries}
    found = []
    for model in MODELS:
        parts = []
        for part in question.parts:
            entry = entries.get(part.name)
            detects, limits = pilot_values(entry) if entry is not None else ([], [])
            parts.append(_population(question, part, model, detects=detects, limits=limits))
        whole = [p for p in parts if p is not None and _possible(model, p[1])]
        if len(whole) == len(parts):
            below = [share_below(model, limit, mean=p[0], cv=p[1]) for p in whole]
            placed = tuple(Population(*p, b) for p, b in zip(whole, below, strict=True))
            share = math.fsum(c * b for c, b in zip(counts, below, strict=True)) / sum(counts)
            wider, gap = _bounds(question, counts, limit, model, placed)
            found.append(Forecast(model, placed, share, wider, gap))
    return tuple(found)


def _population(
    question: Question,
    part: Part,
    model: Model,
    *,
    detects: Sequence[float],
    limits: Sequence[float],
) -> tuple[float, float] | None:
    """Fit mean and CV to a pilot with non-detects; else take those that sizing uses."""
    if limits and len(set(detects)) >= FEWEST_DETECTS:
        try:
            fit = fit_censored(detects, limits, model)
        except DesignError:
            return None
        return fit.mean, fit.cv
    mean = part_mean(question, part)
    return (mean, part.sigma / mean) if mean > 0 and part.sigma > 0 else None


def _possible(model: Model, cv: float) -> bool:
    """Tell whether a model keeps above 0, as amounts do."""
    return model != "normal" or normal_share(-1 / cv) <= NEGATIVE


def _bounds(
    question: Question,
    counts: Sequence[int],
    limit: float,
    model: Model,
    parts: Sequence[Population],
) -> tuple[float, float]:
    """Give the reach from 0 to the limit over that without a limit, and the gap of the means."""
    strata = question.strata
    factors = variance_factors(strata.weights, counts, strata.populations)
    known = Precision(question).degrees_of_freedom(counts)
    q = t_quantile(known, confidence=question.confidence, kind=question.interval)

    def error(sds: Sequence[float]) -> float:
        return math.sqrt(math.fsum(f * sd**2 for f, sd in zip(factors, sds, strict=True)))

    def mean(means: Sequence[float]) -> float:
        return math.fsum(w * m for w, m in zip(strata.weights, means, strict=True))

    low, high = (
        [substituted(model, limit, mean=p.mean, cv=p.cv, value=value) for p in parts]
        for value in (0.0, limit)
    )
    true, without = mean([p.mean for p in parts]), q * error([p.mean * p.cv for p in parts])
    bottom = mean([one.mean for one in low]) - q * error([one.sd for one in low])
    top = mean([one.mean for one in high]) + q * error([one.sd for one in high])
    reach = {"upper-limit": top - true, "lower-limit": true - bottom}
    wider = reach.get(question.interval, (top - bottom) / 2) / without
    return wider, mean([one.mean for one in high]) - mean([one.mean for one in low])
