"""What is asked: the campaign file, read and checked."""

from fieldplan.campaign.alarms import alarms
from fieldplan.campaign.draft import draft
from fieldplan.campaign.inputs import fingerprint, input_files, missing_files
from fieldplan.campaign.read import Inspection, OpenEntry, inspect_campaign, read_campaign

__all__ = [
    "Inspection",
    "OpenEntry",
    "alarms",
    "draft",
    "fingerprint",
    "input_files",
    "inspect_campaign",
    "missing_files",
    "read_campaign",
]
