"""Names that survive receivers and spreadsheets: at most six characters, made by rule.

A short name is the campaign's prefix, a letter for the stratum and a number: ``QFA01``.
"""

import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import product

from fieldplan.base.errors import DesignError

LONGEST = 6
LETTERS = "ABCDFGHJKLMNPQRSUVWXYZ"
"""For strata: no I and O (read as 1 and 0), no E (12E5 is a number), no T (targeted places)."""
TARGETED_LETTER = "T"

# As spreadsheets know them in English, German, French, Spanish, Italian, Portuguese and Dutch.
_MONTH_WORDS = """
JAN FEB MAR APR MAY JUN JUL AUG SEP SEPT OCT NOV DEC MARCH APRIL JUNE JULY
MRZ MAI OKT DEZ JUNI JULI MARZ MAERZ FEV FEVR AVR AVRIL MARS JUIN JUIL AOUT
ENE ABR ABRIL AGO DIC ENERO MARZO MAYO JUNIO JULIO GEN MAG GIU LUG SET SETT OTT
FEBR MAIO MRT MAART MEI OUT AOU
"""
_MONTHS = frozenset(_MONTH_WORDS.split())


def is_date_like(name: str) -> bool:
    """Tell whether a spreadsheet could take a name for a day or a month.

    Examples
    --------
    >>> [is_date_like(name) for name in ("MAR01", "DEC2", "SEP-3", "QFA01")]
    [True, True, True, False]
    """
    found = re.fullmatch(r"([A-Z]+)[ .-]?\d{1,4}", name.upper())
    return found is not None and found[1] in _MONTHS


def is_number_like(name: str) -> bool:
    """Tell whether a name holds an ``E`` between digits, or opens with a digit.

    Examples
    --------
    >>> [is_number_like(name) for name in ("12E5", "A1E05", "01", "QFA01")]
    [True, True, True, False]
    """
    return re.search(r"^\d|\d[Ee]\d", name) is not None


def check_prefix(prefix: str) -> None:
    """Refuse a prefix that cannot open short names.

    Raises
    ------
    DesignError
        It is not one or two characters, A–Z and 0–9, the first a letter.

    Examples
    --------
    >>> check_prefix("HL")
    """
    if re.fullmatch(r"[A-Z][A-Z0-9]?", prefix) is None:
        message = (
            f"prefix '{prefix}' cannot open a short name; it must be one or two characters, "
            'capital letters A–Z or digits, the first a letter, e.g. prefix = "HL".'
        )
        raise DesignError(message)


@dataclass(frozen=True)
class Naming:
    """How the places of one campaign are named; every name has the same width.

    Parameters
    ----------
    prefix : str
    codes : mapping of str to str
        The letter, or letters, of each stratum.
    digits : int
        2, or 3 when a stratum's list is longer than 99.
    targeted_code : str
        Stands where the stratum's letter stands in the names of targeted places.
    """

    prefix: str
    codes: Mapping[str, str]
    digits: int
    targeted_code: str

    def short_name(self, stratum: str, order: int) -> str:
        """Name a drawn place, e.g. ``QFA01``."""
        return f"{self.prefix}{self.codes[stratum]}{order:0{self.digits}d}"

    def location_id(self, stratum: str, order: int) -> str:
        """Give the id of a drawn place in an area, e.g. ``QF-A-01``."""
        return f"{self.prefix}-{self.codes[stratum]}-{order:0{self.digits}d}"

    def targeted_name(self, number: int) -> str:
        """Name a targeted place, e.g. ``QFT01``."""
        return f"{self.prefix}{self.targeted_code}{number:0{self.digits}d}"


def naming(prefix: str, strata: Sequence[str], longest_list: int) -> Naming:
    """Choose codes and width so that every name fits six characters.

    Parameters
    ----------
    prefix : str
    strata : sequence of str
        In the frame's order, which decides the letters: A for the first, and so on.
    longest_list : int
        Places on the longest list of a stratum, alternates in, or the number of targeted places.

    Raises
    ------
    DesignError
        The prefix is bad, or so many strata and places leave no room for it.

    Notes
    -----
    Letters that would make a name read as a date with this prefix are left out: with ``MA`` there
    is no stratum R. Going from 99 places to 100 lengthens the names; nothing else changes them.

    Examples
    --------
    >>> naming("MA", ["field", "yard"], 12).short_name("yard", 7)
    'MAB07'
    >>> naming("QF", ["field"], 640).location_id("field", 7)
    'QF-A-007'
    """
    check_prefix(prefix)
    digits = max(len(str(longest_list)), 2)
    width = 1
    codes = list(_codes(prefix, width))
    if len(codes) < len(strata):
        width = 2
        codes = list(_codes(prefix, width))
    if len(prefix) + width + digits > LONGEST or len(codes) < len(strata):
        message = (
            f"{len(strata)} strata with up to {longest_list} places each cannot be named in "
            f"{LONGEST} characters after the prefix '{prefix}'. " + _remedy(prefix, width, digits)
        )
        raise DesignError(message)
    targeted = _targeted_code(prefix, width)
    return Naming(prefix, dict(zip(strata, codes, strict=False)), digits, targeted)


def _codes(prefix: str, width: int) -> Iterator[str]:
    kept_back = _targeted_code(prefix, width)
    for letters in product(LETTERS, repeat=width):
        code = "".join(letters)
        if code != kept_back and not is_date_like(f"{prefix}{code}01"):
            yield code


def _targeted_code(prefix: str, width: int) -> str:
    """Return T, or X after a prefix with which T would read as a month (OC, SE)."""
    code = TARGETED_LETTER * width
    return "X" * width if is_date_like(f"{prefix}{code}01") else code


def _remedy(prefix: str, width: int, digits: int) -> str:
    if len(prefix) == 2 and 1 + width + digits <= LONGEST:
        return f'Shorten it to one letter, e.g. prefix = "{prefix[0]}".'
    return "Ask for fewer places, merge strata, or make two campaigns of it."
