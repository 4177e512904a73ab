"""Places that are points: targeted ones beside an area, and the units of a list."""

from dataclasses import dataclass

import numpy as np
import shapely
from numpy.typing import NDArray

from fieldplan.base.errors import FrameError
from fieldplan.campaign.model import Targeted
from fieldplan.frame.ground import FrameFiles, Ground, Overlay, distance_in_words, points_of
from fieldplan.frame.layer import Feature, Layer, raise_all
from fieldplan.frame.model import SiteProjection, TargetedPlace
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
        if away.min() > _FARTHEST_TARGETED_M or (away.min() > 0 and ground.swapped_inside(overlay)):
            ground.check_near(overlay, shapely.MultiPoint(list(points)))
        middle = np.asarray(ground.boundary.centroid.coords)[0]
        check_strays(overlay, found, ground.projection, middle, _FARTHEST_TARGETED_M)
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


def check_strays(
    overlay: Overlay,
    found: NamedPlaces,
    projection: SiteProjection,
    middle: NDArray[np.float64],
    limit_m: float,
) -> None:
    """Refuse places far from the middle of things; say when swapped axes are the reason.

    Parameters
    ----------
    overlay : Overlay
        The file.
    found : NamedPlaces
        Its places.
    projection : SiteProjection
        The plane.
    middle : array of float, shape (2,)
        Easting and northing of what they should be near.
    limit_m : float
        The farthest that is believed.

    Raises
    ------
    FrameError
        One line for each stray.
    """
    places = np.column_stack(to_site(projection, found.latitude, found.longitude))
    away = np.hypot(*(places - middle).T)
    faults = []
    for index in np.flatnonzero(~(away <= limit_m)):
        feature = found.features[index]
        swapped = shapely.get_coordinates(feature.geometry)[:, ::-1]
        remedy = "correct its coordinates."
        if not overlay.shift.crs.is_geographic or abs(swapped[0, 1]) <= 90:
            there = np.array(to_site(projection, *overlay.shift.degrees(swapped)))[:, 0]
            if np.hypot(*(there - middle)) < away[index] / 10:
                remedy = "its axes are the other way round: if swapped they fall inside your site."
        faults.append(
            f"{overlay.layer.name} {feature.label}: {found.ids[index]!r} lies "
            f"{distance_in_words(float(away[index]))} away; {remedy}"
        )
    raise_all(faults)


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
