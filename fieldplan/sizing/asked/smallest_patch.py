"""The smallest patch that must not be missed: how many locations, and what a number finds."""

import math
from collections.abc import Callable
from dataclasses import replace

from fieldplan.base.errors import DesignError
from fieldplan.base.working import Quantity, Step
from fieldplan.design.patch_chance import PatchChance
from fieldplan.sizing.asked.model import Answered, Asked
from fieldplan.sizing.asked.patch_ground import LATTICES, PatchQuestion, patch_question
from fieldplan.sizing.asked.patch_words import (
    SOURCES,
    asked_for,
    assumptions,
    beyond,
    ground_words,
    off_words,
    patch_words,
    place_words,
    refusal,
    too_many_lost,
    warnings,
)
from fieldplan.sizing.model import Amount, Finding, Picture, Series
from fieldplan.sizing.words import counted, figure, percent, typed, typed_percent
from fieldplan.stats.precision import MOST, meets, smallest

TITLE = "The smallest patch that must not be missed"
_SCALES = (0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0, 1.2, 1.5, 2.0)
"""Sizes of the picture, as shares of the patch asked about."""
_ROWS = (0.4, 0.6, 0.8, 1.0, 1.2, 1.5, 2.0)
"""Those of the table."""


def count(asked: Asked) -> Answered:
    """Count the locations of which one at least lies in the patch, with the stated probability.

    Parameters
    ----------
    asked : Asked

    Returns
    -------
    Answered

    Raises
    ------
    DesignError
        The patch does not fit into the area, there is no area, or the receiver is too coarse.
    """
    question = patch_question(asked)
    if question.doubtful:
        raise DesignError(refusal(question))
    if question.out_of_reach:
        raise DesignError(too_many_lost(question))
    endless = question.endless_count(question.design.layout)
    total = _fewest(question, math.ceil(endless - 1e-9))
    needed = asked.shared(total)
    finding = _finding(question, needed)
    sentence = (
        f"{_counted(question, needed)} {place_words(question)} hit {patch_words(question)}, "
        f"with a chance of {_reached(question, finding)}{off_words(question)}: "
        f"averaged {ground_words(question)}."
    )
    steps = (*_patch_steps(question), _endless_step(question, endless), *finding.steps)
    return Answered(
        needed=needed,
        target=f"{asked_for(question)} chance of hitting {patch_words(question)}",
        finding=replace(finding, answer=sentence, steps=steps),
        unrounded=endless,
    )


def bought(asked: Asked, counts: tuple[int, ...]) -> Finding:
    """Say with what chance given counts hit the patch, and the smallest patch that they find.

    Parameters
    ----------
    asked : Asked
    counts : tuple of int
        Results by stratum.

    Returns
    -------
    Finding
        Without a chance where the receiver is too coarse for one.

    Raises
    ------
    DesignError
        The patch does not fit into the area, or there is no area.
    """
    question = patch_question(asked)
    if question.doubtful:
        return Finding("smallest-patch", TITLE, refusal(question), sources=SOURCES)
    return _finding(question, counts)


def _reached(question: PatchQuestion, finding: Finding) -> str:
    """Write the chance that the number reaches: never less than the one asked for."""
    asked = question.table.probability
    reached = max(float(finding.amounts[0].value or 0.0), asked)
    shown = math.floor(1000 * reached + 1e-6) / 1000
    return "over 99.9 %" if 1 > reached > 0.9995 else typed_percent(max(shown, asked))


def _counted(question: PatchQuestion, counts: tuple[int, ...]) -> str:
    """Count the locations; where some are expected to be lost, say of how many they are left."""
    left, planned = sum(counts), sum(question.planned(counts))
    return counted(left, "location") if left == planned else f"{left} of {planned} locations"


def _fewest(question: PatchQuestion, start: int) -> int:
    """Find the fewest results that keep the probability.

    Random places have a closed form, so the search is exact. A grid is followed by scaling: on a
    field n locations find a patch as often as n·f² find one that is f times as small, on a strip
    as often as n·f. The last steps are one location, or one in 200.
    """
    asked, least = question.asked, sum(question.asked.question.strata.floors)

    def fits(total: int) -> bool:
        counts = question.laid(asked.shared(total))
        found = question.chances.chance(counts, scale=question.reach)
        return meets(question.table.probability, found.chance)

    if question.lattice is None or asked.frame is None:
        total = smallest(fits, least, MOST)
        if total == MOST and not fits(total):
            raise DesignError(beyond(question, MOST))
        return total
    return _settled(fits, _scaled_guess(question, max(start, least)), least)


def _scaled_guess(question: PatchQuestion, start: int) -> int:
    """Follow the scale that n locations find with the probability to the patch asked about."""
    asked, least = question.asked, sum(question.asked.question.strata.floors)

    def excess(total: int) -> float:
        counts = question.laid(asked.shared(total))
        scale = question.rough_chances.smallest_scale(counts, question.table.probability)
        return math.log(scale / question.reach)

    first = excess(start)
    second_n = max(math.ceil(start * math.exp(2 * first)), least)
    if second_n == start:
        return start
    second = excess(second_n)
    rise = (second - first) / math.log(second_n / start)
    slope = min(max(-rise, 0.3), 1.5)  # one half on a field, 1 on a strip
    return max(math.ceil(second_n * math.exp(second / slope)), least)


def _settled(fits: Callable[[int], bool], guess: int, least: int) -> int:
    """Walk from a guess to a number that fits while the next smaller one does not."""
    step = max(1, guess // 200)
    if fits(guess):
        good, bad = guess, guess - step
        while bad >= least and fits(bad):
            good, bad, step = bad, bad - 2 * step, 2 * step
        bad = max(bad, least - 1)
    else:
        good, bad = guess + step, guess
        while not fits(good):
            good, bad, step = good + 2 * step, good, 2 * step
    while good - bad > max(1, good // 200):
        middle = (good + bad) // 2
        good, bad = (middle, bad) if fits(middle) else (good, middle)
    return good


def _finding(question: PatchQuestion, counts: tuple[int, ...]) -> Finding:
    laid, chances = question.laid(counts), question.chances
    kept = chances.chance(laid, scale=question.reach)
    planned = chances.chance(laid)
    factor = chances.smallest_scale(laid, question.table.probability) + 1 - question.reach
    factor = max(factor, question.least_scale)
    spacing = _spacing(question, laid)
    answer = _bought_words(question, counts, kept=kept, factor=factor)
    curve = _curve(question, laid)
    return Finding(
        topic="smallest-patch",
        title=TITLE,
        answer=answer,
        amounts=_amounts(question, kept, planned, factor=factor, spacing=spacing),
        columns=("length, m", "width, m", "chance of hitting"),
        rows=tuple(
            (figure(p.length), figure(p.width), percent(c))
            for p, c in ((question.patch.scaled(s), c) for s, c in curve if s in _ROWS)
        ),
        steps=(_chance_step(question, counts, kept),),
        assumptions=assumptions(question, kept),
        warnings=warnings(question, spacing),
        sources=SOURCES,
        picture=_picture(question, curve, sum(counts)),
    )


def _bought_words(
    question: PatchQuestion, counts: tuple[int, ...], *, kept: PatchChance, factor: float
) -> str:
    """Say first the smallest patch that is hit as surely as asked, then the one asked about."""
    opening = f"{_counted(question, counts)} {place_words(question)} hit"
    if not math.isfinite(factor):
        return (
            f"{opening} {patch_words(question)}, with a chance of {percent(kept.chance)}"
            f"{off_words(question)}; {asked_for(question)} was asked for."
        )
    patch = question.patch.scaled(factor)
    least = f"a round patch {figure(patch.length)} m across"
    if patch.length > patch.width:
        least = f"an oval patch of {figure(patch.length)} m by {figure(patch.width)} m"
    return (
        f"{opening} {least} or larger with a chance of {asked_for(question)}, and "
        f"{patch_words(question)} with {percent(kept.chance)}{off_words(question)}."
    )


def _curve(question: PatchQuestion, laid: tuple[int, ...]) -> list[tuple[float, float]]:
    """Pair each scale with its chance, the receiver's error taken off.

    Sizes for which the receiver is too coarse are left out.
    """
    scales = [scale for scale in _SCALES if scale >= question.least_scale]
    inner = [scale - (1 - question.reach) for scale in scales]
    return list(zip(scales, question.chances.by_scale(laid, inner), strict=True))


def _spacing(question: PatchQuestion, laid: tuple[int, ...]) -> float | None:
    """Spacing of the finest grid; None for random places."""
    if question.lattice is None:
        return None
    pairs = zip(question.areas, laid, strict=True)
    return min(question.lattice.spacing(area, count) for area, count in pairs)


def _amounts(
    question: PatchQuestion,
    kept: PatchChance,
    planned: PatchChance,
    *,
    factor: float,
    spacing: float | None,
) -> tuple[Amount, ...]:
    patch = question.patch.scaled(factor) if math.isfinite(factor) else None
    share = typed_percent(question.table.probability)
    found = [Amount("chance_of_hitting", "Chance of hitting the patch", kept.chance)]
    if question.error_m:
        found[0] = Amount(
            "chance_of_hitting", "Chance of hitting it with every location off", kept.chance
        )
        found.append(Amount("chance_as_planned", "Chance with no location off", planned.chance))
    if kept.starts:
        words = f"Standard error of that chance, from {kept.starts} starts of the grid"
        found.append(Amount("standard_error_of_chance", words, kept.standard_error))
    words = f"Length of the smallest patch of this shape found with {share}"
    found.append(Amount("smallest_length_m", words, patch.length if patch else None, "m"))
    if patch and patch.length > patch.width:
        found.append(Amount("smallest_width_m", "Its width", patch.width, "m"))
    if spacing is not None:
        several = len(question.areas) > 1
        words = "Spacing of the finest grid" if several else "Spacing of the grid"
        found.append(Amount("spacing_m", words, spacing, "m"))
    for layout, words in (
        ("square-grid", "a square grid"),
        ("triangular-grid", "a triangular grid"),
        ("simple-random", "random places"),
    ):
        endless = math.ceil(question.endless_count(layout) - 1e-9)
        name = f"endless_{layout.replace('-', '_')}"
        meaning = f"Locations for {share} on {words}, no edge counted"
        found.append(Amount(name, meaning, endless))
    return tuple(found)


def _patch_steps(question: PatchQuestion) -> tuple[Step, ...]:
    patch = question.patch
    inputs = (
        Quantity("L", "length of the patch", patch.length, "m"),
        Quantity("W", "width of the patch", patch.width, "m"),
    )
    area = Step(
        "a", "Area of the patch", "a = π L W / 4", inputs, patch.area, patch.area, "m²",
        "common practice, no source",
    )  # fmt: skip
    if not question.error_m:
        return (area,)
    error = Quantity("e", "position error of the receiver", question.error_m, "m")
    inner = patch.scaled(question.reach).length
    shrunk = Step(
        "L'", "Length of its part that is hit however far each location is off",
        "L' = L (1 − 2 e / W), and W' likewise", (*inputs, error), inner, inner, "m",
        "inner ellipse of the same shape, worked out in docs/sizing/smallest-patch.md",
    )  # fmt: skip
    return (area, shrunk)


def _endless_step(question: PatchQuestion, endless: float) -> Step:
    """Show the textbook's number, no edge counted."""
    patch, layout = question.patch.scaled(question.reach), question.design.layout
    area = Quantity("A", "area of the population", question.asked.area_m2 or 0.0, "m²")
    chance = Quantity("P", "probability asked for", question.table.probability)
    if layout not in LATTICES:
        inputs = (chance, Quantity("a'", "area that counts", patch.area, "m²"), area)
        formula, source = "n = ln(1 − P) / ln(1 − a' / A)", "geometric distribution"
    else:
        lattice = LATTICES[layout]
        part = "that part of the patch" if question.error_m else "the patch"
        widest = math.sqrt((question.asked.area_m2 or 0.0) / (lattice.row_distance * endless))
        inputs = (
            area,
            Quantity("k", "distance between rows for a spacing of 1", lattice.row_distance),
            Quantity(
                "G", f"spacing at which {part} is hit with {asked_for(question)}", widest, "m"
            ),
        )
        formula, source = "n = A / (k G²)", SOURCES[0]
    return Step(
        "n∞", "Locations by the textbook, no edge counted", formula, inputs, endless,
        float(math.ceil(endless - 1e-9)), "locations", source,
    )  # fmt: skip


def _chance_step(question: PatchQuestion, counts: tuple[int, ...], found: PatchChance) -> Step:
    names = [part.name for part in question.asked.question.parts]
    words = "results" if question.lattice is None else "locations laid"
    inputs = tuple(
        Quantity("n" if len(names) == 1 else f"n({name})", words, float(n))
        for name, n in zip(names, question.laid(counts), strict=True)
    )
    if question.lattice is not None:
        inputs += tuple(
            Quantity(f"loss({name})", "share of them that yields nothing", loss)
            for name, loss in zip(names, question.losses, strict=True)
            if loss
        )
    if question.asked.frame is None:
        formula = "P = Σ W · share of the ground within the patch about the locations"
    elif question.lattice is None:
        formula = "P = mean over centres c of 1 − Π (1 − a(c) / A)ⁿ"
    else:
        formula = f"P = mean over {found.starts} starts of the share of centres with a hit"
    return Step(
        "P", "Chance that at least one location lies in the patch", formula, inputs,
        found.chance, found.chance, "", "geometry of the population, docs/sizing/smallest-patch.md",
    )  # fmt: skip


def _picture(question: PatchQuestion, curve: list[tuple[float, float]], total: int) -> Picture:
    lengths = tuple(question.patch.length * scale for scale, _ in curve)
    line = Series(f"{total} locations", lengths, tuple(100 * chance for _, chance in curve))
    share = typed_percent(question.table.probability)
    return Picture(
        kind="lines",
        caption=f"Chance of hitting a patch of this shape, by its length, with {total} locations.",
        alternative=(
            f"A line rising with the length of the patch: {percent(curve[0][1])} at "
            f"{figure(lengths[0])} m, {percent(dict(curve)[1.0])} at "
            f"{figure(question.patch.length)} m, {percent(curve[-1][1])} at "
            f"{figure(lengths[-1])} m."
        ),
        x_label="Length of the patch, m",
        y_label="Chance of hitting, %",
        series=(line,),
        marks=((f"{typed(question.patch.length)} m", question.patch.length),),
        levels=((share, 100 * question.table.probability),),
    )
