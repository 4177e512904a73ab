"""Page one: how many, where, how sure, and what is still open."""

from dataclasses import replace

from fieldplan.base.document import Block, Bullets, Heading, Paragraph, Table
from fieldplan.packet.sheets.amounts import percent, rounded
from fieldplan.packet.sheets.plan_words import (
    aim_sentence,
    assumed_lines,
    sample_sentence,
    several_strata,
)
from fieldplan.plan.model import Plan
from fieldplan.sizing.model import StratumSize

FIGURE_MM = 145.0
"""Width that leaves page one room for the words."""


SHOWN = 12
"""Most rows of strata on page one."""

SUMMARY = (
    "This sheet is a summary; what stands behind it is in The working (working.pdf). It is no "
    "substitute for the documents that a regulator requires, for a health and safety plan, or for "
    "a permit."
)


def answer_blocks(plan: Plan) -> list[Block]:
    """Compose page one: the answer in words, the site, and what the sheet is not."""
    from fieldplan.packet.charts import site_figure

    figure = replace(site_figure(plan), width_mm=FIGURE_MM)
    return [*answer_words(plan), figure, Paragraph(SUMMARY, tone="note")]


def answer_words(plan: Plan) -> list[Block]:
    """Say how many, for what, how sure, where, and what is open."""
    first, *others = plan.size.sentences
    blocks: list[Block] = [Paragraph(first, tone="answer"), Paragraph(aim_sentence(plan))]
    stamps = (*alarm_lines(plan), *assumed_lines(plan))
    if stamps:
        blocks.append(Bullets(stamps))
    blocks += [Paragraph(sentence) for sentence in others]
    blocks += [Paragraph(other.sentence) for other in plan.size.others if other.falls_short]
    blocks += [Paragraph(sentence) for sentence in plan.frame.population.sentences[:1]]
    return [*blocks, stratum_table(plan), *extra_lines(plan), *open_blocks(plan)]


def alarm_lines(plan: Plan) -> tuple[str, ...]:
    """Return what the plan raises an alarm about: a limit above the level, a date too late."""
    from fieldplan.campaign.alarms import alarms

    return alarms(plan.campaign, made_on=plan.made_on, issued_on=plan.issued_on)


def stratum_table(plan: Plan, *, whole: bool = False) -> Table:
    """Set how many locations go where, and for how much each part counts.

    Of many strata page one names the largest and sums up the rest; ``whole`` names them all.
    """
    unit, strata = plan.size.unit, plan.size.strata
    short = len(strata) > SHOWN and not whole
    if short:
        strata = tuple(sorted(strata, key=lambda entry: -entry.planned)[: SHOWN - 1])
    name = "Stratum" if several_strata(plan) else "Population"
    columns = (
        name,
        "Share",
        f"Standard deviation ({unit})",
        "Results needed" if plan.size.number_from in ("target", "question") else "Results expected",
        "Locations",
        "Alternates",
    )
    rows: list[tuple[str, ...]] = [
        (
            entry.stratum,
            percent(entry.weight),
            spread_cell(plan, entry),
            f"{entry.needed}" + (" (floor)" if entry.floor_applied else ""),
            str(entry.planned),
            str(entry.alternates),
        )
        for entry in strata
    ]
    if short:
        rows.append(_others(plan, strata))
    if several_strata(plan):
        alternates = sum(entry.alternates for entry in plan.size.strata)
        rows.append(
            ("All", "100 %", "", str(plan.size.needed), str(plan.size.planned), str(alternates))
        )
    return Table(columns, tuple(rows), numeric=columns[1:])


def _others(plan: Plan, shown: tuple[StratumSize, ...]) -> tuple[str, ...]:
    """Sum up the strata that are not shown."""
    left = [entry for entry in plan.size.strata if entry not in shown]
    return (
        f"{len(left)} others",
        percent(sum(entry.weight for entry in left)),
        "see The working",
        str(sum(entry.needed for entry in left)),
        str(sum(entry.planned for entry in left)),
        str(sum(entry.alternates for entry in left)),
    )


def spread_cell(plan: Plan, entry: StratumSize) -> str:
    """Write a stratum's sigma, stamped where it was assumed; a dash where none is known."""
    if entry.sigma is None:
        return "–"
    return rounded(entry.sigma) + (" ASSUMED" if is_assumed(plan, entry.stratum) else "")


def is_assumed(plan: Plan, stratum: str) -> bool:
    """Tell whether the spread of a stratum was assumed."""
    return any(s.stratum == stratum and s.assumed for s in plan.spread.strata)


def extra_lines(plan: Plan) -> list[Block]:
    """Say how many jars, and how many places besides."""
    lines = [sample_sentence(plan)]
    targeted = plan.locations.of_class("targeted")
    if targeted:
        lines.append(
            f"Targeted places ({len(targeted)}) are chosen by judgement: visited and reported, "
            "never in the mean."
        )
    return [Bullets(tuple(lines))]


def open_blocks(plan: Plan) -> list[Block]:
    """List what is still open, hold points first."""
    holding = [c for c in plan.open_items if c.holds_work]
    others = [c for c in plan.open_items if not c.holds_work]
    blocks: list[Block] = [Heading("Still open", level=2)]
    if not plan.open_items:
        return [*blocks, Paragraph("Nothing: a reference was typed for every topic raised.")]
    items = [f"HOLD POINT, no work before it is settled: {c.topic}. {c.status}." for c in holding]
    if others:
        items.append("To settle before field work: " + "; ".join(c.topic for c in others) + ".")
    return [*blocks, Bullets(tuple(items))]
