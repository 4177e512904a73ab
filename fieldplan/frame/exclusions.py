"""What is taken out of the site: exclusions with their buffers, none counted twice."""

from dataclasses import replace

import shapely
from shapely.geometry.base import BaseGeometry

from fieldplan.base.errors import FrameError
from fieldplan.campaign.model import Exclusion
from fieldplan.frame.cutting import joined, parted
from fieldplan.frame.ground import FrameFiles, Ground, Overlay, distance_in_words
from fieldplan.frame.layer import Feature, Layer
from fieldplan.frame.model import ExcludedArea
from fieldplan.frame.places import ID_COLUMNS
from fieldplan.frame.plane import GRID_M, SitePlane, merged, polygons_of, widened

_FAR_M = 1000.0


def read_exclusions(
    files: FrameFiles, ground: Ground, taken: tuple[ExcludedArea, ...]
) -> tuple[tuple[ExcludedArea, ...], Ground]:
    """Read the exclusions in the order of the campaign file.

    Parameters
    ----------
    files : FrameFiles
        Where ``[[frame.exclusion]]`` stands.
    ground : Ground
        The site.
    taken : tuple of ExcludedArea
        What already left the population; ground under it is not counted again.

    Returns
    -------
    excluded : tuple of ExcludedArea
        ``taken`` and one more for each exclusion that touches the site. The polygon has its
        buffer and ends at the boundary; the area is what it took that was not yet taken.
    ground : Ground
        With notes.

    Raises
    ------
    FrameError
        Lines or points without a buffer, or a file that lies kilometres away.
    """
    excluded = list(taken)
    left = ground.boundary
    for area in taken:
        _, left = parted(left, area.geometry, f"{area.source}: the site without {area.reason}")
    for exclusion in files.table.exclusion:
        overlay = files.open(exclusion.file, wanted="any")
        shape, notes = excluded_shape(exclusion, overlay, ground)
        ground = ground.noting(
            *overlay.layer.notes, *overlay.shift.notes, *notes, source=overlay.shift.source
        )
        label = f"{exclusion.file}: the site without {exclusion.reason}"
        inside, _ = parted(ground.boundary, shape, label)
        if inside.area <= 0:
            ground = ground.noting(elsewhere(exclusion, overlay, ground, shape))
            continue
        took, left = parted(left, inside, label)
        excluded.append(
            ExcludedArea(
                exclusion.reason,
                exclusion.file,
                exclusion.buffer_m,
                float(took.area),
                merged(inside),
            )
        )
    return tuple(excluded), ground


def excluded_shape(
    exclusion: Exclusion, overlay: Overlay, ground: Ground
) -> tuple[BaseGeometry, list[str]]:
    """Give the ground that an exclusion covers, buffer included."""
    layer = overlay.layer
    outlines, others = _parted(layer, exclusion.buffer_m)
    if others and not outlines and exclusion.buffer_m == 0:
        message = (
            f"{layer.name} holds lines or points and no polygon, and they take no ground; give "
            "their exclusion a buffer_m, or draw a polygon."
        )
        raise FrameError(message)
    shapes: list[BaseGeometry] = []
    notes: list[str] = []
    if outlines:
        part = replace(overlay, layer=replace(layer, features=outlines))
        features, notes = ground.polygons(part)
        shapes = [joined([feature.geometry for feature in features], layer.name)]
    if exclusion.buffer_m > 0:
        plane = SitePlane(ground.projection, overlay.shift)
        shapes += [plane.place(feature.geometry) for feature in others]
    elif others:
        notes.append(
            f"{layer.name}: {len(others)} line(s) or point(s) take no ground without a buffer_m "
            "and were left out."
        )
    whole = shapely.union_all(shapes, grid_size=GRID_M)
    return widened(whole, exclusion.buffer_m), notes


def _parted(layer: Layer, buffer_m: float) -> tuple[tuple[Feature, ...], tuple[Feature, ...]]:
    """Part what is an outline from what takes ground by its buffer alone.

    Rows of a table are corners, unless they have ids and a buffer: then each is a place. A
    walked track is an outline, waypoints are places.
    """
    if layer.format == "CSV":
        named = any(column in layer.columns for column in ID_COLUMNS)
        each_a_place = named and buffer_m > 0 and "part" not in layer.columns
        return ((), layer.features) if each_a_place else (layer.features, ())
    if layer.format == "GPX":
        is_outline = [shapely.get_dimensions(f.geometry) == 1 for f in layer.features]
    else:
        is_outline = [bool(polygons_of(f.geometry)) for f in layer.features]
    paired = list(zip(layer.features, is_outline, strict=True))
    return (
        tuple(feature for feature, outline in paired if outline),
        tuple(feature for feature, outline in paired if not outline),
    )


def elsewhere(exclusion: Exclusion, overlay: Overlay, ground: Ground, shape: BaseGeometry) -> str:
    """Note an exclusion that just misses the site; refuse one that is kilometres away."""
    away = float(shapely.distance(ground.boundary, shape))
    if away > _FAR_M:
        ground.check_near(overlay, shape)
    return (
        f"{exclusion.file} ({exclusion.reason}) lies {distance_in_words(away)} outside the site "
        "and takes nothing from it."
    )
