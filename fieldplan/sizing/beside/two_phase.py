"""Cheap readings beside laboratory results: what the same precision would cost with them."""

from dataclasses import dataclass

from fieldplan.base.working import Quantity, Step
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.field_readings import Reading, readings_of
from fieldplan.sizing.frontier import PricedDesign, Wanted, wanted_of
from fieldplan.sizing.frontier_readings import WithReadings
from fieldplan.sizing.model import Amount, Finding, Size
from fieldplan.sizing.words import counted, figure, with_unit
from fieldplan.stats.two_phase import (
    break_even_correlation,
    readings_per_result,
    relative_variance,
)

COCHRAN = "Cochran 1977, Sampling Techniques, 3rd ed., ch. 12 (from memory)"
FISHER = "Fisher 1921, Metron 1:3 (from memory)"


@dataclass(frozen=True)
class _Weighed:
    """One reading, its best design at the precision compared, and the border of what pays."""

    reading: Reading
    design: PricedDesign | None
    border: float | None
    plan_cost: float

    @property
    def pays(self) -> bool:
        """The precision costs less with it than the plan does."""
        return self.design is not None and self.design.cost < self.plan_cost - 0.5

    @property
    def cost(self) -> float:
        """Of its design; without one as dear as can be."""
        return float("inf") if self.design is None else self.design.cost


def finding(asked: Asked, size: Size) -> Finding | None:
    """Say what field readings would save; n is not changed by them.

    Parameters
    ----------
    asked : Asked
    size : Size

    Returns
    -------
    Finding or None
        None where the campaign names no reading of the deciding analyte, for a census, for
        composites, and where something else than the precision of a mean is asked.
    """
    if not asked.sigma_known or size.question != "mean" or asked.question.census:
        return None
    if asked.question.increments > 1:
        return None
    readings = readings_of(asked)
    if not readings or asked.question.takes_all([entry.needed for entry in size.strata]):
        return None
    if any(r.of_a_reading <= 0 or r.of_a_result <= 0 for r in readings):
        return _without_prices(readings[0])
    wanted = wanted_of(asked.question, tuple(entry.needed for entry in size.strata))
    weighed = [_weighed(asked, reading, wanted, cost=size.cost or 0.0) for reading in readings]
    best = min(weighed, key=lambda w: w.cost)
    return Finding(
        topic="two-phase",
        title="Readings in the field beside laboratory results",
        answer=_answer(asked, best, wanted),
        amounts=_amounts(asked, best, wanted),
        columns=("Reading", "Correlation", "Pays above", "Readings", "Results", "Cost")
        if len(weighed) > 1
        else (),
        rows=tuple(_row(w) for w in weighed) if len(weighed) > 1 else (),
        steps=_steps(asked, best),
        assumptions=_assumptions(best),
        warnings=_warnings(asked, best),
        sources=(COCHRAN, *((FISHER,) if best.reading.pairs else ())),
    )


def _weighed(asked: Asked, reading: Reading, wanted: Wanted, *, cost: float) -> _Weighed:
    border = break_even_correlation(
        reading_cost=reading.of_a_reading,
        result_cost=reading.of_a_result,
        single_cost=reading.of_a_single_result,
    )
    design = WithReadings(asked.question, reading).cheapest(wanted)
    return _Weighed(reading, design, border, cost)


def _without_prices(reading: Reading) -> Finding:
    """Say what no price can change: the most that readings could do."""
    most = (1 - reading.correlation**2) ** 0.5
    return Finding(
        topic="two-phase",
        title="Readings in the field beside laboratory results",
        answer=(
            f"What {reading.name} would save cannot be said without what a visit and an analysis "
            f"cost. Very many readings would bring the standard error of the same results down to "
            f"{100 * most:.0f} % at best (√(1 − ρ²) at ρ = {reading.correlation:.2f})."
        ),
        amounts=(Amount("least_share_of_error", "Standard error with very many readings", most),),
        warnings=_source_warnings(reading),
        sources=(COCHRAN,),
    )


def _money(asked: Asked, amount: float) -> str:
    prices = asked.question.prices
    return with_unit(f"{amount:.0f}", prices.currency if prices else "")


def _aim(asked: Asked, wanted: Wanted) -> str:
    word = "standard error" if wanted.measure == "standard_error" else "half-width"
    return f"{word} of {with_unit(figure(wanted.value), asked.question.unit)}"


def _border_words(weighed: _Weighed) -> str:
    if weighed.border is None:
        return "At these prices not even a perfect reading would pay in a large campaign."
    if weighed.border == 0:
        return "At these prices a reading costs nothing extra, so it pays however loose it is."
    border, here = weighed.border, weighed.reading.correlation
    if weighed.pays and here < border:
        return (
            "That is room that whole numbers and whole days leave: in a larger campaign readings "
            f"stop paying below a correlation of {border:.2f}, and here it is {here:.2f}."
        )
    if not weighed.pays and here >= border:
        return (
            f"In a larger campaign they would: at these prices from a correlation of {border:.2f} "
            f"up, and here it is {here:.2f}."
        )
    return (
        f"At these prices readings stop paying below a correlation of {border:.2f}; here it is "
        f"{here:.2f}."
    )


def _answer(asked: Asked, best: _Weighed, wanted: Wanted) -> str:
    """Say what the precision of the plan would cost with readings, and where that ends."""
    design, name = best.design, best.reading.name
    aim, own = _aim(asked, wanted), _money(asked, best.plan_cost)
    if design is None:
        return f"No number of readings with {name} reaches a {aim}."
    if not best.pays:
        return f"Readings with {name} do not pay here: results alone cost {own}. " + _border_words(
            best
        )
    split = f"{counted(design.readings, 'reading')}, {design.results} of them with a result"
    return (
        f"With {name} a {aim} would cost {_money(asked, design.cost)} ({split}) where this plan "
        f"costs {own}. {_border_words(best)}"
    )


def _amounts(asked: Asked, best: _Weighed, wanted: Wanted) -> tuple[Amount, ...]:
    reading, design, currency = best.reading, best.design, ""
    if asked.question.prices is not None:
        currency = asked.question.prices.currency
    found = [
        Amount("correlation", f"Correlation of {reading.name} and result", reading.correlation),
        Amount("correlation_low", "Lower end of its 95 % interval", reading.low),
        Amount("correlation_high", "Upper end of its 95 % interval", reading.high),
        Amount("border", "Correlation below which readings stop paying", best.border),
        Amount("compared", f"Precision that is compared, {wanted.measure.replace('_', ' ')}",
               wanted.value, asked.question.unit),
        Amount("plan_cost", "Cost of this plan", best.plan_cost, currency),
    ]  # fmt: skip
    if design is not None:
        found += [
            Amount("readings", "Readings", design.readings),
            Amount("results", "Results among them", design.results),
            Amount("locations", "Locations to visit, losses in", design.locations),
            Amount("cost", "Cost with readings", design.cost, currency),
            Amount("standard_error", "Standard error to expect", design.standard_error,
                   asked.question.unit),
        ]  # fmt: skip
    return tuple(found)


def _row(weighed: _Weighed) -> tuple[str, ...]:
    design, reading = weighed.design, weighed.reading
    border = "never" if weighed.border is None else f"{weighed.border:.2f}"
    if design is None:
        return (reading.name, f"{reading.correlation:.2f}", border, "–", "–", "–")
    cells = (str(design.readings), str(design.results), f"{design.cost:.0f}")
    return (reading.name, f"{reading.correlation:.2f}", border, *cells)


def _steps(asked: Asked, best: _Weighed) -> tuple[Step, ...]:
    """Write out the ratio, the variance of the split and the border."""
    reading, design = best.reading, best.design
    if design is None:
        return ()
    rho = Quantity("ρ", f"correlation ({reading.source})", reading.correlation)
    ratio = readings_per_result(
        reading.correlation, reading_cost=reading.of_a_reading, result_cost=reading.of_a_result
    )
    gain = relative_variance(
        reading.correlation,
        reading_cost=reading.of_a_reading,
        result_cost=reading.of_a_result,
        single_cost=reading.of_a_single_result,
    )
    costs = _cost_quantities(reading)
    steps = [
        Step("n'/n", "Readings for each result, in a large campaign",
             "n'/n = ρ · √c / √((1 − ρ²) · c'), at least 1", (rho, *costs[:2]), ratio,
             ratio, "", COCHRAN),
        _error_step(reading, design, rho, unit=asked.question.unit),
        Step("V/V1", "Variance of the mean against results alone for the same money",
             "V/V1 = (√((1 − ρ²) · c) + ρ · √c')² / c1", (rho, *costs), gain, gain, "", COCHRAN),
    ]  # fmt: skip
    if best.border is not None:
        steps.append(
            Step("ρ0", "Correlation below which readings stop paying, in a large campaign",
                 "√((1 − ρ0²) · c) + ρ0 · √c' = √c1", costs, best.border, best.border, "", COCHRAN)
        )  # fmt: skip
    return tuple(steps)


def _cost_quantities(reading: Reading) -> tuple[Quantity, ...]:
    unit = reading.prices.currency
    return (
        Quantity("c", "what a result adds at a place with a reading", reading.of_a_result, unit),
        Quantity("c'", "what one more place with a reading costs", reading.of_a_reading, unit),
        Quantity("c1", "what a result costs without readings", reading.of_a_single_result, unit),
    )


def _error_step(reading: Reading, design: PricedDesign, rho: Quantity, *, unit: str) -> Step:
    population = reading.population
    finite = " − F" if population.finite else ""
    inputs = [
        Quantity("σ", "standard deviation of single results, as they are shared",
                 population.sigma, unit),
        rho,
        Quantity("n", "results", design.results, "results"),
        Quantity("n'", "readings", design.readings, "readings"),
        Quantity("L", "strata, each with a level of its own", population.strata),
    ]  # fmt: skip
    if population.finite:
        inputs.append(Quantity("F", "what the list takes off, Σ W²·σ²/N", population.finite))
    return Step(
        symbol="SE",
        meaning="Standard error to expect with readings; the line fitted to n results",
        formula=f"SE² = σ²·(1 − ρ²)·(1/n + (1/n − 1/n')/(n − L − 2)) + σ²·ρ²/n'{finite}",
        inputs=tuple(inputs),
        unrounded=design.standard_error,
        rounded=design.standard_error,
        unit=unit,
        source=COCHRAN,
    )


def _assumptions(best: _Weighed) -> tuple[str, ...]:
    lines = [
        "The places with a result are drawn at random from those with a reading, and every place "
        "with a result has one.",
        "Results follow readings along a straight line, with the same scatter about it over the "
        "whole range; readings are near normal where results are few.",
        "The whole numbers are the cheapest that keep the precision: all near them were tried.",
        "The line is fitted on this site's own results; a factory calibration does not replace it.",
    ]
    if best.reading.population.strata > 1:
        lines.append(
            "The correlation holds inside the strata, with one slope for all; over the whole site "
            "it is larger where the strata differ, and must not be taken from there."
        )
    return tuple(lines)


def _source_warnings(reading: Reading) -> tuple[str, ...]:
    lines = list(reading.notes)
    if reading.assumed:
        lines.append(f"The correlation of {reading.name} is ASSUMED.")
    elif reading.pairs is None:
        lines.append(
            f"Nobody said how many pairs stand behind the correlation of {reading.name}; give "
            "from_pairs, or a file of pairs, to see how sure it is."
        )
    return tuple(lines)


def _warnings(asked: Asked, best: _Weighed) -> tuple[str, ...]:
    """Say what is not done with it, and what a smaller correlation would do to the split."""
    reading, design = best.reading, best.design
    lines = list(_source_warnings(reading))
    if design is not None and best.pays and reading.low is not None and reading.pairs:
        looser = reading.with_correlation(reading.low).population
        error = looser.variance(design.readings, design.results) ** 0.5
        line = (
            f"From {reading.pairs} pairs the true correlation may be as low as {reading.low:.2f} "
            f"(95 % interval); the standard error would then be "
            f"{with_unit(figure(error), asked.question.unit)}, not {figure(design.standard_error)}"
        )
        short = best.border is not None and reading.low < best.border
        lines.append(line + (", and readings would not pay." if short else "."))
    lines.append(
        "The number of this plan is not changed by it: locations, forms and estimate are those of "
        "results alone."
    )
    return tuple(lines)
