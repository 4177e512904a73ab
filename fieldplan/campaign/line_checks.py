"""Rules for frames along lines, and for the layout that only they take."""

from collections.abc import Iterator
from typing import Any

from fieldplan.campaign.problems import Problem, shown
from fieldplan.campaign.screen import is_fill_in
from fieldplan.campaign.table import tables

LINE_LAYOUTS = ("simple-random", "stratified", "even-spacing")
EVEN_SPACING = "even-spacing"
_LINE_ONLY = ("line_file", "branch_column")
_NOT_FOR_LINES = ("boundary", "boundary_assumed", "list_file", "columns")

Data = dict[str, Any]


def line_problems(data: Data) -> Iterator[Problem]:
    """Give what is wrong with a frame along lines, and with keys that belong to one elsewhere.

    Parameters
    ----------
    data : dict
        The whole file, screened.
    """
    frames = tables(data, "frame")
    for i, frame in enumerate(frames):
        if frame.get("kind") == "line":
            yield from _line_frame(frame, i)
        elif frame.get("kind") in ("area", "list"):
            for key in _LINE_ONLY:
                if key in frame:
                    text = 'lines belong to kind = "line". Take it out, or change the kind.'
                    yield Problem(("frame", i, key), text)
    kind = frames[0].get("kind") if frames else None
    for i, design in enumerate(tables(data, "design")):
        yield from _design(design, kind, i)


def _line_frame(frame: Data, i: int) -> Iterator[Problem]:
    if "line_file" not in frame:
        text = 'missing; a line needs the file that it is drawn in. Give it, or "FILL IN".'
        yield Problem(("frame", i, "line_file"), text)
    for key in _NOT_FOR_LINES:
        if key in frame:
            text = 'this key has no meaning for kind = "line". Take it out.'
            yield Problem(("frame", i, key), text)


def _design(design: Data, kind: object, i: int) -> Iterator[Problem]:
    layout = design.get("layout")
    open_or_odd = not isinstance(layout, str) or is_fill_in(layout)
    if kind == "line" and not open_or_odd and layout not in LINE_LAYOUTS:
        text = (
            f"this layout does not suit a frame of kind {shown(kind)} (got {shown(layout)}). "
            f"Takes {', '.join(LINE_LAYOUTS)}."
        )
        yield Problem(("design", i, "layout"), text)
    if kind in ("area", "list") and layout == EVEN_SPACING:
        text = (
            f"this layout runs along lines, and the frame is of kind {shown(kind)} (got "
            f'{shown(layout)}). Write kind = "line" with a line_file, or take another layout.'
        )
        yield Problem(("design", i, "layout"), text)
    starts = design.get("starts", 1)
    if is_fill_in(starts):
        return
    if "starts" in design and not open_or_odd and layout != EVEN_SPACING:
        text = f'this key belongs to layout = "{EVEN_SPACING}". Take it out.'
        yield Problem(("design", i, "starts"), text)
    elif isinstance(starts, int) and starts > 1 and design.get("minimum_spacing_m"):
        text = (
            "several starts are independent, so that their places may fall close together. Take "
            "starts or minimum_spacing_m out."
        )
        yield Problem(("design", i, "minimum_spacing_m"), text)
    locations = design.get("locations")
    if isinstance(starts, int) and isinstance(locations, int) and 1 < starts > locations:
        text = f"more starts than the {locations} locations (got {starts}). Lower it."
        yield Problem(("design", i, "starts"), text)
