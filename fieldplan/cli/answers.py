"""From typed words to answers: targets, shares, files, numbers; each refused with a remedy."""

import os
import re
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Literal

from fieldplan.base.bounds import magnitude_fault
from fieldplan.base.errors import CampaignError
from fieldplan.campaign.answers import Answers, TargetKind
from fieldplan.campaign.inputs import file_fault, file_part
from fieldplan.campaign.outline import circle_geojson, corners_geojson, read_corners

OUTLINE_NAME = "boundary.geojson"


@dataclass(frozen=True)
class Start:
    """Answers, and the outline that has to be written beside the campaign file.

    ``outline_words`` says how the outline was understood, for the author to compare.
    """

    answers: Answers
    outline: str | None = None
    outline_words: str = ""


def circle_start(answers: Answers, centre: tuple[float, float], radius_m: float) -> Start:
    """Start from a circle round a point, stamped as assumed."""
    outline = circle_geojson(*centre, radius_m=radius_m)
    words = (
        f"ASSUMED boundary: a circle of {radius_m:g} m round latitude {centre[0]:g}, "
        f"longitude {centre[1]:g}."
    )
    return Start(replace(answers, boundary=OUTLINE_NAME, boundary_assumed=True), outline, words)


def corners_start(answers: Answers, text: str) -> Start:
    """Start from corners as typed."""
    corners = read_corners(text)
    latitude, longitude = corners[0]
    words = (
        f"Boundary of {len(corners)} corners; the first lies at latitude {latitude:g}, "
        f"longitude {longitude:g}."
    )
    return Start(replace(answers, boundary=OUTLINE_NAME), corners_geojson(corners), words)


_OPEN = {
    "", "?", "don't know", "dont know", "do not know", "i don't know", "i do not know", "not known",
    "not known yet", "not yet", "no idea", "unknown", "fill in",
}  # fmt: skip
_NONE = {"none", "no", "n", "nothing", "there is none", "no level", "no pilot"}


def is_open(text: str) -> bool:
    """Tell whether a typed answer means "not known yet".

    Parameters
    ----------
    text : str

    Examples
    --------
    >>> is_open("?"), is_open("Don’t know."), is_open("12")
    (True, True, False)
    """
    return _plain(text) in _OPEN


def is_none(text: str) -> bool:
    """Tell whether a typed answer means that there is none.

    Parameters
    ----------
    text : str

    Examples
    --------
    >>> is_none("None"), is_none("?")
    (True, False)
    """
    return _plain(text) in _NONE


def _plain(text: str) -> str:
    return " ".join(text.replace("’", "'").lower().replace("-", " ").split()).rstrip(" .!")


def read_words(text: str) -> str:
    """Read a name or a sentence as typed.

    Raises
    ------
    CampaignError
        Control characters, or more than 2000 characters.

    Examples
    --------
    >>> read_words(" Bramley orchard ")
    'Bramley orchard'
    """
    plain = text.strip()
    if any(not c.isprintable() and ord(c) < 160 for c in plain):
        message = "there are control characters in that, as from an arrow key. Type it anew."
        raise CampaignError(message)
    if len(plain) > LONGEST_WORDS:
        message = f"up to {LONGEST_WORDS} characters are accepted (got {len(plain)}). Shorten it."
        raise CampaignError(message)
    return plain


LONGEST_WORDS = 2000


def read_id(text: str) -> str:
    """Read a short id, which becomes part of folder names.

    Raises
    ------
    CampaignError
        It has blanks or other signs that an id does not take; one that is near is proposed.

    Examples
    --------
    >>> read_id("BO-2026")
    'BO-2026'
    """
    plain = text.strip()
    if re.fullmatch(r"[A-Za-z0-9][A-Za-z0-9_.-]{0,34}", plain):
        return plain
    near = re.sub(r"[^A-Za-z0-9_.-]+", "-", plain).strip("-_.")[:35].rstrip("-_.")
    message = (
        f"'{plain}' cannot open the name of a folder: up to 35 letters A-Z, digits, points, "
        "hyphens and underscores are accepted, a letter or digit first."
    )
    raise CampaignError(message + (f" Write {near}." if near else ""))


def read_number(text: str, *, what: str = "a number above 0") -> float:
    """Read a number above 0 as typed.

    Raises
    ------
    CampaignError
        No number, a decimal comma, not above 0, or beyond what can be reckoned with.

    Examples
    --------
    >>> read_number(" 27.5 ")
    27.5
    """
    plain = text.strip()
    try:
        value = float(plain)
    except ValueError as fault:
        remedy = f"Write {plain.replace(',', '.')}." if _has_comma(plain) else "Write digits only."
        message = f"{what} is accepted, with a decimal point (got '{plain}'). {remedy}"
        raise CampaignError(message) from fault
    if not 0 < value < float("inf"):
        message = f"{what} is accepted (got '{plain}'). Write it without sign."
        raise CampaignError(message)
    beyond = magnitude_fault(value)
    if beyond:
        message = f"{plain} is {beyond}. Check it and its unit."
        raise CampaignError(message)
    return value


def read_count(text: str) -> int:
    """Read a number of results: whole, at least 2.

    Examples
    --------
    >>> read_count("8")
    8
    """
    plain = text.strip()
    if not plain.isascii() or not plain.isdigit() or len(plain) > 9 or int(plain) < 2:
        message = f"a whole number of at least 2 is accepted (got '{plain}'). Write digits only."
        raise CampaignError(message)
    return int(plain)


def read_amount(text: str, unit: str | None) -> float:
    """Read a number above 0 with or without its unit behind it.

    Parameters
    ----------
    text : str
    unit : str or None
        The laboratory's.

    Examples
    --------
    >>> read_amount("12 mg/kg", "mg/kg"), read_amount("12", None)
    (12.0, 12.0)
    """
    return read_number(_without_unit(text, unit))


def _without_unit(text: str, unit: str | None) -> str:
    plain = text.strip()
    behind = (unit or "").strip().lower()
    return plain[: -len(behind)] if behind and plain.lower().endswith(behind) else plain


_AHEAD = re.compile(r"^(within|at most|up to|about|plus or minus|±|\+\s*/?\s*-|\+\s*/?\s*−)\s*")
_PERCENT = re.compile(r"\s*(%|percent|per cent|pct)$")
_TARGETS = "a distance such as 12, a share such as 20 %, 'SE 6' or 'budget 9000'"


def read_target(text: str, *, unit: str | None = None) -> tuple[TargetKind, float]:
    """Read how far off the mean may be.

    Parameters
    ----------
    text : str
        ``12`` is a half-width, ``20 %`` a share of the mean, ``SE 6`` a standard error,
        ``budget 9000`` money; ``within`` or ``±`` may stand before it.
    unit : str, optional
        The laboratory's; may stand behind a distance.

    Raises
    ------
    CampaignError
        None of these.

    Examples
    --------
    >>> read_target("within 10 %"), read_target("SE 6")
    (('relative_half_width', 0.1), ('standard_error', 6.0))
    >>> read_target("± 12 mg/kg", unit="mg/kg")
    ('half_width', 12.0)
    """
    plain = _AHEAD.sub("", text.strip().lower())
    first, _, rest = plain.partition(" ")
    if first in ("se", "budget") and rest:
        kind: TargetKind = "standard_error" if first == "se" else "budget"
        return kind, read_number(_without_unit(rest.lstrip("= "), unit), what=_TARGETS)
    if _PERCENT.search(plain):
        return "relative_half_width", read_number(_PERCENT.sub("", plain), what=_TARGETS) / 100
    return "half_width", read_number(_without_unit(plain, unit), what=_TARGETS)


def read_share(text: str) -> float:
    """Read a share: ``0.8``, ``80 %`` or ``80``, which can only mean per cent.

    Raises
    ------
    CampaignError
        No number.

    Examples
    --------
    >>> read_share("0.8"), read_share("80 %"), read_share("80"), read_share("80 percent")
    (0.8, 0.8, 0.8, 0.8)
    """
    plain = text.strip().lower()
    number = read_number(_PERCENT.sub("", plain), what="a share such as 0.80 or 80 %")
    return number / 100 if _PERCENT.search(plain) or number > 1 else number


def read_assurance(text: str) -> float | Literal["plain"]:
    """Read an assurance: ``plain`` or a share from 50 % to below 100 %.

    Raises
    ------
    CampaignError
        Neither.

    Examples
    --------
    >>> read_assurance("80 %"), read_assurance("plain")
    (0.8, 'plain')
    """
    plain = text.strip()
    if plain.lower() == "plain":
        return "plain"
    what = "a share from 50 % to below 100 %, such as 80 %, or plain is accepted"
    try:
        value = read_share(plain)
    except CampaignError as fault:
        message = f"{what} (got '{plain}')."
        raise CampaignError(message) from fault
    if not 0.5 <= value < 1:
        message = f"{what} (got '{plain}', which is {value * 100:g} %)."
        raise CampaignError(message)
    return value


_DEPTH = re.compile(
    r"([\d.]+)\s*(m|cm|mm)?\s*(?:to|-|–|—|−|\.\.)\s*([\d.]+)\s*(m|cm|mm)\b.*", re.IGNORECASE
)
_METRES = {"m": 1.0, "cm": 0.01, "mm": 0.001}


def read_depth(text: str) -> tuple[float, float]:
    """Read a depth interval and return its top and bottom in metres.

    Raises
    ------
    CampaignError
        Not two depths with a unit, or a bottom that is not below the top.

    Examples
    --------
    >>> read_depth("0 to 15 cm"), read_depth("0.5-1.0 m")
    ((0.0, 0.15), (0.5, 1.0))
    """
    plain = text.strip()
    found = _DEPTH.fullmatch(plain)
    try:
        top, unit_above, bottom, unit = found.groups() if found else ("", "", "", "")
        depths = (
            round(float(top) * _METRES[(unit_above or unit).lower()], 4),
            round(float(bottom) * _METRES[unit.lower()], 4),
        )
    except (KeyError, ValueError) as fault:
        message = f"top and bottom with a unit are accepted, such as 0 to 15 cm (got '{plain}')."
        raise CampaignError(message) from fault
    if depths[1] <= depths[0]:
        message = f"the bottom must lie below the top (got '{plain}'). Depths grow downwards."
        raise CampaignError(message)
    return depths


def read_column(text: str) -> tuple[str, str]:
    """Read which column of a file is which of ours: ``location_id=Well ID``.

    Raises
    ------
    CampaignError
        No equals sign, or nothing on one side of it.

    Examples
    --------
    >>> read_column("as_reported=Result")
    ('as_reported', 'Result')
    """
    ours, equals, theirs = (part.strip() for part in text.partition("="))
    if not (ours and equals and theirs):
        message = f"a column is named like \"location_id=Well ID\" (got '{text}')."
        raise CampaignError(message)
    return ours, theirs


def read_file(text: str, folder: Path) -> str:
    """Return the path of an existing file as the campaign file in ``folder`` shall name it.

    Raises
    ------
    CampaignError
        There is no such file (names that come near are given), or it is a folder or a pipe.
    """
    typed = text.strip().strip("\"'")
    name = file_part(Path(), typed)
    place = Path(name)
    fault = file_fault(place, otherwise="Check the name and the folder.")
    if fault is not None:
        message = f"{typed}: {fault[0]}. {fault[1]}"
        raise CampaignError(message)
    return _from_folder(place, folder) + typed[len(name) :]


def _from_folder(place: Path, folder: Path) -> str:
    """Write a path from a folder, ``/`` between names; absolute where drives differ."""
    try:
        return Path(os.path.relpath(place.resolve(), folder.resolve())).as_posix()
    except ValueError:
        return place.resolve().as_posix()


def _has_comma(text: str) -> bool:
    return text.replace(",", "").replace(".", "").isdigit() and "," in text
