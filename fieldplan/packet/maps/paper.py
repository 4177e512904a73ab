"""Where things stand on a printed page, and at which round scale the ground is drawn."""

from dataclasses import dataclass
from typing import Literal

PAPERS = {"A4": (210.0, 297.0), "Letter": (215.9, 279.4)}
"""Width and height in millimetres, ISO 216 and ANSI/ASME Y14.1."""

_MANTISSAS = (1.0, 1.25, 1.5, 2.0, 2.5, 3.0, 4.0, 5.0, 6.0, 7.5)
DENOMINATORS = (
    *(20, 25, 30, 40, 50, 60, 75),
    *(round(mantissa * 10**power) for power in range(2, 8) for mantissa in _MANTISSAS),
)
"""Round scales from 1 : 20 to 1 : 75 000 000."""


@dataclass(frozen=True)
class Box:
    """A rectangle on the page, in millimetres from the lower left corner."""

    left: float
    bottom: float
    width: float
    height: float

    @property
    def right(self) -> float:
        """The right edge."""
        return self.left + self.width

    @property
    def top(self) -> float:
        """The upper edge."""
        return self.bottom + self.height

    def shrunk(self, by: float) -> "Box":
        """Take ``by`` millimetres off every side."""
        return Box(self.left + by, self.bottom + by, self.width - 2 * by, self.height - 2 * by)


@dataclass(frozen=True)
class Extent:
    """A rectangle of ground in site metres."""

    west: float
    south: float
    east: float
    north: float

    @property
    def width(self) -> float:
        """Metres from west to east."""
        return self.east - self.west

    @property
    def height(self) -> float:
        """Metres from south to north."""
        return self.north - self.south

    @property
    def centre(self) -> tuple[float, float]:
        """Easting and northing of the middle."""
        return (self.west + self.east) / 2, (self.south + self.north) / 2

    def holds(self, easting: float, northing: float) -> bool:
        """Tell whether a place lies inside or on the edge."""
        return self.west <= easting <= self.east and self.south <= northing <= self.north


@dataclass(frozen=True)
class PageLayout:
    """The boxes of one page: the map, and the panels around it."""

    width: float
    height: float
    title: Box
    ground: Box
    legend: Box
    scale: Box
    inset: Box
    notes: Box
    footer: Box


LEAST_NOTES_MM, MOST_NOTES_MM = 17.5, 42.0
"""Height of the notes below an upright map."""


def page_layout(
    paper: Literal["A4", "Letter"], *, landscape: bool, notes_mm: float = LEAST_NOTES_MM
) -> PageLayout:
    """Lay out a page: panels below the map when upright, beside it when lying.

    Parameters
    ----------
    paper : str
        ``A4`` or ``Letter``.
    landscape : bool
        Whether the long side lies.
    notes_mm : float
        Height wanted for the notes; beside a lying map they take what is left, and some of the
        legend's and the inset's.

    Returns
    -------
    PageLayout
    """
    short, long = PAPERS[paper]
    width, height = (long, short) if landscape else (short, long)
    edge, inner = 10.0, width - 20.0
    title = Box(edge, height - edge - 15, inner, 15)
    footer = Box(edge, 7.0, inner, 5)
    ticks = 6.5  # room for coordinates outside the frame
    bottom = footer.top + 2
    if landscape:
        panel = Box(width - edge - 66, bottom, 66, title.bottom - bottom - 3)
        ground = Box(edge + ticks, bottom + ticks, inner - 66 - 2 * ticks - 3, 0)
        ground = Box(
            ground.left, ground.bottom, ground.width, title.bottom - 2 * ticks - bottom - 1
        )
        left = panel.height - 52 - 42 - 38 - 2
        more = min(max(notes_mm - left, 0.0), 24.0)  # the legend and the inset give way alike
        legend = Box(panel.left, panel.top - 52 + more / 2, 66, 52 - more / 2)
        scale = Box(panel.left, legend.bottom - 42, 66, 40)
        inset = Box(panel.left, scale.bottom - 38 + more / 2, 66, 36 - more / 2)
        notes = Box(panel.left, panel.bottom, 66, inset.bottom - 2 - panel.bottom)
        return PageLayout(width, height, title, ground, legend, scale, inset, notes, footer)
    notes = Box(edge, bottom, inner, min(max(notes_mm, LEAST_NOTES_MM), MOST_NOTES_MM))
    row = notes.top + 2
    legend = Box(edge, row, inner - 122, 45)
    scale = Box(legend.right + 3, row, 70, 45)
    inset = Box(scale.right + 3, row, 46, 45)
    low = legend.top + 2 + ticks
    ground = Box(edge + ticks, low, inner - 2 * ticks, title.bottom - 1 - ticks - low)
    return PageLayout(width, height, title, ground, legend, scale, inset, notes, footer)


def fitting_denominator(extent: Extent, ground: Box, *, clear_mm: float = 9.0) -> int:
    """Find the largest round scale at which an extent fits a box.

    Parameters
    ----------
    extent : Extent
        What must be seen.
    ground : Box
        The frame of the map.
    clear_mm : float
        Kept free on every side, for markers and labels at the edge.

    Returns
    -------
    int
        The denominator: 1000 for 1 : 1 000.

    Examples
    --------
    >>> fitting_denominator(Extent(0, 0, 200, 120), Box(0, 0, 177, 180))
    1500
    """
    room = ground.shrunk(clear_mm)
    wanted = 1000 * max(extent.width / room.width, extent.height / room.height)
    fitting: int = next((d for d in DENOMINATORS if d >= wanted), DENOMINATORS[-1])
    return fitting


def extent_around(centre: tuple[float, float], ground: Box, *, denominator: int) -> Extent:
    """Give the ground that a box shows at a scale, around a place.

    Examples
    --------
    >>> extent_around((0.0, 0.0), Box(0, 0, 100, 50), denominator=1000)
    Extent(west=-50.0, south=-25.0, east=50.0, north=25.0)
    """
    half_width = ground.width * denominator / 2000
    half_height = ground.height * denominator / 2000
    easting, northing = centre
    return Extent(
        easting - half_width, northing - half_height, easting + half_width, northing + half_height
    )
