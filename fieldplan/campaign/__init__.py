"""What is asked: the campaign file, read and checked."""

from fieldplan.campaign.read import Inspection, OpenEntry, inspect_campaign, read_campaign

__all__ = ["Inspection", "OpenEntry", "inspect_campaign", "read_campaign"]
