"""Visits that resemble each other: sigma as the mean feels it, so that n counts visits."""

import math
from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

from fieldplan.stats.planned_visits import planned_factor
from fieldplan.stats.time_series import results_behind_sigma, sigma_of_series

if TYPE_CHECKING:
    from fieldplan.lab.model import StratumSpread
    from fieldplan.sizing.asked.model import Asked
    from fieldplan.sizing.question import Part

ABOUT_MEANS = frozenset({"mean", "mean-and-level", "mean-and-background", "change"})
"""Questions that ask how well a mean is known; only there do correlated visits count for less."""


def as_visits(parts: "Sequence[Part]", entries: "Sequence[StratumSpread]") -> "tuple[Part, ...]":
    """Raise the sigma of parts whose visits are declared to resemble each other.

    Parameters
    ----------
    parts : sequence of Part
    entries : sequence of StratumSpread
        What is known of their spread; a part without an entry stays as it is.

    Returns
    -------
    tuple of Part
        Sigma times √((1 + ρ)/(1 − ρ)), which gives the mean of n visits the variance that n
        independent ones of the raised sigma would have; times 1 where ρ is below 0. A pilot of
        visits first loses what its s hides, and counts for the independent visits it is worth. A
        list of days gives no credit for its length.

    Examples
    --------
    >>> from fieldplan.lab.model import StratumSpread, VisitCorrelation
    >>> from fieldplan.sizing.question import Part
    >>> entry = StratumSpread("nitrate", "site", 6.0, None, None, "typed",
    ...                       visits=VisitCorrelation(0.35))
    >>> round(as_visits([Part("site", 1.0, 6.0)], [entry])[0].sigma, 3)
    8.647
    """
    known: Mapping[str, StratumSpread] = {entry.stratum: entry for entry in entries}
    return tuple(_as_visits(part, known.get(part.name)) for part in parts)


def _as_visits(part: "Part", entry: "StratumSpread | None") -> "Part":
    if entry is None or entry.visits is None or entry.visits.planned_rho == 0:
        return part
    rho = entry.visits.planned_rho
    factor = math.sqrt(planned_factor(rho))
    words = f"times {factor:.4g} for visits that resemble each other by {rho:.3g}"
    return replace(
        part,
        sigma=unhidden_sigma(part.sigma, entry) * factor,
        results=_worth(entry, part.results),
        source=f"{part.source}, {words}" if part.source else words,
        # The long-run mean is asked for, and no list of days holds all of that population.
        population=None,
    )


def unhidden_sigma(sigma: float, entry: "StratumSpread") -> float:
    """Give sigma with what the s of visits in a row hides of it; a typed one stays as it is.

    Parameters
    ----------
    sigma : float
    entry : StratumSpread
    """
    if entry.visits is None or len(entry.values) < 2:
        return sigma
    return sigma_of_series(sigma, len(entry.values), entry.visits.rho)


def in_a_row(asked: "Asked") -> bool:
    """Tell whether n counts visits that resemble each other, so none is independent."""
    return any(entry.visits is not None and entry.visits.planned_rho > 0 for entry in asked.entries)


def as_single(asked: "Asked") -> "Asked":
    """Give what is asked with the sigma of single results, as it was before visits raised it."""
    if not in_a_row(asked):
        return asked
    own = {entry.stratum: unhidden_sigma(entry.sigma, entry) for entry in asked.entries}
    parts = tuple(replace(part, sigma=own[part.name]) for part in asked.question.parts)
    return replace(asked, question=replace(asked.question, parts=parts))


def _worth(entry: "StratumSpread", results: int | None) -> int | None:
    """Give the independent visits that know sigma as well as the pilot's; at least 2."""
    if results is None or entry.visits is None or len(entry.values) < 2:
        return results
    return max(2, int(results_behind_sigma(results, entry.visits.rho) + 1e-9))
