"""Questions other than the precision of a mean: one file each, with ``count`` and ``bought``.

``count(asked) -> Answered`` says how many; ``bought(asked, counts) -> Finding`` says what given
counts buy for the same question, by the same code.
"""

from collections.abc import Sequence
from importlib import import_module
from types import ModuleType
from typing import TYPE_CHECKING

from fieldplan.sizing.asked.model import Answered, Asked

if TYPE_CHECKING:
    from fieldplan.sizing.model import Finding

__all__ = ["Answered", "Asked", "bought", "count", "side_questions"]


def _module(question: str) -> ModuleType:
    return import_module(f"fieldplan.sizing.asked.{question.replace('-', '_')}")


def count(asked: Asked) -> Answered:
    """Say how many results the objective's question takes."""
    answered: Answered = _module(asked.objective.question).count(asked)
    return answered


def bought(asked: Asked, question: str, counts: Sequence[int]) -> "Finding":
    """Say what given counts buy for a question whose table the objective has."""
    finding: Finding = _module(question).bought(asked, tuple(counts))
    return finding


def side_questions(asked: Asked) -> tuple[str, ...]:
    """Name the questions that the objective has a table for, besides the one that decides n."""
    from fieldplan.campaign.questions import MODULES, table_of

    objective = asked.objective
    return tuple(
        question
        for question in MODULES
        if question != objective.question and getattr(objective, table_of(question)) is not None
    )
