"""Lines as population: branches by distance, with strata, exclusions and inset cut out of them."""

from collections.abc import Iterable, Sequence

import numpy as np
import pyproj
import shapely
from shapely.geometry.base import BaseGeometry
from shapely.ops import substring

from fieldplan.base.errors import FrameError
from fieldplan.base.units import length_in_words, significant
from fieldplan.campaign.model import Targeted
from fieldplan.frame.columns import key_of, quoted
from fieldplan.frame.exclusions import elsewhere, excluded_shape
from fieldplan.frame.ground import FrameFiles, Ground, Overlay
from fieldplan.frame.intervals import Interval, shared, total_m, united, without
from fieldplan.frame.layer import Feature, Layer, raise_all
from fieldplan.frame.line_strata import Stretches, length_of, strata_of
from fieldplan.frame.model import Branch, ExcludedArea, Frame, Reach, Stratum
from fieldplan.frame.network import (
    Course,
    Piece,
    courses,
    refuse_repeats,
    simple_lines,
    spans_within,
)
from fieldplan.frame.places import read_targeted
from fieldplan.frame.plane import SitePlane, check_extent
from fieldplan.frame.population import line_population
from fieldplan.frame.projection import centre_of, to_degrees

SMALLEST_STRATUM_M = 1.0


def read_line(files: FrameFiles, targeted: tuple[Targeted, ...], *, layout: str) -> Frame:
    """Read a frame along lines and measure it.

    Parameters
    ----------
    files : FrameFiles
        The frame table and where its files are.
    targeted : tuple of Targeted
        Files of places chosen by judgement.
    layout : str
        Of the design that draws from it; ``simple-random`` knows no strata.

    Returns
    -------
    Frame
        ``gross - exclusions - inset == net``, in whole millimetres.

    Raises
    ------
    FrameError
        A file cannot serve, a line is a loop, has no length or is drawn twice, or nothing is left
        of the lines or of a stratum.
    """
    table = files.table
    if not table.line_file:
        message = '[[frame]] has no lines; name the file that they are in as line_file = "…".'
        raise FrameError(message)
    overlay = files.open(table.line_file, wanted="line")
    found, ground = _branches(files, overlay)
    parts, gaps, ground = strata_of(files, ground, found)
    if layout == "simple-random" and len(parts) > 1:
        raise FrameError(_strata_beside_simple_random(files, sorted(parts)))
    excluded, left, ground = _exclusions(files, ground, found, gaps)
    strips = _inset(found, table.inset_m)
    inset_m = sum(total_m(shared(left[at], strips[at])) for at in left)
    left = {at: without(left[at], strips[at]) for at in left}
    net = {
        name: {at: shared(stretches.get(at, ()), left[at]) for at in left}
        for name, stretches in sorted(parts.items())
    }
    _refuse_vanished(net, parts, files)
    places, ground = read_targeted(files, ground, targeted)
    total = sum(map(length_of, net.values()))
    branches = tuple(Branch(c.name, c.millimetres / 1000, c.line) for c in found)
    return Frame(
        kind="line",
        projection=ground.projection,
        strata=tuple(_stratum(name, net[name], found, total) for name in net),
        boundary=ground.boundary,
        population=line_population(
            table, branches, excluded=excluded, inset_loss=inset_m, net=total
        ),
        excluded=excluded,
        targeted=places,
        sources=ground.sources,
        notes=ground.notes,
        branches=branches,
    )


def _strata_beside_simple_random(files: FrameFiles, names: list[str]) -> str:
    table = files.table
    column = "" if table.strata else f"; or rename its column {table.stratum_column!r}"
    return (
        f"{table.strata or table.line_file} puts the lines into strata ({', '.join(names)}), and "
        'layout = "simple-random" draws from one population. Write layout = "stratified"'
        f"{column}, if that is not meant to divide them."
    )


def _branches(files: FrameFiles, overlay: Overlay) -> tuple[tuple[Course, ...], Ground]:
    """Read the lines into the plane and join them to branches."""
    layer, table = overlay.layer, files.table
    drawn, notes = _lines(layer)
    degrees = overlay.shift.degrees(np.vstack([shapely.get_coordinates(line) for _, line in drawn]))
    projection = centre_of(*degrees)
    plane = SitePlane(projection, overlay.shift)
    placed = [
        (feature, shapely.LineString(shapely.get_coordinates(plane.place(line))))
        for feature, line in drawn
    ]
    corners = np.vstack([shapely.get_coordinates(line) for _, line in placed])
    notes += check_extent(corners, layer.name)
    simple = simple_lines(placed, projection, file=layer.name)
    branch_column, told = _branch_column(layer, table.branch_column)
    stratum_column = "" if table.strata else _stratum_column(layer, table.stratum_column)
    pieces = [
        Piece(
            feature.label,
            feature.values.get(branch_column, "") or f"line {number}",
            feature.values.get(stratum_column, ""),
            line,
        )
        for number, (feature, line) in enumerate(simple, 1)
    ]
    if stratum_column:
        _refuse_unnamed(pieces, file=layer.name, column=stratum_column)
    refuse_repeats(pieces, file=layer.name)
    found, joints = courses(pieces)
    ground = Ground(
        projection,
        shapely.MultiLineString([course.line for course in found]),
        (overlay.shift.source,),
        (*layer.notes, *overlay.shift.notes, *notes, *told, *joints),
    )
    return found, ground.noting(_measured_note(ground, found))


def _lines(layer: Layer) -> tuple[list[tuple[Feature, shapely.LineString]], list[str]]:
    """List the single lines of a layer, each with its feature."""
    if layer.format == "CSV":
        message = f"{layer.name} is a table of places; export the lines as GeoJSON or GeoPackage."
        raise FrameError(message)
    found, others = [], 0
    for feature in layer.features:
        parts = _flat(feature.geometry)
        lines = [part for part in parts if isinstance(part, shapely.LineString)]
        others += len(parts) - len(lines)
        for number, line in enumerate(lines, 1):
            label = feature.label + (f" part {number}" if len(lines) > 1 else "")
            found.append((Feature(label, line, feature.values), line))
    if not found:
        message = (
            f"{layer.name} holds no line; draw the river, shore or ditch as a line (the outline of "
            "a water body as a line, not as a polygon) and export it again."
        )
        raise FrameError(message)
    notes = [f"{layer.name}: {others} feature(s) that are no lines were left out."]
    return found, notes if others else []


def _flat(geometry: BaseGeometry) -> list[BaseGeometry]:
    """Take collections apart, however nested."""
    if not hasattr(geometry, "geoms"):
        return [] if geometry.is_empty else [geometry]
    return [part for member in geometry.geoms for part in _flat(member)]


def _branch_column(layer: Layer, wanted: str) -> tuple[str, list[str]]:
    """Find the column that names branches; without one the name of a line will do."""
    titles = dict(zip(map(key_of, layer.titles), layer.columns, strict=True))
    if key_of(wanted) in titles:
        return titles[key_of(wanted)], []
    if wanted != "branch":
        message = (
            f"{layer.name} has no column {wanted!r}; its columns are {quoted(layer.titles)}. "
            "Correct branch_column in [[frame]]."
        )
        raise FrameError(message)
    if "name" in titles and any(f.values.get(titles["name"]) for f in layer.features):
        return titles["name"], [f"{layer.name}: column 'name' was taken for the branch."]
    return "", [f"{layer.name} names no branches; each line is one, numbered as in the file."]


def _stratum_column(layer: Layer, wanted: str) -> str:
    """Find the column that names strata; empty when the file has none and none was asked for."""
    titles = dict(zip(map(key_of, layer.titles), layer.columns, strict=True))
    found = titles.get(key_of(wanted), "")
    if found and any(feature.values.get(found) for feature in layer.features):
        return found
    if wanted != "stratum":
        message = (
            f"{layer.name} has no values in a column {wanted!r}; its columns are "
            f"{quoted(layer.titles)}. Correct stratum_column in [[frame]]."
        )
        raise FrameError(message)
    return ""


def _refuse_unnamed(pieces: Sequence[Piece], *, file: str, column: str) -> None:
    """Refuse lines without a stratum, and strata that differ in capital letters only."""
    raise_all(
        f"{file} {piece.label}: its stratum (column {column!r}) is empty; name it."
        for piece in pieces
        if not piece.stratum
    )
    spellings: dict[str, str] = {}
    raise_all(
        f"{file}: strata {spellings[name.casefold()]!r} and {name!r} differ in capital letters "
        "only; write one spelling."
        for name in dict.fromkeys(piece.stratum for piece in pieces)
        if spellings.setdefault(name.casefold(), name) != name
    )


def _measured_note(ground: Ground, found: Sequence[Course]) -> str:
    """Say how lengths are measured and how far they are from those on the ellipsoid."""
    geod = pyproj.Geod(ellps="WGS84")
    plane = true = 0.0
    for course in found:
        corners = shapely.get_coordinates(course.line)
        latitude, longitude = to_degrees(ground.projection, corners[:, 0], corners[:, 1])
        plane += float(course.line.length)
        true += float(geod.line_length(longitude, latitude))
    off = 100 * abs(plane - true) / true
    share = "by less than 0.0001 %" if off < 1e-4 else f"by {significant(off, 2)} %"
    return (
        f"Lengths are measured along the lines as drawn, in the site's plane: {plane:.1f} m in "
        f"all; on the ellipsoid of WGS 84 {true:.1f} m, which differs {share}. Bends that the file "
        "leaves out are not in them."
    )


def _exclusions(
    files: FrameFiles, ground: Ground, found: Sequence[Course], gaps: Stretches
) -> tuple[tuple[ExcludedArea, ...], Stretches, Ground]:
    """Take exclusions out in the order of the campaign file; no stretch counts twice."""
    left: Stretches = {at: ((0, c.millimetres),) for at, c in enumerate(found)}
    excluded = []
    if length_of(gaps) > 0:
        excluded.append(
            ExcludedArea("gaps between strata", str(files.table.strata), 0.0, 0.0,
                         _geometry(gaps, found), length_of(gaps))
        )  # fmt: skip
        left = {at: without(left[at], gaps.get(at, ())) for at in left}
    for exclusion in files.table.exclusion:
        overlay = files.open(exclusion.file, wanted="any")
        shape, notes = excluded_shape(exclusion, overlay, ground)
        ground = ground.noting(
            *overlay.layer.notes, *overlay.shift.notes, *notes, source=overlay.shift.source
        )
        inside = {at: united(spans_within(c, shape)) for at, c in enumerate(found)}
        if not length_of(inside):
            ground = ground.noting(elsewhere(exclusion, overlay, ground, shape))
            continue
        took = sum(total_m(shared(left[at], inside[at])) for at in left)
        left = {at: without(left[at], inside[at]) for at in left}
        excluded.append(
            ExcludedArea(
                exclusion.reason, exclusion.file, exclusion.buffer_m, 0.0,
                _geometry(inside, found), took,
            )
        )  # fmt: skip
    return tuple(excluded), left, ground


def _inset(found: Sequence[Course], inset_m: float) -> Stretches:
    """Give the strips along free ends; where branches meet there is no end."""
    width = round(1000 * inset_m)
    strips: Stretches = {}
    for at, course in enumerate(found):
        whole = course.millimetres
        cut: list[Interval] = [(0, min(width, whole))] if course.free[0] else []
        cut += [(max(whole - width, 0), whole)] if course.free[1] else []
        strips[at] = united(cut)
    return strips


def _refuse_vanished(
    net: dict[str, Stretches], parts: dict[str, Stretches], files: FrameFiles
) -> None:
    """Refuse a stratum of which nothing is left, by name."""
    raise_all(
        f"Nothing is left of {'the lines' if name == 'site' else f'stratum {name!r}'}: of "
        f"{length_in_words(length_of(parts[name]))} the inset of {files.table.inset_m:g} m and the "
        f"exclusions leave {length_of(stretches):.2f} m. Take a smaller inset or buffer, merge the "
        "stratum with a neighbour, or leave it out."
        for name, stretches in net.items()
        if length_of(stretches) < SMALLEST_STRATUM_M
    )


def _stratum(name: str, stretches: Stretches, found: Sequence[Course], total: float) -> Stratum:
    length = length_of(stretches)
    reaches = tuple(_reaches(stretches, found))
    return Stratum(name, length, length / total, _together(reaches), (), reaches)


def _reaches(stretches: Stretches, found: Sequence[Course]) -> Iterable[Reach]:
    """Cut stretches out of their branches."""
    for at, intervals in sorted(stretches.items()):
        for low, high in intervals:
            yield Reach(found[at].name, low / 1000, high / 1000, _cut(found[at], (low, high)))


def _geometry(stretches: Stretches, found: Sequence[Course]) -> BaseGeometry:
    return _together(_reaches(stretches, found))


def _together(reaches: Iterable[Reach]) -> BaseGeometry:
    return shapely.MultiLineString([shapely.get_coordinates(r.geometry) for r in reaches])


def _cut(course: Course, stretch: Interval) -> shapely.LineString:
    """Give a stretch of a branch, its ends on the millimetre grid like all corners."""
    if stretch == (0, course.millimetres):
        return course.line
    low, high = stretch
    piece = substring(course.line, low / 1000, min(high / 1000, course.line.length))
    corners = np.round(shapely.get_coordinates(piece), 3)
    moves = np.concatenate([[True], np.any(np.diff(corners, axis=0) != 0, axis=1)])
    if moves.sum() < 2:  # a stretch of a millimetre or so
        return shapely.LineString(np.vstack([corners[0], corners[0] + (0.0, 0.001)]))
    return shapely.LineString(corners[moves])
