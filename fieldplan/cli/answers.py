"""From typed words to answers: targets, assurance, files, numbers; each refused with a remedy."""

import os
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Literal

from fieldplan.base.bounds import magnitude_fault
from fieldplan.base.errors import CampaignError
from fieldplan.campaign.inputs import file_fault, file_part
from fieldplan.campaign.new import Answers, TargetKind
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


def read_target(text: str) -> tuple[TargetKind, float]:
    """Read how far off the mean may be.

    Parameters
    ----------
    text : str
        ``12`` is a half-width, ``20 %`` a share of the mean, ``SE 6`` a standard error,
        ``budget 9000`` money.

    Examples
    --------
    >>> read_target("20 %"), read_target("SE 6"), read_target("± 12")
    (('relative_half_width', 0.2), ('standard_error', 6.0), ('half_width', 12.0))
    """
    plain = text.strip().removeprefix("±").removeprefix("+-").strip()
    words = plain.split(maxsplit=1)
    first = words[0].lower() if len(words) == 2 else ""
    what = "a distance such as 12, a share such as 20 %, 'SE 6' or 'budget 9000'"
    if first == "se":
        return "standard_error", read_number(words[1], what=what)
    if first == "budget":
        return "budget", read_number(words[1], what=what)
    if plain.endswith("%"):
        return "relative_half_width", read_number(plain[:-1], what=what) / 100
    return "half_width", read_number(plain, what=what)


def read_assurance(text: str) -> float | Literal["plain"]:
    """Read an assurance: ``plain`` or a share from 0.5 to below 1.

    Examples
    --------
    >>> read_assurance("0.8"), read_assurance("plain")
    (0.8, 'plain')
    """
    plain = text.strip()
    if plain.lower() == "plain":
        return "plain"
    try:
        value = float(plain)
    except ValueError:
        value = 0.0
    if not 0.5 <= value < 1:
        message = (
            f"a share from 0.5 to below 1, such as 0.80, or plain is accepted (got '{plain}'). "
            "Write 80 % as 0.80."
        )
        raise CampaignError(message)
    return value


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
