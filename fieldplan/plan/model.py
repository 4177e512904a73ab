"""Everything decided before the field."""

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import date

from fieldplan.base.document import Caution
from fieldplan.campaign.model import Campaign
from fieldplan.design.model import Locations
from fieldplan.frame.model import Frame
from fieldplan.lab.model import Spread
from fieldplan.samples.model import Samples
from fieldplan.sizing.model import Size


@dataclass(frozen=True)
class Plan:
    """The plan: what was asked, the population, how many, where, what is taken, who may go.

    Parameters
    ----------
    campaign : Campaign
    campaign_text : str
        The file as read.
    frame : Frame
    spread : Spread
    size : Size
    locations : Locations
    samples : Samples
    cautions : tuple of Caution
    revision : int
        From 1; ``revision_name`` is e.g. ``HL-r01``.
    made_on : date
        Given by the caller, never read from a clock here.
    issued_by : str
        Empty while DRAFT.
    issued_on : date or None
    inputs : mapping of str to str
        SHA-256 of the campaign file and of every file that it names, by the name written there.
    fieldplan_version : str
    """

    campaign: Campaign
    campaign_text: str
    frame: Frame
    spread: Spread
    size: Size
    locations: Locations
    samples: Samples
    cautions: tuple[Caution, ...]
    revision: int
    made_on: date
    issued_by: str = ""
    issued_on: date | None = None
    inputs: Mapping[str, str] | None = None
    fieldplan_version: str = ""

    @property
    def revision_name(self) -> str:
        """The plan id with its revision, e.g. ``HL-r01``."""
        return f"{self.campaign.plan.id}-r{self.revision:02d}"

    @property
    def status(self) -> str:
        """``DRAFT``, or who issued it and when."""
        if not self.issued_by:
            return "DRAFT"
        return f"ISSUED by {self.issued_by} on {self.issued_on}"

    @property
    def open_items(self) -> tuple[Caution, ...]:
        """Cautions whose hold point or reference is still open."""
        return tuple(c for c in self.cautions if c.is_open)
