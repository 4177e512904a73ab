"""The end of the working: losses, the precision to expect, control samples and cost."""

import math
from collections.abc import Iterator

from fieldplan.base.working import Quantity, Step
from fieldplan.sizing.counting import Counts, control_counts, total_cost
from fieldplan.sizing.money import Prices
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Question
from fieldplan.sizing.words import typed_percent
from fieldplan.stats.intervals import t_quantile

COCHRAN = "Cochran 1977, Sampling Techniques, 3rd ed."


def closing_steps(question: Question, counts: Counts) -> Iterator[Step]:
    """Write out what follows once the results are counted.

    Parameters
    ----------
    question : Question
    counts : Counts
    """
    yield from _losses(question, counts)
    yield from _precision(question, counts)
    yield from _controls(question, counts)
    yield from _cost(question, counts)


def _losses(question: Question, counts: Counts) -> Iterator[Step]:
    if question.locations is not None or question.census:
        return
    for part, results, visits in zip(question.parts, counts.needed, counts.planned, strict=True):
        if part.loss:
            where = f" in {part.name}" if len(question.parts) > 1 else ""
            yield Step(
                symbol="visits" if not where else f"visits({part.name})",
                meaning=f"Locations to visit{where}, with the loss allowance",
                formula="visits = n / (1 − loss)"
                + ("" if part.population is None else ", at most N"),
                inputs=(
                    Quantity("n", "results needed", results, "results"),
                    Quantity("loss", "share of locations without a result", part.loss),
                ),
                unrounded=results / (1 - part.loss),
                rounded=float(visits),
                unit="locations",
                source="campaign choice",
            )


def _precision(question: Question, counts: Counts) -> Iterator[Step]:
    if question.census:
        return
    yield _error(question, counts)
    known = Precision(question).degrees_of_freedom(counts.needed)
    if math.isfinite(known) and question.widened:
        from fieldplan.sizing.widened_steps import widened_reach_step

        yield widened_reach_step(question, counts.needed)
    elif math.isfinite(known):
        yield _reach(question, counts, known)


def _error(question: Question, counts: Counts) -> Step:
    strata = len(question.parts) > 1
    inputs = []
    for part, results in zip(question.parts, counts.needed, strict=True):
        where = f"({part.name})" if strata else ""
        if strata:
            inputs.append(Quantity(f"W{where}", "share of the population", part.weight))
        inputs += [
            Quantity(f"s{where}", "standard deviation", part.sigma, question.unit),
            Quantity(f"n{where}", "results", results, "results"),
        ]
        if part.population is not None:
            inputs.append(Quantity(f"N{where}", "units in the list", part.population, "units"))
    listed = any(part.population is not None for part in question.parts)
    inside = "s² (1 − n/N) / n" if listed else "s² / n"
    error = Precision(question).standard_error(counts.needed)
    return Step(
        symbol="SE",
        meaning="Standard error to expect if sigma is right",
        formula=f"SE = √(Σ W² {inside})" if strata else f"SE = √({inside})",
        inputs=tuple(inputs),
        unrounded=error,
        rounded=error,
        unit=question.unit,
        source=f"{COCHRAN}, theorem {'5.3' if strata else '2.2'}",
    )


def _reach(question: Question, counts: Counts, known: float) -> Step:
    error = Precision(question).standard_error(counts.needed)
    t = t_quantile(known, confidence=question.confidence, kind=question.interval)
    two_sided = question.interval == "two-sided"
    name = "interval" if two_sided else question.interval.replace("-", " ")
    strata = len(question.parts) > 1
    return Step(
        symbol="half-width",
        meaning=f"Reach of the {typed_percent(question.confidence)} {name} to expect",
        formula="half-width = t · SE",
        inputs=(
            Quantity("t", f"Student quantile at {known:.4g} degrees of freedom", t),
            Quantity("SE", "standard error to expect", error, question.unit),
        ),
        unrounded=t * error,
        rounded=t * error,
        unit=question.unit,
        source=f"{COCHRAN}, ch. 2" + ("; df Satterthwaite 1946" if strata else ""),
    )


def _controls(question: Question, counts: Counts) -> Iterator[Step]:
    visits = sum(counts.planned)
    for rate, entry in zip(
        question.controls, control_counts(question, counts.planned), strict=True
    ):
        if rate.share is not None:
            yield Step(
                symbol=rate.kind,
                meaning=f"Control samples, {rate.kind}, counted apart from n",
                formula="count = share · locations",
                inputs=(
                    Quantity("share", "share of the samples", rate.share),
                    Quantity("locations", "locations to visit", visits, "locations"),
                ),
                unrounded=rate.share * visits,
                rounded=float(entry.count),
                unit="samples",
                source=rate.source,
            )


def _cost(question: Question, counts: Counts) -> Iterator[Step]:
    visits = sum(counts.planned)
    cost, prices = total_cost(question, counts.planned), question.prices
    if cost is None or prices is None:
        return
    controls = sum(entry.count for entry in control_counts(question, counts.planned))
    places = "locations"
    aimed: tuple[Quantity, ...] = ()
    if question.targeted:
        places = "(locations + targeted)"
        aimed = (Quantity("targeted", "places chosen by judgement", question.targeted, "places"),)
    jar, jars, more, days = _jars_and_days(prices, visits + question.targeted)
    beyond, extra = _beyond_common_prices(question, counts)
    each = f"{places} · (visit + {jar})"
    yield Step(
        symbol="cost",
        meaning="Cost of the round",
        formula=f"cost = mobilisation + {each} + controls · {jars}{days}{beyond}",
        inputs=(
            Quantity("mobilisation", "once", prices.mobilisation, prices.currency),
            Quantity("locations", "locations to visit", visits, "locations"),
            *aimed,
            Quantity("visit", "per location", prices.per_location, prices.currency),
            Quantity("analysis", "per analysed sample", prices.per_analysis, prices.currency),
            Quantity("controls", "control samples", controls, "samples"),
            *more,
            *extra,
        ),
        unrounded=cost,
        rounded=cost,
        unit=prices.currency,
        source="prices typed in the campaign file",
    )


def _beyond_common_prices(question: Question, counts: Counts) -> tuple[str, tuple[Quantity, ...]]:
    """Give what increments, and strata dearer than others, add to the formula of the cost."""
    pairs = zip(question.parts, counts.planned, strict=True)
    total = math.fsum(part.extra_cost * planned for part, planned in pairs)
    if not total:
        return "", ()
    what = "increments" if question.increments > 1 else "strata with prices of their own"
    currency = question.prices.currency if question.prices else ""
    return " + extra", (Quantity("extra", f"{what}, in all", total, currency),)


def _jars_and_days(prices: Prices, visits: int) -> tuple[str, str, tuple[Quantity, ...], str]:
    """Give what jars and crew-days add to the formula of the cost, where they have a price."""
    jar, jars, days = "analysis", "analysis", ""
    more: list[Quantity] = []
    if prices.per_sample:
        jar, jars = "jar + analysis", "(jar + analysis)"
        more.append(Quantity("jar", "per sample taken", prices.per_sample, prices.currency))
    if prices.per_crew_day:
        days = " + days · crew-day"
        count = prices.crew_days(visits)
        more += [
            Quantity("days", f"days of {prices.locations_per_day:g} locations", count, "days"),
            Quantity("crew-day", "per day of a crew", prices.per_crew_day, prices.currency),
        ]
    return jar, jars, tuple(more), days
