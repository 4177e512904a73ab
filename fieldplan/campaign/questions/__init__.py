"""Questions other than the precision of a mean: one file each, with its table, words and rules.

Each module gives ``Asked`` (the table below ``[[objective]]``), ``MEANING`` (what its keys are) and
``problems`` (what must hold between them). The table is named as the question, with underscores.
"""

from fieldplan.campaign.questions import (
    all_clear,
    change,
    mean_and_background,
    mean_and_level,
    share,
    smallest_patch,
    upper_share,
    which_exceed,
)

MODULES = {
    "all-clear": all_clear,
    "change": change,
    "mean-and-background": mean_and_background,
    "mean-and-level": mean_and_level,
    "share": share,
    "smallest-patch": smallest_patch,
    "upper-share": upper_share,
    "which-exceed": which_exceed,
}
"""Question, as the campaign file names it, and its module."""

WITHOUT_SIGMA = frozenset(
    {"all-clear", "change", "share", "smallest-patch", "upper-share", "which-exceed"}
)
"""Questions that can be answered where nobody knows a standard deviation."""


def table_of(question: str) -> str:
    """Name the table that a question reads.

    Examples
    --------
    >>> table_of("all-clear")
    'all_clear'
    """
    return question.replace("-", "_")


def meanings() -> dict[str, str]:
    """Say what every key of every question's table is."""
    found: dict[str, str] = {}
    for question, module in MODULES.items():
        name = f"objective.{table_of(question)}"
        found[name] = module.MEANING[""]
        found |= {f"{name}.{key}": words for key, words in module.MEANING.items() if key}
    return found
