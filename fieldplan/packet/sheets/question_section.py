"""What is asked, and the population that the answer speaks for."""

from fieldplan.base.document import Block, Bullets, Facts, Paragraph, Table
from fieldplan.campaign.model import Analyte
from fieldplan.packet.sheets.amounts import BLANK, area, days
from fieldplan.packet.sheets.plan_words import mean_of, several_strata
from fieldplan.packet.sheets.wording import number
from fieldplan.plan.model import Plan


def question_blocks(plan: Plan) -> list[Block]:
    """Set the objective, the decision, the background and the analytes."""
    table = plan.campaign.plan
    rows = [
        ("Question", f"What is the {mean_of(plan.campaign)}?"),
        ("Decision that waits for it", table.decision or BLANK),
        ("Who decides", table.decides or BLANK),
        ("Field work", days(table.fieldwork_from, table.fieldwork_to)),
        ("Prepared by", table.prepared_by or BLANK),
    ]
    blocks: list[Block] = [Facts(tuple(rows))]
    if table.background:
        blocks.append(Paragraph(table.background))
    return [*blocks, analyte_table(plan)]


def analyte_table(plan: Plan) -> Table:
    """Set what the laboratory measures, its limit and the level, one analyte a row."""
    columns = ("Analyte", "Unit", "Matrix", "Basis", "Reporting limit", "Action level", "Source")
    rows = tuple(analyte_row(analyte) for analyte in plan.campaign.analyte)
    return Table(columns, rows, numeric=("Reporting limit", "Action level"))


def analyte_row(analyte: Analyte) -> tuple[str, ...]:
    """Set one analyte."""
    return (
        analyte.name or analyte.id,
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
    """Set the population in sentences, then what was taken out of it."""
    frame, population = plan.frame, plan.frame.population
    blocks: list[Block] = [Bullets(population.sentences)]
    blocks.append(measure_table(plan) if frame.kind == "area" else list_table(plan))
    asked = plan.campaign.frame[0]
    facts = [
        ("One n is", asked.unit_is),
        ("Depth", depth(plan)),
        ("Fraction", asked.size_fraction),
        ("Time", asked.time_window),
        ("Why this is averaged as one", asked.why_this_area),
    ]
    blocks.append(Facts(tuple((label, value) for label, value in facts if value)))
    if frame.notes:
        blocks.append(Bullets(frame.notes))
    return blocks


def depth(plan: Plan) -> str:
    """Say the depth interval with its datum; empty when none was typed."""
    asked = plan.campaign.frame[0]
    if asked.depth_bottom_m is None:
        return ""
    datum = f" below {asked.depth_datum}" if asked.depth_datum else ""
    return f"{number(asked.depth_top_m or 0.0)} m to {number(asked.depth_bottom_m)} m{datum}"


def measure_table(plan: Plan) -> Table:
    """Set gross area, each exclusion, the strip at the edge, and what is left."""
    population = plan.frame.population
    rows = [("Inside the boundary", area(population.gross), "")]
    for part in plan.frame.excluded:
        buffer = f" (with {number(part.buffer_m)} m around it)" if part.buffer_m else ""
        rows.append((f"Left out: {part.reason}{buffer}", "− " + area(part.area_m2), part.source))
    if population.inset_loss:
        inset = number(plan.campaign.frame[0].inset_m)
        rows.append(
            (f"Left out: strip of {inset} m at the edge", "− " + area(population.inset_loss), "")
        )
    if several_strata(plan):
        rows += [(f"Stratum {s.name}", area(s.measure), "") for s in plan.frame.strata]
    rows.append(("Population", area(population.net), ""))
    return Table(("Part", "Area", "File"), tuple(rows), numeric=("Area",))


def list_table(plan: Plan) -> Table:
    """Set the number of units, by stratum where there are strata."""
    rows = [(f"Stratum {s.name}", str(s.count or 0)) for s in plan.frame.strata]
    total = ("Population", str(round(plan.frame.population.net)))
    return Table(
        ("Part", "Units"),
        (*rows, total) if several_strata(plan) else (total,),
        numeric=("Units",),
    )
