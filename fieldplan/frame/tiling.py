"""Strata must tile the site: overlaps, gaps and slivers measured, small ones settled by rule."""

from itertools import groupby

import shapely
from shapely.geometry.base import BaseGeometry

from fieldplan.base.errors import FrameError
from fieldplan.base.units import area_in_words, significant
from fieldplan.frame.cutting import (
    allowed_m2,
    area_m2,
    check_sum,
    common,
    joined,
    parted,
    wide_parts,
)
from fieldplan.frame.ground import FrameFiles, Ground, Overlay
from fieldplan.frame.layer import Feature, Layer, raise_all
from fieldplan.frame.model import ExcludedArea
from fieldplan.frame.plane import polygons_of

SLIVER_SHARE = 1e-4
"""Gaps and overlaps up to this share of the site are drawing noise and are settled by rule."""

GAP_LIMIT = 5e-3
"""Gaps above this share of the site are refused; between the two they leave the population."""

WORTH_SAYING_M2 = 0.5
"""Slivers below this are given away without a word."""

Pieces = dict[str, BaseGeometry]
"""Polygons by the name of their stratum, in the order of the names."""


def read_strata(
    files: FrameFiles, ground: Ground
) -> tuple[Pieces, tuple[ExcludedArea, ...], Ground]:
    """Read the strata, cut them to the boundary, and make them tile the site.

    Parameters
    ----------
    files : FrameFiles
        Where ``strata`` and ``stratum_column`` stand.
    ground : Ground
        The site.

    Returns
    -------
    pieces : dict of str to BaseGeometry
        One polygon per stratum, names sorted; ``{"site": boundary}`` without strata.
    gaps : tuple of ExcludedArea
        What no stratum covers and therefore leaves the population.
    ground : Ground
        With the notes of what was settled.

    Raises
    ------
    FrameError
        No such column, unnamed strata, strata elsewhere, overlaps above 0.01 % of the site or
        gaps above 0.5 %.
    """
    typed = files.table.strata
    if not typed:
        return {"site": ground.boundary}, (), ground
    overlay = files.open(typed)
    column = column_of(overlay.layer, files.table.stratum_column)
    features, notes = ground.polygons(overlay, stratum_column=column)
    ground = ground.noting(
        *overlay.layer.notes, *overlay.shift.notes, *notes, source=overlay.shift.source
    )
    drawn = by_name(overlay.layer, features, column)
    ground.check_near(overlay, joined(list(drawn.values()), overlay.layer.name))
    pieces, notes = _cut(drawn, ground, overlay)
    pieces, overlap_notes = _without_overlaps(pieces, ground, typed)
    pieces, gaps, gap_notes = _without_gaps(pieces, ground, typed)
    return pieces, gaps, ground.noting(*notes, *overlap_notes, *gap_notes)


def column_of(layer: Layer, wanted: str) -> str:
    """Find the column with the names of strata; in KML and GPX the name of the feature will do."""
    if wanted in layer.columns:
        return wanted
    by_small_letters = {column.lower(): column for column in layer.columns}
    if wanted.lower() in by_small_letters:
        return by_small_letters[wanted.lower()]
    if layer.format in ("KML", "GPX") and wanted == "stratum" and "name" in layer.columns:
        return "name"
    there = ", ".join(layer.columns) or "none"
    message = (
        f"{layer.name} has no column {wanted!r} (its columns: {there}); name the one with the "
        'strata as stratum_column = "…" in [[frame]].'
    )
    raise FrameError(message)


def by_name(layer: Layer, features: list[Feature], column: str) -> Pieces:
    """Join the polygons of each stratum."""
    raise_all(
        f"{layer.name} {feature.label}: its stratum (column {column!r}) is empty; name it."
        for feature in features
        if not feature.values.get(column)
    )
    named = sorted(features, key=lambda feature: feature.values[column])
    drawn = {
        name: joined([feature.geometry for feature in group], f"{layer.name} stratum {name!r}")
        for name, group in groupby(named, key=lambda feature: feature.values[column])
    }
    spellings: dict[str, str] = {}
    faults = []
    for name in drawn:
        other = spellings.setdefault(name.casefold(), name)
        if other != name:
            faults.append(
                f"{layer.name}: strata {other!r} and {name!r} differ in capital letters only; "
                "write one spelling, or two different names."
            )
    raise_all(faults)
    return drawn


def _cut(drawn: Pieces, ground: Ground, overlay: Overlay) -> tuple[Pieces, list[str]]:
    """Cut each stratum to the boundary; one that lies outside is an error by name."""
    pieces, notes, faults = {}, [], []
    for name, geometry in drawn.items():
        label = f"{overlay.layer.name} stratum {name!r}, cut at the boundary"
        inside, beyond = parted(geometry, ground.boundary, label)
        lost = float(beyond.area)
        if inside.area <= 0:
            faults.append(
                f"{overlay.layer.name}: stratum {name!r} lies outside the boundary; correct it, "
                "or leave it out."
            )
        if lost > SLIVER_SHARE * ground.boundary.area:
            notes.append(
                f"{overlay.layer.name}: {area_in_words(lost)} of stratum {name!r} lie outside the "
                "boundary and were cut off."
            )
        pieces[name] = inside
    raise_all(faults)
    return pieces, notes


def _without_overlaps(pieces: Pieces, ground: Ground, name: str) -> tuple[Pieces, list[str]]:
    """Refuse strata that overlap; give a sliver to the first of the two by name."""
    names, shapes = list(pieces), list(pieces.values())
    tree = shapely.STRtree(shapes)
    first, second = tree.query(shapes, predicate="intersects")
    pairs = sorted((int(a), int(b)) for a, b in zip(first, second, strict=True) if a < b)
    shared = {(a, b): common(shapes[a], shapes[b]) for a, b in pairs}
    over = {pair: area_m2(wide) for pair, both in shared.items() if (wide := wide_parts(both))}
    total = sum(over.values())
    if total > SLIVER_SHARE * ground.boundary.area:
        raise_all(
            f"{name}: strata {names[a]!r} and {names[b]!r} overlap on {area_in_words(area)} "
            f"({_percent(area, ground)} of the site, limit 0.01 % in all); a place can be in one "
            "stratum only. Draw one border between them."
            for (a, b), area in sorted(over.items(), key=lambda item: -item[1])
        )
    for a, b in (pair for pair, both in shared.items() if both.area > 0):
        label = f"{name}: stratum {names[b]!r} without what {names[a]!r} covers"
        _, shapes[b] = parted(shapes[b], shapes[a], label)
    notes = []
    if total >= WORTH_SAYING_M2:
        notes.append(
            f"{name}: slivers where strata overlap, {area_in_words(total)} "
            f"({_percent(total, ground)}), went to the first stratum by name."
        )
    return dict(zip(names, shapes, strict=True)), notes


def _without_gaps(
    pieces: Pieces, ground: Ground, name: str
) -> tuple[Pieces, tuple[ExcludedArea, ...], list[str]]:
    """Refuse wide gaps, take narrow ones out of the population, give slivers to a neighbour."""
    shapes = list(pieces.values())
    _, gap = parted(ground.boundary, joined(shapes, name), f"{name}: strata and gaps")
    check_sum(
        ground.boundary.area,
        area_m2([gap, *shapes]),
        allowed=allowed_m2(ground.boundary, *shapes),
        label=f"{name}: strata and gaps of the site",
    )
    wide = wide_parts(gap)
    area = area_m2(wide)
    share = area / ground.boundary.area
    if share > GAP_LIMIT:
        largest = max(wide, key=lambda part: part.area)
        message = (
            f"{name}: strata leave {area_in_words(area)} ({_percent(area, ground)}) of the site "
            f"uncovered, limit 0.5 %; the largest gap has {area_in_words(largest.area)}. Draw the "
            "strata up to the boundary and to each other, or make the gap an exclusion with a "
            "reason."
        )
        raise FrameError(message)
    if share > SLIVER_SHARE:
        told = f"{name}: {area_in_words(area)} ({_percent(area, ground)}) lie in no stratum"
        left = ExcludedArea("gaps between strata", name, 0.0, area, shapely.MultiPolygon(wide))
        thin = [part for part in polygons_of(gap) if not wide_parts(part)]
        closed = _given_to_neighbours(pieces, thin)
        return closed, (left,), [f"{told} and were taken out of the population."]
    closed = _given_to_neighbours(pieces, polygons_of(gap))
    notes = []
    if area >= WORTH_SAYING_M2:
        notes.append(
            f"{name}: slivers in no stratum, {area_in_words(area)} ({_percent(area, ground)}), "
            "went to the nearest stratum."
        )
    return closed, (), notes


def _given_to_neighbours(pieces: Pieces, slivers: list[shapely.Polygon]) -> Pieces:
    """Add each sliver to the stratum that is nearest, the first by name among equals."""
    if not slivers:
        return pieces
    names, shapes = list(pieces), list(pieces.values())
    shares: dict[int, list[BaseGeometry]] = {}
    for sliver in slivers:
        distances = shapely.distance(shapes, sliver)
        shares.setdefault(int(distances.argmin()), []).append(sliver)
    for index, added in shares.items():
        shapes[index] = joined([shapes[index], *added], f"stratum {names[index]!r} with slivers")
    return dict(zip(names, shapes, strict=True))


def _percent(area: float, ground: Ground) -> str:
    return f"{significant(100 * area / ground.boundary.area, 2)} %"
