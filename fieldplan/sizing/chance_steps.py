"""The working of the chance that a number is enough, each number traceable to its inputs."""

import math
from collections.abc import Iterator, Sequence

from fieldplan.base.working import Quantity, Step
from fieldplan.sizing.closing_steps import COCHRAN
from fieldplan.sizing.counting import Counts
from fieldplan.sizing.precision import PilotTerm, Precision
from fieldplan.sizing.quantities import corrected_for_list, sigma_quantity, target_quantity
from fieldplan.sizing.question import Part, Question
from fieldplan.stats.assurance import effective_degrees_of_freedom
from fieldplan.stats.distributions import chi_square_quantile
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.precision import unrounded_for_standard_error

DERIVED = "derived here, no published source; see docs/methods.md"


def chance_steps(question: Question, counts: Counts) -> Iterator[Step]:
    """Show how sure the plain number is and, with one pilot, how sigma is raised.

    Parameters
    ----------
    question : Question
    counts : Counts
    """
    precision = Precision(question)
    totals = [counts.plain, counts.needed] if counts.plain != counts.needed else [counts.needed]
    for chosen in totals:
        if chosen is None:
            continue
        chance = precision.chance(chosen)
        if chance is not None:
            yield from _behind(question, chosen)
            yield _chance(question, chosen, chance)
        elif question.assurance is not None and question.target_half_width is not None:
            luck_only = precision.chance(chosen, sigma_known=True) or 0.0
            yield _chance(question, chosen, luck_only)
    simple = len(question.parts) == 1 and question.target == "standard_error"
    if simple and question.assurance is not None and question.locations is None:
        yield from _raised(question, counts, question.assurance)


def _raised(question: Question, counts: Counts, assurance: float) -> Iterator[Step]:
    """Show how the upper limit of sigma gives the number at an assurance."""
    part = question.parts[0]
    if part.results is None:
        return
    known = effective_degrees_of_freedom(part.results, part.excess_kurtosis or 0.0)
    quantile = chi_square_quantile(1 - assurance, known)
    upper = part.sigma * math.sqrt(known / quantile)
    yield Step(
        symbol="s_u",
        meaning="Upper confidence limit of sigma at the chosen assurance",
        formula="s_u = s · √(df / χ²)",
        inputs=(
            sigma_quantity(question),
            Quantity("df", _behind_sigma(part), known),
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
        inputs=(
            Quantity("s_u", "upper limit of sigma", upper, question.unit),
            target_quantity(question),
        ),
        unrounded=corrected_for_list(question, endless),
        rounded=float(sum(counts.needed)),
        unit="results",
        source=f"{COCHRAN}, sec. 4.6",
    )


def _behind_sigma(part: Part) -> str:
    """Say what the degrees of freedom behind one sigma are."""
    if not part.excess_kurtosis:
        return "pilot results − 1"
    return f"2 / (2/(n0 − 1) + {part.excess_kurtosis:g}/n0), heavy tails declared"


def _behind(question: Question, chosen: tuple[int, ...]) -> Iterator[Step]:
    """Show, for strata, the degrees of freedom behind V and the factor on it."""
    precision = Precision(question)
    terms = [term for term in precision.pilot_terms(chosen) if term.variance > 0]
    if len(question.parts) == 1 or not terms:
        return
    known = precision.pilot_degrees_of_freedom(chosen) or 0.0
    yield Step(
        symbol="df",
        meaning=f"Degrees of freedom behind the variance predicted for {sum(chosen)} results",
        formula="df = (Σ v)² / Σ (v² / (n0 − 1))",
        inputs=tuple(_terms(question, chosen, terms)),
        unrounded=known,
        rounded=known,
        source="Satterthwaite 1946, Biometrics Bulletin 2:110",
    )
    luck = precision.luck_of_allocation(chosen)
    if luck == 1:
        return
    total = math.fsum(term.variance for term in terms)
    moving = [term for term in terms if term.moving > 0]
    shares = [
        quantity
        for term in moving
        for quantity in (
            Quantity(f"p({term.name})", "its share of Σ v", term.moving / total),
            Quantity(f"n0({term.name})", "results of its pilot", term.results, "results"),
        )
    ]
    whole = math.fsum(term.moving for term in moving) / total
    squared = question.allocation == "equal-precision"
    over = "2·p·(1 − p/P) / (n0 − 2.5)" if squared else "p·(1 − p/P) / (n0 − 1)"
    yield Step(
        symbol="m",
        meaning="Factor on the predicted variance, as the counts follow the pilot's luck",
        formula=f"m = exp(Σ {over}), over strata neither at their floor nor whole",
        inputs=(*shares, Quantity("P", "sum of p", whole)),
        unrounded=luck,
        rounded=luck,
        unit="",
        source=DERIVED,
    )


def _terms(
    question: Question, chosen: tuple[int, ...], terms: Sequence[PilotTerm]
) -> Iterator[Quantity]:
    """Give each pilot's part of the predicted variance, and how it comes about."""
    unit = f"({question.unit})²" if question.unit else ""
    n = {part.name: count for part, count in zip(question.parts, chosen, strict=True)}
    for term in terms:
        listed = any(part.population for part in question.parts if part.name in term.strata)
        counts = " and ".join(str(n[name]) for name in term.strata)
        how = f"W²·s²{'·(1 − n/N)' if listed else ''}/n at n = {counts}"
        added = ", added" if len(term.strata) > 1 else ""
        yield Quantity(f"v({term.name})", how + added, term.variance, unit)
        yield Quantity(f"n0({term.name})", "results of its pilot", term.results, "results")


def _chance(question: Question, chosen: tuple[int, ...], chance: float) -> Step:
    if question.widened and question.target_half_width is not None:
        from fieldplan.sizing.widened_steps import widened_chance_step

        return widened_chance_step(question, chosen, chance)
    precision = Precision(question)
    pilot = precision.pilot_degrees_of_freedom(chosen)
    luck = precision.luck_of_allocation(chosen)
    unit = f"({question.unit})²" if question.unit else ""
    summed = ", Σ v" if len(question.parts) > 1 else ""
    inputs = [
        Quantity("n", "results", sum(chosen), "results"),
        Quantity("V", f"predicted variance of the mean{summed}", precision.variance(chosen), unit),
        target_quantity(question),
    ]
    if pilot is not None and math.isfinite(pilot):
        inputs.append(Quantity("df", "degrees of freedom behind sigma", pilot))
    if luck != 1:
        inputs.append(Quantity("m", "factor on V: the counts follow the pilot's luck", luck))
    main = precision.degrees_of_freedom(chosen)
    if question.target_half_width is not None and math.isfinite(main):
        t = t_quantile(main, confidence=question.confidence, kind=question.interval)
        inputs.append(Quantity("df'", "degrees of freedom of the coming results", main))
        inputs.append(Quantity("t", "Student quantile at df'", t))
        worth = precision.luck(chosen)
        if worth != main:
            inputs.append(Quantity("df*", "what they are worth, heavy tails declared", worth))
    formula, source = _chance_formula(question, pilot_known=pilot is not None, factor=luck != 1)
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


def _chance_formula(question: Question, *, pilot_known: bool, factor: bool) -> tuple[str, str]:
    """Give the formula of a chance, and its source."""
    m = "m·" if factor else ""
    derived = f"; the factor m {DERIVED}" if factor else ""
    if question.target_half_width is None:
        source = "Hahn & Meeker 1991, Statistical Intervals, ch. 4"
        return f"chance = P(χ² ≥ df · {m}V / SE²)", source + derived
    if not pilot_known:
        source = "Kupper & Hafner 1989, The American Statistician 43:101"
        of = "df*" if question.heavy_tails else "df'"
        return f"chance = P(χ² ≤ {of} · h² / (t² · V)), χ² with {of}", source
    source = "predictive F: Hahn & Meeker 1991, Statistical Intervals"
    of = "df*" if question.heavy_tails else "df'"
    return f"chance = P(F ≤ h² / (t² · {m}V)), F with {of} and df", source + derived
