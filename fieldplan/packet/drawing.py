"""How every figure and map is drawn: one face, one set of pens, the same bytes every time."""

import io
import warnings
from collections.abc import Iterator
from contextlib import contextmanager
from functools import lru_cache
from typing import TYPE_CHECKING, Any

from fieldplan.packet.sheets.wording import printable

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

MM_PER_INCH = 25.4
WIDE_MM, NARROW_MM = 165.0, 92.0
"""Width of a figure on a sheet, and on the screen of a phone."""
POINTS_PER_MM = 72 / MM_PER_INCH

INK = "#1b1f23"
SOFT = "#57606a"
LINE = "#8c959f"
BLUE = "#0072B2"
ORANGE = "#E69F00"
VERMILION = "#D55E00"
"""Colours that the colour-blind tell apart: Okabe and Ito (2008), Color Universal Design."""

_PENS: Any = {
    "axes.edgecolor": INK,
    "axes.labelcolor": INK,
    "axes.linewidth": 0.6,
    "axes.spines.right": False,
    "axes.spines.top": False,
    "font.family": ["DejaVu Sans"],
    "font.size": 8.0,
    "hatch.linewidth": 0.35,
    "lines.linewidth": 1.2,
    "pdf.fonttype": 42,
    "savefig.dpi": "figure",
    "svg.fonttype": "path",
    "svg.hashsalt": "fieldplan",
    "text.color": INK,
    "text.parse_math": False,
    "xtick.color": INK,
    "xtick.labelsize": 7.5,
    "ytick.color": INK,
    "ytick.labelsize": 7.5,
}


@contextmanager
def pens() -> Iterator[None]:
    """Draw with our own settings inside the block, whatever the user's matplotlib is set to.

    Typed text stays inert (no mathematics in dollar signs). A sign that the face lacks is drawn
    as an empty box, without a warning on the screen.
    """
    import matplotlib as mpl

    with mpl.rc_context(), warnings.catch_warnings():
        mpl.rcdefaults()
        mpl.rcParams.update(_PENS)
        warnings.filterwarnings("ignore", message="(?s).*Glyph .* missing from")
        yield


def new_figure(width_mm: float, height_mm: float) -> "Figure":
    """Make an empty white figure of a given size on paper."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    figure = Figure(
        figsize=(width_mm / MM_PER_INCH, height_mm / MM_PER_INCH), dpi=150, facecolor="white"
    )
    FigureCanvasAgg(figure)
    return figure


def mm_axes(figure: "Figure") -> "Axes":
    """Lay invisible axes over a whole figure in which one unit is one millimetre."""
    width, height = figure.get_size_inches() * MM_PER_INCH
    axes = figure.add_axes((0.0, 0.0, 1.0, 1.0))
    axes.set_axis_off()
    axes.set_xlim(0, width)
    axes.set_ylim(0, height)
    return axes


def svg_text(figure: "Figure") -> str:
    """Write a figure as SVG: letters as outlines, no date, the same text every time."""
    page = io.StringIO()
    figure.savefig(page, format="svg", metadata={"Date": None, "Creator": None})
    return page.getvalue()


@lru_cache(maxsize=4096)
def text_width_mm(text: str, points: float, *, bold: bool = False) -> float:
    """Measure how wide a line of text is on paper.

    Parameters
    ----------
    text : str
        One line.
    points : float
        Size of the face.
    bold : bool
        In the bold face.

    Returns
    -------
    float
        Millimetres, from the face's own advance widths.
    """
    from matplotlib.font_manager import FontProperties
    from matplotlib.textpath import text_to_path

    face = FontProperties(family=["DejaVu Sans"], size=points, weight="bold" if bold else "normal")
    with warnings.catch_warnings():
        warnings.filterwarnings("ignore", message="(?s).*Glyph .* missing from")
        width, _, _ = text_to_path.get_text_width_height_descent(text, face, ismath=False)
    return float(width) / POINTS_PER_MM


def wrapped(
    text: str, points: float, *, width_mm: float, most: int = 99, bold: bool = False
) -> list[str]:
    """Break text into lines that fit a width; what does not fit in ``most`` lines ends in ``…``.

    Parameters
    ----------
    text : str
        Sentences; line ends in them count as spaces.
    points, width_mm : float
        Size of the face, and the room.
    most : int
        Largest number of lines.
    bold : bool
        In the bold face.

    Returns
    -------
    list of str
        At least one line.
    """
    lines = [""]
    for word in printable(text).split():
        for piece in _pieces(word, points, width_mm=width_mm, bold=bold):
            longer = f"{lines[-1]} {piece}".strip()
            if text_width_mm(longer, points, bold=bold) <= width_mm:
                lines[-1] = longer
            else:
                lines.append(piece)
    lines = [line for line in lines if line] or [""]
    if len(lines) > most:
        lines = lines[:most]
        lines[-1] = shortened(lines[-1] + " …", points, width_mm=width_mm, bold=bold)
    return lines


def shortened(text: str, points: float, *, width_mm: float, bold: bool = False) -> str:
    """Cut a line until it fits a width, and say with ``…`` that it was cut."""
    whole = " ".join(printable(text).split())
    if text_width_mm(whole, points, bold=bold) <= width_mm:
        return whole
    stem = whole.removesuffix("…").rstrip()
    while stem and text_width_mm(stem + "…", points, bold=bold) > width_mm:
        stem = stem[:-1].rstrip()
    return stem + "…"


def _pieces(word: str, points: float, *, width_mm: float, bold: bool) -> list[str]:
    """Cut a word that alone is wider than the room."""
    if text_width_mm(word, points, bold=bold) <= width_mm:
        return [word]
    pieces = [""]
    for sign in word:
        if pieces[-1] and text_width_mm(pieces[-1] + sign, points, bold=bold) > width_mm:
            pieces.append(sign)
        else:
            pieces[-1] += sign
    return pieces
