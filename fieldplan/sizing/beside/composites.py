"""Composites: where a result's spread comes from, what it costs, and what one jar can hide."""

from collections.abc import Iterator
from dataclasses import replace

from fieldplan.base.errors import DesignError
from fieldplan.base.working import Quantity, Step
from fieldplan.lab.model import SplitSpread
from fieldplan.lab.parts import ANALYSIS, PLACES, SAMPLING, TOGETHER
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.composites import error_parts
from fieldplan.sizing.counting import count, total_cost
from fieldplan.sizing.frontier_composites import single_results
from fieldplan.sizing.model import Amount, Finding, Size
from fieldplan.sizing.words import counted, figure, with_unit
from fieldplan.stats.composites import composite_sigma, level_for_composite

TOPIC = "composites"
BOOK = "Berthouex & Brown 2002, Statistics for Environmental Engineers, 2nd ed., ch. 25"
GUIDE = "ITRC ISM-1, Incremental Sampling Methodology (from memory)"
FEW = 3
"""Fewest replicates that guidance on incremental sampling asks for."""

SYMBOLS = {PLACES: "s_b", SAMPLING: "s_s", ANALYSIS: "s_a", TOGETHER: "s_a"}


def finding(asked: Asked, size: Size) -> Finding | None:
    """Say what a composite keeps and hides.

    Parameters
    ----------
    asked : Asked
    size : Size

    Returns
    -------
    Finding or None
        None where every result is a sample of its own.
    """
    question = asked.question
    if question.increments == 1 or asked.spread is None:
        return None
    splits = [asked.spread.split(e.analyte, e.stratum) for e in asked.entries]
    known = [split for split in splits if split is not None]
    if not known:
        return None
    return Finding(
        topic=TOPIC,
        title="What a composite keeps and hides",
        answer=_answer(asked, known) + _against_singles(asked, size),
        amounts=tuple(_amounts(asked)),
        columns=("Increments in each", "SD of one result", "Standard error"),
        rows=tuple(_rows(asked, size, known)),
        steps=tuple(_step(asked, split) for split in known),
        assumptions=(
            "Increments have equal mass, lie at random, and are mixed well before a part is "
            "weighed in; what mixing leaves uneven belongs to the laboratory's part.",
            "Increments average the ground only: the laboratory's error is that of one analysis, "
            "however many increments are in the jar, and falls with composites alone.",
        ),
        warnings=tuple(_warnings(size, known)),
        sources=(BOOK, GUIDE),
    )


def _answer(asked: Asked, splits: list[SplitSpread]) -> str:
    question = asked.question
    k, unit = question.increments, question.unit
    singles = max(error_parts(split).total for split in splits)
    kept = max(part.sigma for part in question.parts)
    several = " in the most uneven stratum" if len(splits) > 1 else ""
    line = (
        f"A composite of {k} increments brings the standard deviation of a result from "
        f"{with_unit(figure(singles), unit)} down to {with_unit(figure(kept), unit)}{several}."
    )
    if asked.level is None:
        return f"{line} It cannot show where in it a high increment came from."
    below = with_unit(figure(level_for_composite(asked.level, k)), unit)
    level = with_unit(figure(asked.level), unit)
    return (
        f"{line} Only a result below {below}, the level over {k}, leaves no room for a single "
        f"increment above {level}."
    )


def _against_singles(asked: Asked, size: Size) -> str:
    """Say what single samples would take and cost for the same target, where prices are known."""
    single = single_results(asked)
    if single is None or size.cost is None or size.question != "mean" or single.target == "budget":
        return ""
    single = replace(single, locations=None)
    try:
        counts = count(single)
    except DesignError:
        return " No number of single samples that can be had meets the same target."
    cost = total_cost(single, counts.planned)
    if cost is None:
        return ""
    paid, instead = (f"{value:.0f} {size.currency}" for value in (cost, size.cost))
    return (
        f" Single samples would take {sum(counts.needed)} results for the same target and cost "
        f"{paid}, against {instead} here."
    )


def _amounts(asked: Asked) -> Iterator[Amount]:
    question = asked.question
    yield Amount("increments", "Increments in each composite", question.increments, "increments")
    for part in question.parts:
        name = "sigma_of_composite" if len(question.parts) == 1 else f"sigma_in_{part.name}"
        where = "" if len(question.parts) == 1 else f" in {part.name}"
        meaning = f"Standard deviation from composite to composite{where}"
        yield Amount(name, meaning, part.sigma, question.unit)
    if asked.level is not None:
        below = level_for_composite(asked.level, question.increments)
        meaning = "Result below which no increment can be above the level"
        yield Amount("result_without_high_increment", meaning, below, question.unit)


def _rows(asked: Asked, size: Size, splits: list[SplitSpread]) -> Iterator[tuple[str, ...]]:
    """Show other numbers of increments for the same number of composites."""
    if len(splits) != 1:
        return
    parts, one_place = error_parts(splits[0]), asked.question.one_place
    for k in sorted({1, 2, 5, 10, 30, 50, 100, asked.question.increments}):
        sigma = composite_sigma(parts, k, one_place=one_place)
        yield f"{k}", figure(sigma), figure(sigma / size.needed**0.5)


def _step(asked: Asked, split: SplitSpread) -> Step:
    question = asked.question
    inputs = [
        Quantity(SYMBOLS[part.part], f"{part.part.replace('-', ' ')} ({part.source})", part.sigma,
                 question.unit)
        for part in split.parts
    ]  # fmt: skip
    sigma = composite_sigma(error_parts(split), question.increments, one_place=question.one_place)
    names = {part.part for part in split.parts}
    small = "s_s²" if SAMPLING in names else ""
    if question.one_place:
        inside = f"s_b² + {small}/k" if small else "s_b²"
    else:
        inside = f"(s_b² + {small})/k" if small else "s_b²/k"
    where = f" in {split.stratum}" if len(question.parts) > 1 else ""
    return Step(
        symbol="s",
        meaning=f"Standard deviation from composite to composite{where}",
        formula=f"s = √({inside} + s_a²)",
        inputs=(*inputs, Quantity("k", "increments in each", question.increments, "increments")),
        unrounded=sigma,
        rounded=sigma,
        unit=question.unit,
        source=BOOK,
    )


def _warnings(size: Size, splits: list[SplitSpread]) -> Iterator[str]:
    if any(split.part(TOGETHER) for split in splits):
        yield (
            "No sample was analysed twice, so what increments would average of sampling counts "
            "with the laboratory here: the number is on the careful side."
        )
    fewest = min(entry.needed for entry in size.strata)
    if fewest < FEW:
        yield (
            f"Guidance on incremental sampling asks for at least {FEW} replicates of each decision "
            f"unit ({GUIDE}); here a stratum has {counted(fewest, 'composite')}. A floor of {FEW} "
            "would ask for them."
        )
