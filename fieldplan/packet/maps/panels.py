"""The panels of a page: title and status, scale and north, sources and open items, page number."""

from typing import TYPE_CHECKING

from fieldplan.frame.projection import projection_in_words, utm_in_words
from fieldplan.packet.drawing import INK, SOFT, shortened, text_width_mm, wrapped
from fieldplan.packet.maps.content import MapContent
from fieldplan.packet.maps.grid import GridLines
from fieldplan.packet.maps.ground import DIFFERENT_FILLS
from fieldplan.packet.maps.paper import Box
from fieldplan.packet.maps.tiles import PageSpec
from fieldplan.plan.model import Plan

if TYPE_CHECKING:
    from matplotlib.axes import Axes

_LINE_MM = 2.75
_NOTE_POINTS = 6.2


def draw_title(page: "Axes", plan: Plan, *, title: str, spec: PageSpec) -> None:
    """Write title, plan, date and status at the head; plan, status and page at the foot."""
    box, foot = spec.layout.title, spec.layout.footer
    status_width = min(text_width_mm(plan.status, 11, bold=True) + 5, box.width * 0.5)
    room = box.width - status_width - 4
    points, lines = _title_lines(title, room)
    for number, line in enumerate(lines):
        y = box.top - (3 if len(lines) < 3 else 1.6) - 0.43 * points * number
        page.text(box.left, y, line, fontsize=points, weight="bold", va="center")
    parts = [f"plan {plan.campaign.plan.id}", f"revision {plan.revision_name}", f"{plan.made_on}"]
    if plan.campaign.plan.site:
        parts.insert(0, plan.campaign.plan.site)
    words = shortened(" · ".join(parts), 8, width_mm=room)
    page.text(box.left, box.top - 11.8, words, fontsize=8, va="center", color=SOFT)
    page.text(
        box.right - 2, box.top - 5,
        shortened(plan.status, 11, width_mm=status_width - 4, bold=True),
        fontsize=11, weight="bold", ha="right", va="center",
        bbox={"facecolor": "white", "edgecolor": INK, "linewidth": 1.2, "pad": 3.5},
    )  # fmt: skip
    page.plot([foot.left, foot.right], [foot.top, foot.top], color=INK, linewidth=0.5)
    words = f"{plan.revision_name} · page {spec.page} of {spec.pages}"
    page.text(foot.left, foot.bottom + 1.5, words, fontsize=7.5, va="center")
    status = shortened(plan.status, 7.5, width_mm=foot.width / 2)
    page.text(foot.right, foot.bottom + 1.5, status, fontsize=7.5, ha="right", va="center")


def _title_lines(title: str, room: float) -> tuple[float, list[str]]:
    """Set a title in one large line, two smaller ones, or three small ones."""
    for points, most in ((13.0, 1), (10.0, 2)):
        lines = wrapped(title, points, width_mm=room, bold=True)
        if len(lines) <= most:
            return points, lines
    return 7.6, wrapped(title, 7.6, width_mm=room, most=3, bold=True)


def bar_length(denominator: int, *, longest_mm: float = 56.0) -> int:
    """Choose the ground length of the scale bar: 1, 2 or 5 × 10ᵏ metres that fits.

    Examples
    --------
    >>> bar_length(1000), bar_length(2500), bar_length(20)
    (50, 100, 1)
    """
    longest = longest_mm * denominator / 1000
    lengths = [m * 10**power for power in range(8) for m in (1, 2, 5)]
    return max((length for length in lengths if length <= longest), default=1)


def draw_scale(page: "Axes", plan: Plan, *, spec: PageSpec, grid: GridLines) -> None:
    """Draw the fraction, the bar, the north arrow, and say the coordinate systems in words."""
    box = spec.layout.scale
    scale = f"1 : {spec.denominator:,}".replace(",", "\u00a0")
    page.text(box.left + 1, box.top - 3.5, scale, fontsize=12, weight="bold", va="center")
    paper = plan.campaign.paper.size
    words = f"true on {paper} printed at 100 %"
    page.text(box.left + 1, box.top - 7.8, words, fontsize=6.2, va="center", color=SOFT)
    draw_bar(page, box.left + 1, bottom=box.top - 15.5, denominator=spec.denominator)
    draw_north(page, box.right - 5, y=box.top - 7)
    lines = [
        "Drawn in: " + projection_in_words(plan.frame.projection) + " (no EPSG code).",
        "Ticks and crosses: " + utm_in_words(grid.reference) + ".",
        "Corners: latitude and longitude, WGS 84 (EPSG:4326).",
        _north_words(grid),
    ]
    draw_lines(
        page, lines, box=Box(box.left + 1, box.bottom, box.width - 1, box.height - 18), points=5.9
    )


def draw_bar(
    page: "Axes", left: float, *, bottom: float, denominator: int, longest_mm: float = 56.0
) -> None:
    """Draw the bar in four parts of alternate black and white, with its lengths."""
    from matplotlib.patches import Rectangle

    length = bar_length(denominator, longest_mm=longest_mm)
    whole = length * 1000 / denominator
    for part in range(4):
        page.add_patch(
            Rectangle(
                (left + part * whole / 4, bottom),
                whole / 4,
                1.5,
                linewidth=0.6,
                edgecolor=INK,
                facecolor=INK if part % 2 == 0 else "white",
                gid="scale-bar",
            )
        )
    shown = (length / 1000, "km") if length >= 2000 else (length, "m")
    for share in (0.0, 0.5, 1.0):
        words = f"{shown[0] * share:g}" + (f" {shown[1]}" if share == 1.0 else "")
        page.text(left + share * whole, bottom + 3.2, words, fontsize=6, ha="center", va="center")


def draw_north(page: "Axes", x: float, *, y: float) -> None:
    """Draw an arrow up the page: the north of the site's plane."""
    from matplotlib.patches import Polygon

    low, high = y - 6, y + 5
    for side, face in ((-2.6, INK), (2.6, "white")):
        page.add_patch(
            Polygon(
                [(x, high), (x + side, low), (x, low + 2.4)],
                closed=True,
                facecolor=face,
                edgecolor=INK,
                linewidth=0.7,
            )
        )
    page.text(x, low - 1.8, "N", fontsize=8, weight="bold", ha="center", va="center")


def _north_words(grid: GridLines) -> str:
    """Say which north the arrow shows, and how far the others lie from it."""
    name = "UTM grid north" if grid.reference.zone else "polar grid north"
    return (
        "Arrow: grid north of the site plane. True north lies "
        f"{_turned(grid.true_turn)}, {name} {_turned(grid.turn)} of it. "
        "Magnetic north is not shown."
    )


def _turned(angle: float) -> str:
    """Write an angle with its side."""
    if abs(angle) < 0.005:
        return "0.00°"
    return f"{abs(angle):.2f}° {'east' if angle > 0 else 'west'}"


def note_lines(plan: Plan, content: MapContent, *, unplaced: tuple[str, ...] = ()) -> list[str]:
    """List what is open, what the map says, and what it does not show; sources come after."""
    lines = []
    if plan.open_items and content.before_field:
        held = [
            item.topic + (" (hold point)" if item.holds_work else "") for item in plan.open_items
        ]
        lines.append("OPEN: " + "; ".join(held) + ". See the plan sheet.")
    lines += content.lines
    if unplaced:
        lines.append("Too close together to name on the map: " + ", ".join(unplaced) + ".")
    strata = len(plan.frame.strata) if plan.frame.kind == "area" else 0
    if strata > DIFFERENT_FILLS:
        lines.append(
            f"{strata} strata share {DIFFERENT_FILLS} fills, which come again and again; the list "
            "of points names the stratum of each location."
        )
    if plan.frame.boundary_assumed:
        lines.append("The boundary is ASSUMED: areas and locations hang on it.")
    return lines


def sources_line(plan: Plan) -> str:
    """Say where the outlines come from; empty when nothing is known."""
    sources = plan.frame.sources
    return "Sources: " + "; ".join(s.rstrip(".") for s in sources) + "." if sources else ""


def notes_height(plan: Plan, content: MapContent, *, width_mm: float) -> float:
    """Measure the notes of a page of this width, in millimetres, sources in full among them."""
    lines = [*note_lines(plan, content), sources_line(plan)]
    return _LINE_MM * _rows(lines, width_mm) + 0.1


def _rows(lines: list[str], width_mm: float) -> int:
    """Count the rows that lines take."""
    return sum(
        len(wrapped(line, _NOTE_POINTS, width_mm=width_mm, bold=_is_bold(line)))
        for line in lines
        if line
    )


def draw_notes(
    page: "Axes", plan: Plan, *, content: MapContent, spec: PageSpec, unplaced: tuple[str, ...]
) -> None:
    """Write the notes; sources give way, and are named in full or not at all."""
    box = spec.layout.notes
    lines, sources = note_lines(plan, content, unplaced=unplaced), sources_line(plan)
    if sources and _rows([*lines, sources], box.width) > int(box.height / _LINE_MM):
        sources = "Sources: in full in The working, office folder."
    draw_lines(page, [*lines, *([sources] if sources else [])], box=box, points=_NOTE_POINTS)


def _is_bold(line: str) -> bool:
    """Tell whether a line calls for attention."""
    return line.startswith(("OPEN", "ASSUMED"))


def draw_lines(page: "Axes", lines: list[str], *, box: Box, points: float) -> None:
    """Write sentences into a box from the top; one that starts with OPEN is set bold.

    What does not fit is cut with ``…``; plan sheet and working have all of it.
    """
    room = int(box.height / _LINE_MM)
    y = box.top - _LINE_MM / 2
    for index, line in enumerate(lines):
        most = room - min(len(lines) - index - 1, room - 1)  # leave a line for each that follows
        bold = _is_bold(line)
        pieces = wrapped(line, points, width_mm=box.width, most=max(most, 1), bold=bold)
        for piece in pieces:
            if room <= 0:
                return
            page.text(
                box.left,
                y,
                piece,
                fontsize=points,
                va="center",
                weight="bold" if bold else "normal",
                color=INK if bold else SOFT,
            )
            y -= _LINE_MM
            room -= 1
