"""Counts where something is weighed: several analytes against each other, or money against spread.

Several analytes share the same samples. Their targets are all kept, with the fewest results (or
the least money) where the allocation may choose; where it may not, with the smallest total.
"""

import math
from collections.abc import Callable, Sequence
from dataclasses import replace
from functools import lru_cache
from typing import TYPE_CHECKING, Any

from fieldplan.base.errors import DesignError
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Question
from fieldplan.sizing.words import figure, named, target_words, with_unit
from fieldplan.stats.allocation import share_total
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.precision import meets, smallest
from fieldplan.stats.strata import Strata

if TYPE_CHECKING:
    from fieldplan.stats.several_analytes import Balance, Demand

CHOOSING = ("neyman", "cost-optimal")
"""Allocations that follow the spread wherever the targets lead them."""

FEW_STRATA = 30
"""Up to so many strata single results are taken away again where all targets allow it."""

ROUNDS, SMALLER = 8, 0.98
"""So often, and each time by so much, a missed target's tolerated variance is made smaller."""


def weighs(question: Question) -> bool:
    """Tell whether something is weighed: other analytes, or what results cost."""
    return bool(question.also) or (
        question.allocation == "cost-optimal" and question.target != "budget"
    )


def everyone(question: Question) -> tuple[Question, ...]:
    """Give the questions of all analytes that decide, each for itself."""
    if not question.also:
        return (question,)
    same: dict[str, Any] = {"floor": question.floor, "allocation": question.allocation, "also": ()}
    return (replace(question, also=()), *(replace(other, **same) for other in question.also))


def face_value(question: Question) -> Question:
    """Give the question with every sigma taken as exact."""
    others = tuple(replace(other, assurance=None) for other in question.also)
    return replace(question, assurance=None, also=others)


def holds_to(member: Question) -> float | None:
    """Give the assurance that counts must reach; None where none was chosen or can be had."""
    if member.pilots is None and member.target_half_width is None:
        return None
    return member.assurance


def keeps(member: Question, counts: Sequence[int]) -> bool:
    """Tell whether counts keep one analyte's target, with its assurance where it has one."""
    precision, width = Precision(member), member.target_half_width
    if width is not None and not meets(precision.half_width(counts), width):
        return False
    if width is None and not meets(precision.variance(counts), member.value**2):
        return False
    wanted = holds_to(member)
    if wanted is None:
        return True
    chance = precision.chance(counts, sigma_known=member.pilots is None)
    return (chance or 0.0) >= wanted


def refuse_unreachable(question: Question) -> None:
    """Refuse a target that the most locations of single strata forbid, whatever lies elsewhere.

    Raises
    ------
    DesignError
        It names the strata, and what can be had.
    """
    short = _capped(question)
    if not short or question.target == "budget":
        return
    caps = question.strata.caps
    for member in everyone(question):
        if keeps(replace(member, assurance=None), caps):
            continue
        precision, wide = Precision(member), member.target_half_width is not None
        best = precision.half_width(caps) if wide else precision.standard_error(caps)
        whose = f"{member.analyte}: " if question.also else ""
        message = (
            f"{whose}a {target_words(member)} is out of reach while these strata may have at most "
            f"so many locations: {short}; with any number elsewhere it stays at "
            f"{with_unit(figure(best), member.unit)}. Raise [design.most], or allow a larger error."
        )
        raise DesignError(message)


def _capped(question: Question) -> str:
    """Name the strata that may have only so many locations; empty where none is bounded."""
    short = [f"{part.name} ({part.most})" for part in question.parts if part.most is not None]
    return named(short) if short else ""


def weighed_counts(question: Question, *, plain: bool = False) -> list[int]:
    """Count the results that keep every analyte's target, weighed by spread and cost.

    Parameters
    ----------
    question : Question
    plain : bool
        Take every sigma at face value.

    Returns
    -------
    list of int
        Results by stratum.

    Raises
    ------
    DesignError
        A target is out of reach.
    """
    question = face_value(question) if plain else question
    members = everyone(question)
    chosen = question.allocation in CHOOSING
    if chosen and all(m.target == "standard_error" and holds_to(m) is None for m in members):
        return list(exact_counts(question)[0])
    strata = question.sharing

    def shared(total: int) -> list[int]:
        return share_total(strata, total, allocation=question.allocation)

    def fits(total: int) -> bool:
        counts = shared(total)
        return all(keeps(member, counts) for member in members)

    back = 2 * len(question.parts) + 1 if len(question.parts) <= FEW_STRATA else 0
    total = smallest(fits, sum(strata.floors), strata.most, back=back)
    if not fits(total):
        bounded = _capped(question)
        limit = (
            f"these strata may have at most so many locations: {bounded}"
            if bounded
            else f"no more than {strata.most} results can be had"
        )
        message = (
            f"a {target_words(question)} is out of reach with the assurance asked for while "
            f"{limit}; allow a larger error or a lower assurance, or raise [design.most]."
        )
        raise DesignError(message)
    return _cheapest(question, shared(total)) if chosen else shared(total)


def exact_counts(question: Question) -> tuple[tuple[int, ...], float, float]:
    """Find the counts of least cost for target standard errors: counts, value and its bound.

    Parameters
    ----------
    question : Question
        All of whose members have a standard error as target.

    Returns
    -------
    counts : tuple of int
    value, bound : float
        What they cost (results, or money), and what no other counts can undercut.
    """
    from fieldplan.stats.least_cost import least_cost
    from fieldplan.stats.several_analytes import Demand

    demands = [
        Demand(tuple(part.sigma for part in member.parts), member.value**2, member.analyte)
        for member in everyone(question)
    ]
    found, _ = least_cost(_priced(question), demands)
    return found.counts, found.value, found.bound


def _priced(question: Question) -> Strata:
    """Give the strata with costs only where the allocation looks at them."""
    strata = question.strata
    return strata if question.allocation == "cost-optimal" else replace(strata, costs=())


def _cheapest(question: Question, counts: list[int]) -> list[int]:
    """Improve counts that keep every target: the cheaper of two ways, trimmed."""
    if len(counts) > FEW_STRATA:
        return counts
    strata = _priced(question)
    found = [_trimmed(question, way) for way in (counts, _sought(question, counts)) if way]
    return min(found, key=lambda way: (strata.cost(way), sum(way)))


def _sought(question: Question, known: list[int]) -> list[int]:
    """Seek the least cost for tolerated variances, made smaller where a target is still missed."""
    from fieldplan.stats.least_cost import least_cost

    members = everyone(question)
    demands = [demand_of(member, None if question.also else known) for member in members]
    for _ in range(ROUNDS):
        counts = list(least_cost(_priced(question), demands)[0].counts)
        missed = [not keeps(member, counts) for member in members]
        if not any(missed):
            return counts
        demands = [
            replace(demand, target_variance=demand.target_variance * SMALLER) if short else demand
            for demand, short in zip(demands, missed, strict=True)
        ]
    return []


def _trimmed(question: Question, counts: list[int]) -> list[int]:
    """Take results away, the dearest first, as long as every target is kept."""
    members, strata = everyone(question), _priced(question)
    costs, floors = strata.unit_costs, strata.floors
    order = sorted(range(len(counts)), key=lambda k: (-costs[k], -counts[k], k))
    for k in order:
        while counts[k] > floors[k]:
            fewer = [*counts[:k], counts[k] - 1, *counts[k + 1 :]]
            if not all(keeps(member, fewer) for member in members):
                break
            counts = fewer
    return counts


@lru_cache(maxsize=64)
def alone(member: Question) -> tuple[int, ...]:
    """Count the results that one analyte would need without the others.

    Raises
    ------
    DesignError
        Its target is out of reach; the line names it.
    """
    from fieldplan.sizing.counting import needed_counts

    try:
        return tuple(needed_counts(member))
    except DesignError as fault:
        raise DesignError(*(f"{member.analyte}: {line}" for line in fault.problems)) from fault


def demand_of(member: Question, own: Sequence[int] | None = None) -> "Demand":
    """Put one analyte's target as a tolerated variance.

    A half-width takes Student's t, and an assurance the reserve, that its own counts would have:
    ``own``, or else those that it alone would need.
    """
    from fieldplan.stats.several_analytes import Demand

    sigmas = tuple(part.sigma for part in member.parts)
    if member.target == "standard_error" and holds_to(member) is None:
        return Demand(sigmas, member.value**2, member.analyte)
    counts, precision = own or alone(member), Precision(member)
    width = member.target_half_width
    if width is None or holds_to(member) is not None:
        return Demand(sigmas, precision.variance(counts), member.analyte)
    known = precision.degrees_of_freedom(counts)
    if math.isinf(known):  # a list taken whole
        return Demand(sigmas, 0.0, member.analyte)
    t = t_quantile(known, confidence=member.confidence, kind=member.interval)
    return Demand(sigmas, (width / t) ** 2, member.analyte)


@lru_cache(maxsize=64)
def joint_balance(question: Question) -> "Balance":
    """Weigh the analytes that decide against each other, before any rounding."""
    from fieldplan.stats.several_analytes import balance

    return balance(_priced(question), [demand_of(member) for member in everyone(question)])


def joint_strata(question: Question) -> Strata:
    """Give the strata with the spread that shares results between them for all analytes.

    Parameters
    ----------
    question : Question
        With others in ``also``.

    Notes
    -----
    Neyman and least cost take √(Σ λ σ²/V), with the multipliers λ of the unrounded optimum. Equal
    precision takes, in each stratum, the analyte that is furthest from its target there.
    """
    strata, members = question.strata, everyone(question)
    if question.allocation == "proportional":
        return strata
    if question.allocation == "equal-precision":
        spreads = [member.strata.levelled for member in members]
        if question.equal_in == "standard-error":
            limits = [math.sqrt(demand_of(member).target_variance) or 1.0 for member in members]
            spreads = [
                tuple(part.sigma / limit for part in member.parts)
                for member, limit in zip(members, limits, strict=True)
            ]
        return replace(strata, levelled=tuple(max(own) for own in zip(*spreads, strict=True)))
    return replace(strata, sigmas=joint_balance(question).sigmas)


def most_for_money(question: Question, cost: Callable[[Sequence[int]], float]) -> list[int]:
    """Count the results of smallest variance that a budget buys where their costs differ.

    Parameters
    ----------
    question : Question
        Its budget buys at least the floors.
    cost : callable
        Money for counts: whole locations, losses, control samples and days in.
    """
    from fieldplan.stats.least_cost import smallest_variance

    strata = question.strata
    floors = list(strata.floors)
    money = question.value - cost([0] * len(floors))
    counts = floors
    while money > strata.cost(floors):
        counts = list(smallest_variance(strata, money).counts)
        over = cost(counts) - question.value
        if over <= 1e-9 * question.value:
            break
        money -= over
        counts = floors
    return _spent(question, counts, cost) if len(floors) <= FEW_STRATA else counts


def _spent(
    question: Question, counts: list[int], cost: Callable[[Sequence[int]], float]
) -> list[int]:
    """Spend what rounding left over, each time where the variance falls most."""
    strata = question.strata
    while True:
        more = [
            [*counts[:k], n + 1, *counts[k + 1 :]]
            for k, (n, cap) in enumerate(zip(counts, strata.caps, strict=True))
            if n < cap
        ]
        bought = [other for other in more if meets(cost(other), question.value)]
        if not bought:
            return counts
        counts = min(bought, key=strata.variance)
