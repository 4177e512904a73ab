"""What is asked, and the population that the answer speaks for."""

from fieldplan.base.document import Block, Bullets, Facts, Paragraph, Table
from fieldplan.base.units import length_in_words
from fieldplan.campaign.model import Analyte
from fieldplan.packet.sheets.amounts import BLANK, area, days, percent
from fieldplan.packet.sheets.plan_words import mean_of, several_strata
from fieldplan.packet.sheets.wording import number
from fieldplan.plan.model import Plan


def question_blocks(plan: Plan) -> list[Block]:
    """Set the objective, the decision, the background and the analytes."""
    table = plan.campaign.plan
    rows = [
        ("Question", asked_words(plan)),
        *(("Also asked", words) for words in also_asked(plan)),
        ("Decision that waits for it", table.decision or BLANK),
        ("Who decides", table.decides or BLANK),
        ("Field work", days(table.fieldwork_from, table.fieldwork_to)),
        ("Prepared by", table.prepared_by or BLANK),
    ]
    blocks: list[Block] = [Facts(tuple(rows))]
    if table.background:
        blocks.append(Paragraph(table.background))
    return [*blocks, analyte_table(plan)]


def asked_words(plan: Plan) -> str:
    """Say what the deciding objective asks."""
    if plan.size.question == "mean":
        return f"What is the {mean_of(plan.campaign)}?"
    label = plan.campaign.deciding_analyte.label
    return f"{label}: {plan.size.target}. The {mean_of(plan.campaign)} is reported as well."


def also_asked(plan: Plan) -> list[str]:
    """Say which other objectives the campaign has, and which decide the number as well."""
    lines = []
    deciding = {objective.analyte for objective in plan.campaign.also_deciding}
    for other in plan.size.others:
        label = plan.campaign.analyte_called(other.analyte).label
        if other.target and other.question == "mean":
            role = "; it decides n as well" if other.analyte in deciding else ""
            lines.append(f"mean of {label}, {other.target}{role}")
        elif other.target:
            lines.append(f"{label}: {other.target}")
    return lines


def analyte_table(plan: Plan) -> Table:
    """Set what the laboratory measures, its limit and the level, one analyte a row."""
    columns = ("Analyte", "Unit", "Matrix", "Basis", "Reporting limit", "Action level", "Source")
    rows = tuple(analyte_row(analyte) for analyte in plan.campaign.analyte)
    return Table(columns, rows, numeric=("Reporting limit", "Action level"))


def analyte_row(analyte: Analyte) -> tuple[str, ...]:
    """Set one analyte."""
    return (
        analyte.label,
        analyte.unit,
        analyte.matrix,
        ", ".join(kind for kind in (analyte.basis, analyte.fraction) if kind),
        typed(analyte.reporting_limit),
        typed(analyte.action_level),
        analyte.action_level_source,
    )


def typed(value: float | None) -> str:
    """Write a number that a person typed, or a dash."""
    return "–" if value is None else number(value)


def population_blocks(plan: Plan) -> list[Block]:
    """Set the population in sentences, and what one result stands for."""
    blocks: list[Block] = [Bullets(plan.frame.population.sentences)]
    asked = plan.campaign.frame[0]
    facts = [
        ("Depth", depth(plan)),
        ("Fraction", asked.size_fraction),
        ("Time", asked.time_window),
        ("Why this is averaged as one", asked.why_this_area),
    ]
    typed_facts = tuple((label, value) for label, value in facts if value)
    if typed_facts:
        blocks.append(Facts(typed_facts))
    return blocks


def population_detail(plan: Plan) -> list[Block]:
    """Set the strata with their size and weight, and what was noticed on the way."""
    blocks: list[Block] = [measure_table(plan)] if several_strata(plan) else []
    return [*blocks, *([Bullets(plan.frame.notes)] if plan.frame.notes else [])]


def depth(plan: Plan) -> str:
    """Say the depth interval with its datum; empty when none was typed."""
    asked = plan.campaign.frame[0]
    if asked.depth_bottom_m is None:
        return ""
    datum = f" below {asked.depth_datum}" if asked.depth_datum else ""
    return f"{number(asked.depth_top_m or 0.0)} m to {number(asked.depth_bottom_m)} m{datum}"


def measure_table(plan: Plan) -> Table:
    """Set the strata with their size and their weight in the mean."""
    frame = plan.frame
    unit = {"area": "Area", "line": "Length", "list": "Units"}[frame.kind]
    rows = [
        (stratum.name, measured(plan, stratum.measure), percent(stratum.weight))
        for stratum in frame.strata
    ]
    rows.append(("All", measured(plan, frame.population.net), "100 %"))
    return Table(("Stratum", unit, "Weight"), tuple(rows), numeric=(unit, "Weight"))


def measured(plan: Plan, measure: float) -> str:
    """Write square metres of an area, metres of lines, or the number of units of a list."""
    if plan.frame.kind == "line":
        return length_in_words(measure)
    return area(measure) if plan.frame.kind == "area" else str(round(measure))
