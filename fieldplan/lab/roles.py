"""What a row is: a sample of the population, a duplicate, or a control sample."""

import re
from difflib import get_close_matches

from fieldplan.base.errors import LabError
from fieldplan.lab.cells import tidy

IN_THE_MEAN = ("field sample", "field duplicate")
_SPELLINGS = {
    "field sample": ("", "field sample", "sample", "primary", "primary sample", "normal", "fs"),
    "field duplicate": ("field duplicate", "duplicate", "dup", "fd", "field replicate"),
    "equipment blank": ("equipment blank", "rinsate", "rinsate blank", "rinse blank", "eb"),
    "field blank": ("field blank", "fb"),
    "trip blank": ("trip blank", "transport blank", "tb"),
    "temperature blank": ("temperature blank",),
    "laboratory duplicate": ("laboratory duplicate", "lab duplicate", "lab dup", "ld"),
    "laboratory control": (
        "laboratory control", "laboratory control sample", "lab control sample", "lcs",
        "reference material",
    ),
    "method blank": ("method blank", "laboratory blank", "lab blank", "mb"),
    "matrix spike": ("matrix spike", "matrix spike duplicate", "ms", "msd", "spike"),
}  # fmt: skip


def plain_role(text: str, file_name: str, row: int) -> str:
    """Bring the spellings of one role together; a blank is a field sample.

    Parameters
    ----------
    text : str
        The cell.
    file_name : str
    row : int
        For the message.

    Returns
    -------
    str

    Raises
    ------
    LabError
        The word is none that is known; guessing could put a blank into the mean.

    Examples
    --------
    >>> plain_role("Field_Duplicate", "labs.csv", 3)
    'field duplicate'
    """
    plain = " ".join(re.sub(r"[_\-]+", " ", tidy(text).casefold()).split())
    known = {spelling: role for role, spellings in _SPELLINGS.items() for spelling in spellings}
    if plain in known:
        return known[plain]
    near = get_close_matches(plain, known, n=1)
    hint = f"did you mean '{near[0]}'?" if near else f"roles are: {', '.join(_SPELLINGS)}."
    message = f"{file_name} row {row}: role '{tidy(text)[:40]}' is not known; {hint}"
    raise LabError(message)
