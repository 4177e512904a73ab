"""Ranked sets: what a cheap look at several places would save."""

from collections.abc import Iterator

from fieldplan.base.working import Quantity, Step
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.model import Amount, Finding, Size
from fieldplan.sizing.words import counted, figure
from fieldplan.stats.ranked_sets import (
    highest_ranking_price,
    ranked_count,
    relative_precision,
    standard_scores,
)

TOPIC = "ranked-sets"
PERFECT = (
    "Takahasi & Wakimoto 1968, Annals of the Institute of Statistical Mathematics 20:1 (from "
    "memory)"
)
ERRORS = "Dell & Clutter 1972, Biometrics 28:545 (from memory)"


def finding(asked: Asked, size: Size) -> Finding | None:
    """Say how many ranked-set results are as precise as the number above.

    Parameters
    ----------
    asked : Asked
    size : Size

    Returns
    -------
    Finding or None
        None where the design names no set, for a list, and without a sigma.
    """
    design = asked.campaign.design[0]
    m, correlation = design.ranking_set_size, design.ranking_correlation
    if m is None or correlation is None or size.standard_error is None:
        return None
    if any(part.population is not None for part in asked.question.parts):
        return None
    precision = relative_precision(m, correlation=correlation)
    results = sum(ranked_count(entry.needed, m, precision) for entry in size.strata)
    price, most = _prices(asked, m, simple=size.needed, ranked=results)
    return Finding(
        topic=TOPIC,
        title="Ranked sets",
        answer=_answer(asked, size, results=results, price=price, most=most),
        amounts=tuple(_amounts(asked, results=results, precision=precision, most=most)),
        steps=(_precision_step(m, correlation, precision), *_count_steps(size, m, precision)),
        assumptions=(
            "The sign that places are ranked by is near normal, and results follow it in a "
            "straight line with the stated correlation; every rank comes equally often.",
            "Ranking is free of knowledge of the results, and the places of a set are drawn at "
            "random.",
        ),
        warnings=(
            "This version draws no ranked sets: the number above is for the layout of the design.",
        ),
        sources=(PERFECT, ERRORS),
    )


def _prices(asked: Asked, m: int, *, simple: int, ranked: int) -> tuple[float | None, float | None]:
    """Give the price of a look as typed, and the highest at which ranking saves money."""
    cost, prices = asked.campaign.cost, asked.question.prices
    if cost is None or prices is None:
        return None, None
    result = prices.of_a_visit + prices.of_a_result
    if result <= 0:
        return None, None
    return cost.per_ranking or None, highest_ranking_price(result, m, simple=simple, ranked=ranked)


def _answer(
    asked: Asked, size: Size, *, results: int, price: float | None, most: float | None
) -> str:
    design = asked.campaign.design[0]
    m = design.ranking_set_size or 2
    line = (
        f"By a sign that correlates {design.ranking_correlation:g} with the "
        f"result, {counted(results, 'result')} from ranked sets of {m} would be as precise as the "
        f"{size.needed} above, for {m * results} places looked at."
    )
    if results >= size.needed:
        line = (
            f"Ranked sets of {m} by a sign that correlates {design.ranking_correlation:g} save "
            f"nothing here: whole cycles take {counted(results, 'result')} against {size.needed}."
        )
    if not most:
        return line
    currency = asked.question.prices.currency if asked.question.prices else ""
    line += f" That saves money while a look costs less than {figure(most)} {currency}"
    if price is None:
        return f"{line}."
    side = "which is less" if price < most else "which is no less"
    return f"{line}; typed is {figure(price)}, {side}."


def _amounts(
    asked: Asked, *, results: int, precision: float, most: float | None
) -> Iterator[Amount]:
    currency = asked.question.prices.currency if asked.question.prices else ""
    m = asked.campaign.design[0].ranking_set_size or 2
    yield Amount("relative_precision", "Relative precision, same results", precision)
    yield Amount("ranked_results", "Results from ranked sets", results, "results")
    yield Amount("places_looked_at", "Places looked at", m * results, "places")
    yield Amount("highest_price", "Price of a look below which money is saved", most, currency)


def _precision_step(m: int, correlation: float, precision: float) -> Step:
    explained = sum(score**2 for score in standard_scores(m)) / m
    return Step(
        symbol="RP",
        meaning="Variance of a simple random mean over that of ranked sets, same results",
        formula="RP = 1 / (1 − ρ² · Σδ²/m)",
        inputs=(
            Quantity("m", "places in a set", m, "places"),
            Quantity("ρ", "correlation of the sign with the result", correlation),
            Quantity("Σδ²/m", "mean square of the normal scores of the ranks", explained),
        ),
        unrounded=precision,
        rounded=precision,
        source=ERRORS,
    )


def _count_steps(size: Size, m: int, precision: float) -> Iterator[Step]:
    for entry in size.strata:
        where = f" in {entry.stratum}" if len(size.strata) > 1 else ""
        yield Step(
            symbol="n'",
            meaning=f"Results from ranked sets{where}, in whole cycles of m, two at least",
            formula="n' = n / RP",
            inputs=(
                Quantity("n", "results of the design above", entry.needed, "results"),
                Quantity("RP", "relative precision", precision),
            ),
            unrounded=entry.needed / precision,
            rounded=float(ranked_count(entry.needed, m, precision)),
            unit="results",
            source="whole cycles keep every rank equally often",
        )
