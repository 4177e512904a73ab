"""Designs whose results are composites: sigma of one composite, and how many increments."""

import math
from collections.abc import Callable
from dataclasses import replace
from typing import TYPE_CHECKING

from fieldplan.base.errors import DesignError
from fieldplan.lab.model import SplitSpread, Spread, StratumSpread
from fieldplan.lab.parts import ANALYSIS, PLACES, SAMPLING, TOGETHER, satterthwaite_of
from fieldplan.stats.composites import ErrorParts, composite_sigma

if TYPE_CHECKING:
    from fieldplan.campaign.model import Campaign, DesignTable
    from fieldplan.sizing.question import Question

MOST_CHOSEN = 100
"""No composite of more increments is chosen; 30 to 100 are usual (ITRC ISM-1, from memory)."""


def composited(
    campaign: "Campaign", spread: Spread, *, put: "Callable[[Campaign, Spread], Question]"
) -> "tuple[Campaign, Spread]":
    """Let a campaign of composites speak of composites: a number of increments, and their sigma.

    Parameters
    ----------
    campaign : Campaign
    spread : Spread
        Of single samples.
    put : callable
        Puts a campaign and its spread as the question about a mean; called where the number of
        increments is to be chosen.

    Returns
    -------
    campaign : Campaign
        ``increments`` is a number, and ``locations`` the replicates where they are typed.
    spread : Spread
        Every sigma is that of one composite's result. Both come back as they are where the design
        takes none.

    Raises
    ------
    DesignError
        The parts of sigma that composites depend on are not known, or no number of increments
        reaches the target.
    """
    design = campaign.design[0]
    if not design.takes_composites or spread.increments != 1:
        return campaign, spread
    if isinstance(design.replicates, int):
        design = design.model_copy(update={"locations": design.replicates})
    increments = design.increments
    if increments == "choose":
        increments = _chosen(campaign, design, spread, put)
    design = design.model_copy(update={"increments": increments})
    return _with_design(campaign, design), spread_of_composites(spread, design)


def _with_design(campaign: "Campaign", design: "DesignTable") -> "Campaign":
    return campaign.model_copy(update={"design": (design, *campaign.design[1:])})


def spread_of_composites(spread: Spread, design: "DesignTable") -> Spread:
    """Give the sigma of one composite's result in place of that of one sample.

    Parameters
    ----------
    spread : Spread
    design : DesignTable
        ``increments`` is a number.

    Raises
    ------
    DesignError
        A part of sigma that the composite depends on is not known for the deciding analyte.

    Notes
    -----
    Analytes that do not decide n and whose parts are not known are left out. Pilot values are left
    out as well: they are values of single samples.
    """
    others = []
    for entry in spread.others:
        split = spread.split(entry.analyte, entry.stratum)
        if not _missing(split, design):
            others.append(_of_composite(entry, split, design))
    site = spread.site
    if site is not None:
        site = replace(site, values=(), detected=())
    return replace(
        spread,
        strata=tuple(
            _of_composite(entry, spread.split(entry.analyte, entry.stratum), design)
            for entry in spread.strata
        ),
        site=site,
        others=tuple(others),
        increments=int(design.increments),
    )


def error_parts(split: SplitSpread) -> ErrorParts:
    """Give the parts as arithmetic takes them.

    What nobody can tell apart counts with the laboratory, which increments do not average: the
    careful side.
    """
    sigmas = {part.part: part.sigma for part in split.parts}
    return ErrorParts(
        between_locations=sigmas.get(PLACES, 0.0),
        sampling=sigmas.get(SAMPLING, 0.0),
        analysis=sigmas.get(ANALYSIS, sigmas.get(TOGETHER, 0.0)),
    )


def _missing(split: SplitSpread | None, design: "DesignTable") -> str:
    """Name the part of sigma that the design depends on and nobody knows; empty where none is."""
    names = {part.part for part in split.parts} if split else set()
    if design.increments_at == "one-place":
        return "" if SAMPLING in names else SAMPLING
    return "" if names & {ANALYSIS, TOGETHER} else ANALYSIS


def _of_composite(
    entry: StratumSpread, split: SplitSpread | None, design: "DesignTable"
) -> StratumSpread:
    lacking = _missing(split, design)
    if lacking or split is None:
        averaged = "the ground" if lacking == ANALYSIS else "sampling at one place"
        message = (
            f"design takes composites: increments average {averaged} only, and "
            f"nothing says how large the rest of sigma is in stratum '{entry.stratum}'. Add a "
            f'[[sigma]] table with part = "{lacking}", or a pilot with duplicates that tell it.'
        )
        raise DesignError(message)
    parts, k = error_parts(split), int(design.increments)
    one_place = design.increments_at == "one-place"
    sigma = composite_sigma(parts, k, one_place=one_place)
    worth = satterthwaite_of(
        [(_kept(part.part, k, one_place) * part.sigma**2, part.degrees_of_freedom)
         for part in split.parts]
    )  # fmt: skip
    sources = "; ".join(dict.fromkeys(part.source for part in split.parts))
    results = None if worth is None else max(2, math.floor(worth) + 1)
    if results is None and entry.results is not None:
        # A part typed without results is taken as exact. The rest is what the whole leaves, and a
        # composite keeps at most all of the whole's doubt: n0 - 1 degrees of freedom or more.
        results = entry.results
        sources += "; typed parts taken as exact"
    ratio = parts.total / sigma
    return StratumSpread(
        analyte=entry.analyte,
        stratum=entry.stratum,
        sigma=sigma,
        mean=entry.mean,
        results=results,
        source=f"composites of {k} increments, from the parts of sigma: {sources}",
        assumed=entry.assumed or any(part.assumed for part in split.parts),
        skewness=_evened(entry.skewness, ratio**3, 1 if one_place else k**2),
        excess_kurtosis=_evened(entry.excess_kurtosis, ratio**4, 1 if one_place else k**3),
    )


def _kept(part: str, increments: int, one_place: bool) -> float:
    """Give the share of a part's variance that a composite keeps."""
    averaged = part == SAMPLING or (part == PLACES and not one_place)
    return 1 / increments if averaged else 1.0


def _evened(shape: float | None, ratio: float, increments: int) -> float | None:
    """Give a composite's skewness or excess kurtosis from that of single samples.

    Cumulants of a mean of k: the third is divided by k², the fourth by k³. The laboratory's error
    is taken as normal; round one place the differences between places are taken to carry it all.
    """
    return None if shape is None else shape * ratio / increments


def _chosen(
    campaign: "Campaign",
    design: "DesignTable",
    spread: Spread,
    put: "Callable[[Campaign, Spread], Question]",
) -> int:
    """Choose the increments: the cheapest that meet the target, or the most precise for a budget.

    With replicates typed it is the fewest that meet the target.
    """

    def asked(increments: int) -> "Question":
        fixed = design.model_copy(update={"increments": increments})
        tried = _with_design(campaign, fixed)
        return put(tried, spread_of_composites(spread, fixed))

    if asked(1).target == "budget":
        return _most_precise(asked)
    if isinstance(design.replicates, int):
        return _fewest(asked, design.replicates)
    return _cheapest(asked, campaign.cost.per_increment if campaign.cost else 0.0)


def _most_precise(asked: "Callable[[int], Question]") -> int:
    from fieldplan.sizing.counting import count
    from fieldplan.sizing.precision import Precision

    def error(increments: int) -> float:
        question = asked(increments)
        try:
            return Precision(question).standard_error(count(question).needed)
        except DesignError:
            if increments == 1:
                raise
            return math.inf  # more increments than the budget buys

    return min(range(1, MOST_CHOSEN + 1), key=error)


def _fewest(asked: "Callable[[int], Question]", replicates: int) -> int:
    """Find the fewest increments with which so many composites meet the target."""
    from fieldplan.sizing.counting import count
    from fieldplan.stats.precision import smallest

    def enough(increments: int) -> bool:
        question = replace(asked(increments), locations=None)
        return sum(count(question).planned) <= replicates

    if not enough(MOST_CHOSEN):
        least = sum(count(replace(asked(MOST_CHOSEN), locations=None)).planned)
        message = (
            f"design.replicates = {replicates} do not meet the target with up to {MOST_CHOSEN} "
            f"increments each; {least} would. Raise replicates, or allow a larger error."
        )
        raise DesignError(message)
    return smallest(enough, 1, MOST_CHOSEN, back=0)


def _cheapest(asked: "Callable[[int], Question]", price: float) -> int:
    """Find the increments of the cheapest design; of equal cost the one of fewest composites.

    Composites needed fall as increments rise. So between two numbers of increments none costs
    less than the composites of the larger with the increments of the smaller, and where that is
    more than the best found, or both need as many, nothing between them is looked at.
    """
    from fieldplan.sizing.counting import count, total_cost

    found: dict[int, tuple[int, float]] = {}

    def look(increments: int) -> None:
        question = asked(increments)
        planned = count(question).planned
        found[increments] = sum(planned), total_cost(question, planned) or 0.0

    def between(low: int, high: int) -> None:
        if high - low < 2 or found[low][0] == found[high][0]:
            return
        composites, cost = found[high]
        least = cost - composites * price * (high - low - 1)
        if least > min(cost for _, cost in found.values()) * (1 + 1e-9):
            return
        middle = (low + high) // 2
        look(middle)
        between(low, middle)
        between(middle, high)

    look(1)
    look(MOST_CHOSEN)
    between(1, MOST_CHOSEN)
    return min(found, key=lambda k: (found[k][1], found[k][0], k))
