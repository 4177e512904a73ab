"""Ids as a spreadsheet writes them once it has taken them for dates or for numbers."""

import re
from collections.abc import Sequence

from fieldplan.lab.model import LabRow
from fieldplan.lab.words import listed

_MONTH = (
    "Jan|Feb|Mar|Apr|May|Jun|Jul|Aug|Sep|Sept|Oct|Nov|Dec"
    "|Mrz|Mär|Mai|Okt|Dez"
)  # fmt: skip
_CHANGED = re.compile(
    rf"[0-9](?:\.[0-9]+)?E\+[0-9]{{2,3}}|[0-9]{{1,2}}[-.] ?(?:{_MONTH})(?:[-. ]+[0-9]{{2,4}})?"
    rf"|(?:{_MONTH})[-. ][0-9]{{2}}|[0-9]{{1,2}}/[0-9]{{1,2}}/[0-9]{{2,4}}"
    r"|[0-9]{1,2}\.[0-9]{1,2}\.[0-9]{4}|[0-9]{4}-[0-9]{2}-[0-9]{2}(?: [0-9:]+)?"
)


def looks_changed(written: str) -> bool:
    """Whether an id has the look of a spreadsheet's date, or of its power of ten.

    Parameters
    ----------
    written : str

    Examples
    --------
    >>> looks_changed("2-May"), looks_changed("1.00E+05"), looks_changed("01/05/2026")
    (True, True, True)
    >>> looks_changed("MAR-01"), looks_changed("1e5"), looks_changed("3-5")
    (False, False, False)
    """
    return _CHANGED.fullmatch(written) is not None


def changed_ids_note(file_name: str, rows: Sequence[LabRow]) -> list[str]:
    """Say which ids a spreadsheet may have changed; two of them may have become one.

    Parameters
    ----------
    file_name : str
    rows : sequence of LabRow

    Returns
    -------
    list of str
        One sentence, or none.
    """
    found = [
        f"'{written}' (row {row.row})"
        for row in rows
        for written in dict.fromkeys((row.sample_id, row.location_id))
        if looks_changed(written)
    ]
    if not found:
        return []
    return [
        f"{file_name}: a spreadsheet may have turned ids into dates or numbers: {listed(found)}. "
        "Compare them with the labels; set their column to text before the file is saved."
    ]
