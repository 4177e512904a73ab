"""The campaign file of a folder, where a folder is named in its place."""

import re
from pathlib import Path

from fieldplan.base.errors import CampaignError


def campaign_in(path: Path) -> Path:
    """Return the campaign file that is meant: the path itself, or the only one in a folder.

    Parameters
    ----------
    path : Path
        A file, which is returned as it is, or a folder.

    Raises
    ------
    CampaignError
        The folder holds none, or several.
    """
    if not path.is_dir():
        return path
    inside = sorted(entry for entry in path.glob("*.toml") if entry.is_file())
    campaigns = inside if len(inside) == 1 else [entry for entry in inside if _says_format(entry)]
    if len(campaigns) == 1:
        return campaigns[0]
    if campaigns:
        names = ", ".join(entry.name for entry in campaigns)
        message = f"{path} holds {len(campaigns)} campaign files: {names}. Name the one you mean."
    else:
        message = f"{path} holds no campaign file (.toml). Run 'fieldplan new' to write one."
    raise CampaignError(message)


def _says_format(path: Path) -> bool:
    """Tell a campaign file from other TOML by its first key, also where it is damaged."""
    try:
        text = path.read_bytes().decode("utf-8", errors="replace").replace("\0", "")
    except OSError:
        return False
    return re.search(r"^\ufeff?\s*format\s*=", text, re.MULTILINE) is not None
