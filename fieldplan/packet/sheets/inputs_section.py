"""What a plan was made from: inputs with their fingerprints."""

from fieldplan.base.document import Block, Bullets, Facts, Paragraph, Verbatim
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
