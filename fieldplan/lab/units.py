"""Units as laboratories write them, and the factors between those that can be converted."""

import re
import unicodedata
from decimal import Decimal

_MASS = {"kg": 3, "g": 0, "mg": -3, "ug": -6, "ng": -9, "pg": -12}
_VOLUME = {"m3": 3, "l": 0, "ml": -3}
AMBIGUOUS = {"ppm", "ppb", "ppt", "%", "percent"}
_BASES = {
    "dry weight": ("dry weight", "dry", "dw", "d.w.", "dry wt", "dry mass", "d"),
    "wet weight": ("wet weight", "wet", "ww", "w.w.", "wet wt", "as received", "fresh weight", "w"),
}


def plain_unit(text: str) -> str:
    """Bring the spellings of one unit together: case, micro signs, minus one, spaces.

    Parameters
    ----------
    text : str
        As written.

    Returns
    -------
    str
        Lower case, ``u`` for micro, a slash for "per".

    Examples
    --------
    >>> plain_unit("µg/L"), plain_unit("Âµg/l"), plain_unit("mg kg⁻¹"), plain_unit(" mg/Kg ")
    ('ug/l', 'ug/l', 'mg/kg', 'mg/kg')
    """
    mended = text.replace("Âµ", "µ").replace("Î¼", "µ").replace("Âμ", "µ").replace("Â³", "3")
    plain = unicodedata.normalize("NFKC", mended).casefold().replace("μ", "u")
    plain = re.sub(r"[−–‐‑]", "-", plain)
    plain = re.sub(r"\bmcg\b", "ug", plain)
    plain = re.sub(r"^([a-z]+)[\s.·⋅*]*([a-z]+3?)\^?-1\b", r"\1/\2", plain.strip())
    plain = re.sub(r"\s*(/|\bper\b)\s*", "/", plain)
    return re.sub(r"\s+", " ", plain).strip()


def split_basis(text: str) -> tuple[str, str]:
    """Part a unit from a basis written behind it.

    Parameters
    ----------
    text : str

    Returns
    -------
    unit, basis : str
        Both plain; the basis is empty when none is written.

    Examples
    --------
    >>> split_basis("mg/kg dw"), split_basis("mg/L"), split_basis("mg/L as N")
    (('mg/kg', 'dry weight'), ('mg/l', ''), ('mg/l as n', ''))
    """
    plain = plain_unit(text)
    head, _, tail = plain.partition(" ")
    basis = plain_basis(tail.strip("()[] ")) if tail else ""
    return (head.rstrip(","), basis) if basis in _BASES else (plain, "")


def plain_basis(text: str) -> str:
    """Bring the spellings of wet and dry together; other words are kept in lower case.

    Parameters
    ----------
    text : str

    Examples
    --------
    >>> plain_basis("DW"), plain_basis("as received"), plain_basis("Organic carbon")
    ('dry weight', 'wet weight', 'organic carbon')
    """
    plain = " ".join(unicodedata.normalize("NFKC", text).casefold().split())
    for name, spellings in _BASES.items():
        if plain in spellings:
            return name
    return plain


def conversion_factor(unit: str, wanted: str) -> Decimal | None:
    """Give the number that turns a value in ``unit`` into one in ``wanted``.

    Parameters
    ----------
    unit, wanted : str
        As written, or plain; a wet or dry basis behind them is not looked at here.

    Returns
    -------
    Decimal or None
        An exact power of ten; None when the two cannot be converted into each other.

    Examples
    --------
    >>> conversion_factor("ug/kg", "mg/kg"), conversion_factor("mg/L", "µg/L")
    (Decimal('0.001'), Decimal('1000'))
    >>> conversion_factor("mg/L", "mg/kg") is None
    True
    """
    given, target = split_basis(unit)[0], split_basis(wanted)[0]
    if given == target:
        return Decimal(1)
    first, second = _power(given), _power(target)
    if first is None or second is None or first[1] != second[1]:
        return None
    power = first[0] - second[0]
    return Decimal(10) ** power if power >= 0 else Decimal(1).scaleb(power)


def _power(plain: str) -> tuple[int, str] | None:
    """Power of ten against g/g or g/L, and what the unit is per."""
    above, _, below = plain.partition("/")
    if above not in _MASS:
        return None
    if below in _MASS:
        return _MASS[above] - _MASS[below], "mass"
    if below in _VOLUME:
        return _MASS[above] - _VOLUME[below], "volume"
    return None
