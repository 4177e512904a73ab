"""The questions of ``fieldplan new`` about the place: file, corners, circle, parts of the site."""

from dataclasses import replace

from fieldplan.base.errors import CampaignError
from fieldplan.campaign.outline import read_position
from fieldplan.cli.answers import (
    OUTLINE_NAME,
    Start,
    circle_start,
    corners_start,
    is_none,
    read_amount,
    read_file,
)
from fieldplan.cli.conversation import Question, Talk
from fieldplan.cli.named_files import look_at_site


def _take_place(talk: Talk, typed: str) -> Talk:
    way = typed.lower()
    if way in ("corners", "around"):
        outline = talk.folder / OUTLINE_NAME
        if outline.exists():
            message = (
                f"{OUTLINE_NAME} is there already and is never replaced. Type its name to use it, "
                "or move it away first."
            )
            raise CampaignError(message)
        return replace(talk, way=way)
    path = read_file(typed, talk.folder)
    if path.lower().endswith((".csv", ".txt", ".tsv")):
        return replace(talk.with_answers(boundary=path), way="table")
    return _looked_at(talk.with_answers(boundary=path))


def _looked_at(talk: Talk) -> Talk:
    """Say what the site's files hold, and note whether a list is in strata."""
    drawn = talk.way not in ("corners", "around")
    said, strata = look_at_site(talk.answers, talk.folder, drawn=drawn)
    in_strata = talk.answers.list_file is not None and len(strata) > 1
    return talk.with_answers(*said, list_in_strata=in_strata)


def _ask_rows(talk: Talk) -> str:
    return (
        f"Is each row of {talk.answers.boundary} a station that can be chosen, or a corner of the "
        "boundary? 'station' or 'corner'"
    )


def _take_rows(talk: Talk, typed: str) -> Talk:
    if typed.lower().rstrip("s") not in ("station", "corner"):
        message = f"'station' or 'corner' is accepted (got '{typed}')."
        raise CampaignError(message)
    if typed.lower().startswith("station"):
        talk = talk.with_answers(list_file=talk.answers.boundary, boundary=None)
    return _looked_at(talk)


def _leave_rows(talk: Talk) -> Talk:
    return talk.with_answers(
        f"{talk.answers.boundary} is left out: the file says FILL IN for the place.", boundary=None
    )


def _ask_corner(talk: Talk) -> str:
    number = len(talk.corners) + 1
    if number == 1:
        return "Corner 1, as latitude, longitude; go in order round the site. Enter ends."
    return f"Corner {number}"


def _take_corner(talk: Talk, typed: str) -> Talk:
    read_position(typed)
    asked = talk.asked - {"corner"}  # the next corner is the same question
    return replace(talk, corners=(*talk.corners, typed), asked=asked)


def _end_corners(talk: Talk) -> Talk:
    if not talk.corners:
        return talk
    return _begun(talk, corners_start(talk.answers, "\n".join(talk.corners)))


def _begun(talk: Talk, start: Start) -> Talk:
    """Take over a boundary that has to be written."""
    return replace(talk, answers=start.answers, outline=start.outline, told=(start.outline_words,))


def _take_centre(talk: Talk, typed: str) -> Talk:
    return replace(talk, centre=read_position(typed))


def _take_radius(talk: Talk, typed: str) -> Talk:
    centre = talk.centre or (0.0, 0.0)
    return _begun(talk, circle_start(talk.answers, centre, read_amount(typed, "m")))


def is_area(talk: Talk) -> bool:
    """Tell whether locations are places in an area; else they are members of a list."""
    return talk.answers.list_file is None


def _take_strata(talk: Talk, typed: str) -> Talk:
    if is_none(typed):
        return talk
    return _looked_at(talk.with_answers(strata=read_file(typed, talk.folder)))


PLACE_QUESTIONS: tuple[Question, ...] = (
    Question(
        "place",
        lambda _talk: (
            "Where is it? The file of the boundary, a CSV of stations, 'corners' to type them, or "
            "'around' for a circle round a point"
        ),
        _take_place,
    ),
    Question("rows", _ask_rows, _take_rows, lambda t: t.way == "table", _leave_rows),
    Question("corner", _ask_corner, _take_corner, lambda t: t.way == "corners", _end_corners),
    Question(
        "centre",
        lambda _talk: "Centre, as latitude, longitude",
        _take_centre,
        lambda t: t.way == "around",
    ),
    Question(
        "radius",
        lambda _talk: "Radius in metres",
        _take_radius,
        lambda t: t.centre is not None,
    ),
    Question(
        "strata",
        lambda _talk: (
            "Does the site fall into parts that differ? The file with an outline for each, or "
            "'none'"
        ),
        _take_strata,
        is_area,
    ),
)
