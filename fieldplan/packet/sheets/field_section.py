"""What the crew may change, how it is recorded, and what has to be settled first."""

from fieldplan.base.document import Block, Bullets, Caution, Facts, Paragraph, Table
from fieldplan.packet.sheets.amounts import BLANK, days
from fieldplan.packet.sheets.plan_words import REASONS
from fieldplan.packet.sheets.sections import in_working, on_sheet
from fieldplan.packet.sheets.wording import number
from fieldplan.plan.model import Plan


def field_blocks(plan: Plan) -> list[Block]:
    """Set the days, the receiver, the contact and the reason codes."""
    field, table = plan.campaign.field, plan.campaign.plan
    accuracy = f"{number(field.position_accuracy_m)} m" if field.position_accuracy_m else BLANK
    facts = Facts(
        (
            ("Days", days(table.fieldwork_from, table.fieldwork_to)),
            ("Position accuracy of the receiver", accuracy),
            ("Order of visits", "left to the protocol and the field lead"),
            ("Contact", field.contact or BLANK),
            ("Clock", f"UTC{field.utc_offset}" if field.utc_offset else BLANK),
        )
    )
    rule = on_sheet("When a location cannot be sampled as planned")
    return [
        facts,
        Paragraph(f"When a location cannot be sampled as planned: {rule}."),
        reason_table(),
    ]


def deviation_blocks(plan: Plan) -> list[Block]:
    """Set the rule for the field, and say where its codes are."""
    codes = f"Reason codes are on the field form and in {in_working('In the field')}."
    return [Bullets((*deviation_rule(plan), codes), numbered=True)]


def deviation_rule(plan: Plan) -> tuple[str, ...]:
    """Say how far a location may move, what replaces it and what is written down."""
    field = plan.campaign.field
    if plan.frame.kind == "list":
        first = "A unit of the list is never moved."
    elif field.offset_within_m:
        first = f"The field lead may move a location by up to {number(field.offset_within_m)} m."
    else:
        first = "No location may be moved."
    steps = [f"{first} {field.offset_rule}".strip()]
    if plan.locations.of_class("alternate"):
        steps.append(
            "Where that is not enough, take the next unused alternate of the same stratum, in "
            "its order; never the nearest convenient spot."
        )
    steps += [
        "The crew's judgement that a place is unfit to work at always comes before the design.",
        "Write the actual position, the time, the reason code and initials on the return. "
        "Targeted places are not replaced.",
        f"In doubt, stop and call: {field.contact or 'the contact is not typed yet'}.",
    ]
    return tuple(steps)


def reason_table() -> Table:
    """Set the reason codes of the field return."""
    return Table(("Reason code", "Use it when"), tuple(REASONS.items()))


def caution_blocks(plan: Plan) -> list[Block]:
    """Set hold points one by one and the other topics as a table; none instructs, each defers."""
    blocks: list[Block] = [
        Paragraph(
            "Each is open until a reference, its date and its expiry are typed in the campaign "
            "file, and again when it has expired. The rules named are examples of where to ask; "
            "which of them apply is for the user and the authority to say."
        )
    ]
    blocks += [caution for caution in plan.cautions if caution.holds_work]
    others = [caution for caution in plan.cautions if not caution.holds_work]
    if others:
        rows = tuple((f"{c.topic}: {c.because}", c.defers_to, short_status(c)) for c in others)
        blocks.append(Table(("Topic, raised because", "Decided by", "Reference"), rows))
    return blocks


def short_status(caution: Caution) -> str:
    """Write OPEN alone where nothing was typed; the paragraph above says what is missing.

    Examples
    --------
    >>> short_status(Caution("t", "b", "d", "OPEN: no reference, date and expiry typed", True))
    'OPEN'
    """
    return "OPEN" if caution.status.startswith("OPEN: no reference") else caution.status
