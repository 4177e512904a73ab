"""Set a sheet as one HTML file that needs nothing but a browser."""

import base64
from functools import cache
from importlib import resources
from typing import TYPE_CHECKING

from fieldplan.base.document import Block, Document, Table
from fieldplan.packet.sheets.wording import printable, step_lines

if TYPE_CHECKING:
    from jinja2 import Environment, Template


def set_html(document: Document) -> str:
    """Set a document as one self-contained page.

    Parameters
    ----------
    document : Document
        What to set. All of its text is printed as typed: markup in it stays inert.

    Returns
    -------
    str
        A whole HTML file: style and figures inside, nothing asked of the network, status on the
        screen and on every printed page.

    Examples
    --------
    >>> from fieldplan.base.document import Paragraph
    >>> page = set_html(Document("T", "", "HL", "HL-r01", "DRAFT", [Paragraph("1 < 2")]))
    >>> "1 &lt; 2" in page
    True
    """
    return _template().render(document=document, blocks=document.blocks)


@cache
def _template() -> "Template":
    """Read the page once; autoescape is on for all that is put into it."""
    from markupsafe import Markup

    environment = _environment()
    style = resources.files(__package__).joinpath("sheet.css").read_text("utf-8")
    environment.globals["style"] = Markup(style)  # our own file, no typed text in it
    page = resources.files(__package__).joinpath("sheet.html").read_text("utf-8")
    return environment.from_string(page)


def _environment() -> "Environment":
    """Make a jinja environment that escapes everything and refuses unknown names."""
    from jinja2 import Environment, StrictUndefined

    environment = Environment(
        autoescape=True, undefined=StrictUndefined, trim_blocks=True, lstrip_blocks=True
    )
    environment.finalize = lambda value: printable(value) if type(value) is str else value
    environment.filters["kind"] = _kind
    environment.filters["lines"] = step_lines
    environment.filters["as_cards"] = _as_cards
    environment.tests["words"] = _is_words
    environment.filters["as_image"] = _as_image
    return environment


def _kind(block: Block) -> str:
    """Name the type of a block."""
    return type(block).__name__


def _as_cards(table: Table) -> bool:
    """Tell whether a phone shows a table as cards: few rows, of many columns or of sentences."""
    if len(table.rows) > 12 or len(table.columns) < 3:
        return False
    return len(table.columns) > 3 or any(len(cell) > 40 for row in table.rows for cell in row)


def _is_words(cell: str) -> bool:
    """Tell whether a cell holds words enough to need the whole width of a phone."""
    return len(cell) > 24


def _as_image(svg: str) -> str:
    """Turn a drawing into an image address; as an image, scripts and ids in it stay inert."""
    return "data:image/svg+xml;base64," + base64.b64encode(svg.encode("utf-8")).decode()
