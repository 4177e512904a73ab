"""Places that are points: targeted ones beside an area, and the units of a list."""

from dataclasses import dataclass

import numpy as np
import shapely
from numpy.typing import NDArray

from fieldplan.base.errors import FrameError
from fieldplan.campaign.model import Targeted
from fieldplan.frame.ground import FrameFiles, Ground, Overlay, distance_in_words, points_of
from fieldplan.frame.layer import Feature, Layer, raise_all
from fieldplan.frame.model import TargetedPlace
from fieldplan.frame.projection import to_site

ID_COLUMNS = ("location_id", "name", "id", "title")
_FARTHEST_TARGETED_M = 50_000.0


@dataclass(frozen=True)
class NamedPlaces:
    """Points of a file with the ids they have there."""

    features: tuple[Feature, ...]
    ids: tuple[str, ...]
    latitude: NDArray[np.float64]
    longitude: NDArray[np.float64]


def named_places(overlay: Overlay) -> NamedPlaces:
    """Give the points of a file with their ids, refusing lines, polygons, blanks and repeats.

    Raises
    ------
    FrameError
        Not all features are single points, an id is missing, or two are alike ignoring case.
    """
    layer = overlay.layer
    if layer.format == "GPX":
        kept = tuple(f for f in layer.features if shapely.get_dimensions(f.geometry) == 0)
    else:
        kept = layer.features
    features = tuple(_as_point(feature) for feature in kept)
    faults = [
        f"{layer.name} {feature.label} is a {feature.geometry.geom_type.lower()}, not one point; "
        "give each place its own point."
        for feature in features
        if not isinstance(feature.geometry, shapely.Point)
    ]
    raise_all(faults)
    if not features:
        message = f"{layer.name} holds no points; export the places as points."
        raise FrameError(message)
    ids = _ids(layer, features)
    coordinates = shapely.get_coordinates([feature.geometry for feature in features])
    latitude, longitude = overlay.shift.degrees(coordinates)
    longitude = np.where(np.abs(longitude) > 180, (longitude + 180) % 360 - 180, longitude)
    return NamedPlaces(features, ids, latitude, longitude)


def read_targeted(
    files: FrameFiles, ground: Ground, targeted: tuple[Targeted, ...]
) -> tuple[tuple[TargetedPlace, ...], Ground]:
    """Read the places chosen by judgement; they may lie outside the site, said in a note.

    Parameters
    ----------
    files : FrameFiles
        Where paths start.
    ground : Ground
        The site.
    targeted : tuple of Targeted
        ``[[targeted]]`` of the campaign.

    Returns
    -------
    places : tuple of TargetedPlace
        In file order.
    ground : Ground
        With notes.

    Raises
    ------
    FrameError
        Unreadable, without ids, alike ids, or places more than 50 km away.
    """
    places: list[TargetedPlace] = []
    for entry in targeted:
        overlay = files.open(entry.file, wanted="point")
        found = named_places(overlay)
        easting, northing = to_site(ground.projection, found.latitude, found.longitude)
        points = points_of(ground.projection, found.latitude, found.longitude)
        away = np.asarray(shapely.distance(ground.boundary, points))
        if away.min() > 0:
            _check_targeted(ground, overlay, points, float(away.min()))
        outside = [
            f"{identifier} ({distance_in_words(float(metres))})"
            for identifier, metres in zip(found.ids, away, strict=True)
            if metres > 0
        ]
        notes = [*overlay.layer.notes, *overlay.shift.notes]
        if outside:
            notes.append(f"{entry.file}: targeted outside the site: {', '.join(outside)}.")
        ground = ground.noting(*notes, source=overlay.shift.source)
        places += [
            TargetedPlace(identifier, float(e), float(n), float(lat), float(lon), entry.reason)
            for identifier, e, n, lat, lon in zip(
                found.ids, easting, northing, found.latitude, found.longitude, strict=True
            )
        ]
    _check_unique([place.place_id for place in places], "targeted files")
    return tuple(places), ground


def _check_targeted(
    ground: Ground, overlay: Overlay, points: NDArray[np.object_], away: float
) -> None:
    """Refuse targeted places that are swapped or in another part of the country."""
    if away > _FARTHEST_TARGETED_M or ground.swapped_inside(overlay):
        ground.check_near(overlay, shapely.MultiPoint(list(points)))


def _as_point(feature: Feature) -> Feature:
    """Take the one point out of a multipoint of one."""
    geometry = feature.geometry
    if isinstance(geometry, shapely.MultiPoint) and len(geometry.geoms) == 1:
        return Feature(feature.label, geometry.geoms[0], feature.values)
    return feature


def _ids(layer: Layer, features: tuple[Feature, ...]) -> tuple[str, ...]:
    """Find the ids, as given."""
    by_small_letters = {column.lower(): column for column in reversed(layer.columns)}
    column = next((by_small_letters[c] for c in ID_COLUMNS if c in by_small_letters), None)
    if column is None:
        there = ", ".join(layer.columns) or "none"
        message = f"{layer.name} has no column 'location_id' (its columns: {there}); add one."
        raise FrameError(message)
    ids = tuple(feature.values.get(column, "") for feature in features)
    raise_all(
        f"{layer.name} {feature.label}: its {column} is empty; every place needs one."
        for feature, identifier in zip(features, ids, strict=True)
        if not identifier
    )
    _check_unique(list(ids), layer.name, [feature.label for feature in features])
    return ids


def _check_unique(ids: list[str], name: str, labels: list[str] | None = None) -> None:
    """Refuse ids that are alike ignoring case."""
    seen: dict[str, int] = {}
    faults = []
    for index, identifier in enumerate(ids):
        first = seen.setdefault(identifier.casefold(), index)
        if first == index:
            continue
        where = f" {labels[index]}" if labels else ""
        as_in = f" as in {labels[first]}" if labels else ""
        told = (
            ""
            if ids[first] == identifier
            else f" (as {ids[first]!r}; capital letters do not tell places apart)"
        )
        faults.append(
            f"{name}{where}: id {identifier!r} stands there twice{as_in}{told}; rename one."
        )
    raise_all(faults)
