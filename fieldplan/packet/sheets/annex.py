"""Inputs with their fingerprints, and the annexes: the working, and how to draw again."""

from fieldplan.base.document import (
    Block,
    Bullets,
    Facts,
    Heading,
    PageBreak,
    Paragraph,
    Verbatim,
    Working,
)
from fieldplan.packet.sheets.finding_section import finding_annex
from fieldplan.plan.model import Plan


def inputs_blocks(plan: Plan) -> list[Block]:
    """Set the files, their fingerprints, where coordinates came from, and the version."""
    blocks: list[Block] = []
    if plan.inputs:
        lines = "\n".join(f"{digest}  {name}" for name, digest in plan.inputs.items())
        blocks += [Paragraph("SHA-256 of every input file:"), Verbatim(lines)]
    if plan.frame.sources:
        blocks.append(Bullets(plan.frame.sources))
    return [
        *blocks,
        Facts(
            (
                ("Plan", f"{plan.revision_name}, {plan.status}"),
                ("Made on", str(plan.made_on)),
                ("Made with", f"fieldplan {plan.fieldplan_version}".strip()),
                ("Record", "office/record.json; “fieldplan redraw” draws it again and compares"),
            )
        ),
    ]


def annex_blocks(plan: Plan) -> list[Block]:
    """Set the working and the drawing procedure, line by line."""
    from fieldplan.design.procedure import procedure_pseudocode

    return [
        PageBreak(),
        Heading("Annex A. The working"),
        Paragraph(
            "Sections, pages and equations of sources are cited from memory: read them before "
            "quoting. What is derived here says so and has no published source.",
            tone="note",
        ),
        Working(plan.size.steps),
        *finding_annex(plan.size.findings),
        PageBreak(),
        Heading("Annex B. The drawing procedure, line by line"),
        Paragraph("For a reviewer who wants to draw the locations again without this program."),
        Verbatim(procedure_pseudocode()),
    ]
