"""The checks of a campaign file for tables that options made, worded for who typed them."""

import json
from typing import TYPE_CHECKING, Any

from fieldplan.cli.option_words import in_options, key_in_options
from fieldplan.cli.question_keys import misplaced, table_model
from fieldplan.cli.size_options import BadOption

if TYPE_CHECKING:
    from fieldplan.campaign.lines import KeyPath
    from fieldplan.campaign.model import Campaign
    from fieldplan.campaign.problems import Problem


def checked(data: dict[str, Any], question: str) -> "Campaign":
    """Run the checks of a campaign file; each problem is one line in the words of options.

    Parameters
    ----------
    data : dict
        The tables, as a file would have them.
    question : str

    Raises
    ------
    BadOption
        All problems, one line each.
    """
    from fieldplan.campaign.checks import check
    from fieldplan.campaign.read import validated
    from fieldplan.campaign.references import resolve
    from fieldplan.campaign.screen import screen

    screened = screen(json.loads(json.dumps(data)))
    problems = [*screened.problems, *resolve(screened.data)]
    problems += [p for p in check(screened.data) if p.path[0] != "frame"]
    campaign, faults = validated(screened, problems)
    told = [_told(problem, screened.data, question) for problem in (*problems, *faults)]
    if told or campaign is None:
        raise BadOption("\n".join(dict.fromkeys(told)))
    return campaign


def _told(problem: "Problem", data: dict[str, Any], question: str) -> str:
    """Word one problem for somebody who typed options."""
    from fieldplan.campaign.problems import key_name
    from fieldplan.campaign.questions import MODULES, table_of

    path, own = problem.path, table_of(question)
    name = key_in_options(key_name(path, data), own)
    text = in_options(problem.text)
    of_own = question in MODULES and path[2:3] == (own,) and len(path) == 4
    if of_own and path[3] not in table_model(question).model_fields:
        text = misplaced(question, str(path[3]))
    part = _at((*path[:2], "part"), data) if path[0] == "sigma" else None
    if part not in (None, "total"):
        name = f"--with sigma.{part}"
    value = _at(path, data)
    if isinstance(value, int | float) and 1 < value < 100 and "below 1 " in f"{text} ":
        text += f" For {value:g} % type {value / 100:g}."
    return f"{name}: {text}"


def _at(path: "KeyPath", data: Any) -> Any:
    """Return what stands at a path; None where nothing does."""
    for step in path:
        try:
            data = data[step]
        except (LookupError, TypeError):
            return None
    return data
