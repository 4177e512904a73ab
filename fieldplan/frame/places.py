"""Places that are points: targeted ones beside an area, and the units of a list."""

from dataclasses import dataclass

import numpy as np
import shapely
from numpy.typing import NDArray

from fieldplan.base.errors import FrameError
from fieldplan.campaign.model import Targeted
from fieldplan.frame.columns import (
    ColumnMap,
    has_none,
    key_of,
    one_of,
    remedy,
    standing_for,
    taken_as,
    told,
)
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
    notes: tuple[str, ...] = ()


def named_places(overlay: Overlay, named: ColumnMap) -> NamedPlaces:
    """Give the points of a file with their ids, refusing lines, polygons, blanks and repeats.

    Parameters
    ----------
    overlay : Overlay
    named : ColumnMap
        Columns as the campaign file names them.

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
    at = _id_column(layer, named)
    notes = taken_as(layer.name, [(layer.titles[at], "location_id")]) if at in _usual(layer) else ()
    ids = _ids(layer, features, layer.columns[at])
    coordinates = shapely.get_coordinates([feature.geometry for feature in features])
    latitude, longitude = overlay.shift.degrees(coordinates)
    longitude = np.where(np.abs(longitude) > 180, (longitude + 180) % 360 - 180, longitude)
    return NamedPlaces(features, ids, latitude, longitude, notes)


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
        named = ColumnMap(entry.columns, "[[targeted]]")
        overlay = files.open(entry.file, wanted="point", named=named)
        found = named_places(overlay, named)
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
        notes = [*overlay.layer.notes, *found.notes, *overlay.shift.notes]
        if outside:
            site = "the site" if shapely.get_dimensions(ground.boundary) == 2 else "the lines"
            notes.append(f"{entry.file}: targeted outside {site}: {', '.join(outside)}.")
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


def _id_column(layer: Layer, named: ColumnMap) -> int:
    """Find the column with the ids: as told, by our name, by a usual one, or a plain name.

    Raises
    ------
    FrameError
        None, or several that could be meant.
    """
    if "location_id" in named.columns:
        theirs = named.columns["location_id"]
        return told(layer.name, layer.titles, "location_id", theirs=theirs)
    usual = _usual(layer)
    if [key_of(layer.titles[at]) for at in usual] == ["location_id"]:
        return usual[0]
    keys = [key_of(title) for title in layer.titles]
    general = [keys.index(name) for name in ID_COLUMNS[1:] if name in keys][:1]
    at = general if general and layer.format in ("KML", "GPX") else [*usual, *general]
    if at:
        return one_of(layer.name, layer.titles, "location_id", at, table=named.table)
    words = f"Add one; or, if one of them is that: {_inner(named.table)}"
    raise has_none(layer.name, layer.titles, "column 'location_id'", words)


def _inner(table: str) -> str:
    """Say how to name the column, within a sentence."""
    words = remedy(table, {"location_id": ""})
    return words[0].lower() + words[1:]


def _usual(layer: Layer) -> list[int]:
    return standing_for(layer.titles, "location_id")


def _ids(layer: Layer, features: tuple[Feature, ...], column: str) -> tuple[str, ...]:
    """Give the ids, as they stand in the file."""
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
