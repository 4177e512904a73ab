"""What population: areas, lines and lists, with strata and measure."""

from fieldplan.base.errors import FrameError
from fieldplan.campaign.model import Campaign, FrameTable, ReadCampaign
from fieldplan.frame.model import Frame


def read_frame(read: ReadCampaign) -> Frame:
    """Read the population that a campaign asks about.

    Parameters
    ----------
    read : ReadCampaign
        From ``read_campaign``; paths in it start from its folder.

    Returns
    -------
    Frame
        Boundary, strata, exclusions and targeted places in one equal-area plane, measured; or
        the units of a list, or lines by distance.

    Raises
    ------
    FrameError
        A file is missing, unreadable or cannot serve; every line says which and what to do.
    """
    from fieldplan.frame.area import read_area
    from fieldplan.frame.ground import FrameFiles
    from fieldplan.frame.line import read_line
    from fieldplan.frame.listing import read_list

    table = _frame_table(read.campaign)
    files = FrameFiles(read.folder, table, read.campaign.field.position_accuracy_m)
    if table.kind == "area":
        return read_area(files, read.campaign.targeted)
    if table.kind == "line":
        return read_line(files, read.campaign.targeted, layout=read.campaign.design[0].layout)
    return read_list(files, read.campaign.targeted, layout=read.campaign.design[0].layout)


def _frame_table(campaign: Campaign) -> FrameTable:
    """Find the frame that the first design draws from; the only one when it names none."""
    wanted = campaign.design[0].frame
    if wanted is None:
        return campaign.frame[0]
    for table in campaign.frame:
        if table.id == wanted:
            return table
    message = f"design {campaign.design[0].id!r} names frame {wanted!r}, which is not there."
    raise FrameError(message)


__all__ = ["read_frame"]
