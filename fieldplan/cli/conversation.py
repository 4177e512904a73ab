"""The questions of ``fieldplan new``, one after another; no answer is always an answer."""

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Literal, TypeVar

import click

from fieldplan.base.errors import CampaignError, FieldplanError
from fieldplan.campaign.new import Answers, initials
from fieldplan.campaign.outline import read_position
from fieldplan.cli import text_fault
from fieldplan.cli.answers import (
    Start,
    circle_start,
    corners_start,
    read_assurance,
    read_count,
    read_file,
    read_number,
    read_target,
)
from fieldplan.cli.options import say, wrapped
from fieldplan.cli.target_echo import echo_target

Answer = TypeVar("Answer")


def converse(start: Answers, folder: Path) -> Start:
    """Ask for everything that a campaign file needs.

    Parameters
    ----------
    start : Answers
        What is known already: the seed and the date.
    folder : Path
        The folder of the campaign file; paths are written from there.
    """
    say(wrapped("Enter or ? leaves a question open; the file then says FILL IN at that place."))
    answers = _about_the_plan(start)
    begun = _about_the_place(answers, folder)
    answers = _about_the_analyte(begun.answers)
    answers = _about_the_spread(answers, folder)
    answers = _about_the_target(answers, folder)
    answers = _about_the_assurance(answers)
    return replace(begun, answers=answers)


def _ask(question: str, read: Callable[[str], Answer]) -> Answer | None:
    """Ask until the answer can be read; None when it is left open."""
    end = " " if question.endswith("?") else ": "
    while True:
        typed = _typed(wrapped(question), end)
        if typed in ("", "?"):
            return None
        broken = text_fault(typed)
        if broken:
            say(wrapped(broken, indent="  "))
            continue
        try:
            return read(typed)
        except FieldplanError as fault:
            for problem in fault.problems:
                say(wrapped(problem, indent="  "))


def _typed(question: str, end: str) -> str:
    """Return what is typed to a question."""
    try:
        typed: str = click.prompt(
            question, default="", show_default=False, prompt_suffix=end, err=True
        )
    except UnicodeDecodeError as fault:
        message = (
            f"what was typed has the byte 0x{fault.object[fault.start]:02X}, which is no UTF-8 "
            "text. Set the terminal to UTF-8 and start again; nothing was written."
        )
        raise CampaignError(message) from fault
    return typed.strip()


def _about_the_plan(answers: Answers) -> Answers:
    title = _ask("What is the campaign called?", str)
    made = initials(title) if title else None
    hint = f" (Enter for {made})" if made else ""
    plan_id = _ask(f"A short id that opens the name of every packet{hint}", str)
    author = _ask("Who prepares the plan?", str)
    return replace(answers, title=title, plan_id=plan_id or made, prepared_by=author)


def _about_the_place(answers: Answers, folder: Path) -> Start:
    question = (
        "Where is it? The file of the boundary, a CSV of stations, 'corners' to paste corners, "
        "or 'around' for a circle round a point"
    )

    def read(typed: str) -> Start:
        if typed.lower() == "corners":
            return _from_corners(answers)
        if typed.lower() == "around":
            return _from_circle(answers)
        return _from_file(answers, read_file(typed, folder))

    start = _ask(question, read) or Start(answers)
    say(wrapped(start.outline_words, indent="  "), quiet=not start.outline_words)
    return start


def _from_file(answers: Answers, path: str) -> Start:
    if path.lower().endswith(".csv"):
        kind = click.prompt(
            wrapped("Is each row a station that can be chosen, or a corner of the boundary?"),
            type=click.Choice(["station", "corner"]),
            err=True,
        )
        if kind == "station":
            return Start(replace(answers, list_file=path))
    return Start(replace(answers, boundary=path))


def _from_corners(answers: Answers) -> Start:
    say("One 'latitude, longitude' a line, in order round the site; an empty line ends.")
    lines: list[str] = []
    while True:
        corner = _ask(f"corner {len(lines) + 1}", _position_text)
        if corner is None:
            break
        lines.append(corner)
    if not lines:
        return Start(answers)
    return corners_start(answers, "\n".join(lines))


def _position_text(typed: str) -> str:
    """Check one corner and keep it as typed."""
    read_position(typed)
    return typed


def _from_circle(answers: Answers) -> Start:
    centre = _ask("Centre, as latitude, longitude", read_position)
    radius = _ask("Radius in metres", read_number) if centre else None
    if centre is None or radius is None:
        return Start(answers)
    return circle_start(answers, centre, radius)


def _about_the_analyte(answers: Answers) -> Answers:
    analyte = _ask("What does the laboratory measure?", str)
    unit = _ask("In which unit does it report?", str)
    return replace(answers, analyte=analyte, unit=unit)


def _about_the_spread(answers: Answers, folder: Path) -> Answers:
    pilot = _ask("The file of pilot results, CSV or XLSX", lambda text: read_file(text, folder))
    if pilot is not None:
        return replace(answers, pilot=pilot)
    unit = f" in {answers.unit}" if answers.unit else ""
    sigma = _ask(f"Standard deviation of single results{unit}", read_number)
    if sigma is None:
        return answers
    source = _ask("Where does that come from? ASSUMED if it is a guess", str)
    results = _ask("How many results are behind it?", read_count)
    return replace(answers, sigma=sigma, sigma_source=source, from_results=results)


def _about_the_target(answers: Answers, folder: Path) -> Answers:
    unit = f" {answers.unit}" if answers.unit else ""
    question = (
        f"How far off may the mean be? A distance such as 12{unit}, a share such as 20 %, "
        "'SE 6' for its standard error, or 'budget 9000'"
    )
    while True:
        typed = _ask(question, read_target)
        if typed is None:
            return answers
        aimed = replace(answers, target_kind=typed[0], target=typed[1])
        if typed[0] == "relative_half_width" and aimed.sigma is not None:
            aimed = replace(aimed, expected_mean=_ask("Which mean is expected?", read_number))
        for sentence in echo_target(aimed, folder):
            say(wrapped(sentence, indent="  "))
        if click.confirm("Keep this target?", default=True, err=True):
            return aimed


def _about_the_assurance(answers: Answers) -> Answers:
    if answers.target_kind == "budget":
        return answers
    question = (
        "How sure shall it be that the number is enough? A share such as 0.80, or 'plain' for "
        "the bare formula, which is enough in about half of campaigns"
    )
    assurance: float | Literal["plain"] | None = _ask(question, read_assurance)
    chosen_by = _ask("Who chooses that?", str) if assurance is not None else None
    return replace(answers, assurance=assurance, chosen_by=chosen_by)
