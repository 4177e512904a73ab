"""The working: numbered steps, each with all numbers it uses, before and after rounding."""

import math
from collections.abc import Iterator

from fieldplan.base.working import Quantity, Step
from fieldplan.sizing.closing_steps import COCHRAN, closing_steps
from fieldplan.sizing.counting import Counts
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Question
from fieldplan.stats.allocation import unrounded_shares, unrounded_total
from fieldplan.stats.distributions import chi_square_quantile
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.precision import (
    unrounded_for_half_width,
    unrounded_for_list,
    unrounded_for_standard_error,
    whole,
)


def steps(question: Question, counts: Counts) -> tuple[Step, ...]:
    """Write out the working of a question's counts.

    Parameters
    ----------
    question : Question
    counts : Counts

    Returns
    -------
    tuple of Step
        In the order of the arithmetic.
    """
    working: list[Step] = []
    if counts.plain is not None and not question.census:
        if question.target == "relative_half_width":
            working.append(_absolute(question))
        if len(question.parts) == 1:
            working += _single(question, counts.plain[0])
        else:
            working += _stratified(question, counts.plain)
        working += _chances(question, counts)
    return (*working, *closing_steps(question, counts))


def _sigma(question: Question) -> Quantity:
    part = question.parts[0]
    source = f" ({part.source})" if part.source else ""
    meaning = f"standard deviation of single results{source}"
    return Quantity("s", meaning, part.sigma, question.unit)


def _target(question: Question) -> Quantity:
    if question.target_half_width is None:
        return Quantity("SE", "target standard error of the mean", question.value, question.unit)
    width = question.target_half_width
    return Quantity("h", "target half-width of the interval", width, question.unit)


def _absolute(question: Question) -> Step:
    width = question.target_half_width or 0.0
    return Step(
        symbol="h",
        meaning="Half-width as a share of the expected mean",
        formula="h = r · mean",
        inputs=(
            Quantity("r", "relative half-width", question.value),
            Quantity("mean", "expected mean", question.mean or 0.0, question.unit),
        ),
        unrounded=width,
        rounded=width,
        unit=question.unit,
        source="definition",
    )


def _single(question: Question, plain: int) -> Iterator[Step]:
    """Show one population: first pass, list, t, floor."""
    size = question.parts[0].population
    first = _first_pass(question)
    yield first
    if size is not None:
        yield _listed(first.unrounded, size)
    if question.target_half_width is not None:
        yield _iterated(question, plain)
    elif plain > whole(_corrected(question, first.unrounded)):
        yield _floored(question, plain)


def _first_pass(question: Question) -> Step:
    sigma = question.parts[0].sigma
    formula = "n0 = (s / SE)²"
    inputs: tuple[Quantity, ...] = (_sigma(question), _target(question))
    if question.target_half_width is None:
        first = unrounded_for_standard_error(sigma, question.value)
    else:
        confidence, kind = question.confidence, question.interval
        first = unrounded_for_half_width(
            sigma, question.target_half_width, confidence=confidence, kind=kind
        )
        z = t_quantile(math.inf, confidence=confidence, kind=kind)
        formula = "n0 = (z · s / h)²"
        inputs = (Quantity("z", f"normal quantile, {kind}, {confidence:g}", z), *inputs)
    return Step(
        symbol="n0",
        meaning="Results needed with sigma at face value, first pass",
        formula=formula,
        inputs=inputs,
        unrounded=first,
        rounded=float(whole(first)),
        unit="results",
        source=f"{COCHRAN}, sec. 4.6",
    )


def _corrected(question: Question, first: float) -> float:
    size = question.parts[0].population
    return first if size is None else unrounded_for_list(first, size)


def _listed(first: float, size: int) -> Step:
    corrected = unrounded_for_list(first, size)
    return Step(
        symbol="n",
        meaning="The same for a list of N units",
        formula="n = n0 / (1 + n0 / N)",
        inputs=(
            Quantity("n0", "results needed from an endless population, unrounded", first),
            Quantity("N", "units in the list", size, "units"),
        ),
        unrounded=corrected,
        rounded=float(min(whole(corrected), size)),
        unit="results",
        source=f"{COCHRAN}, sec. 4.6",
    )


def _iterated(question: Question, plain: int) -> Step:
    """Show the t iteration at its end: the last n that is too small would fail the same line."""
    part, width = question.parts[0], question.target_half_width or 0.0
    inputs = [_sigma(question), _target(question)]
    if plain == part.population:
        value, formula = float(plain), "n = N: every unit is visited"
    else:
        t = t_quantile(plain - 1, confidence=question.confidence, kind=question.interval)
        value = (t * part.sigma / width) ** 2
        formula = "smallest n that is at least (t · s / h)² with t at n − 1 degrees of freedom"
        if part.population is not None:
            value = unrounded_for_list(value, part.population)
            formula += "; for the list x / (1 + x / N)"
            inputs.append(Quantity("N", "units in the list", part.population, "units"))
        inputs.insert(0, Quantity("t", f"Student quantile at {plain - 1} degrees of freedom", t))
    return Step(
        symbol="n",
        meaning="Results needed with Student's t in place of z, iterated to its end",
        formula=formula,
        inputs=tuple(inputs),
        unrounded=value,
        rounded=float(plain),
        unit="results",
        source=f"{COCHRAN}, ch. 4",
    )


def _floored(question: Question, plain: int) -> Step:
    return Step(
        symbol="n",
        meaning="Raised to the floor: a variance needs 2 results",
        formula="n = max(n, floor)",
        inputs=(Quantity("floor", "fewest results", question.floor, "results"),),
        unrounded=float(plain),
        rounded=float(plain),
        unit="results",
        source="campaign choice",
    )


def _stratified(question: Question, plain: tuple[int, ...]) -> Iterator[Step]:
    """Show strata: the total before rounding, the smallest whole one, the share of each."""
    strata, allocation = question.strata, question.allocation
    symbol = "(Σ W·s)²" if allocation == "neyman" else "Σ W·s²"
    below = "SE²" if question.target_half_width is None else "(h / z)²"
    target = question.target_standard_error or 0.0
    inputs = [_target(question)]
    if question.target_half_width is not None:
        z = t_quantile(math.inf, confidence=question.confidence, kind=question.interval)
        target = question.target_half_width / z
        inputs.append(Quantity("z", f"normal quantile, {question.interval}", z))
    listed = any(part.population is not None for part in question.parts)
    for k, part in enumerate(question.parts, start=1):
        inputs += [
            Quantity(f"W{k}", f"share of {part.name}", part.weight),
            Quantity(f"s{k}", f"standard deviation in {part.name}", part.sigma, question.unit),
        ]
        if part.population is not None:
            inputs.append(Quantity(f"N{k}", f"units in {part.name}", part.population, "units"))
    total = unrounded_total(strata, target**2, allocation=allocation)
    yield Step(
        symbol="n",
        meaning=f"Results needed with sigma at face value, {allocation.capitalize()} allocation",
        formula=f"n = {symbol} / ({below} + Σ W²·s²/N)" if listed else f"n = {symbol} / {below}",
        inputs=tuple(inputs),
        unrounded=total,
        rounded=float(sum(plain)),
        unit="results",
        source=f"{COCHRAN}, sec. 5.9; then the smallest whole total that keeps the target with "
        f"at least {question.floor} results in every stratum",
    )
    yield from _shares(question, plain, total)


def _shares(question: Question, plain: tuple[int, ...], total: float) -> Iterator[Step]:
    shares = unrounded_shares(question.strata, total, allocation=question.allocation)
    neyman = question.allocation == "neyman"
    formula = "n_h = n · W·s / Σ W·s" if neyman else "n_h = n · W"
    for part, share, count in zip(question.parts, shares, plain, strict=True):
        inputs = [
            Quantity("n", "total before rounding", total, "results"),
            Quantity("W", f"share of {part.name}", part.weight),
        ]
        if neyman:
            spreads = math.fsum(p.weight * p.sigma for p in question.parts)
            inputs += [
                Quantity("s", f"standard deviation in {part.name}", part.sigma, question.unit),
                Quantity("Σ W·s", "sum over strata", spreads, question.unit),
            ]
        yield Step(
            symbol=f"n({part.name})",
            meaning=f"Results in {part.name}; whole numbers of smallest standard error",
            formula=formula,
            inputs=tuple(inputs),
            unrounded=share,
            rounded=float(count),
            unit="results",
            source="Wright 2012, The American Statistician 66:217"
            if neyman
            else f"{COCHRAN}, ch. 5",
        )


def _chances(question: Question, counts: Counts) -> Iterator[Step]:
    """Show how sure the plain number is and, with one pilot, how sigma is raised."""
    totals = [counts.plain, counts.needed] if counts.plain != counts.needed else [counts.needed]
    for chosen in totals:
        if chosen is not None:
            chance = Precision(question).chance(chosen)
            if chance is not None:
                yield _chance(question, chosen, chance)
            elif question.assurance is not None and question.target_half_width is not None:
                luck_only = Precision(question).chance(chosen, sigma_known=True) or 0.0
                yield _chance(question, chosen, luck_only)
    simple = len(question.parts) == 1 and question.target == "standard_error"
    if simple and question.assurance is not None and question.locations is None:
        yield from _raised(question, counts, question.assurance)


def _raised(question: Question, counts: Counts, assurance: float) -> Iterator[Step]:
    """Show how the upper limit of sigma gives the number at an assurance."""
    part = question.parts[0]
    if part.results is None:
        return
    known = part.results - 1
    quantile = chi_square_quantile(1 - assurance, known)
    upper = part.sigma * math.sqrt(known / quantile)
    yield Step(
        symbol="s_u",
        meaning="Upper confidence limit of sigma at the chosen assurance",
        formula="s_u = s · √(df / χ²)",
        inputs=(
            _sigma(question),
            Quantity("df", "pilot results − 1", known),
            Quantity("χ²", f"chi-square quantile at {1 - assurance:.4g}", quantile),
        ),
        unrounded=upper,
        rounded=upper,
        unit=question.unit,
        source="Hahn & Meeker 1991, Statistical Intervals, ch. 4",
    )
    endless = unrounded_for_standard_error(upper, question.value)
    yield Step(
        symbol="n",
        meaning="Results needed at the chosen assurance",
        formula="n = (s_u / SE)²" + ("" if part.population is None else ", then n / (1 + n / N)"),
        inputs=(Quantity("s_u", "upper limit of sigma", upper, question.unit), _target(question)),
        unrounded=_corrected(question, endless),
        rounded=float(sum(counts.needed)),
        unit="results",
        source=f"{COCHRAN}, sec. 4.6",
    )


def _chance(question: Question, chosen: tuple[int, ...], chance: float) -> Step:
    precision = Precision(question)
    pilot = precision.pilot_degrees_of_freedom(chosen)
    luck = precision.luck_of_allocation(chosen)
    unit = f"({question.unit})²" if question.unit else ""
    inputs = [
        Quantity("n", "results", sum(chosen), "results"),
        Quantity("V", "predicted variance of the mean", precision.variance(chosen), unit),
        _target(question),
    ]
    if pilot is not None and math.isfinite(pilot):
        inputs.append(Quantity("df", "degrees of freedom behind sigma", pilot))
    if luck != 1:
        inputs.append(Quantity("m", "factor on V: Neyman counts follow the pilot's luck", luck))
    factor = "m·" if luck != 1 else ""
    if question.target_half_width is None:
        formula = f"chance = P(χ² ≥ df · {factor}V / SE²)"
        source = "Hahn & Meeker 1991, Statistical Intervals, ch. 4"
    else:
        main = precision.degrees_of_freedom(chosen)
        formula = f"chance = P(F ≤ h² / (t² · {factor}V)), F with df of the coming results and df"
        source = "predictive F: Hahn & Meeker 1991, Statistical Intervals"
        if pilot is None:
            formula = "chance = P(χ² ≤ df' · h² / (t² · V)), df' of the coming results"
            source = "Kupper & Hafner 1989, The American Statistician 43:101"
        if math.isfinite(main):
            t = t_quantile(main, confidence=question.confidence, kind=question.interval)
            inputs.append(Quantity("t", f"Student quantile at {main:.4g} degrees of freedom", t))
    return Step(
        symbol="chance",
        meaning=f"Chance that {sum(chosen)} results meet the target"
        + (", were sigma exactly right" if pilot is None else ""),
        formula=formula,
        inputs=tuple(inputs),
        unrounded=chance,
        rounded=round(chance, 3),
        source=source,
    )
