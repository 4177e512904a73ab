"""From the campaign file to the plan: each room is asked once, in the order of the job."""

from collections.abc import Callable
from datetime import date

from fieldplan import __version__
from fieldplan.base.errors import CampaignError
from fieldplan.campaign.inputs import fingerprint, input_files
from fieldplan.campaign.model import ReadCampaign
from fieldplan.campaign.text import read_text
from fieldplan.crew.cautions import cautions
from fieldplan.design import locate
from fieldplan.design.model import StratumCount
from fieldplan.frame import read_frame
from fieldplan.lab import read_spread
from fieldplan.plan.model import Plan
from fieldplan.samples import assign
from fieldplan.sizing import size


def _ignore(_stage: str) -> None:
    """Take a stage name and do nothing with it."""


def make_plan(
    read: ReadCampaign,
    *,
    made_on: date,
    revision: int = 1,
    progress: Callable[[str], None] = _ignore,
) -> Plan:
    """Decide everything that is decided before the field.

    Parameters
    ----------
    read : ReadCampaign
        From ``read_campaign``.
    made_on : date
        Printed on the pages; also the day on which clearances are judged to have expired.
    revision : int
        From 1.
    progress : callable
        Called with the name of each stage as it begins.

    Returns
    -------
    Plan
        A DRAFT.

    Raises
    ------
    FieldplanError
        An input cannot be read, the campaign file has changed since it was read, or the campaign
        cannot be sized or drawn.
    """
    campaign = read.campaign
    inputs = _fingerprints(read)
    progress("reading the boundary")
    frame = read_frame(read)
    progress("reading the pilot")
    spread = read_spread(read, frame)
    progress("counting locations")
    how_many = size(campaign, spread, frame, beside="all")
    progress("drawing locations")
    counts = [StratumCount(s.stratum, s.planned, s.alternates) for s in how_many.strata]
    locations = locate(campaign, frame, counts)
    return Plan(
        campaign=campaign,
        campaign_text=read.text,
        frame=frame,
        spread=spread,
        size=how_many,
        locations=locations,
        samples=assign(campaign, locations, how_many, revision=revision),
        cautions=cautions(campaign, on=made_on),
        revision=revision,
        made_on=made_on,
        inputs=inputs,
        fieldplan_version=__version__,
    )


def _fingerprints(read: ReadCampaign) -> dict[str, str]:
    """Hash the campaign file, which must still be the one that was read, and all that it names."""
    own = fingerprint(read.path)
    if read_text(read.path) != read.text:
        message = f"{read.path} was changed while it was being read; run the command again."
        raise CampaignError(message)
    named = {name: fingerprint(path) for name, path in input_files(read).items()}
    return {read.path.name: own, **named}
