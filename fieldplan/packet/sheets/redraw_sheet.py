"""The attachment for a reviewer: an old plan drawn again and compared."""

import platform
from importlib.metadata import version

from fieldplan.base.document import Block, Bullets, Document, Facts, Heading, Paragraph, SignOff
from fieldplan.packet.sheets.plan_sheet import subtitle
from fieldplan.packet.sheets.plan_words import LAYOUTS
from fieldplan.plan.model import Plan
from fieldplan.plan.redraw import Comparison

LIBRARIES = ("numpy", "shapely", "pyproj")


def redraw_sheet(plan: Plan, comparison: Comparison) -> Document:
    """Compose the one-page attachment.

    Parameters
    ----------
    plan : Plan
        Read from the packet's record.
    comparison : Comparison
        From ``plan.redraw``.

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
                ("Keys of the draw", keys(plan)),
                ("Recorded with", f"fieldplan {plan.fieldplan_version}".strip()),
                ("Drawn again with", libraries()),
            )
        ),
        Paragraph(
            "Only office/record.json was read. Targeted places are chosen by people and are not "
            "drawn. The plan sheet's annex tells how to draw without this program.",
            tone="note",
        ),
    ]
    if comparison.differing:
        blocks += [Heading("Places that differ"), Bullets((", ".join(comparison.differing),))]
    blocks += [Heading("Sign-off"), SignOff(("Drawn again by", "Reviewed by"))]
    return Document(
        title=f"{plan.campaign.plan.title}: drawn again",
        subtitle=subtitle(plan, "Attachment to the plan"),
        plan_id=plan.campaign.plan.id,
        revision_name=plan.revision_name,
        status=plan.status,
        blocks=tuple(blocks),
    )


def keys(plan: Plan) -> str:
    """Name what the random numbers are keyed by."""
    strata = ", ".join(stratum.name for stratum in plan.frame.strata)
    design = plan.campaign.design[0].id
    return f"seed, design “{design}”, stratum ({strata}), place in the stratum's list"


def libraries() -> str:
    """Name this program, the libraries that touch coordinates, and Python, with versions."""
    named = [f"{name} {version(name)}" for name in ("fieldplan", *LIBRARIES)]
    return ", ".join([*named, f"Python {platform.python_version()}"])
