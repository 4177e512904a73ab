"""The printed map: one page at a round scale, or a key and an atlas where one is too little."""

import io
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from fieldplan.packet.drawing import pens
from fieldplan.packet.maps.content import MapContent, plan_content
from fieldplan.packet.maps.names import unplaced_names
from fieldplan.packet.maps.page import draw_page
from fieldplan.packet.maps.panels import notes_height
from fieldplan.packet.maps.paper import (
    Extent,
    PageLayout,
    extent_around,
    fitting_denominator,
    page_layout,
)
from fieldplan.packet.maps.tiles import LOCATIONS_ON_ONE_PAGE, Atlas, PageSpec, atlas, crowded
from fieldplan.packet.sheets.wording import printable
from fieldplan.plan.model import Plan

if TYPE_CHECKING:
    from matplotlib.figure import Figure

_PNG_DPI = 150


@dataclass(frozen=True)
class PrintedMap:
    """A map on paper.

    Parameters
    ----------
    pdf : bytes
        All pages, at their true size.
    png : bytes
        The first page at 150 dots to the inch.
    pages : int
    denominator : int
        Scale of the first page.
    """

    pdf: bytes
    png: bytes
    pages: int
    denominator: int


def printed_map(plan: Plan) -> PrintedMap:
    """Draw the map that the crew takes along.

    Parameters
    ----------
    plan : Plan
        ``campaign.paper.size`` chooses the paper.

    Returns
    -------
    PrintedMap
        The same plan gives the same bytes.
    """
    return print_content(plan, plan_content(plan))


def print_content(plan: Plan, content: MapContent) -> PrintedMap:
    """Print marks over a plan's ground on as many pages as they take."""
    with pens():
        figures, specs = draw_pages(plan, content)
        return PrintedMap(
            _as_pdf(figures, f"{plan.revision_name} map"),
            _as_png(figures[0]),
            len(figures),
            specs[0].denominator,
        )


def draw_pages(plan: Plan, content: MapContent) -> tuple[list["Figure"], list[PageSpec]]:
    """Draw all pages; one when its names find a place, else a key and an atlas.

    Parameters
    ----------
    plan : Plan
    content : MapContent

    Returns
    -------
    figures : list of matplotlib Figure
    specs : list of PageSpec
        One for each figure.
    """
    whole = _whole(plan, content)
    places = content.places
    one = len(places) <= LOCATIONS_ON_ONE_PAGE
    if one and not crowded(places, whole.denominator / 1000):
        figure, unplaced = draw_page(plan, content, spec=whole)
        if not unplaced:
            return [figure], [whole]
    pages = _atlas_pages(whole, content)
    return [draw_page(plan, content, spec=spec)[0] for spec in pages], pages


def _whole(plan: Plan, content: MapContent) -> PageSpec:
    """Choose the page that shows the whole site at the larger scale: upright or lying."""
    seen = _seen(plan, content)
    trials: list[tuple[int, PageLayout]] = []
    for landscape in (False, True):
        size = plan.campaign.paper.size
        layout = page_layout(size, landscape=landscape)
        needed = notes_height(plan, content, width_mm=layout.notes.width)
        layout = page_layout(size, landscape=landscape, notes_mm=needed)
        trials.append((fitting_denominator(seen, layout.ground), layout))
    denominator, layout = min(trials, key=lambda trial: trial[0])
    return PageSpec(
        layout, extent_around(seen.centre, layout.ground, denominator=denominator), denominator
    )


def _seen(plan: Plan, content: MapContent) -> Extent:
    """Give the box round the boundary and all marks, also those outside it."""
    marks = np.array([(m.easting, m.northing) for m in content.marks]).reshape(-1, 2)
    west, south, east, north = plan.frame.boundary.bounds
    corners = np.vstack([marks, [(west, south), (east, north)]])
    (west, south), (east, north) = corners.min(axis=0), corners.max(axis=0)
    return Extent(float(west), float(south), float(east), float(north))


def _atlas_pages(whole: PageSpec, content: MapContent) -> list[PageSpec]:
    """List the key and the pages after it."""
    layout = whole.layout

    def pages_of(book: Atlas) -> list[PageSpec]:
        count = len(book.tiles) + 1
        return [
            PageSpec(layout, tile.extent, book.denominator, tile.page, count, book, tile)
            for tile in book.tiles
        ]

    def readable(book: Atlas) -> bool:
        return not any(unplaced_names(content, spec) for spec in pages_of(book))

    book = atlas(content.places, layout.ground, whole=whole.denominator, readable=readable)
    count = len(book.tiles) + 1
    key = PageSpec(layout, whole.extent, whole.denominator, 1, count, book)
    return [key, *pages_of(book)]


def _as_pdf(figures: list["Figure"], title: str) -> bytes:
    """Write pages into one PDF without dates."""
    from matplotlib.backends.backend_pdf import PdfPages

    page = io.BytesIO()
    about = {"Title": printable(title), "Creator": "fieldplan", "CreationDate": None}
    with PdfPages(page, metadata=about) as pages:
        for figure in figures:
            pages.savefig(figure)
    return page.getvalue()


def _as_png(figure: "Figure") -> bytes:
    """Draw the first page as a picture without dates."""
    page = io.BytesIO()
    figure.savefig(page, format="png", dpi=_PNG_DPI, metadata={"Software": None})
    return page.getvalue()
