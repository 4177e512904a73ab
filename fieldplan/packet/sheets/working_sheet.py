"""The working: what stands behind the plan sheet, for whoever checks it."""

from collections.abc import Sequence

from fieldplan.base.document import Block, Document, Facts, Paragraph, Verbatim
from fieldplan.packet.sheets.field_section import field_blocks
from fieldplan.packet.sheets.finding_section import finding_details
from fieldplan.packet.sheets.inputs_section import inputs_blocks
from fieldplan.packet.sheets.methods import methods_blocks
from fieldplan.packet.sheets.number_section import number_detail, spread_detail
from fieldplan.packet.sheets.place_section import location_blocks
from fieldplan.packet.sheets.plan_sheet import numbered, plan_sheet, subtitle
from fieldplan.packet.sheets.quality_section import quality_blocks
from fieldplan.packet.sheets.question_section import population_detail
from fieldplan.packet.sheets.rules import RECIPE, rules_fingerprint
from fieldplan.packet.sheets.sections import WORKING
from fieldplan.packet.sheets.words_used import words_used
from fieldplan.plan.model import Plan


def working_sheet(plan: Plan, sheet: Document | None = None) -> Document:
    """Compose the working that belongs to a plan sheet.

    Parameters
    ----------
    plan : Plan
    sheet : Document or None
        The plan sheet, where it is composed already; its words are explained here.

    Returns
    -------
    Document
        It repeats nothing of the plan sheet but what tells that the two belong together.
    """
    from fieldplan.design.procedure import procedure_pseudocode

    before: list[list[Block]] = [
        spread_detail(plan),
        number_detail(plan),
        finding_details(plan.size.findings),
        population_detail(plan),
        location_blocks(plan),
        quality_blocks(plan),
        field_blocks(plan),
        methods_blocks(plan),
        inputs_blocks(plan),
    ]
    said = [*(sheet or plan_sheet(plan)).blocks, *(block for part in before for block in part)]
    contents = [part or [nothing()] for part in before]
    contents += [words_used(said)[1:] or [nothing()], procedure_blocks(procedure_pseudocode())]
    return Document(
        title=plan.campaign.plan.title,
        subtitle=subtitle(plan, "The working"),
        plan_id=plan.campaign.plan.id,
        revision_name=plan.revision_name,
        status=plan.status,
        blocks=(*opening_blocks(plan), *numbered(WORKING, contents)),
    )


def opening_blocks(plan: Plan) -> Sequence[Block]:
    """Say what the working is, and to which sheet and rules it belongs."""
    return (
        Paragraph(
            "What stands behind the plan sheet: the pilot, the arithmetic with its sources, every "
            "location, samples and field, and how to draw the locations again. The answer, the "
            "rules, the cautions and the sign-off are on the plan sheet."
        ),
        Facts(
            (
                ("Belongs to", "office/plan_sheet.pdf, also as plan_sheet.html"),
                ("Fingerprint of the rules", rules_fingerprint(plan.campaign.rules)),
            )
        ),
        Paragraph(RECIPE, tone="note"),
    )


def nothing() -> Paragraph:
    """Say that a section is empty, so that nobody looks for its content."""
    return Paragraph("Nothing to say for this plan.")


def procedure_blocks(lines: str) -> list[Block]:
    """Set the drawing procedure, line by line."""
    return [
        Paragraph("For a reviewer who wants to draw the locations again without this program."),
        Verbatim(lines),
    ]
