"""One reported cell: a number, a non-detect, or a sentence on why it is neither."""

import re
import unicodedata
from dataclasses import dataclass
from decimal import Decimal
from typing import NoReturn

from fieldplan.base.errors import LabError
from fieldplan.lab.qualifiers import read_qualifier

SMALLEST, LARGEST = Decimal("1e-30"), Decimal("1e30")
_NUMBER = re.compile(r"\+?(?:[0-9]{1,40}(?:\.[0-9]{0,40})?|\.[0-9]{1,40})(?:[eE][+-]?[0-9]{1,3})?")
_CELL = re.compile(
    rf"(?P<less><=?|≤)?\s*(?P<number>{_NUMBER.pattern})\s*(?P<letters>[A-Za-z*^][A-Za-z*^+\-,/ ]*)?"
)
_THOUSANDS = re.compile(r"\+?[1-9][0-9]{0,2}(?:,[0-9]{3})+(?:\.[0-9]+)?")
_DECIMAL_COMMA = re.compile(r"\+?(?:[0-9]+,[0-9]+)(?:[eE][+-]?[0-9]+)?")
_BLANK = {"", "-", "--", "---", "–", "—", "na", "n/a", "n.a.", "null", "none", "nil", "."}


@dataclass(frozen=True)
class Reading:
    """What one cell says, in the unit of its row.

    Parameters
    ----------
    number : Decimal or None
        The result; None for a non-detect.
    limit : Decimal or None
        The limit that the cell itself states; None when it states none.
    detected : bool
    letters : str
        Qualifiers as written beside the number.
    """

    number: Decimal | None
    limit: Decimal | None
    detected: bool
    letters: str = ""


def tidy(text: str) -> str:
    """Take away what cannot be seen: odd spaces, zero-width marks, spaces at the ends.

    Parameters
    ----------
    text : str

    Examples
    --------
    >>> tidy("\u00a0<\u2009 0.5\u200b ")
    '< 0.5'
    """
    seen = "".join(c for c in text if unicodedata.category(c) not in {"Cf", "Cc"} or c in "\t\n")
    return " ".join(seen.split())


def read_cell(text: str, *, decimal_comma: bool = False) -> Reading:
    """Read what the laboratory reported, strictly.

    Parameters
    ----------
    text : str
        The cell as written.
    decimal_comma : bool
        Whether ``8,6`` means 8.6; the reader of the file decides it once for all cells.

    Returns
    -------
    Reading

    Raises
    ------
    LabError
        With a sentence that gives the rule and the remedy, without file and row.

    Notes
    -----
    Accepted: ``12``, ``1.2E3``, ``<0.5``, ``0.5U`` (not detected, limit 0.5), ``3.1 J``, and
    ``ND``, ``n.d.``, ``BDL``, ``U`` or a bare ``<``, whose limit another column must give.
    Refused: blanks, ``0``, numbers below 0, ``>``, words, commas that could mean two things.

    Examples
    --------
    >>> read_cell("3.1 J").letters, read_cell("< 0.5").limit, read_cell("n.d.").detected
    ('J', Decimal('0.5'), False)
    """
    plain = tidy(text).replace("−", "-").replace("＜", "<")
    lower = plain.casefold()
    if lower in _BLANK:
        _refuse("is no result", "Type ND with a reporting_limit, or leave the row out")
    if not any(c.isdigit() for c in lower) and _says_not_detected(lower):
        return Reading(None, None, False, plain if lower in {"u", "uj"} else "")
    plain = _without_comma(plain, decimal_comma)
    match = _CELL.fullmatch(plain)
    if match is None:
        _refuse_unreadable(plain)
    return _from_match(match)


def _without_comma(plain: str, decimal_comma: bool) -> str:
    body = re.match(r"[<≤=\s]*([+0-9][0-9.,]*)", plain)
    if body is None or "," not in body[1]:
        return plain
    number = body[1].rstrip(",.")
    if "," not in number:
        return plain
    if _THOUSANDS.fullmatch(number):
        bare = number.replace(",", "")
        _refuse(
            "has a comma that may part thousands or decimals",
            f"Type {bare} or {number.replace(',', '.', 1)}",
        )
    if not decimal_comma or not _DECIMAL_COMMA.fullmatch(number):
        _refuse(
            "has a comma; decimal commas are read only in files cut by semicolons or tabs "
            "that use no decimal point",
            f"Type {number.replace(',', '.', 1)}",
        )
    return plain.replace(",", ".", 1)


def _from_match(match: re.Match[str]) -> Reading:
    number = Decimal(match["number"])
    letters = (match["letters"] or "").strip(" ,/")
    qualifier = read_qualifier(letters)
    if qualifier.unknown:
        _refuse(
            f"has {letters!r} beside the number",
            "Put a unit into 'unit' and the laboratory's letters into 'qualifier_lab'",
        )
    if number == 0:
        _refuse(
            "is zero, which no laboratory can measure",
            "Type ND with a reporting_limit if nothing was detected",
        )
    if not SMALLEST <= number <= LARGEST:
        _refuse("is outside 1e-30 to 1e30", "Check the exponent")
    if match["less"] or qualifier.not_detected:
        return Reading(None, number, False, letters)
    return Reading(number, None, True, letters)


def _says_not_detected(words: str) -> bool:
    qualifier = read_qualifier(words)
    return qualifier.not_detected and not (qualifier.unknown or qualifier.above)


def letters_beside(text: str) -> str:
    """Give what stands behind the number of a cell, without reading the number.

    Parameters
    ----------
    text : str

    Examples
    --------
    >>> letters_beside("< 3.1 R")
    'R'
    """
    return tidy(text).lstrip("<>=≤+-0123456789., ")


def _refuse_unreadable(plain: str) -> NoReturn:
    if plain.startswith((">", "≥")):
        _refuse(
            "is above what the laboratory can measure; a mean cannot use it",
            "Ask for a dilution and type its result",
        )
    if re.match(r"-\s*[\d.]", plain):
        _refuse(
            "is below 0, which a concentration cannot be",
            "Type ND with a reporting_limit if nothing was detected",
        )
    _refuse("is not a number, <number or ND", "Type what the laboratory reported")


def _refuse(rule: str, remedy: str) -> NoReturn:
    message = f"{rule}. {remedy}."
    raise LabError(message)
