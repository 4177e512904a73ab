"""A sheet without a format: written once, set as HTML and as PDF by ``packet.sheets``."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from fieldplan.base.working import Step


@dataclass(frozen=True)
class Heading:
    """A heading; level 1 is a section, level 2 a part of one."""

    text: str
    level: int = 1


@dataclass(frozen=True)
class Paragraph:
    """Plain sentences; ``tone`` sets the answer and what is said in a lower voice."""

    text: str
    tone: Literal["plain", "answer", "note"] = "plain"


@dataclass(frozen=True)
class Bullets:
    """A list of short sentences; numbered when their order matters."""

    items: tuple[str, ...]
    numbered: bool = False


@dataclass(frozen=True)
class Facts:
    """Label and value pairs, set as two columns."""

    rows: tuple[tuple[str, str], ...]


@dataclass(frozen=True)
class Files:
    """Files that lie in ``folder`` beside the sheet, each with what it is for; a page links them.

    A row is the file's name (with its sub-folder, if any) and a sentence.
    """

    folder: str
    rows: tuple[tuple[str, str], ...]


@dataclass(frozen=True)
class Table:
    """A table of text cells; ``numeric`` names the columns set flush right.

    ``by_hand`` names the columns that people write into, each with its share of the room.
    """

    columns: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    caption: str = ""
    numeric: tuple[str, ...] = ()
    by_hand: tuple[tuple[str, float], ...] = ()

    def __post_init__(self) -> None:
        for row in self.rows:
            if len(row) != len(self.columns):
                message = f"table row {row!r} has {len(row)} cells, its header {len(self.columns)}"
                raise ValueError(message)


@dataclass(frozen=True)
class Figure:
    """A drawing as an SVG string, with a caption and words for those who cannot see it.

    ``narrow_svg`` is the same drawing for the screen of a phone, where there is one.
    """

    svg: str
    caption: str
    alternative: str
    width_mm: float = 165.0
    narrow_svg: str = ""


@dataclass(frozen=True)
class Caution:
    """A topic that the facts of the campaign raise, and who decides about it."""

    topic: str
    because: str
    defers_to: str
    status: str
    is_open: bool
    holds_work: bool = False


@dataclass(frozen=True)
class Working:
    """Numbered steps of arithmetic."""

    steps: tuple[Step, ...]


@dataclass(frozen=True)
class SignOff:
    """Blank lines for name, signature and date, one per role."""

    roles: tuple[str, ...]


@dataclass(frozen=True)
class Verbatim:
    """Text set in a fixed-width face as it stands: pseudo-code, fingerprints."""

    text: str


@dataclass(frozen=True)
class PageBreak:
    """Start a new page where there are pages."""


Block = (
    Heading
    | Paragraph
    | Bullets
    | Facts
    | Files
    | Table
    | Figure
    | Caution
    | Working
    | SignOff
    | Verbatim
    | PageBreak
)


@dataclass(frozen=True)
class Document:
    """A sheet: its title block, its status on every page, and its blocks in order.

    Parameters
    ----------
    title, subtitle : str
        As printed at the top.
    plan_id, revision_name : str
        e.g. ``HL`` and ``HL-r01``; printed in the footer of every page.
    status : str
        ``DRAFT`` or ``ISSUED by NAME on DATE``; printed on every page.
    blocks : sequence of Block
        The content.
    lying : bool
        Whether printed pages lie on their long side.
    """

    title: str
    subtitle: str
    plan_id: str
    revision_name: str
    status: str
    blocks: Sequence[Block]
    lying: bool = False
