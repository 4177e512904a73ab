"""``[objective.smallest_patch]``: the smallest patch that must not be missed, and how surely."""

from collections.abc import Iterator
from typing import Annotated, Any, Literal

from pydantic import Field

from fieldplan.campaign.table import PositiveNumber, Table

MEANING = {
    "": "the smallest patch that the locations must not miss, and how surely",
    "length_m": "how long the patch is",
    "width_m": "how wide it is across its length; as wide as long, a circle, if left out",
    "direction_degrees": "where its length points, clockwise from north, or that nobody knows",
    "probability": "chance that at least one location lies in it, wherever in the area it is",
}


class SmallestPatch(Table):
    """A circle or an ellipse that may lie anywhere in the area.

    A probability above 0.999 would rest on corners that averages over starts cannot see.
    """

    length_m: PositiveNumber
    width_m: PositiveNumber | None = None
    direction_degrees: Annotated[float, Field(ge=0, lt=360)] | Literal["unknown"] = "unknown"
    probability: Annotated[float, Field(gt=0, le=0.999)]


def problems(table: dict[str, Any], data: dict[str, Any]) -> Iterator[tuple[str, str]]:
    """Give key and sentence for each rule that the table breaks.

    Parameters
    ----------
    table : dict
        ``[objective.smallest_patch]`` as typed.
    data : dict
        The whole file.
    """
    length, width = table.get("length_m"), table.get("width_m")
    if isinstance(length, int | float) and isinstance(width, int | float) and width > length > 0:
        yield "width_m", f"is more than length_m = {length:g}. Exchange the two."
    kinds = [frame.get("kind") for frame in data.get("frame", []) if isinstance(frame, dict)]
    if "list" in kinds:
        yield "length_m", "a list has no area that a patch could lie in. Take the table out."
    elif "line" in kinds:
        yield "length_m", "a line has no area that a patch could lie in. Take the table out."
