"""Polygons out of what a file holds: as drawn, from a walked track, or from corners in a table."""

from itertools import groupby

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from fieldplan.base.errors import FrameError
from fieldplan.frame.layer import Feature, Layer, raise_all
from fieldplan.frame.plane import polygons_of

LARGEST_GAP = 0.1
"""A track is closed when the gap between its ends is at most this share of its length."""


def polygon_features(layer: Layer, *, stratum_column: str = "") -> tuple[list[Feature], list[str]]:
    """List the polygons of a layer.

    Parameters
    ----------
    layer : Layer
        As read.
    stratum_column : str
        In a table of corners, rows that differ in this column belong to different polygons.

    Returns
    -------
    features : list of Feature
        Each geometry a polygon or a collection with polygons.
    notes : list of str
        What was closed or left out.

    Raises
    ------
    FrameError
        Only lines or points, a track that does not return, or fewer than three corners.
    """
    if layer.format == "CSV":
        return _from_corners(layer, stratum_column), []
    if layer.format == "GPX":
        return _from_tracks(layer)
    features = [feature for feature in layer.features if polygons_of(feature.geometry)]
    if not features:
        message = (
            f"{layer.name} holds {_kinds(layer)} and no polygon; draw the outline as a polygon "
            "and export it again."
        )
        raise FrameError(message)
    left = [feature for feature in layer.features if not polygons_of(feature.geometry)]
    notes = [f"{layer.name}: {len(left)} feature(s) that are no polygons were left out."]
    return features, notes if left else []


def _kinds(layer: Layer) -> str:
    """Say what a layer holds instead of polygons."""
    kinds = {shapely.get_dimensions(feature.geometry) for feature in layer.features}
    return " and ".join(word for code, word in ((0, "points"), (1, "lines")) if code in kinds)


def _from_corners(layer: Layer, stratum_column: str) -> list[Feature]:
    """Join the rows of a table to polygons: one for each run of the same part and stratum."""

    def key(feature: Feature) -> tuple[str, str]:
        return feature.values.get(stratum_column, ""), feature.values.get("part", "")

    features, faults = [], []
    for _, rows in groupby(layer.features, key):
        corners = list(rows)
        label = f"{corners[0].label} to {corners[-1].label.removeprefix('row ')}"
        places = np.array([shapely.get_coordinates(corner.geometry)[0] for corner in corners])
        if len(np.unique(places, axis=0)) < 3:
            faults.append(
                f"{layer.name} {label}: an outline needs 3 corners and has "
                f"{len(np.unique(places, axis=0))}; give all corners in walking order."
            )
            continue
        features.append(Feature(label, shapely.Polygon(places), corners[0].values))
    raise_all(faults)
    return features


def _from_tracks(layer: Layer) -> tuple[list[Feature], list[str]]:
    """Close each walked track to a polygon."""
    features, notes, faults = [], [], []
    for feature in layer.features:
        if shapely.get_dimensions(feature.geometry) != 1:
            continue
        closed, gap, length = _closed(feature.geometry)
        if closed is None:
            faults.append(
                f"{layer.name} {feature.label}: its ends lie {gap / length:.0%} of its length apart"
                " (limit 10 %), so it does not go round the site; walk it to the end."
            )
            continue
        if gap > 0:
            notes.append(
                f"{layer.name} {feature.label} was closed: its ends lay {gap / length:.1%} of its "
                "length apart."
            )
        features.append(Feature(feature.label, closed, feature.values))
    raise_all(faults)
    if not features:
        message = f"{layer.name} holds waypoints and no track; a boundary needs a track or route."
        raise FrameError(message)
    return features, notes


def _closed(line: BaseGeometry) -> tuple[shapely.Polygon | None, float, float]:
    """Close a line; None when its ends are too far apart for that."""
    coordinates = shapely.get_coordinates(line)
    coordinates[:, 0] = np.unwrap(coordinates[:, 0], period=360.0)
    # Degrees of longitude are shortened so that gap and length are in one measure.
    shrink = np.array([np.cos(np.radians(coordinates[:, 1].mean())), 1.0])
    steps = np.diff(coordinates * shrink, axis=0)
    length = float(np.hypot(steps[:, 0], steps[:, 1]).sum())
    gap = float(np.hypot(*((coordinates[-1] - coordinates[0]) * shrink)))
    if len(np.unique(coordinates, axis=0)) < 3 or gap > LARGEST_GAP * length:
        return None, gap, length or 1.0
    return shapely.Polygon(coordinates), gap, length
