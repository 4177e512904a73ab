"""Is the mean near normal at this n: what the planned interval delivers, over shapes that fit."""

from collections.abc import Sequence

from fieldplan.base.working import Quantity, Step
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.model import Amount, Finding, Size
from fieldplan.sizing.question import Question
from fieldplan.sizing.shapes import (
    Misses,
    SiteShape,
    equivalent,
    misses,
    n_within,
    part_mean,
    places,
    scaled,
    short_list,
    site_shapes,
    within_lists,
)
from fieldplan.sizing.visits import in_a_row
from fieldplan.sizing.words import figure, listed, typed_percent
from fieldplan.stats.mean_shape import POINT

TEXTBOOK = 30
"""The number that is handed down for data that are not normal (common practice, no source)."""

MEANS = ("mean", "mean-and-level")
"""Questions whose answer is the interval of one mean."""

SOURCES = (
    "Cochran 1977, Sampling Techniques, 3rd ed., sec. 2.15 (from memory)",
    "Hall 1992, The Bootstrap and Edgeworth Expansion, sec. 2.6 (from memory)",
    "simulated t statistics, tests/reference/make_t_coverage.py",
)

Judged = tuple[SiteShape, Misses]


def finding(asked: Asked, size: Size) -> Finding | None:
    """Say what the planned interval delivers where that is not what it claims.

    Parameters
    ----------
    asked : Asked
    size : Size

    Returns
    -------
    Finding or None
        None where no mean is asked for, nothing is known of the shape, every unit is taken, or
        the interval comes within one point of its confidence whatever the shape.
    """
    counts = [entry.needed for entry in size.strata]
    judged = judge(asked, counts)
    if not judged or worst(judged)[1].held >= asked.question.confidence - POINT:
        return None
    question = asked.question
    short = short_list(question, counts) or question.widened
    ends = [None if short else n_within(question, shape, counts) for shape, _ in judged]
    enough = "" if short else _enough_sentence(question, ends)
    return Finding(
        topic="near-normal",
        title="Is the mean near normal at this number of results?",
        answer=f"{held_sentence(asked, counts, judged)} {enough}".rstrip(),
        amounts=_amounts(judged, ends),
        columns=_columns(sum(counts)),
        rows=_rows(question, counts, judged, ends),
        steps=_steps(question, counts, judged),
        assumptions=_assumptions(asked, counts, judged),
        sources=SOURCES,
    )


def judge(asked: Asked, counts: Sequence[int]) -> list[Judged]:
    """Judge every shape that fits; none where no mean of random results is asked for."""
    question = asked.question
    if asked.objective.question not in MEANS or not asked.sigma_known:
        return []
    if question.takes_all(tuple(counts)) or min(counts) < 2 or in_a_row(asked):
        return []
    return [(shape, misses(question, shape, counts)) for shape in site_shapes(asked)]


def worst(judged: Sequence[Judged]) -> Judged:
    """Pick the shape that serves the interval worst."""
    return min(judged, key=lambda one: one[1].held)


def held_sentence(asked: Asked, counts: Sequence[int], judged: Sequence[Judged]) -> str:
    """Say in how many of 100 campaigns the interval holds the mean, and on which side it misses.

    Parameters
    ----------
    asked : Asked
    counts : sequence of int
        Results by stratum.
    judged : sequence of (SiteShape, Misses)

    Returns
    -------
    str
    """
    question = asked.question
    what = f"{typed_percent(question.confidence)} {interval_name(question)}"
    does = {"upper-limit": "lie above", "lower-limit": "lie below"}.get(question.interval, "hold")
    return (
        f"At n = {sum(counts)} the {what} is expected to {does} the mean in {held_words(judged)} "
        f"of 100 campaigns {_shaped_like(asked, judged)}{_sides(question, worst(judged)[1])}."
    )


def interval_name(question: Question) -> str:
    """Name what the campaign fixed: interval, upper limit or lower limit."""
    return "interval" if question.interval == "two-sided" else question.interval.replace("-", " ")


def held_words(judged: Sequence[Judged]) -> str:
    """Write the range over shapes, per 100 campaigns."""
    low, high = (f"{100 * end(one[1].held for one in judged):.0f}" for end in (min, max))
    return f"about {low}" if low == high else f"{low} to {high}"


def _shaped_like(asked: Asked, judged: Sequence[Judged]) -> str:
    families = list(dict.fromkeys(shape.name.split()[0] for shape, _ in judged))
    from_pilot = any(entry.values for entry in asked.entries)
    parts = asked.question.parts
    means = [part_mean(asked.question, part) for part in parts]
    cvs = [part.sigma / mean for part, mean in zip(parts, means, strict=True) if mean > 0]
    how = f"if the site is shaped like {'the pilot' if from_pilot else 'what was typed'}"
    lump = ", with or without a lump of zeros" if any(shape.zeros for shape, _ in judged) else ""
    low, high = (figure(end(cvs), 2) for end in (min, max)) if cvs else ("", "")
    spread = "" if not cvs else f", CV {low}" if low == high else f", CV {low} to {high}"
    return f"{how} ({' or '.join(families)}{spread}{lump})"


def _sides(question: Question, missed: Misses) -> str:
    """Say on which side the interval misses, by the worst shape."""
    if question.interval != "two-sided":
        return ""
    many, few = sorted((missed.too_low, missed.too_high), reverse=True)
    side, other = ("above", "below") if missed.too_low >= missed.too_high else ("below", "above")
    if many < 1.25 * few:
        return "; it misses on either side about as often"
    if few < many / 20:
        return f"; where it misses, the true mean nearly always lies {side} it"
    times = figure(many / few, 1 if many > 3 * few else 2)
    return f"; where it misses, the true mean lies {side} it {times} times as often as {other}"


def _enough_sentence(question: Question, ends: Sequence[int | None]) -> str:
    near = f"comes within one point of {typed_percent(question.confidence)}"
    if None in ends:
        return f"Under the worst of these shapes it takes more than 100000 results until it {near}."
    most = _round(max(n or 0 for n in ends))
    return f"It {near} from about {most} results on under each of these shapes."


def _round(n: int) -> int:
    """Give two digits: the n is no better known."""
    return int(float(f"{n:.2g}"))


def _amounts(judged: Sequence[Judged], ends: Sequence[int | None]) -> tuple[Amount, ...]:
    shape, missed = worst(judged)
    error = max(one.standard_error for _, one in judged)
    return (
        Amount("held_low", "Share of campaigns that hold the mean, worst shape", missed.held),
        Amount("held_high", "The same, best shape", max(one.held for _, one in judged)),
        Amount("mean_above", f"True mean above the interval, {shape.name}", missed.too_low),
        Amount("mean_below", f"True mean below the interval, {shape.name}", missed.too_high),
        Amount("simulation_error", "Standard error of these shares, from simulating", error),
        Amount(
            "n_within_a_point",
            "Results for one point short at most, worst shape",
            None if None in ends else max(n or 0 for n in ends),
        ),
    )


def _columns(n: int) -> tuple[str, ...]:
    return (
        "If the site is",
        "Skewness",
        f"Holds at {n}",
        "Mean above",
        "Mean below",
        f"Holds at {TEXTBOOK}",
        "Within a point from",
    )


def _rows(
    question: Question,
    counts: Sequence[int],
    judged: Sequence[Judged],
    ends: Sequence[int | None],
) -> tuple[tuple[str, ...], ...]:
    """Set the shapes side by side; shares per 100 campaigns."""
    thirty = within_lists(question, scaled(counts, TEXTBOOK))
    short, rows = short_list(question, counts) or question.widened, []
    for (shape, missed), end in zip(judged, ends, strict=True):
        lean = equivalent(question, shape, counts)[1]
        textbook = "–" if thirty is None else f"{100 * misses(question, shape, thirty).held:.1f}"
        rows.append(
            (
                shape.name,
                figure(lean, 2).replace("-", "−"),
                f"{100 * missed.held:.1f}",
                f"{100 * missed.too_low:.1f}",
                f"{100 * missed.too_high:.1f}",
                textbook,
                str(_round(end)) if end else "–" if short else "over 100000",
            )
        )
    return tuple(rows)


def _steps(question: Question, counts: Sequence[int], judged: Sequence[Judged]) -> tuple[Step, ...]:
    """Show where skewness, coverage and the two rules come from, for the worst shape."""
    shape, missed = worst(judged)
    n, lean = equivalent(question, shape, counts)
    skewness = Quantity("G1", f"skewness, {shape.name}", lean)
    drawn = shape.zeros or short_list(question, counts) or question.widened
    held = Step(
        symbol="held",
        meaning="Share of campaigns whose interval holds the mean, worst shape that fits",
        formula="1 − P(t < −q) − P(t > q)",
        inputs=(
            Quantity("n", "results, strata taken as one sample", n),
            skewness,
            Quantity("P(t < −q)", "share of campaigns with the true mean above", missed.too_low),
            Quantity("P(t > q)", "share of campaigns with the true mean below", missed.too_high),
        ),
        unrounded=missed.held,
        rounded=round(missed.held, 3),
        source="simulated for this plan, fixed seed" if drawn else SOURCES[2],
    )
    steps = (_lean_step(question, shape, n, lean), held)
    plain = not short_list(question, counts) and not question.widened
    return (*steps, _rule_step(question, skewness)) if plain else steps


def _rule_step(question: Question, skewness: Quantity) -> Step:
    """Show Cochran's rule, or its like for a limit on the side of the long tail."""
    rule, factor, source = "Cochran's rule for a two-sided interval", 25.0, SOURCES[0]
    if question.interval != "two-sided":
        rule, factor, source = "The same for a limit: first Edgeworth term", 121.0, SOURCES[1]
    n = factor * skewness.value**2
    return Step(
        symbol="n rule",
        meaning=f"{rule}, at 95 %",
        formula=f"n = {factor:g}·G1²",
        inputs=(skewness,),
        unrounded=n,
        rounded=float(round(n)),
        unit="results",
        source=source,
    )


def _lean_step(question: Question, shape: SiteShape, n: int, lean: float) -> Step:
    """Show how the skewness follows from the coefficient of variation."""
    one = shape.parts[0]
    if len(shape.parts) > 1:
        formula = "G1 = √n·Σ W³·s³·G1h/n² / SE³"
        inputs = tuple(
            Quantity(f"G1 {part.name}", f"skewness of {part.name}, {form.name}", form.skewness)
            for part, form in zip(question.parts, shape.parts, strict=True)
        )
        inputs += (Quantity("n", "degrees of freedom + 1", n),)
    elif one.zeros:
        formula = "G1 = third central moment of the part above 0 and the lump, over its s³"
        inputs = (
            Quantity("CV", "coefficient of variation above 0", one.cv),
            Quantity("p0", "share of zeros", one.zeros),
        )
    elif shape.by_skewness:
        formula = "G1 of the results behind sigma, or as typed"
        inputs = (Quantity("g1", "their skewness", lean),)
    else:
        formula = "G1 = 2·CV" if one.family == "gamma" else "G1 = 3·CV + CV³"
        inputs = (Quantity("CV", "coefficient of variation of the shape", one.cv),)
    return Step(
        symbol="G1",
        meaning=f"Skewness of the shape that serves worst, {shape.name}",
        formula=formula,
        inputs=inputs,
        unrounded=lean,
        rounded=round(lean, 3),
        source="Johnson, Kotz & Balakrishnan 1994, Continuous Univariate Distributions 1 "
        "(from memory)",
    )


def _assumptions(asked: Asked, counts: Sequence[int], judged: Sequence[Judged]) -> tuple[str, ...]:
    named = listed([shape.name for shape, _ in judged])
    lines = [
        f"Shapes that fit: {named}. The pilot itself is not drawn from again: a handful of results "
        "cannot show a tail.",
        places(asked.question, counts),
        "A rare part much higher than the rest does worse than any of these shapes.",
    ]
    if len(asked.question.parts) > 1:
        lines.append(
            "Strata are taken as the single sample whose mean leans as theirs (degrees of freedom "
            "+ 1)."
        )
    if any(shape.zeros for shape, _ in judged):
        lines.append("Non-detects of the pilot count as zeros where a lump of zeros is named.")
    return tuple(lines)
