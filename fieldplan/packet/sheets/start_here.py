"""START_HERE: one page that says what each file is for, what comes next and what is open."""

from fieldplan.base.document import Block, Bullets, Document, Files, Heading, Paragraph
from fieldplan.packet.sheets.answer import open_blocks
from fieldplan.packet.sheets.plan_sheet import subtitle
from fieldplan.packet.sheets.words_used import explained
from fieldplan.plan.model import Plan


def start_here(plan: Plan) -> Document:
    """Compose the first page of a packet.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    Document
        The crew's files come first.
    """
    blocks: list[Block] = [
        *explained([Paragraph(plan.size.sentences[0], tone="answer")]),
        Heading("Three things to do next"),
        Bullets(next_steps(plan), numbered=True),
        *open_blocks(plan),
        Heading("For the crew: folder crew"),
        Files("crew", crew_files(plan)),
        Heading("For the office: folder office"),
        Files("office", office_files(plan)),
    ]
    return Document(
        title=plan.campaign.plan.title,
        subtitle=subtitle(plan, "Start here"),
        plan_id=plan.campaign.plan.id,
        revision_name=plan.revision_name,
        status=plan.status,
        blocks=tuple(blocks),
    )


def next_steps(plan: Plan) -> tuple[str, ...]:
    """Say the three things to do next, for a draft or for an issued packet."""
    name = plan.revision_name
    returned = (
        f"When results are back, run: fieldplan estimate {name} LAB_FILE --field field_return.csv"
    )
    if plan.issued_by:
        held = any(caution.holds_work for caution in plan.open_items)
        first = "No work before the hold points below are settled. " if held else ""
        return (
            f"{first}Load the point file into the receiver and open the map once before leaving; "
            "it works without a signal.",
            "In the field, fill in field_return.csv or the printed form: what was taken, where, "
            "when, and why if it was changed.",
            returned,
        )
    settle = (
        "Settle what is open below, type its reference and dates in the campaign file, and pack "
        "again."
        if plan.open_items
        else "Nothing is open; read the plan sheet once more."
    )
    return (
        "Read office/plan_sheet.pdf: the answer is on its first page.",
        settle,
        f"When all agree, run: fieldplan issue {name} --by NAME. Then hand over folder crew.",
    )


def crew_files(plan: Plan) -> tuple[tuple[str, str], ...]:
    """Say what each of the crew's files is for."""
    name = plan.revision_name
    drawn = "the lines as tracks" if plan.frame.kind == "line" else "the boundary as a track"
    return (
        (f"{name}-points.gpx", f"for a GPS receiver: all locations, and {drawn}"),
        (f"{name}-points.kml", "for a phone or a globe viewer"),
        (f"{name}-points.csv", "all locations in degrees, degrees-minutes-seconds and UTM"),
        (f"{name}-map.html", "the map for phone or laptop; works without a signal"),
        (f"{name}-map.pdf", "the map to print"),
        (f"{name}-map.png", "its first page as a picture"),
        ("field_form.pdf", "the form to print and fill in by hand"),
        ("field_return.csv", "the same form for a spreadsheet; send it back to the office"),
    )


def office_files(plan: Plan) -> tuple[tuple[str, str], ...]:
    """Say what each of the office's files is for."""
    name = plan.revision_name
    return (
        ("plan_sheet.pdf", "the plan for review and sign-off"),
        ("plan_sheet.html", "the same as a page"),
        ("working.pdf", "the working: pilot, every step, locations, samples, how to draw again"),
        ("working.html", "the same as a page"),
        (
            f"{name}-locations.gpkg",
            "all layers with their styles, for a GIS",
        ),
        (f"{name}-locations.geojson", "all locations in the open web format"),
        (f"{name}-locations.xlsx", "all locations for a spreadsheet"),
        ("inputs/campaign.toml", "the campaign file and all it names, as they were when packed"),
        ("samples_key.csv", "which sample repeats which; never for the crew or the laboratory"),
        ("manifest.json", "the fingerprint of every file of the packet"),
        ("record.json", "all that is needed to draw again and to estimate; the key is in it too"),
    )
