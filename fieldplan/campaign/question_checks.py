"""Rules for questions that are not about the precision of a mean."""

from collections.abc import Iterator
from typing import Any

from fieldplan.campaign.problems import Problem, shown
from fieldplan.campaign.questions import MODULES, WITHOUT_SIGMA, table_of

_OF_A_MEAN = ("standard_error", "half_width", "relative_half_width", "budget", "assurance")


def needs_sigma(objective: dict[str, Any]) -> bool:
    """Tell whether the question of an objective cannot be answered without a sigma."""
    question = objective.get("question", "mean")
    return not isinstance(question, str) or question not in WITHOUT_SIGMA


def question_problems(data: dict[str, Any], objective: dict[str, Any], i: int) -> Iterator[Problem]:
    """Give what is wrong with the tables of questions below one objective.

    Parameters
    ----------
    data : dict
        The whole file, screened.
    objective : dict
    i : int
        Its position.
    """
    question = objective.get("question", "mean")
    if isinstance(question, str) and question in MODULES:
        yield from _own_table(objective, question, i)
    for name, module in MODULES.items():
        table = objective.get(table_of(name))
        if isinstance(table, dict):
            for key, text in module.problems(table, data):
                yield Problem(("objective", i, table_of(name), key), text)


def _own_table(objective: dict[str, Any], question: str, i: int) -> Iterator[Problem]:
    """Ask for the question's table; refuse the targets of a mean beside it."""
    table = table_of(question)
    if table not in objective:
        text = f"missing; question = {shown(question)} reads its keys there. Write it below."
        yield Problem(("objective", i, table), text)
    for key in _OF_A_MEAN:
        if key in objective:
            text = (
                f'belongs to question = "mean", and this objective asks {shown(question)} '
                f"(got {shown(objective[key])}). Take it out, or ask it in an [[objective]] of its "
                "own."
            )
            yield Problem(("objective", i, key), text)
