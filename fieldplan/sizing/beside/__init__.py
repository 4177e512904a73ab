"""What stands beside the number: one file a topic, each with ``finding(asked, size)``.

A finding is None where the campaign gives nothing to say. Quick ones take a few milliseconds and
always come along; thorough ones simulate or fit, and come when they are asked for.
"""

from collections.abc import Collection
from importlib import import_module
from typing import TYPE_CHECKING, Literal

from fieldplan.sizing.asked import bought, side_questions
from fieldplan.sizing.asked.model import Asked

if TYPE_CHECKING:
    from fieldplan.sizing.model import Finding, Size

QUICK: tuple[str, ...] = (
    "deciding-analytes",
    "two-phase",
    "being-wrong",
    "patch",
    "composites",
    "parts",
    "ranked-sets",
    "near-normal",
    "non-detects",
    "time",
    "bunched",
)
"""Topics in the order of the sheet; ``near-normal`` stands in ``near_normal.py``."""

THOROUGH: tuple[str, ...] = (
    "strata",
    "two-stages",
    "frontier",
    "mean-band",
    "space",
)
"""Topics that take up to 2 s."""

Wanted = Literal["quick", "all"] | Collection[str]


def findings_beside(
    asked: Asked, size: "Size", *, wanted: Wanted = "quick"
) -> "tuple[Finding, ...]":
    """Say what stands beside the number.

    Parameters
    ----------
    asked : Asked
    size : Size
    wanted : str or collection of str
        ``quick``, ``all``, or the names of topics besides the quick ones.

    Returns
    -------
    tuple of Finding
        What n buys for the objective's other questions, then the topics.
    """
    counts = [entry.needed for entry in size.strata]
    found = [bought(asked, question, counts) for question in side_questions(asked)]
    more = THOROUGH if wanted == "all" else [name for name in THOROUGH if name in wanted]
    for topic in (*QUICK, *more):
        module = import_module(f"fieldplan.sizing.beside.{topic.replace('-', '_')}")
        finding: Finding | None = module.finding(asked, size)
        if finding is not None:
            found.append(finding)
    return tuple(found)
