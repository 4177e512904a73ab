"""The printable field return: one line a sample, blanks for what the crew writes."""

from fieldplan.base.document import Block, Bullets, Document, Facts, Heading, Paragraph, Table
from fieldplan.design.model import Location, LocationClass
from fieldplan.design.names import plain_form
from fieldplan.packet.sheets.amounts import days
from fieldplan.packet.sheets.field_section import deviation_rule, reason_table
from fieldplan.packet.sheets.plan_sheet import subtitle
from fieldplan.packet.sheets.plan_words import several_strata
from fieldplan.packet.sheets.take import analysed_words, take_words
from fieldplan.plan.model import Plan
from fieldplan.samples.model import Sample

COLUMNS = (
    "Location (on the receiver)",
    "Sample",
    "Planned position",
    "Taken?",
    "Date, time",
    "Actual latitude, longitude",
    "Reason code",
    "Replaced by",
    "Note",
    "Initials",
)
BY_HAND = (
    ("Date, time", 1.1),
    ("Actual latitude, longitude", 1.6),
    ("Reason code", 0.8),
    ("Replaced by", 0.9),
    ("Note", 2.2),
    ("Initials", 0.75),
)
"""What the crew writes, and its share of the room."""

JARS = (
    "one line below is one sample; where a location has two lines, take two. Containers and "
    "preservation as the laboratory says"
)

TITLES: dict[LocationClass, str] = {
    "random": "Locations to visit",
    "targeted": "Targeted places",
    "alternate": "Alternates: only in place of a location that cannot be sampled",
}


def field_form(plan: Plan) -> Document:
    """Compose the form; nothing on it tells a duplicate from any other sample.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    Document
        Planned and targeted locations first, alternates apart, then the rule and the codes.
    """
    blocks: list[Block] = [*hold_blocks(plan), Facts(head_rows(plan))]
    for location_class, title in TITLES.items():
        places = plan.locations.of_class(location_class)
        if places:
            blocks += [Heading(title), sample_table(plan, places)]
    blocks += blank_blocks(plan)
    blocks += [
        Heading("When a location cannot be sampled as planned"),
        Bullets(deviation_rule(plan), numbered=True),
        reason_table(),
        Paragraph(
            "Correct with a single line through, initials and date; nothing is overwritten.",
            tone="note",
        ),
    ]
    return Document(
        title=plan.campaign.plan.title,
        subtitle=subtitle(plan, "Field return"),
        plan_id=plan.campaign.plan.id,
        revision_name=plan.revision_name,
        status=plan.status,
        blocks=tuple(blocks),
        lying=True,
    )


def hold_blocks(plan: Plan) -> list[Block]:
    """Set the open hold points at the head, so that nobody starts without seeing them."""
    return [c for c in plan.open_items if c.holds_work]


def head_rows(plan: Plan) -> tuple[tuple[str, str], ...]:
    """Set what the crew needs at hand, and blanks for who was there."""
    field, table = plan.campaign.field, plan.campaign.plan
    return (
        ("Take", take_words(plan)),
        ("To be analysed for", analysed_words(plan)),
        ("Jars", JARS),
        ("Days", days(table.fieldwork_from, table.fieldwork_to)),
        ("Method", field.method or "ask the office"),
        ("Contact", field.contact or "ask the office"),
        ("Clock", f"UTC{field.utc_offset}" if field.utc_offset else "UTC offset: ________"),
        ("Crew and receiver", "______________________________"),
    )


def sample_table(plan: Plan, places: tuple[Location, ...]) -> Table:
    """Set one line for each sample of the places, in the order of its id."""
    rows = []
    for place in places:
        samples = sorted(plan.samples.at(place.location_id), key=lambda s: s.sample_id)
        rows += [sample_row(plan, place, sample) for sample in samples]
    return Table(COLUMNS, tuple(rows), by_hand=BY_HAND)


def sample_row(plan: Plan, place: Location, sample: Sample) -> tuple[str, ...]:
    """Set one sample with blanks, and what the receiver shows where the id does not tell it."""
    name = place.location_id
    if place.short_name != plain_form(name):
        name += f" ({place.short_name})"
    if place.location_class == "alternate" and several_strata(plan):
        name += f"\n{place.stratum}"
    position = f"{place.latitude:.6f}, {place.longitude:.6f}"
    if place.along_m is not None:
        position += f"\n{place.branch}, {place.along_m:.0f} m from its start"
    return (name, sample.sample_id, position, "☐", *[""] * len(BY_HAND))


def blank_blocks(plan: Plan) -> list[Block]:
    """Set the samples that belong to no location: blanks, whose kind the crew must know."""
    blanks = [sample for sample in plan.samples.samples if not sample.location_id]
    if not blanks:
        return []
    columns = ("Sample", "Kind", "Taken?", "Date, time", "Note", "Initials")
    rows = tuple((sample.sample_id, sample.role, "☐", "", "", "") for sample in blanks)
    by_hand = tuple(entry for entry in BY_HAND if entry[0] in columns)
    return [Heading("Blanks"), Table(columns, rows, by_hand=by_hand)]
