"""Whether a file writes decimals with a point or a comma, by what its numbers can only mean."""

import re
from collections.abc import Mapping
from dataclasses import dataclass
from itertools import pairwise

from fieldplan.lab.cells import tidy
from fieldplan.lab.tables import TextTable

_OF_RESULTS = ("as_reported", "reporting_limit")
_POINT = re.compile(r"(?<![0-9.,])([0-9]*)\.([0-9]+)(?![0-9.,])")
_DECIMAL_COMMA = re.compile(r"[0-9],(?![0-9]{3}(?![0-9]))[0-9]")
_LIKE_THOUSANDS = re.compile(r"[<≤=+ ]*([1-9][0-9]{0,2}\.[0-9]{3})(?![0-9.eE])")


@dataclass(frozen=True)
class DecimalMarks:
    """How the numbers of one file are written.

    Parameters
    ----------
    comma : bool
        ``8,6`` is 8.6.
    point_unclear : bool
        ``1.200`` may be 1200 or 1.2: nothing in the file tells which.
    """

    comma: bool = False
    point_unclear: bool = False


def decimal_marks(table: TextTable, found: Mapping[str, int]) -> DecimalMarks:
    """Settle the decimal mark of a file for all its cells.

    Parameters
    ----------
    table : TextTable
    found : mapping of str to int
        Our columns.

    Returns
    -------
    DecimalMarks

    Notes
    -----
    Where commas part the cells a point is decimal. Semicolons and tabs are used where the comma
    is, and there a point parts thousands; so three digits behind it settle nothing. A number such
    as 3.14, 0.512 or 1.2005 does, unless another has a decimal comma. Positions settle nothing:
    they often come from another program than the results.
    """
    if table.separator not in {";", "\t"}:
        return DecimalMarks()
    indexes = [found[column] for column in _OF_RESULTS if column in found]
    results = [cells[index] for _, cells in table.rows for index in indexes]
    comma = not any(_has_point(text) for text in results)
    decimal = any(_is_decimal(text) for text in results)
    contradicted = any(_DECIMAL_COMMA.search(text) for text in results)
    return DecimalMarks(comma, not decimal or contradicted)


def like_thousands(text: str) -> str:
    """Give the whole number that a cell may mean if its point parts thousands; else nothing.

    Parameters
    ----------
    text : str

    Examples
    --------
    >>> like_thousands("< 1.200 J"), like_thousands("0.512"), like_thousands("1.2005")
    ('1200', '', '')
    """
    match = _LIKE_THOUSANDS.match(tidy(text))
    return match[1].replace(".", "") if match else ""


def _has_point(text: str) -> bool:
    """Whether a digit, a point and a digit stand side by side."""
    return any(a[-1:].isdigit() and b[:1].isdigit() for a, b in pairwise(text.split(".")))


def _is_decimal(text: str) -> bool:
    """Whether a point in a number cannot part thousands."""
    match = _POINT.search(text)
    if match is None:
        return False
    before, behind = match.groups()
    exponent = text[match.end() : match.end() + 1] in {"e", "E"}
    return len(behind) != 3 or len(before) > 3 or before.startswith("0") or not before or exponent
