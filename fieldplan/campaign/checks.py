"""Rules that hold between keys and tables of a campaign file."""

from typing import Any

from fieldplan.campaign.problems import Problem


def check(data: dict[str, Any]) -> list[Problem]:
    """Return every rule between keys that ``data`` breaks."""
    return []
