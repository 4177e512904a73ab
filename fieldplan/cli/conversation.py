"""The talk of ``fieldplan new``: one question at a time, each answer checked where it is given."""

from collections.abc import Callable
from dataclasses import dataclass, replace
from pathlib import Path

import click

from fieldplan.base.errors import CampaignError, FieldplanError
from fieldplan.campaign.answers import Answers
from fieldplan.campaign.new import campaign_text
from fieldplan.campaign.read import inspect_text
from fieldplan.cli import text_fault
from fieldplan.cli.answers import Start, is_open
from fieldplan.cli.options import say, wrapped

WELCOME = (
    "About fifteen questions. Enter or ? leaves one open: the file then says FILL IN at that "
    "place. 'back' goes one question back. Ctrl-C stops, and offers to keep the answers."
)


@dataclass(frozen=True)
class Talk:
    """What was said so far.

    Parameters
    ----------
    answers : Answers
    folder : Path
        Of the campaign file; paths are written from there.
    asked : frozenset of str
        Names of the questions that are done.
    way : str
        How the place is given: ``table``, ``corners`` or ``around``; empty for a file.
    corners : tuple of str
        As typed so far.
    centre : (float, float), optional
        Latitude and longitude of a circle.
    outline : str, optional
        The boundary that has to be written beside the campaign file.
    columns, titles : tuple of str
        Our columns that the pilot has under another name, and what its columns are called.
    told : tuple of str
        What is said after this answer.
    refused : bool
        The answer could not be taken; the same question comes again.
    """

    answers: Answers
    folder: Path
    asked: frozenset[str] = frozenset()
    way: str = ""
    corners: tuple[str, ...] = ()
    centre: tuple[float, float] | None = None
    outline: str | None = None
    columns: tuple[str, ...] = ()
    titles: tuple[str, ...] = ()
    told: tuple[str, ...] = ()
    refused: bool = False

    def with_answers(self, *told: str, **changes: object) -> "Talk":
        """Return the talk with some answers given."""
        answers = replace(self.answers, **changes)  # type: ignore[arg-type]
        return replace(self, answers=answers, told=told)

    def leaving_open(self, name: str) -> "Talk":
        """Return the talk with an answer that is not known yet."""
        return self.with_answers(left_open=self.answers.left_open | {name})


@dataclass(frozen=True)
class Question:
    """One question: when it is due, how it is put, what its answer does.

    Parameters
    ----------
    name : str
    words : callable
        From the talk so far to the question.
    take : callable
        From the talk and what was typed to the talk after it; raises FieldplanError.
    due : callable
        Whether it has to be asked, given what was said before.
    leave : callable, optional
        What an open answer does; else the answer of this name is left open.
    """

    name: str
    words: Callable[[Talk], str]
    take: Callable[[Talk, str], Talk]
    due: Callable[[Talk], bool] = lambda _talk: True
    leave: Callable[[Talk], Talk] | None = None


class Unfinished(Exception):
    """The talk was cut short; ``start`` holds what was said."""

    def __init__(self, start: Start, *, answered: bool) -> None:
        super().__init__("cut short")
        self.start, self.answered = start, answered


def converse(start: Answers, folder: Path) -> Start:
    """Ask for what a campaign file needs.

    Parameters
    ----------
    start : Answers
        What is known already: the seed and the date.
    folder : Path
        The folder of the campaign file.

    Returns
    -------
    Start

    Raises
    ------
    Unfinished
        The person stopped before the last question.
    """
    from fieldplan.cli.questions import QUESTIONS

    say(wrapped(WELCOME))
    before: list[Talk] = []
    talk = Talk(start, folder)
    while (question := _next(QUESTIONS, talk)) is not None:
        try:
            typed = ask(question.words(talk))
            after = _answered(talk, question, typed) if typed.lower() != "back" else None
        except (click.Abort, KeyboardInterrupt, EOFError) as stop:
            answered = any(said.answers != start for said in (*before, talk))
            raise Unfinished(_start(talk), answered=answered) from stop
        if after is None and not before:
            say("  This is the first question.")
        elif after is None:
            talk = before.pop()
        elif after.refused:
            _tell(after)
        else:
            before.append(talk)
            talk = after
            _tell(talk)
    return _start(talk)


def _tell(talk: Talk) -> None:
    for sentence in talk.told:
        say(wrapped(sentence, indent="  "))


def ask(question: str) -> str:
    """Put a question and return what is typed, trimmed.

    Parameters
    ----------
    question : str

    Raises
    ------
    CampaignError
        What is typed is in another encoding than the terminal says, so no more can be read.
    """
    say(f"\n{wrapped(question)}")
    try:
        typed: str = click.prompt(">", default="", show_default=False, prompt_suffix=" ", err=True)
    except UnicodeDecodeError as fault:
        message = (
            f"what was typed has the byte 0x{fault.object[fault.start]:02X}, which is no UTF-8 "
            "text. Set the terminal to UTF-8 and start again; nothing was written."
        )
        raise CampaignError(message) from fault
    return typed.strip()


def _next(questions: tuple[Question, ...], talk: Talk) -> Question | None:
    """Find the first question that is due and not done."""
    waiting = (q for q in questions if q.name not in talk.asked and q.due(talk))
    return next(waiting, None)


def _answered(talk: Talk, question: Question, typed: str) -> Talk:
    """Take an answer; where it is refused, return the same talk with the reasons to tell."""
    try:
        return _taken(replace(talk, told=(), asked=talk.asked | {question.name}), question, typed)
    except FieldplanError as fault:
        return replace(talk, told=fault.problems, refused=True)


def _taken(talk: Talk, question: Question, typed: str) -> Talk:
    """Take an answer; refuse one that the campaign file could not hold."""
    broken = text_fault(typed)
    if broken:
        raise CampaignError(broken)
    if is_open(typed):
        return question.leave(talk) if question.leave else talk.leaving_open(question.name)
    after = question.take(talk, typed)
    inspection = inspect_text(campaign_text(after.answers), talk.folder / "campaign.toml")
    if inspection.problems:
        raise CampaignError(*(line.split(": ", 1)[-1] for line in inspection.problems))
    return after


def _start(talk: Talk) -> Start:
    return Start(talk.answers, talk.outline)
