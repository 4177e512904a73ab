"""What the files hold that answers name, looked at while the answers are given."""

import os
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

from fieldplan.base.errors import FieldplanError
from fieldplan.campaign.answers import Answers
from fieldplan.campaign.new import campaign_text

if TYPE_CHECKING:
    from fieldplan.campaign.model import ReadCampaign
    from fieldplan.lab.model import StratumSpread

FEWEST_TITLES = 3
"""A row with fewer cells is no header of results."""

MOST_PROBLEMS = 3
"""Told while the answers are given; ``fieldplan check`` tells all."""


def known_campaign(answers: Answers, folder: Path) -> "ReadCampaign | None":
    """Return the campaign that the answers make so far, for reading the files that it names.

    Parameters
    ----------
    answers : Answers
    folder : Path
        Of the campaign file; it may be still to be made.

    Returns
    -------
    ReadCampaign or None
        As from ``draft``: what is open is left out or stood in for.
    """
    from fieldplan.campaign import draft
    from fieldplan.campaign.read import inspect_text

    place = folder.resolve()
    if not place.is_dir():  # still to be made, so the system cannot follow ".." out of it
        straight: dict[str, Any] = {
            key: Path(os.path.normpath(place / written)).as_posix()
            for key in ("boundary", "strata", "list_file", "pilot")
            if (written := getattr(answers, key)) is not None
        }
        answers = replace(answers, **straight)
    return draft(inspect_text(campaign_text(answers), place / "campaign.toml"))


def pilot_spread(read: "ReadCampaign") -> "StratumSpread":
    """Read the pilot as one site; the frame is not needed for that.

    Parameters
    ----------
    read : ReadCampaign
        From ``known_campaign``, with a pilot.
    """
    from fieldplan.campaign.inputs import resolve_file
    from fieldplan.lab import read_lab
    from fieldplan.lab.pilot import measured_spread, pilot_locations

    campaign, sigma = read.campaign, read.campaign.sigma[0]
    analyte = campaign.deciding_analyte.id
    place = resolve_file(read, sigma.pilot or "")
    table = read_lab(place, campaign, columns=sigma.columns, of_pilot=True)
    places, _ = pilot_locations(table, analyte, duplicates=campaign.rules.duplicates)
    return measured_spread(places, analyte, "site")


def look_at_site(answers: Answers, folder: Path, *, drawn: bool) -> tuple[list[str], list[str]]:
    """Read boundary, strata or list, and say in a sentence what they hold.

    Parameters
    ----------
    answers : Answers
    folder : Path
    drawn : bool
        Whether the boundary is a file already.

    Returns
    -------
    said : list of str
        One sentence, or the problems; empty while there is nothing to read.
    strata : list of str
        Their names; empty where they could not be read.
    """
    from fieldplan.base.units import area_in_words, length_in_words
    from fieldplan.frame import read_frame

    # A list tells only when it is read whether it has strata; this layout takes both.
    read = known_campaign(replace(answers, list_in_strata=True), folder)
    if read is None or not drawn or (answers.boundary is None and answers.list_file is None):
        return [], []
    try:
        frame = read_frame(read)
    except FieldplanError as fault:
        return _kept(answers.list_file or answers.strata or answers.boundary, fault), []
    names = [stratum.name for stratum in frame.strata]
    if frame.kind == "list":
        held = f"a list of {frame.population.net:g}"
    elif frame.kind == "line":
        held = length_in_words(frame.population.net)
    else:
        held = area_in_words(frame.population.net)
    inside = f" in {len(names)} strata: {', '.join(names)}" if len(names) > 1 else ""
    taken = [note for note in frame.notes if "is read as" in note]
    return [f"That is {held}{inside}.", *taken], names


def look_at_pilot(answers: Answers, folder: Path) -> list[str]:
    """Read the pilot and say what it holds, or why it cannot be used as it stands.

    Parameters
    ----------
    answers : Answers
    folder : Path
    """
    from fieldplan.lab.pilot import spread_sentences

    read = known_campaign(answers, folder)
    if read is None or answers.analyte is None or answers.unit is None or answers.pilot is None:
        return []
    try:
        *said, _skewness = spread_sentences(pilot_spread(read), answers.unit, {})
        return said
    except FieldplanError as fault:
        return _kept(answers.pilot, fault)


def _kept(name: str | None, fault: FieldplanError) -> list[str]:
    """Say why a file that was named cannot be used yet."""
    head = f"{name} is kept, but cannot be used as it stands ('back' names another):"
    return [head, *first_problems(fault)]


def first_problems(fault: FieldplanError) -> list[str]:
    """List the first few problems of a file, and count the rest.

    Parameters
    ----------
    fault : FieldplanError

    Examples
    --------
    >>> first_problems(FieldplanError("row 2: no.", "row 3: no."))
    ['row 2: no.', 'row 3: no.']
    >>> first_problems(FieldplanError(*"abcde"))
    ['a', 'b', 'c', "… and 2 more; 'fieldplan check' will list them."]
    """
    more = len(fault.problems) - MOST_PROBLEMS
    rest = [f"… and {more} more; 'fieldplan check' will list them."] if more > 0 else []
    return [*fault.problems[:MOST_PROBLEMS], *rest]


def unnamed_columns(answers: Answers, folder: Path) -> tuple[list[str], list[str]]:
    """Say which columns a pilot must have and does not, and what its columns are called.

    Parameters
    ----------
    answers : Answers
        With what was said about the pilot's columns so far.
    folder : Path

    Returns
    -------
    missing, titles : list of str
        Our names, and the file's; nothing is missing from a file that cannot be read as a table.
    """
    from fieldplan.lab.columns import LAB_COLUMNS, find_columns
    from fieldplan.lab.letterhead import certificate_of
    from fieldplan.lab.sheet import REQUIRED
    from fieldplan.lab.tables import read_tables

    told = {ours: (theirs,) for ours, theirs in answers.pilot_columns.items()}
    place = Path(os.path.normpath(folder.resolve() / (answers.pilot or "")))
    try:
        tables = read_tables(place, certificate=certificate_of(REQUIRED, told, {}))
    except FieldplanError:
        return [], []
    titles = [title.strip() for title in tables[0].header if title.strip()]
    if len(tables) != 1 or len(titles) < FEWEST_TITLES:
        return [], []
    missing = []
    for need in sorted(REQUIRED, key=lambda need: not need.startswith("location_id")):
        if not set(need.split("|")).isdisjoint(answers.pilot_columns):
            continue
        try:
            find_columns(tables[0], LAB_COLUMNS, (need,))
        except FieldplanError:
            missing.append(need.split("|")[0])
    return missing, titles
