"""The plan sheet: the answer on page one, then what decision maker, crew and reviewer ask first."""

from collections.abc import Sequence

from fieldplan.base.document import Block, Document, Heading, PageBreak, SignOff
from fieldplan.packet.sheets.answer import answer_blocks
from fieldplan.packet.sheets.field_section import caution_blocks, deviation_blocks
from fieldplan.packet.sheets.methods import limits_blocks
from fieldplan.packet.sheets.number_section import number_blocks, spread_blocks
from fieldplan.packet.sheets.place_section import draw_blocks
from fieldplan.packet.sheets.question_section import population_blocks, question_blocks
from fieldplan.packet.sheets.rules import recorded_blocks
from fieldplan.packet.sheets.sections import SHEET
from fieldplan.packet.sheets.words_used import explained
from fieldplan.plan.model import Plan


def plan_sheet(plan: Plan) -> Document:
    """Compose the plan sheet; what stands behind it is in ``working_sheet``.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    Document
        Page one holds the answer, the chance that it is enough, and what is still open.
    """
    contents: tuple[list[Block], ...] = (
        question_blocks(plan),
        limits_blocks(plan),
        population_blocks(plan),
        spread_blocks(plan),
        number_blocks(plan),
        draw_blocks(plan),
        deviation_blocks(plan),
        recorded_blocks(plan.campaign.rules),
        caution_blocks(plan),
        [sign_off(plan)],
    )
    return Document(
        title=plan.campaign.plan.title,
        subtitle=subtitle(plan, "Plan sheet"),
        plan_id=plan.campaign.plan.id,
        revision_name=plan.revision_name,
        status=plan.status,
        blocks=(
            *explained(answer_blocks(plan)),
            PageBreak(),
            *numbered(SHEET, contents),
        ),
    )


def numbered(titles: Sequence[str], contents: Sequence[Sequence[Block]]) -> list[Block]:
    """Set sections under their numbered headings."""
    blocks: list[Block] = []
    for number, (title, content) in enumerate(zip(titles, contents, strict=True), start=1):
        blocks += [Heading(f"{number}. {title}"), *content]
    return blocks


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
