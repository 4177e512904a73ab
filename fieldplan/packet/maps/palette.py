"""One set of colours, patterns and marks for screen, paper and desktop GIS.

Every difference is carried twice: by a colour that colour-blind readers can tell apart and by a
pattern, a shape or a label, so that a grey copy still reads.
"""

from dataclasses import dataclass
from typing import Literal

from fieldplan.design.model import LocationClass


@dataclass(frozen=True)
class StratumFill:
    """How one stratum is filled: a pale ground, a darker line, and a pattern for grey copies."""

    ground: str
    line: str
    pattern: Literal["plain", "dots", "rising", "level", "upright", "falling", "crosses", "rings"]


@dataclass(frozen=True)
class Mark:
    """The symbol of one class of locations: shape, fill, edge, and its name in the legend."""

    shape: Literal["circle", "square", "diamond"]
    fill: str
    edge: str
    title: str


# Okabe & Ito (2008), Color Universal Design; lines as published, grounds paled by us.
STRATUM_FILLS = (
    StratumFill("#dbe9f4", "#0072B2", "plain"),
    StratumFill("#faeed2", "#B37400", "dots"),
    StratumFill("#d5ede5", "#007A5A", "rising"),
    StratumFill("#f6e3ee", "#A8578A", "level"),
    StratumFill("#e3f3fb", "#2E86B5", "upright"),
    StratumFill("#fbf8d6", "#8A8200", "falling"),
    StratumFill("#f9dfcf", "#B34A00", "crosses"),
    StratumFill("#e6e6e6", "#4D4D4D", "rings"),
)

MARKS: dict[LocationClass, Mark] = {
    "random": Mark("circle", "#111111", "#ffffff", "Random location"),
    "alternate": Mark("circle", "#ffffff", "#111111", "Alternate"),
    "targeted": Mark("diamond", "#D55E00", "#ffffff", "Targeted place, not in the mean"),
}

LINE_DASHES = (None, "14 4", "14 4 3 4", "5 3")
"""Dashes of the lines of strata on a screen, told apart in a grey copy too."""

EXCLUDED_LINE = "#5a5a5a"
BOUNDARY_LINE = "#111111"
GRID_LINE = "#7d8894"


def stratum_fill(number: int) -> StratumFill:
    """Give the fill of the stratum with this position, from 0; after eight they repeat.

    Examples
    --------
    >>> stratum_fill(1).pattern, stratum_fill(9).pattern
    ('dots', 'dots')
    """
    return STRATUM_FILLS[number % len(STRATUM_FILLS)]
