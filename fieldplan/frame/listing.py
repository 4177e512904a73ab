"""A list as population: wells, outfalls or plots with the ids their owners gave them."""

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from fieldplan.base.errors import FrameError
from fieldplan.campaign.model import Targeted
from fieldplan.frame.columns import ColumnMap, key_of, quoted
from fieldplan.frame.ground import (
    FrameFiles,
    Ground,
    Overlay,
    distance_in_words,
    points_of,
    read_ground,
)
from fieldplan.frame.layer import raise_all
from fieldplan.frame.model import Frame, ListUnit, Stratum
from fieldplan.frame.places import NamedPlaces, check_strays, named_places, read_targeted
from fieldplan.frame.plane import check_extent, merged
from fieldplan.frame.population import list_population
from fieldplan.frame.projection import centre_of, to_site

_SMALLEST_MARGIN_M = 20.0
_FAR_M = 100_000.0


def read_list(files: FrameFiles, targeted: tuple[Targeted, ...], *, layout: str) -> Frame:
    """Read a list frame: N units, each with id and place, shared among strata if it says so.

    Parameters
    ----------
    files : FrameFiles
        The frame table and where its files are.
    targeted : tuple of Targeted
        Files of places chosen by judgement.
    layout : str
        Of the design that draws from it: ``census`` visits all units, ``simple-random`` knows no
        strata.

    Returns
    -------
    Frame
        Its boundary is that of the campaign file, or a hull of the units for the map.

    Raises
    ------
    FrameError
        No list, or one whose ids, places or strata cannot serve, or strata beside a layout that
        draws from one population.
    """
    table = files.table
    if not table.list_file:
        message = '[[frame]] has no list; name the file of its units as list_file = "…".'
        raise FrameError(message)
    _refuse_area_keys(files)
    named = ColumnMap(table.columns, "[[frame]]")
    overlay = files.open(table.list_file, wanted="point", named=named)
    found = named_places(overlay, named)
    ground = _ground(files, overlay, found)
    names = _stratum_names(overlay, found, table.stratum_column)
    if layout == "simple-random":
        _refuse_strata(overlay.layer.name, sorted(set(names)), table.stratum_column)
    easting, northing = to_site(ground.projection, found.latitude, found.longitude)
    units = [
        ListUnit(identifier, name, float(e), float(n), float(lat), float(lon))
        for identifier, name, e, n, lat, lon in zip(
            found.ids, names, easting, northing, found.latitude, found.longitude, strict=True
        )
    ]
    places, ground = read_targeted(files, ground, targeted)
    strata = tuple(
        Stratum(name, float(len(members)), len(members) / len(units), None, members)
        for name in sorted(set(names))
        if (members := tuple(unit for unit in units if unit.stratum == name))
    )
    return Frame(
        kind="list",
        projection=ground.projection,
        strata=strata,
        boundary=ground.boundary,
        population=list_population(table, len(units), census=layout == "census"),
        targeted=places,
        sources=ground.sources,
        notes=ground.notes,
        boundary_assumed=table.boundary_assumed,
    )


def _refuse_area_keys(files: FrameFiles) -> None:
    """Refuse what has no meaning for a list, rather than ignore it."""
    table = files.table
    given = {
        "strata": table.strata,
        "exclusion": table.exclusion,
        "inset_m": table.inset_m,
    }
    raise_all(
        f"frame.{key} has no meaning for a list; take it out (a list gives the stratum of a unit "
        "in its own column, and a unit is left out by leaving out its row)."
        for key, value in given.items()
        if value
    )


def _refuse_strata(name: str, strata: list[str], column: str) -> None:
    """Refuse a list in strata that shall be drawn as one population."""
    if len(strata) > 1:
        message = (
            f"{name} puts its members into strata ({', '.join(strata)}), and layout = "
            '"simple-random" draws from one population. Write layout = "stratified"; or rename '
            f"its column {column!r}, if that is not meant to divide the list."
        )
        raise FrameError(message)


def _ground(files: FrameFiles, overlay: Overlay, found: NamedPlaces) -> Ground:
    """Take the boundary of the campaign file, or make a hull that is for maps only."""
    notes = (*overlay.layer.notes, *found.notes, *overlay.shift.notes)
    if not files.table.boundary:
        projection = centre_of(found.latitude, found.longitude)
        easting, northing = to_site(projection, found.latitude, found.longitude)
        places = np.column_stack([easting, northing])
        middle = np.median(places, axis=0)
        spread = float(np.median(np.hypot(*(places - middle).T)))
        check_strays(overlay, found, projection, middle, max(_FAR_M, 20 * spread))
        extent = check_extent(places, overlay.layer.name)
        return Ground(projection, hull(places), (overlay.shift.source,), (*notes, *extent))
    ground = read_ground(files)
    points = points_of(ground.projection, found.latitude, found.longitude)
    ground.check_near(overlay, shapely.MultiPoint(list(points)))
    middle = np.asarray(ground.boundary.centroid.coords)[0]
    west, south, east, north = ground.boundary.bounds
    check_strays(overlay, found, ground.projection, middle, _FAR_M + east - west + north - south)
    away = np.asarray(shapely.distance(ground.boundary, points))
    outside = [
        f"{identifier} ({distance_in_words(float(metres))})"
        for identifier, metres in zip(found.ids, away, strict=True)
        if metres > 0
    ]
    if outside:
        notes = (*notes, f"{overlay.layer.name}: outside the boundary: {', '.join(outside)}.")
    return ground.noting(*notes, source=overlay.shift.source)


def hull(places: np.ndarray) -> BaseGeometry:
    """Draw an outline round points: their convex hull, widened so that one or two have one too.

    Examples
    --------
    >>> outline = hull(np.array([[0.0, 0.0], [100.0, 0.0]]))
    >>> [round(float(edge)) for edge in outline.bounds]
    [-20, -20, 120, 20]
    """
    extent = float(np.ptp(places, axis=0).max())
    margin = max(_SMALLEST_MARGIN_M, 0.05 * extent)
    return merged(shapely.MultiPoint(places).convex_hull.buffer(margin))


def _stratum_names(overlay: Overlay, found: NamedPlaces, column: str) -> list[str]:
    """Give the stratum of each unit; ``site`` when the list has no such column."""
    layer = overlay.layer
    titles = dict(zip(map(key_of, layer.titles), layer.columns, strict=True))
    if key_of(column) not in titles:
        if column != "stratum":
            message = (
                f"{layer.name} has no column '{column}'; its columns are {quoted(layer.titles)}. "
                "Correct stratum_column in [[frame]]."
            )
            raise FrameError(message)
        return ["site"] * len(found.ids)
    names = [feature.values.get(titles[key_of(column)], "") for feature in found.features]
    raise_all(
        f"{layer.name} {feature.label}: the stratum of {identifier!r} is empty; name it."
        for feature, identifier, name in zip(found.features, found.ids, names, strict=True)
        if not name and any(names)
    )
    spellings: dict[str, str] = {}
    raise_all(
        f"{layer.name}: strata {spellings[name.casefold()]!r} and {name!r} differ in capital "
        "letters only; write one spelling."
        for name in dict.fromkeys(names)
        if spellings.setdefault(name.casefold(), name) != name
    )
    return [name or "site" for name in names]
