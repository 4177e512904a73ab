"""The frame inside the record: polygons as GeoJSON geometries in site metres."""

from collections.abc import Mapping
from dataclasses import asdict
from typing import Any

from shapely.geometry import mapping, shape
from shapely.geometry.base import BaseGeometry

from fieldplan.frame.model import (
    Branch,
    ExcludedArea,
    Frame,
    ListUnit,
    Population,
    Reach,
    SiteProjection,
    Stratum,
    TargetedPlace,
)


def _polygon(geometry: BaseGeometry | None) -> dict[str, Any] | None:
    """Turn a geometry into plain lists; the doubles keep every digit."""
    if geometry is None:
        return None
    found = mapping(geometry)
    return {"type": found["type"], "coordinates": _lists(found["coordinates"])}


def _lists(coordinates: Any) -> Any:
    if isinstance(coordinates, tuple | list):
        return [_lists(part) for part in coordinates]
    return float(coordinates)


def frame_to_record(frame: Frame) -> dict[str, Any]:
    """Turn a frame into plain JSON values.

    Parameters
    ----------
    frame : Frame

    Returns
    -------
    dict
        Coordinates are site metres in the projection given by ``projection``. Branches and reaches
        are there for lines alone.
    """
    record = {
        "kind": frame.kind,
        "projection": {**asdict(frame.projection), "definition": frame.projection.definition},
        "boundary": _polygon(frame.boundary),
        "boundary_assumed": frame.boundary_assumed,
        "strata": [
            {
                "name": stratum.name,
                "measure": stratum.measure,
                "weight": stratum.weight,
                "geometry": _polygon(stratum.geometry),
                "units": [asdict(unit) for unit in stratum.units],
                **_reaches(stratum),
            }
            for stratum in frame.strata
        ],
        "excluded": [
            {
                "reason": area.reason,
                "source": area.source,
                "buffer_m": area.buffer_m,
                "area_m2": area.area_m2,
                "geometry": _polygon(area.geometry),
                **({"length_m": area.length_m} if area.length_m else {}),
            }
            for area in frame.excluded
        ],
        "targeted": [asdict(place) for place in frame.targeted],
        "population": {**asdict(frame.population), "sentences": list(frame.population.sentences)},
        "sources": list(frame.sources),
        "notes": list(frame.notes),
    }
    if frame.branches:
        record["branches"] = [
            {"name": b.name, "length_m": b.length_m, "geometry": _polygon(b.geometry)}
            for b in frame.branches
        ]
    return record


def _reaches(stratum: Stratum) -> dict[str, Any]:
    """Turn the reaches of a stratum into plain values; nothing where it has none."""
    if not stratum.reaches:
        return {}
    reaches = [
        {
            "branch": reach.branch,
            "from_m": reach.from_m,
            "to_m": reach.to_m,
            "geometry": _polygon(reach.geometry),
        }
        for reach in stratum.reaches
    ]
    return {"reaches": reaches}


def frame_from_record(record: Mapping[str, Any]) -> Frame:
    """Build the frame that a record holds.

    Parameters
    ----------
    record : mapping
        As from ``frame_to_record``.

    Returns
    -------
    Frame

    Raises
    ------
    KeyError, TypeError, ValueError
        A part is missing or of the wrong kind; the caller names the file.
    """
    population = dict(record["population"])
    population["sentences"] = tuple(population["sentences"])
    return Frame(
        kind=record["kind"],
        projection=SiteProjection(
            record["projection"]["latitude"], record["projection"]["longitude"]
        ),
        strata=tuple(_stratum(entry) for entry in record["strata"]),
        boundary=shape(record["boundary"]),
        population=Population(**population),
        excluded=tuple(
            ExcludedArea(**{**entry, "geometry": shape(entry["geometry"])})
            for entry in record["excluded"]
        ),
        targeted=tuple(TargetedPlace(**entry) for entry in record["targeted"]),
        sources=tuple(record["sources"]),
        notes=tuple(record["notes"]),
        boundary_assumed=record["boundary_assumed"],
        branches=tuple(
            Branch(**{**entry, "geometry": shape(entry["geometry"])})
            for entry in record.get("branches", ())
        ),
    )


def _stratum(entry: Mapping[str, Any]) -> Stratum:
    geometry = entry["geometry"]
    return Stratum(
        name=entry["name"],
        measure=entry["measure"],
        weight=entry["weight"],
        geometry=None if geometry is None else shape(geometry),
        units=tuple(ListUnit(**unit) for unit in entry["units"]),
        reaches=tuple(
            Reach(**{**reach, "geometry": shape(reach["geometry"])})
            for reach in entry.get("reaches", ())
        ),
    )
