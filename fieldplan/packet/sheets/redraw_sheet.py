"""The attachment for a reviewer: an old plan drawn again and compared."""

import platform
from collections.abc import Sequence
from importlib.metadata import version

from fieldplan.base.document import (
    Block,
    Bullets,
    Document,
    Facts,
    Heading,
    Paragraph,
    SignOff,
    Verbatim,
)
from fieldplan.packet.sheets.plan_sheet import subtitle
from fieldplan.packet.sheets.plan_words import LAYOUTS
from fieldplan.plan.model import Plan
from fieldplan.plan.redraw import Comparison

LIBRARIES = ("numpy", "shapely", "pyproj")


def redraw_sheet(
    plan: Plan, comparison: Comparison, *, fingerprint: str = "", differs: Sequence[str] = ()
) -> Document:
    """Compose the one-page attachment.

    Parameters
    ----------
    plan : Plan
        Read from the packet's record.
    comparison : Comparison
        From ``plan.redraw``.
    fingerprint : str
        Of the packet, from ``packet.evidence``.
    differs : sequence of str
        Where the packet differs from its manifest or its record from itself.

    Returns
    -------
    Document
    """
    blocks: list[Block] = [
        Paragraph(comparison.sentence, tone="answer"),
        Facts(
            (
                ("Places compared", str(comparison.places)),
                ("The same to the centimetre", str(comparison.same)),
                ("Largest difference", f"{comparison.largest_m:.3f} m"),
            )
        ),
        Heading("How it was drawn again"),
        Facts(
            (
                ("Layout", LAYOUTS[plan.locations.layout]),
                ("Seed", str(plan.locations.seed)),
                ("Version of the drawing procedure", str(plan.locations.version)),
                ("Recorded with", f"fieldplan {plan.fieldplan_version}".strip()),
                ("Drawn again with", libraries()),
            )
        ),
        Paragraph("Keys of the random numbers:"),
        Verbatim("\n".join(keys(plan))),
        Paragraph(
            "Places come from office/record.json alone. Targeted places are chosen by people and "
            "are not drawn. “The working” of the packet tells how to draw without this program.",
            tone="note",
        ),
    ]
    blocks += [Heading("The packet"), *_packet_blocks(fingerprint, differs)]
    if comparison.differing:
        blocks += [Heading("Places that differ"), Bullets((", ".join(comparison.differing),))]
    blocks += [Heading("Sign-off"), SignOff(("Drawn again by", "Reviewed by"))]
    return Document(
        title=f"Drawn again: {plan.campaign.plan.title}",
        subtitle=subtitle(plan, "Attachment to the plan"),
        plan_id=plan.campaign.plan.id,
        revision_name=plan.revision_name,
        status=plan.status,
        blocks=tuple(blocks),
    )


def _packet_blocks(fingerprint: str, differs: Sequence[str]) -> list[Block]:
    facts = Facts((("Fingerprint of the packet", fingerprint or "none: its manifest is missing"),))
    if differs:
        return [facts, Bullets(tuple(differs))]
    same = (
        "Every file is the one that the manifest names, and the record agrees with itself. Compare "
        "the fingerprint with the one that was noted when the packet was issued."
    )
    return [facts, Paragraph(same)]


def keys(plan: Plan) -> tuple[str, ...]:
    """Write the key lines of the draw: one a stratum, or one a unit of a list (the first shown)."""
    from fieldplan.base.draws import key_text
    from fieldplan.design.procedure import first_purpose

    design, draw = plan.campaign.design[0], plan.locations
    each = draw.layout != "balanced-list"  # its units have no keys of their own
    lines = []
    for stratum in plan.frame.strata:
        unit = stratum.units[0].unit_id if stratum.units else ""
        what = first_purpose(draw.layout, unit=unit)
        more = f"    and so on for {len(stratum.units)} units" if unit and each else ""
        lines.append(key_text(draw.seed, design.id, stratum.name, what) + more)
    return tuple(lines)


def libraries() -> str:
    """Name this program, the libraries that touch coordinates, and Python, with versions."""
    named = [f"{name} {version(name)}" for name in ("fieldplan", *LIBRARIES)]
    return ", ".join([*named, f"Python {platform.python_version()}"])
