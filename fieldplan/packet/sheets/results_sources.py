"""What results were made from, and what was estimated before from the same plan."""

from fieldplan.base.document import Block, Bullets, Facts, Heading, Paragraph, Table, Verbatim
from fieldplan.base.units import significant
from fieldplan.estimate.model import Estimate
from fieldplan.estimate.sentences import interval_in_words
from fieldplan.lab.words import counted
from fieldplan.packet.results_origin import EarlierResults, ResultsOrigin
from fieldplan.plan.model import Plan

ONLY_HERE = "Only folders beside this one, or beside the packet, can be seen."


def earlier_blocks(estimate: Estimate, origin: ResultsOrigin) -> list[Block]:
    """Set every earlier estimate of the plan with its file and answer, or say that none is seen."""
    head = Heading("Earlier estimates from this plan", level=2)
    if not origin.earlier:
        return [head, Paragraph(f"None is seen. {ONLY_HERE}")]
    rows = tuple(
        (entry.folder, entry.lab_file or "–", entry.lab_sha256[:16] or "–",
         earlier_answer(entry, estimate.analyte))
        for entry in origin.earlier
    )  # fmt: skip
    same = f"; this one was made from {estimate.returns.lab_sha256[:16]}"
    return [
        head,
        Table(
            ("Folder", "Laboratory file", "SHA-256 begins", "Answer"),
            rows,
            caption=f"{counted(len(rows), 'earlier estimate')}{same}",
        ),
        Paragraph(ONLY_HERE, tone="note"),
    ]


def order_blocks(plan: Plan, estimate: Estimate) -> list[Block]:
    """Set the dates that bear on whether plan and rules stood before the results."""
    rules, first = plan.campaign.rules, estimate.returns.first_collected
    by = f" by {rules.fixed_by}" if rules.fixed_by else ""
    fixed = f"{rules.fixed_on}{by}, as typed" if rules.fixed_on else "no date typed"
    issued = f"{plan.issued_on} by {plan.issued_by}" if plan.issued_by else "never"
    late = [Paragraph(estimate.standing_sentence)] if estimate.standing_sentence else []
    return [
        Heading("What was there first, by the dates on record", level=2),
        Facts(
            (
                ("Rules fixed", fixed),
                ("Plan made", str(plan.made_on)),
                ("Plan issued", issued),
                ("First sample taken", first or "no date that can be read in the field return"),
            )
        ),
        *late,
        Paragraph(
            "Dates are as typed, or as the computer's clock gave them; the tool cannot verify "
            "them. What can show the order is the packet's fingerprint, which 'fieldplan issue' "
            "prints, lodged with somebody else before the field work.",
            tone="note",
        ),
    ]


def earlier_answer(entry: EarlierResults, analyte: str) -> str:
    """Write what an earlier estimate answered for an analyte."""
    if not entry.answers:
        return "gone, or its results.json cannot be read"
    past = entry.answers.get(analyte)
    if past is None:
        return "no mean of this analyte"
    changed = f"; changed after results: {', '.join(past.changed)}" if past.changed else ""
    words = interval_in_words(past.interval, past.unit)
    return f"{significant(past.mean)} {past.unit}, {words}{changed}"


def earlier_sentence(origin: ResultsOrigin) -> str:
    """Say on page one that this is not the first estimate; empty when it is."""
    if not origin.earlier:
        return ""
    earlier = counted(len(origin.earlier), "earlier estimate")
    verb = "lies" if len(origin.earlier) == 1 else "lie"
    return f"{earlier} from this plan {verb} beside this one, listed under changes below."


def source_blocks(plan: Plan, estimate: Estimate, *, origin: ResultsOrigin) -> list[Block]:
    """Set the files and their fingerprints, and what a fingerprint cannot tell."""
    returns = estimate.returns
    files = origin.files or tuple(
        (digest, name)
        for digest, name in (
            (returns.lab_sha256, returns.lab_file),
            (returns.field_sha256, returns.field_file),
        )
        if name
    )
    return [
        Paragraph("SHA-256 of every file handed to the command:"),
        Verbatim("\n".join(f"{digest}  {name}" for digest, name in files)),
        Paragraph(
            "They show whether a file is the one that was handed in, and nothing of what happened "
            "to it before. Compare it with the report that the laboratory itself issued."
        ),
        Facts(
            (
                ("Laboratory's report number", origin.report_number or "not given"),
                ("Plan", f"{plan.revision_name}, {plan.status}"),
                ("Planned with", f"fieldplan {plan.fieldplan_version}".strip()),
                ("Fingerprint of the packet", origin.packet_fingerprint or "not known"),
            )
        ),
        *([Bullets(origin.packet_differs)] if origin.packet_differs else []),
        Paragraph(
            "This sheet checks that what was ordered came back and computes by the recorded "
            "rules. Whether the data are fit for their use is for a qualified reviewer to say.",
            tone="note",
        ),
    ]
