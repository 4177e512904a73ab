"""The site as drawn: its boundary in the plane, and the way other files are laid over it."""

from dataclasses import dataclass, field, replace
from pathlib import Path

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from fieldplan.base.errors import FrameError
from fieldplan.base.units import area_in_words, significant
from fieldplan.campaign.model import FrameTable
from fieldplan.frame.columns import ColumnMap
from fieldplan.frame.cutting import joined
from fieldplan.frame.datum import Shift, shift_for
from fieldplan.frame.files import read_layer
from fieldplan.frame.layer import Feature, Layer
from fieldplan.frame.model import SiteProjection
from fieldplan.frame.plane import REPAIR_LIMIT, SitePlane, check_extent, merged, repaired
from fieldplan.frame.projection import centre_of, to_site
from fieldplan.frame.rings import polygon_features


@dataclass(frozen=True)
class Overlay:
    """A file with its way to degrees: what it takes to lay it over the site."""

    layer: Layer
    shift: Shift

    def coordinates(self) -> NDArray[np.float64]:
        """All x, y of the file."""
        return _coordinates(self.layer)


@dataclass(frozen=True)
class FrameFiles:
    """Where the files of a frame are, and how far their datum shifts may be off.

    Parameters
    ----------
    folder : Path
        Where relative paths start.
    table : FrameTable
        ``[[frame]]`` of the campaign.
    position_accuracy_m : float or None
        Of the receiver that the crew carries.
    """

    folder: Path
    table: FrameTable
    position_accuracy_m: float | None = None

    def open(
        self, typed: str, *, wanted: str = "polygon", named: ColumnMap | None = None
    ) -> Overlay:
        """Read a file and fix its way to WGS 84."""
        layer = read_layer(self.folder, typed, wanted=wanted, named=named)
        shift = shift_for(
            layer,
            _coordinates(layer),
            typed_crs=self.table.crs,
            accepted_m=self.table.accept_shift_accuracy_m,
            position_accuracy_m=self.position_accuracy_m,
        )
        return Overlay(layer, shift)


@dataclass(frozen=True)
class Ground:
    """The gross site in its plane, with the lines that map and sheet print about it.

    Parameters
    ----------
    projection : SiteProjection
    boundary : BaseGeometry
        Valid polygon in site metres, coordinates on the millimetre grid.
    sources, notes : tuple of str
    """

    projection: SiteProjection
    boundary: BaseGeometry
    sources: tuple[str, ...] = ()
    notes: tuple[str, ...] = field(default=())

    def noting(self, *notes: str, source: str = "") -> "Ground":
        """Return the same ground with more notes and one more source."""
        sources = (*self.sources, source) if source and source not in self.sources else self.sources
        return replace(self, sources=sources, notes=(*self.notes, *notes))

    def polygons(
        self, overlay: Overlay, *, stratum_column: str = ""
    ) -> tuple[list[Feature], list[str]]:
        """Bring the polygons of a file into the plane, each valid."""
        features, notes = polygon_features(overlay.layer, stratum_column=stratum_column)
        return _placed(features, overlay, self.projection, notes)

    def check_near(self, overlay: Overlay, geometry: BaseGeometry) -> None:
        """Refuse a file that lies wholly outside the site, and say whether its axes are swapped."""
        if shapely.intersects(self.boundary, geometry):
            return
        name = overlay.layer.name
        away = float(shapely.distance(self.boundary, geometry))
        if self.swapped_inside(overlay):
            message = (
                f"{name} lies {distance_in_words(away)} from the boundary; its axes are the other "
                "way round: if swapped they fall inside your site. Export it with longitude "
                "(easting) first, or correct the column names."
            )
        else:
            message = (
                f"{name} lies {distance_in_words(away)} from the boundary and does not touch it; "
                "correct its CRS or coordinates, or name the right file."
            )
        raise FrameError(message)

    def swapped_inside(self, overlay: Overlay) -> bool:
        """Tell whether most coordinates of a file fall inside the site once x and y are swapped."""
        swapped = overlay.coordinates()[:, ::-1]
        if overlay.shift.crs.is_geographic and np.abs(swapped[:, 1]).max() > 90:
            return False
        latitude, longitude = overlay.shift.degrees(swapped)
        good = np.isfinite(latitude) & np.isfinite(longitude)
        if not good.any():
            return False
        easting, northing = to_site(self.projection, latitude[good], longitude[good])
        west, south, east, north = shapely.bounds(self.boundary)
        margin = 0.1 * max(east - west, north - south)
        inside = (abs(easting - (west + east) / 2) <= (east - west) / 2 + margin) & (
            abs(northing - (south + north) / 2) <= (north - south) / 2 + margin
        )
        return bool(inside.sum() > len(swapped) / 2)


def read_ground(files: FrameFiles) -> Ground:
    """Read the boundary and centre the site's plane on it.

    Raises
    ------
    FrameError
        No boundary is named, or it cannot serve as one.
    """
    typed = files.table.boundary
    if not typed:
        message = '[[frame]] has no boundary; name the file of the outline as boundary = "…".'
        raise FrameError(message)
    columns = files.table.columns if files.table.kind == "area" else {}
    overlay = files.open(typed, named=ColumnMap(columns, "[[frame]]"))
    features, notes = polygon_features(overlay.layer)
    source = np.vstack([shapely.get_coordinates(feature.geometry) for feature in features])
    projection = centre_of(*overlay.shift.degrees(source))
    placed, notes = _placed(features, overlay, projection, notes)
    notes += check_extent(
        np.vstack([shapely.get_coordinates(feature.geometry) for feature in placed]), typed
    )
    boundary = _united(placed, typed, notes)
    return Ground(
        projection,
        boundary,
        (overlay.shift.source,),
        (*overlay.layer.notes, *overlay.shift.notes, *notes),
    )


def points_of(
    projection: SiteProjection, latitude: NDArray[np.float64], longitude: NDArray[np.float64]
) -> NDArray[np.object_]:
    """Make points in the plane from arrays of degrees."""
    return np.asarray(shapely.points(*to_site(projection, latitude, longitude)), dtype=object)


def distance_in_words(metres: float) -> str:
    """Write a distance in metres, or in kilometres from one kilometre on.

    Examples
    --------
    >>> distance_in_words(412.3), distance_in_words(5_612_345.0)
    ('412 m', '5,610 km')
    """
    if metres < 1000:
        return f"{significant(metres)} m"
    return f"{significant(metres / 1000)} km"


def _coordinates(layer: Layer) -> NDArray[np.float64]:
    return shapely.get_coordinates([feature.geometry for feature in layer.features])


def _placed(
    features: list[Feature], overlay: Overlay, projection: SiteProjection, notes: list[str]
) -> tuple[list[Feature], list[str]]:
    """Bring features into the plane and mend what may be mended."""
    plane = SitePlane(projection, overlay.shift)
    placed = []
    said = list(notes)
    for feature in features:
        label = f"{overlay.layer.name} {feature.label}"
        geometry, repairs = repaired(plane.place(feature.geometry), projection, label)
        said.extend(repairs)
        placed.append(replace(feature, geometry=geometry))
    return placed, said


def _united(features: list[Feature], name: str, notes: list[str]) -> BaseGeometry:
    """Join the parts of a boundary, and say where they lie over each other."""
    shapes = [feature.geometry for feature in features]
    whole = shapes[0] if len(shapes) == 1 else joined(shapes, name)
    boundary = merged(whole)
    twice = float(sum(shape.area for shape in shapes) - boundary.area)
    if len(shapes) > 1 and twice > REPAIR_LIMIT * boundary.area:
        notes.append(f"{name}: its parts overlap on {area_in_words(twice)}, counted once.")
    if boundary.area < 1.0:
        message = f"{name} has an area of {boundary.area:.3f} m²; a site needs at least 1 m²."
        raise FrameError(message)
    return boundary
