"""Sites written to files by hand, and the frame that is read from them."""

import csv
import json
from pathlib import Path
from typing import Any

from fieldplan.campaign.model import Exclusion, FieldTable, FrameTable, ReadCampaign, Targeted
from fieldplan.frame import read_frame
from fieldplan.frame.model import Frame
from tests.factories import make_campaign

WEST, EAST, SOUTH, NORTH = -1.9020, -1.8980, 52.0990, 52.1010
"""A site of about 274 m by 222 m near 52.1° N, 1.9° W."""

OUTLINE = [[WEST, SOUTH], [EAST, SOUTH], [EAST, NORTH], [WEST, NORTH], [WEST, SOUTH]]


def box(west: float, south: float, east: float, north: float) -> list[list[float]]:
    """A closed counter-clockwise ring."""
    return [[west, south], [east, south], [east, north], [west, north], [west, south]]


def polygon(*rings: list[list[float]], **properties: Any) -> dict[str, Any]:
    """A GeoJSON feature with a polygon."""
    geometry = {"type": "Polygon", "coordinates": list(rings)}
    return {"type": "Feature", "properties": properties, "geometry": geometry}


def point(longitude: float, latitude: float, **properties: Any) -> dict[str, Any]:
    """A GeoJSON feature with a point."""
    geometry = {"type": "Point", "coordinates": [longitude, latitude]}
    return {"type": "Feature", "properties": properties, "geometry": geometry}


def line(*positions: list[float], **properties: Any) -> dict[str, Any]:
    """A GeoJSON feature with a line."""
    geometry = {"type": "LineString", "coordinates": list(positions)}
    return {"type": "Feature", "properties": properties, "geometry": geometry}


def write_geojson(path: Path, *features: dict[str, Any], **members: Any) -> Path:
    """Write features as the standard library writes JSON."""
    document = {"type": "FeatureCollection", **members, "features": list(features)}
    path.write_text(json.dumps(document), encoding="utf-8")
    return path


def write_csv(
    path: Path, rows: list[list[Any]], *, separator: str = ",", encoding: str = "utf-8"
) -> Path:
    """Write rows with the standard library."""
    with path.open("w", encoding=encoding, newline="") as stream:
        csv.writer(stream, delimiter=separator).writerows(rows)
    return path


def frame_of(
    folder: Path,
    *,
    exclusions: list[tuple[str, float, str]] | None = None,
    targeted: list[tuple[Any, ...]] | None = None,
    position_accuracy_m: float | None = None,
    layout: str = "",
    **table: Any,
) -> Frame:
    """Read a frame from files in ``folder``; ``table`` are keys of ``[[frame]]``.

    A targeted file is given with its reason, and with its columns if these are told.
    """
    table.setdefault("kind", "area")
    if table["kind"] == "area":
        table.setdefault("boundary", "boundary.geojson")
    out = tuple(
        Exclusion(file=file, buffer_m=buffer, reason=reason)
        for file, buffer, reason in exclusions or []
    )
    changes: dict[str, Any] = {
        "frame": (FrameTable(exclusion=out, **table),),
        "field": FieldTable(position_accuracy_m=position_accuracy_m),
        "targeted": tuple(
            Targeted(file=file, reason=reason, columns=dict(*columns))
            for file, reason, *columns in targeted or []
        ),
    }
    if layout:
        changes["design"] = (make_campaign().design[0].model_copy(update={"layout": layout}),)
    return read_frame(
        ReadCampaign.model_construct(
            campaign=make_campaign(**changes), path=folder / "campaign.toml", text=""
        )
    )


def standard_site(folder: Path) -> Path:
    """Write the boundary of the standard site and return its folder."""
    write_geojson(folder / "boundary.geojson", polygon(OUTLINE))
    return folder
