"""The attachment that tells a reviewer what a second drawing gave."""

from pathlib import Path

from fieldplan.base.errors import RecordError
from fieldplan.base.files import write_atomically
from fieldplan.packet.evidence import Evidence
from fieldplan.packet.folder import must_be_outside_packets
from fieldplan.packet.sheets.pdf import set_pdf
from fieldplan.packet.sheets.redraw_sheet import redraw_sheet
from fieldplan.plan.model import Plan
from fieldplan.plan.redraw import Comparison


def write_redraw(plan: Plan, comparison: Comparison, parent: Path, *, evidence: Evidence) -> Path:
    """Write the one-page attachment, under the next free number.

    Parameters
    ----------
    plan : Plan
    comparison : Comparison
        From ``plan.redraw``.
    parent : Path
        An existing folder, or one that can be made.
    evidence : Evidence
        From ``packet.evidence.examine``.

    Returns
    -------
    Path
        e.g. ``HL-r01-redrawn-01.pdf``.
    """
    must_be_outside_packets(parent)
    try:
        parent.mkdir(parents=True, exist_ok=True)
    except OSError as fault:
        message = f"{parent} cannot be made ({fault.strerror or fault}); choose another folder."
        raise RecordError(message) from fault
    stems = {path.stem for path in parent.glob(f"{plan.revision_name}-redrawn-*.pdf")}
    number = 1
    while f"{plan.revision_name}-redrawn-{number:02d}" in stems:
        number += 1
    sheet = redraw_sheet(
        plan, comparison, fingerprint=evidence.fingerprint, differs=evidence.sentences
    )
    content = set_pdf(sheet, paper=plan.campaign.paper.size)
    return write_atomically(parent / f"{plan.revision_name}-redrawn-{number:02d}.pdf", content)
