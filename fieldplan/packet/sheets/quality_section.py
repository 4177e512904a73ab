"""Samples, their names, and quality control counted apart from n."""

from fieldplan.base.document import Block, Bullets, Facts, Table
from fieldplan.packet.sheets.amounts import BLANK
from fieldplan.packet.sheets.plan_words import sample_sentence
from fieldplan.plan.model import Plan


def quality_blocks(plan: Plan) -> list[Block]:
    """Say what is taken, under which names, and with which control samples."""
    field = plan.campaign.field
    blocks: list[Block] = [
        Facts(
            (
                ("Samples", sample_sentence(plan)),
                ("Method", field.method or BLANK),
                ("Laboratory", field.laboratory or BLANK),
                (
                    "Containers, preservation, holding",
                    "as the laboratory and the method say; this sheet sets nothing",
                ),
                (
                    "Labels and chain of custody",
                    "on the laboratory's own forms; none are made here",
                ),
                ("Limits for control samples", "as the quality plan of the campaign says"),
            )
        )
    ]
    if plan.size.qc:
        blocks.append(control_table(plan))
    return [*blocks, Bullets((*name_lines(plan), *plan.samples.notes))]


def control_table(plan: Plan) -> Table:
    """Set the control samples with the source of their rate."""
    return Table(
        ("Control sample", "Count", "Rate from"),
        tuple((entry.kind, str(entry.count), entry.source) for entry in plan.size.qc),
        numeric=("Count",),
    )


def name_lines(plan: Plan) -> tuple[str, ...]:
    """Explain the names of places and jars."""
    lines = [
        "A location is a place, a sample is a jar. Control samples never count as n and never "
        "enter the mean."
        if plan.campaign.rules.duplicates == "first"
        else "A location is a place, a sample is a jar. Control samples never count as n; a "
        "duplicate is averaged with the sample that it repeats.",
        "Sample ids are made by this plan and are unique in it. Short names fit every receiver.",
    ]
    if any(sample.qc_of for sample in plan.samples.samples):
        lines.append("The key to blind duplicates is office/samples_key.csv; the crew has none.")
    return tuple(lines)
