"""Names that survive receivers and spreadsheets: at most six characters.

A unit of a list, or a place chosen by judgement, keeps its own id, in capitals and without marks:
``MW20`` for MW-20. Where that would not survive, and for drawn places, a name is made by rule: the
campaign's prefix, a letter for the stratum and a number, ``QFA01``.
"""

import re
from collections import Counter
from collections.abc import Iterable, Mapping, Sequence
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
_WORDS = frozenset(["TRUE", "FALSE", "WAHR", "FALSCH", "VRAI", "FAUX", "NA", "NAN", "NULL", "NONE"])
"""What spreadsheets and readers of CSV take for a truth value or for nothing."""
_LOOK_ALIKE = str.maketrans({"O": "0", "I": "1"})


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


def plain_form(own_id: str) -> str:
    """Write an id in capitals, letters and digits alone.

    Examples
    --------
    >>> plain_form("mw-20"), plain_form("P.6")
    ('MW20', 'P6')
    """
    return "".join(mark for mark in own_id if mark.isalnum()).upper()


def own_names(ids: Iterable[str]) -> dict[str, str]:
    """Give those ids that can serve as short names, each with its name.

    Parameters
    ----------
    ids : iterable of str
        All that the owner of the list, or whoever chose the places, gave.

    Returns
    -------
    dict of str to str
        Ids are missing whose plain form is longer than six characters, does not open with a
        letter, holds anything but A-Z and 0-9, reads as a date, a number or a word of
        spreadsheets, parts with a mark between two digits (3-5 is not 35), or is also that of
        another id, but for O and 0, I and 1, and zeros before a number.

    Examples
    --------
    >>> own_names(["MW-20", "mw-5", "07B", "1E5", "SEP-3", "OB-1", "0B-1", "MW-3.1"])
    {'MW-20': 'MW20', 'mw-5': 'MW5'}
    """
    ids = list(ids)
    alike = Counter(_likeness(plain_form(own)) for own in ids)
    return {
        own: plain_form(own)
        for own in ids
        if _is_proof(own) and alike[_likeness(plain_form(own))] == 1
    }


def _is_proof(own: str) -> bool:
    name = plain_form(own)
    return (
        own.isascii()
        and re.fullmatch(rf"[A-Z][A-Z0-9]{{0,{LONGEST - 1}}}", name) is not None
        and re.search(r"\d[^A-Za-z0-9]+\d", own) is None
        and not is_date_like(name)
        and not is_number_like(name)
        and name not in _WORDS
    )


def _likeness(name: str) -> str:
    return re.sub(r"(?<!\d)0+(?=\d)", "", name.translate(_LOOK_ALIKE))


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

    def looks_made(self, name: str) -> bool:
        """Tell whether a name could be one of ours, drawn or targeted.

        Examples
        --------
        >>> [naming("QF", ["field"], 9).looks_made(name) for name in ("QFA07", "QFT1", "MW20")]
        [True, True, False]
        """
        stems = {self.prefix + code for code in (*self.codes.values(), self.targeted_code)}
        return _stem(name) in stems


def naming(
    prefix: str, strata: Sequence[str], longest_list: int, *, given: Iterable[str] = ()
) -> Naming:
    """Choose codes and width so that every name fits six characters.

    Parameters
    ----------
    prefix : str
    strata : sequence of str
        In the frame's order, which decides the letters: A for the first, and so on.
    longest_list : int
        Places on the longest list of a stratum, alternates in, or the number of targeted places.
    given : iterable of str
        Ids that no made name may look like: letters that would make such a name are left out.

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
    >>> naming("QF", ["field"], 9, given=["QF-A-01", "QF-A-02"]).short_name("field", 7)
    'QFB07'
    """
    check_prefix(prefix)
    digits = max(len(str(longest_list)), 2)
    taken = frozenset(_stem(plain_form(own)) for own in given)
    width = 1
    codes = _codes(prefix, width, taken)
    if len(codes) <= len(strata):
        width = 2
        codes = _codes(prefix, width, taken)
    if len(prefix) + width + digits > LONGEST or len(codes) <= len(strata):
        message = (
            f"{len(strata)} strata with up to {longest_list} places each cannot be named in "
            f"{LONGEST} characters after the prefix '{prefix}'. " + _remedy(prefix, width, digits)
        )
        raise DesignError(message)
    targeted, *drawn = codes
    return Naming(prefix, dict(zip(strata, drawn, strict=False)), digits, targeted)


def _codes(prefix: str, width: int, taken: frozenset[str]) -> list[str]:
    """List the code of targeted places, then those that strata may have.

    It is T, or X after a prefix with which T would read as a month (OC, SE).
    """
    letters = ["".join(letters) for letters in product(LETTERS, repeat=width)]
    free = [
        code
        for code in (TARGETED_LETTER * width, "X" * width, *reversed(letters))
        if not is_date_like(f"{prefix}{code}01") and prefix + code not in taken
    ]
    return [*free[:1], *sorted(set(free[1:]) - {free[0]})] if free else []


def _stem(name: str) -> str:
    """Take the digits off the end of a name."""
    return name.rstrip("0123456789")


def _remedy(prefix: str, width: int, digits: int) -> str:
    if len(prefix) == 2 and 1 + width + digits <= LONGEST:
        return f'Shorten it to one letter, e.g. prefix = "{prefix[0]}".'
    return "Ask for fewer places, merge strata, or make two campaigns of it."
