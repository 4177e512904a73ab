"""The plan sheet: the answer on page one, then all that a reviewer asks of a plan."""

from fieldplan.base.document import Block, Document, Heading, PageBreak, SignOff
from fieldplan.packet.sheets.annex import annex_blocks, inputs_blocks
from fieldplan.packet.sheets.answer import answer_blocks
from fieldplan.packet.sheets.field_section import caution_blocks, field_blocks
from fieldplan.packet.sheets.methods import limits_blocks, methods_blocks
from fieldplan.packet.sheets.number_section import number_blocks, spread_blocks
from fieldplan.packet.sheets.place_section import draw_blocks, location_blocks
from fieldplan.packet.sheets.quality_section import quality_blocks
from fieldplan.packet.sheets.question_section import population_blocks, question_blocks
from fieldplan.packet.sheets.rules import rules_blocks
from fieldplan.packet.sheets.words_used import explained, words_used
from fieldplan.plan.model import Plan


def plan_sheet(plan: Plan) -> Document:
    """Compose the plan sheet.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    Document
        Page one holds the answer, the chance that it is enough, and what is still open.
    """
    sections: tuple[tuple[str, list[Block]], ...] = (
        ("What is asked", question_blocks(plan)),
        ("What the plan will and will not tell", limits_blocks(plan)),
        ("For what the mean speaks", population_blocks(plan)),
        ("How uneven the site is", spread_blocks(plan)),
        ("How many", number_blocks(plan)),
        ("How the locations are drawn", draw_blocks(plan)),
        ("Locations", location_blocks(plan)),
        ("Samples and quality control", quality_blocks(plan)),
        ("Rules on record", rules_blocks(plan.campaign.rules)),
        ("In the field", field_blocks(plan)),
        ("Cautions and hold points", caution_blocks(plan)),
        ("For the report", methods_blocks(plan)),
        ("What this plan was made from", inputs_blocks(plan)),
    )
    blocks: list[Block] = [*explained(answer_blocks(plan)), PageBreak()]
    for number, (title, content) in enumerate(sections, start=1):
        blocks += [Heading(f"{number}. {title}"), *content]
    blocks += [Heading(f"{len(sections) + 1}. Sign-off"), sign_off(plan)]
    annexes = annex_blocks(plan)
    blocks += [*words_used([*blocks, *annexes]), *annexes]
    return Document(
        title=plan.campaign.plan.title,
        subtitle=subtitle(plan, "Plan sheet"),
        plan_id=plan.campaign.plan.id,
        revision_name=plan.revision_name,
        status=plan.status,
        blocks=tuple(blocks),
    )


def subtitle(plan: Plan, kind: str) -> str:
    """Name the kind of sheet, the site, the revision and the day of the plan."""
    site = plan.campaign.plan.site
    parts = [kind, *([site] if site else []), plan.revision_name, f"plan of {plan.made_on}"]
    return " · ".join(parts)


def sign_off(plan: Plan) -> SignOff:
    """Leave blanks for those who prepare, review, accept and lead in the field."""
    table = plan.campaign.plan

    def role(name: str, person: str) -> str:
        return f"{name} ({person})" if person else name

    return SignOff(
        (
            role("Prepared by", table.prepared_by),
            role("Reviewed by", table.reviewed_by),
            role("Accepted by", table.decides),
            "Field lead",
            "Distribution",
        )
    )
