"""What is taken out of the site: exclusions with their buffers, none counted twice."""

import shapely
from shapely.geometry.base import BaseGeometry

from fieldplan.base.errors import FrameError
from fieldplan.campaign.model import Exclusion
from fieldplan.frame.ground import FrameFiles, Ground, Overlay, distance_in_words
from fieldplan.frame.model import ExcludedArea
from fieldplan.frame.plane import ARC_SEGMENTS, SitePlane, merged, polygons_of

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
        left = shapely.difference(left, area.geometry)
    for exclusion in files.table.exclusion:
        overlay = files.open(exclusion.file, wanted="any")
        shape, notes = _shape(exclusion, overlay, ground)
        ground = ground.noting(
            *overlay.layer.notes, *overlay.shift.notes, *notes, source=overlay.shift.source
        )
        inside = shapely.intersection(ground.boundary, shape)
        if inside.area <= 0:
            ground = ground.noting(_elsewhere(exclusion, overlay, ground, shape))
            continue
        remaining = shapely.difference(left, inside)
        took = float(left.area - remaining.area)
        left = remaining
        excluded.append(
            ExcludedArea(exclusion.reason, exclusion.file, exclusion.buffer_m, took, merged(inside))
        )
    return tuple(excluded), ground


def _shape(
    exclusion: Exclusion, overlay: Overlay, ground: Ground
) -> tuple[BaseGeometry, list[str]]:
    """Give the ground that an exclusion covers, buffer included."""
    layer = overlay.layer
    if layer.format == "CSV" and "part" not in layer.columns and exclusion.buffer_m == 0:
        features, notes = ground.polygons(overlay)
        return shapely.union_all([feature.geometry for feature in features]), notes
    areas = [feature for feature in layer.features if polygons_of(feature.geometry)]
    others = [feature for feature in layer.features if not polygons_of(feature.geometry)]
    if not areas and exclusion.buffer_m == 0 and layer.format not in ("CSV", "GPX"):
        message = (
            f"{layer.name} holds lines or points and no polygon, and they take no ground; give "
            "their exclusion a buffer_m, or draw a polygon."
        )
        raise FrameError(message)
    shapes: list[BaseGeometry] = []
    notes = []
    if areas or exclusion.buffer_m == 0:
        features, notes = ground.polygons(overlay)
        shapes = [feature.geometry for feature in features]
    if others and exclusion.buffer_m > 0:
        plane = SitePlane(ground.projection, overlay.shift)
        shapes += [plane.place(feature.geometry) for feature in others]
        notes = []
    whole = shapely.union_all(shapes)
    return shapely.buffer(whole, exclusion.buffer_m, quad_segs=ARC_SEGMENTS), notes


def _elsewhere(exclusion: Exclusion, overlay: Overlay, ground: Ground, shape: BaseGeometry) -> str:
    """Note an exclusion that just misses the site; refuse one that is kilometres away."""
    away = float(shapely.distance(ground.boundary, shape))
    if away > _FAR_M:
        ground.check_near(overlay, shape)
    return (
        f"{exclusion.file} ({exclusion.reason}) lies {distance_in_words(away)} outside the site "
        "and takes nothing from it."
    )
