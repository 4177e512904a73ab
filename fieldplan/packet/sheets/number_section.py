"""How uneven the site is, and how many results the target takes: in short, and in full."""

from fieldplan.base.document import Block, Bullets, Facts, Heading, Paragraph, Table, Working
from fieldplan.packet.sheets.amounts import counted, likely, percent, rounded
from fieldplan.packet.sheets.answer import SHOWN, stratum_table
from fieldplan.packet.sheets.conditions_section import (
    condition_lines,
    declared_lines,
    shortened,
)
from fieldplan.packet.sheets.finding_section import finding_blocks
from fieldplan.packet.sheets.methods import sources
from fieldplan.packet.sheets.sections import in_working
from fieldplan.plan.model import Plan
from fieldplan.sizing.model import OtherPrecision
from fieldplan.sizing.other_words import chance_words
from fieldplan.sizing.words import FEW


def spread_blocks(plan: Plan) -> list[Block]:
    """Say where the spread comes from, with the dot plot of a pilot."""
    spread = plan.spread
    blocks: list[Block] = [Paragraph(spread_line(plan))]
    if any(entry.values for entry in spread.strata) or (spread.site and spread.site.values):
        from fieldplan.packet.charts import pilot_dots

        blocks.append(pilot_dots(spread, name=plan.campaign.deciding_analyte.label))
    return blocks


def spread_line(plan: Plan) -> str:
    """Say in a sentence where the standard deviations come from."""
    entries, where = plan.spread.strata, in_working("The spread in full")
    if not entries:
        return f"No standard deviation was typed or found in a pilot. More: {where}."
    one = "standard deviation" if len(entries) == 1 else "standard deviations"
    if all(entry.assumed for entry in entries):
        return f"ASSUMED: nobody measured the {one} on page one. Who typed what: {where}."
    verb = "comes" if len(entries) == 1 else "come"
    part = "; some are ASSUMED" if any(entry.assumed for entry in entries) else ""
    return (
        f"The {one} on page one {verb} from {sources(plan)}{part}. Mean, range, non-detects and "
        f"skewness: {where}."
    )


def spread_detail(plan: Plan) -> list[Block]:
    """Say all that the pilot says, or that the spread was typed."""
    spread = plan.spread
    blocks: list[Block] = []
    if spread.sentences:
        blocks.append(Bullets(spread.sentences))
    if len(spread.strata) > FEW or not all(entry.values for entry in spread.strata):
        blocks.append(spread_table(plan))
    if spread.notes:
        blocks.append(Bullets(spread.notes))
    return blocks


def spread_table(plan: Plan) -> Table:
    """Set the standard deviation that sizing used, and where it comes from."""
    columns = ("Part", f"Standard deviation ({plan.size.unit})", "Results behind it", "Source")
    rows = tuple(
        (
            entry.stratum,
            rounded(entry.sigma),
            "–" if entry.results is None else str(entry.results),
            entry.source,
        )
        for entry in plan.spread.strata
    )
    return Table(columns, rows, numeric=columns[1:3])


def number_blocks(plan: Plan) -> list[Block]:
    """Show how sure the number is, the curve, what stands beside it, and the conditions."""
    from fieldplan.packet.charts import precision_curve

    size = plan.size
    blocks: list[Block] = []
    if size.assured:
        blocks.append(assurance_table(plan))
    if size.curve:
        blocks.append(precision_curve(size))
    if size.others:
        blocks += other_blocks(plan)
    blocks += finding_blocks(size.findings, answered=size.number_from == "question")
    if short := shortened(size.conditions, declared_lines(plan)):
        blocks += [Heading("Under what condition", level=2), Paragraph(short)]
    count, step = len(condition_lines(plan)), in_working("The number in full")
    every = "" if count < 2 else f"All {count} conditions and every step: "
    where = f"{every or 'Every step: '}{step}."
    if size.findings:
        where += f" Numbers, tables and sources of the rest: {in_working('Beside the number')}."
    return [*blocks, Paragraph(where, tone="note")]


def number_detail(plan: Plan) -> list[Block]:
    """Set target and counts, the shares of many strata, every condition and every step."""
    size, conditions = plan.size, condition_lines(plan)
    blocks: list[Block] = [Facts(promise_rows(plan))]
    if len(size.strata) > SHOWN:
        blocks.append(stratum_table(plan, whole=True))
    if conditions:
        blocks += [Heading("Under what condition", level=2), Bullets(conditions)]
    return [
        *blocks,
        Heading("Step by step", level=2),
        Paragraph(
            "Sections, pages and equations of sources are cited from memory: read them before "
            "quoting. What is derived here says so and has no published source.",
            tone="note",
        ),
        Working(size.steps),
    ]


def promise_rows(plan: Plan) -> tuple[tuple[str, str], ...]:
    """Set target, counts, loss and chooser as label and value."""
    size, loss = plan.size, plan.campaign.loss
    rows = [("Target", size.target), *count_rows(plan)]
    if loss.share or loss.by_stratum:
        shares = [percent(loss.share)] if loss.share else []
        shares += [f"{percent(share)} in {name}" for name, share in loss.by_stratum.items()]
        why = f" ({loss.reason})" if loss.reason else ""
        rows.append(("Allowance for losses", ", ".join(shares) + why))
    return tuple(rows)


def count_rows(plan: Plan) -> list[tuple[str, str]]:
    """Set the counts under names that say where they come from."""
    size = plan.size
    expected = ("Results expected, after losses", str(size.needed))
    plain = "plain count" if size.assurance is None else percent(size.assurance)
    chosen = f"{plain}, chosen by {size.assurance_chosen_by or 'nobody named'}"
    if size.number_from == "question":
        return [
            ("Results needed", str(size.needed)),
            ("Locations to visit", str(size.planned)),
        ]
    if size.number_from == "target":
        return [
            ("Assurance", chosen),
            ("Results by the plain formula", str(size.plain_n)),
            ("Results needed", str(size.needed)),
            ("Locations to visit", str(size.planned)),
        ]
    if size.number_from == "locations":
        rows = [("Locations, fixed beforehand", str(size.planned)), expected]
        if plan.campaign.deciding_objective.budget is not None:
            return rows
        takes = [f"{size.plain_n} by the plain formula"]
        takes += [
            f"{entry.n} at the assurance of {chosen}"
            for entry in size.assured
            if entry.assurance == size.assurance
        ]
        return [*rows, ("Results that the target would take", ", ".join(takes))]
    if size.number_from == "budget":
        return [("Locations that the budget buys", str(size.planned)), expected]
    return [("Locations to visit, the whole list", str(size.planned))]


def assurance_table(plan: Plan) -> Table:
    """Set numbers of results against the chance that they meet the target."""
    size = plan.size
    rows = [(size.plain_n, size.chance_plain, "the plain formula")]
    for entry in size.assured:
        chosen = ", the chosen assurance" if entry.assurance == size.assurance else ""
        rows.append((entry.n, entry.chance, f"fewest for {percent(entry.assurance)}{chosen}"))
    if size.number_from == "locations":
        rows.append((size.needed, size.chance_needed, "fixed beforehand, after losses"))
    return Table(
        ("Results", "Chance that they meet the target", "Why this number"),
        tuple(
            (str(n), likely(chance), why)
            for n, chance, why in sorted(rows, key=lambda row: row[0])
            if chance is not None
        ),
        caption="How sure the number is, given how few results stand behind the spread and taking "
        "single results as near normal",
        numeric=("Results", "Chance that they meet the target"),
    )


def other_blocks(plan: Plan) -> list[Block]:
    """Set what the same n buys for objectives and analytes beside the first that decides it."""
    others = plan.size.others
    beside = "the target that decides n"
    if plan.campaign.also_deciding:
        beside = f"the target of {plan.campaign.deciding_analyte.label}"
    columns = ("Analyte", "Standard error to expect", "Its own target", "Kept", "Chance")
    table = Table(
        columns,
        tuple(other_row(plan, other) for other in others),
        caption="Other analytes and objectives: what "
        f"{counted(plan.size.needed, 'result')} buy beside {beside}",
    )
    more = [o.sentence for o in others if o.falls_short or o.standard_error is None]
    return [table, *([Bullets(tuple(more))] if more else [])]


def other_row(plan: Plan, other: OtherPrecision) -> tuple[str, ...]:
    """Set one objective or analyte; a dash where the campaign does not say."""
    analyte = plan.campaign.analyte_called(other.analyte)
    error = "–"
    if other.standard_error is not None:
        error = f"{rounded(other.standard_error)} {other.unit}"
        error += " (sigma ASSUMED)" if other.assumed else ""
    kept = "–" if other.meets is None else "yes" if other.meets else "no"
    chance = "–" if other.chance is None else chance_words(other)
    if other.chance is not None and other.assurance is not None:
        chance += f" ({percent(other.assurance)} asked for)"
    return (analyte.label, error, other.target or "–", kept, chance)
