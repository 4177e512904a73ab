"""The questions of ``fieldplan new``, in their order, and what each answer does."""

from dataclasses import replace

from fieldplan.base.errors import CampaignError
from fieldplan.campaign.new import initials
from fieldplan.cli.answers import (
    is_none,
    read_amount,
    read_assurance,
    read_count,
    read_depth,
    read_file,
    read_id,
    read_target,
    read_words,
)
from fieldplan.cli.conversation import Question, Talk
from fieldplan.cli.named_files import look_at_pilot, unnamed_columns
from fieldplan.cli.place_questions import PLACE_QUESTIONS, is_area
from fieldplan.cli.target_echo import echo_target


def _words(name: str, question: str) -> Question:
    """Ask for words as they are typed."""
    return Question(
        name,
        lambda _talk: question,
        lambda talk, typed: talk.with_answers(**{name: read_words(typed)}),
    )


# The plan


def _ask_id(talk: Talk) -> str:
    made = _made_id(talk)
    return (
        f"A short id; it opens the name of every packet.{f' Enter takes {made}.' if made else ''}"
    )


def _made_id(talk: Talk) -> str:
    return initials(talk.answers.title) if talk.answers.title else ""


def _take_id(talk: Talk, typed: str) -> Talk:
    return talk.with_answers(plan_id=read_id(typed))


def _leave_id(talk: Talk) -> Talk:
    made = _made_id(talk)
    return talk.with_answers(plan_id=made) if made else talk.leaving_open("plan_id")


# The analyte and what is sampled


def _ask_level(talk: Talk) -> str:
    unit = f" in {talk.answers.unit}" if talk.answers.unit else ""
    return f"The level that the mean is compared with{unit}, or 'none'"


def _take_level(talk: Talk, typed: str) -> Talk:
    if is_none(typed):
        return talk
    return talk.with_answers(action_level=read_amount(typed, talk.answers.unit))


def _take_depth(talk: Talk, typed: str) -> Talk:
    return talk if is_none(typed) else talk.with_answers(depth_m=read_depth(typed))


# The spread


def _take_pilot(talk: Talk, typed: str) -> Talk:
    if is_none(typed):
        return talk
    return _with_columns(talk.with_answers(pilot=read_file(typed, talk.folder)))


def _with_columns(talk: Talk) -> Talk:
    """Note which columns of the pilot have to be asked for; say what it holds when none has."""
    missing, titles = unnamed_columns(talk.answers, talk.folder)
    talk = replace(talk, columns=tuple(missing), titles=tuple(titles))
    if missing:
        return replace(talk, asked=talk.asked - {"column"})
    return replace(talk, told=tuple(look_at_pilot(talk.answers, talk.folder)))


_COLUMNS = {
    "location_id": "the names of the locations",
    "analyte": "the names of what was measured",
    "as_reported": "the results as the laboratory reported them",
    "unit": "their units",
}


def _ask_column(talk: Talk) -> str:
    listed = ", ".join(f"'{title}'" for title in talk.titles)
    what = _COLUMNS.get(talk.columns[0], talk.columns[0])
    return f"Which column of {talk.answers.pilot} holds {what}? It has {listed}."


def _take_column(talk: Talk, typed: str) -> Talk:
    wanted = typed.strip("'\"").casefold()
    title = next((title for title in talk.titles if title.casefold() == wanted), None)
    if title is None:
        message = f"there is no column '{typed}'. Type one of them as it stands."
        raise CampaignError(message)
    taken = {theirs: ours for ours, theirs in talk.answers.pilot_columns.items()}
    if title in taken:
        message = f"'{title}' is said to be {taken[title]} already. Type another; or go back."
        raise CampaignError(message)
    return _told_column(talk, title)


def _told_column(talk: Talk, title: str) -> Talk:
    columns = {**talk.answers.pilot_columns, talk.columns[0]: title}
    return _with_columns(talk.with_answers(pilot_columns=columns))


def _leave_column(talk: Talk) -> Talk:
    return _told_column(talk, "FILL IN")


def _needs_sigma(talk: Talk) -> bool:
    return talk.answers.pilot is None


def _ask_sigma(talk: Talk) -> str:
    unit = f" in {talk.answers.unit}" if talk.answers.unit else ""
    return f"Standard deviation of single results{unit}, typed or guessed"


def _take_sigma(talk: Talk, typed: str) -> Talk:
    left_open = talk.answers.left_open - {"pilot"}
    sigma = read_amount(typed, talk.answers.unit)
    return talk.with_answers(sigma=sigma, left_open=left_open)


def _has_sigma(talk: Talk) -> bool:
    return _needs_sigma(talk) and talk.answers.sigma is not None


def _is_measured(talk: Talk) -> bool:
    source = talk.answers.sigma_source or ""
    return _has_sigma(talk) and source.casefold() != "assumed"


def _take_source(talk: Talk, typed: str) -> Talk:
    source = read_words(typed)
    return talk.with_answers(sigma_source="ASSUMED" if source.lower() == "assumed" else source)


def _take_results(talk: Talk, typed: str) -> Talk:
    return talk if is_none(typed) else talk.with_answers(from_results=read_count(typed))


# The target


def _ask_target(talk: Talk) -> str:
    unit = f" {talk.answers.unit}" if talk.answers.unit else ""
    return (
        f"How far off may the mean be? A distance such as 12{unit}, a share such as 20 %, 'SE 6' "
        "for its standard error, or 'budget 9000'"
    )


def _take_target(talk: Talk, typed: str) -> Talk:
    kind, amount = read_target(typed, unit=talk.answers.unit)
    talk = talk.with_answers(target_kind=kind, target=amount)
    return talk if _needs_mean(talk) else _echoed(talk)


def _echoed(talk: Talk) -> Talk:
    """Say what the target takes."""
    drawn = talk.way not in ("corners", "around")
    said = echo_target(talk.answers, talk.folder, drawn=drawn)
    return replace(talk, told=(*said, "To change the target, type back."))


def _needs_mean(talk: Talk) -> bool:
    return _has_sigma(talk) and talk.answers.target_kind == "relative_half_width"


def _take_mean(talk: Talk, typed: str) -> Talk:
    return _echoed(talk.with_answers(expected_mean=read_amount(typed, talk.answers.unit)))


def _takes_assurance(talk: Talk) -> bool:
    return talk.answers.target_kind != "budget"


def _ask_assurance(talk: Talk) -> str:
    if talk.answers.guessed_without_results:
        return (
            "How sure shall it be that the number is enough? Since no number of results is behind "
            "sigma, no chance can be worked out. 'plain' takes the bare formula, which is enough "
            "in about half of campaigns"
        )
    return (
        "How sure shall it be that the number is enough? A share such as 80 %, or 'plain' for the "
        "bare formula, which is enough in about half of campaigns"
    )


def _take_assurance(talk: Talk, typed: str) -> Talk:
    assurance = read_assurance(typed)
    if assurance != "plain" and talk.answers.guessed_without_results:
        message = (
            "a chance can be worked out only from a pilot or from the number of results behind "
            "sigma. Type plain; or go back and give them, if they are known."
        )
        raise CampaignError(message)
    return talk.with_answers(assurance=assurance)


QUESTIONS: tuple[Question, ...] = (
    _words("title", "What is the campaign called?"),
    _words("site", "What is the site called?"),
    Question("plan_id", _ask_id, _take_id, leave=_leave_id),
    _words("prepared_by", "Who prepares the plan?"),
    *PLACE_QUESTIONS,
    _words("analyte", "What does the laboratory measure?"),
    _words("unit", "In which unit does it report?"),
    Question("action_level", _ask_level, _take_level),
    replace(
        _words("action_level_source", "Where does that level come from? Document and date"),
        due=lambda t: t.answers.action_level is not None,
    ),
    Question(
        "depth_m",
        lambda _talk: (
            "Which depth is sampled, from the ground surface down, such as 0 to 15 cm? Or 'none'"
        ),
        _take_depth,
        is_area,
    ),
    Question(
        "pilot",
        lambda _talk: "Are there earlier results, a pilot? Their file, CSV or XLSX, or 'none'",
        _take_pilot,
    ),
    Question("column", _ask_column, _take_column, lambda t: bool(t.columns), _leave_column),
    Question("sigma", _ask_sigma, _take_sigma, _needs_sigma),
    Question(
        "sigma_source",
        lambda _talk: "Where does that come from? ASSUMED if it is a guess",
        _take_source,
        _has_sigma,
    ),
    Question(
        "from_results",
        lambda _talk: "How many results are behind it? Enter if nobody knows",
        _take_results,
        _is_measured,
        lambda talk: talk,
    ),
    Question("target", _ask_target, _take_target),
    Question(
        "expected_mean",
        lambda _talk: "Which mean is expected?",
        _take_mean,
        _needs_mean,
        lambda talk: _echoed(talk.leaving_open("expected_mean")),
    ),
    Question("assurance", _ask_assurance, _take_assurance, _takes_assurance),
    replace(
        _words("chosen_by", "Who chooses that?"),
        due=lambda t: t.answers.assurance is not None,
    ),
    _words("decision", "Which decision waits for the result? A sentence"),
    _words("decides", "Who decides?"),
)
"""A question is asked when the talk so far makes it due; the order is that of the job."""
