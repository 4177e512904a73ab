"""From the coordinates of a file to degrees on WGS 84, with the accuracy of the step said out loud.

Without grids, PROJ quietly takes the next best datum shift. Here the one operation that is used
is fixed, its accuracy is read, and a coarse or unknown one is refused.
"""

import warnings
from dataclasses import dataclass
from typing import Any

import numpy as np
import pyproj
import pyproj.network
from numpy.typing import NDArray
from pyproj.aoi import AreaOfInterest
from pyproj.exceptions import CRSError, ProjError
from pyproj.transformer import TransformerGroup

from fieldplan.base.errors import FrameError
from fieldplan.frame.layer import Layer
from fieldplan.frame.projection import transformed

WGS84 = pyproj.CRS.from_epsg(4326)
COARSEST_ACCURACY_M = 5.0
"""Handheld receivers under open sky reach 3 to 5 m (common practice, no source)."""

_FAR_OUTSIDE_DEGREES = 10.0
_MARGIN_DEGREES = 0.01
_DEGREES_BY_RULE = ("GeoJSON", "KML", "GPX")
_TYPED = "frame.crs"


@dataclass(frozen=True)
class Shift:
    """The one operation from a file's coordinates to WGS 84.

    Parameters
    ----------
    crs : pyproj.CRS
        Of the file, two-dimensional.
    transformer : pyproj.Transformer
        Takes x, y and gives longitude, latitude.
    accuracy_m : float
        As PROJ's database states it; below 0 when it is not known.
    source : str
        One line for map and sheet: file, CRS, operation, accuracy.
    notes : tuple of str
        What somebody should look at.
    """

    crs: pyproj.CRS
    transformer: pyproj.Transformer
    accuracy_m: float
    source: str
    notes: tuple[str, ...] = ()

    def degrees(
        self, coordinates: NDArray[np.float64]
    ) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
        """Turn an (n, 2) array of x, y into arrays of latitude and longitude."""
        longitude, latitude = transformed(self.transformer, coordinates[:, 0], coordinates[:, 1])
        return np.asarray(latitude, dtype=float), np.asarray(longitude, dtype=float)


def shift_for(
    layer: Layer,
    coordinates: NDArray[np.float64],
    *,
    typed_crs: str | None,
    accepted_m: float | None,
    position_accuracy_m: float | None,
) -> Shift:
    """Choose, check and fix the operation from a layer's coordinates to WGS 84.

    Parameters
    ----------
    layer : Layer
        Whose CRS, or that typed in the campaign where it has none, is the start.
    coordinates : array of float, shape (n, 2)
        All x, y of the layer; finite.
    typed_crs : str or None
        ``crs`` of the frame table.
    accepted_m : float or None
        ``accept_shift_accuracy_m`` of the frame table.
    position_accuracy_m : float or None
        Of the receiver; a shift no worse than this is accepted too.

    Returns
    -------
    Shift

    Raises
    ------
    FrameError
        No CRS, one that is no map grid, numbers that cannot belong to it, or a shift that is
        coarse or unknown and not accepted in the campaign file.
    """
    crs, crs_from = _crs(layer, coordinates, typed_crs)
    _check_numbers(layer.name, crs, coordinates)
    transformer, better = _operation(layer.name, crs, coordinates)
    steps, accuracy = _datum_steps(transformer)
    shift = Shift(crs, transformer, accuracy, _source(layer, crs, crs_from, steps, accuracy))
    _check_place(layer.name, shift, coordinates)
    allowed = max(COARSEST_ACCURACY_M, position_accuracy_m or 0.0, accepted_m or 0.0)
    _check_accuracy(layer.name, shift, allowed, accepted_m, better)
    notes = _notes(layer.name, shift, position_accuracy_m)
    return Shift(crs, transformer, accuracy, shift.source, notes)


def crs_in_words(crs: pyproj.CRS) -> str:
    """Name a CRS with its code: ``EPSG:27700 (OSGB36 / British National Grid)``."""
    authority = crs.to_authority(min_confidence=90)
    code = f"{authority[0]}:{authority[1]}" if authority else ""
    name = crs.name if crs.name and crs.name != "unknown" else "a grid without a name"
    return f"{code} ({name})" if code else name


def parse_crs(text: str, where: str) -> pyproj.CRS:
    """Understand a CRS typed by a person, such as ``EPSG:25833``.

    Raises
    ------
    FrameError
        Nothing is known under that name.

    Examples
    --------
    >>> parse_crs("EPSG:25833", "frame.crs").name
    'ETRS89 / UTM zone 33N'
    """
    try:
        return pyproj.CRS.from_user_input(text)
    except (CRSError, ValueError, RecursionError) as fault:
        message = f"{where} is {text!r}, which is no known CRS; write a code such as 'EPSG:25833'."
        raise FrameError(message) from fault


def _crs(
    layer: Layer, coordinates: NDArray[np.float64], typed_crs: str | None
) -> tuple[pyproj.CRS, str]:
    """Find the CRS: the file's own, the typed one, or WGS 84 where the format promises it."""
    if layer.crs is not None:
        crs, crs_from = layer.crs, layer.crs_from
    elif layer.format in _DEGREES_BY_RULE and (typed_crs is None or _within_degrees(coordinates)):
        crs, crs_from = WGS84, f"the rule of {layer.format}"
    elif layer.crs_from and (typed_crs is None or parse_crs(typed_crs, _TYPED).is_projected):
        crs, crs_from = WGS84, f"{layer.crs_from}, taken as WGS 84"
    elif typed_crs is not None:
        crs, crs_from = parse_crs(typed_crs, _TYPED), "crs in the campaign file"
    else:
        x, y = coordinates[0]
        message = (
            f"{layer.name} does not say which CRS its coordinates ({x:g}, {y:g}) are in; "
            'write it as crs = "EPSG:…" in [[frame]], or export the file again with its CRS.'
        )
        raise FrameError(message)
    return _flat(crs, layer.name), crs_from


def _within_degrees(coordinates: NDArray[np.float64]) -> bool:
    x, y = np.abs(coordinates).max(axis=0)
    return bool(x <= 360 and y <= 90)


def _flat(crs: pyproj.CRS, name: str) -> pyproj.CRS:
    """Drop a vertical axis, and refuse what is neither degrees nor a map grid."""
    try:
        horizontal = next((part for part in crs.sub_crs_list if not part.is_vertical), crs)
        flat = horizontal.to_2d() if len(horizontal.axis_info) == 3 else horizontal
    except (CRSError, ProjError) as fault:
        message = f"{name}: its CRS cannot be used ({fault}); export it again in WGS 84."
        raise FrameError(message) from fault
    if not (flat.is_geographic or flat.is_projected):
        message = (
            f"{name}: its CRS {crs_in_words(crs)} is neither degrees nor a map grid; "
            "export it again in WGS 84."
        )
        raise FrameError(message)
    return flat


def _check_numbers(name: str, crs: pyproj.CRS, coordinates: NDArray[np.float64]) -> None:
    """Refuse numbers that cannot be coordinates of the CRS, and say what they look like."""
    x, y = coordinates[0]
    largest_x, largest_y = np.abs(coordinates).max(axis=0)
    seen = f"({x:.6g}, {y:.6g})"
    if crs.is_projected:
        extent = float(np.ptp(coordinates, axis=0).max())
        if largest_x <= 360 and largest_y <= 180 and (crs.area_of_use or extent < 5):
            unit = crs.axis_info[0].unit_name
            message = (
                f"{name} says {unit}s, {crs_in_words(crs)}, but its coordinates look like degrees "
                f"{seen}; set its CRS to EPSG:4326 or export it again."
            )
            raise FrameError(message)
        return
    if largest_y <= 90 and largest_x <= 360:
        return
    if largest_x <= 90 and largest_y <= 360:
        message = (
            f"{name}: latitude and longitude are the other way round: its latitudes run to "
            f"±{largest_y:.4g}°, and swapped they fit; longitude comes first in this format. "
            "Export it again with the axes swapped."
        )
        raise FrameError(message)
    message = (
        f"{name} says degrees, {crs_in_words(crs)}, but its coordinates {seen} look like metres or "
        'feet of a map grid; name that grid as crs = "EPSG:…" in [[frame]], or set it in the file.'
    )
    raise FrameError(message)


def _operation(
    name: str, crs: pyproj.CRS, coordinates: NDArray[np.float64]
) -> tuple[pyproj.Transformer, str]:
    """Fix the best operation that is at hand for this place, and name a better one that is not."""
    rough = _group(name, crs, None).transformers[0]
    probe = np.vstack([coordinates.min(axis=0), coordinates.max(axis=0), coordinates[0]])
    longitude, latitude = transformed(rough, probe[:, 0], probe[:, 1])
    area = None
    if np.isfinite(longitude).all() and np.isfinite(latitude).all():
        wrapped = (np.asarray(longitude) + 180) % 360 - 180
        if np.ptp(wrapped) < 180 and np.abs(latitude).max() <= 90:
            # PROJ before 9.5 finds nothing for an area without extent: a point, a straight line.
            area = AreaOfInterest(
                max(float(wrapped.min()) - _MARGIN_DEGREES, -180.0),
                max(float(np.min(latitude)) - _MARGIN_DEGREES, -90.0),
                min(float(wrapped.max()) + _MARGIN_DEGREES, 180.0),
                min(float(np.max(latitude)) + _MARGIN_DEGREES, 90.0),
            )
    group = _group(name, crs, area)
    better = [o for o in group.unavailable_operations if o.accuracy and o.accuracy > 0]
    words = f"{better[0].name}, {better[0].accuracy:g} m" if better else ""
    return group.transformers[0], words


def _group(name: str, crs: pyproj.CRS, area: Any) -> TransformerGroup:
    """List the operations to WGS 84, best first, without asking any network."""
    pyproj.network.set_network_enabled(active=False)  # type: ignore[attr-defined]
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore", UserWarning)
            group = TransformerGroup(crs, WGS84, always_xy=True, area_of_interest=area)
    except (ProjError, CRSError) as fault:
        message = f"{name}: no way from {crs_in_words(crs)} to WGS 84; export it again in WGS 84."
        raise FrameError(message) from fault
    if not group.transformers:
        message = f"{name}: no way at hand from {crs_in_words(crs)} to WGS 84; export it in WGS 84."
        raise FrameError(message)
    return group


def _check_place(name: str, shift: Shift, coordinates: NDArray[np.float64]) -> None:
    """Refuse coordinates that land far outside the part of the world their grid is made for."""
    area = shift.crs.area_of_use
    latitude, longitude = shift.degrees(coordinates)
    if not (np.isfinite(latitude).all() and np.isfinite(longitude).all()):
        message = (
            f"{name}: coordinates such as ({coordinates[0, 0]:g}, {coordinates[0, 1]:g}) have no "
            f"place on Earth in {crs_in_words(shift.crs)}; correct the CRS or the coordinates."
        )
        raise FrameError(message)
    if area is None or _outside_degrees(area, latitude, longitude) <= _FAR_OUTSIDE_DEGREES:
        return
    swapped = shift.degrees(coordinates[:, ::-1])
    lands = f"{latitude[0]:.2f}, {longitude[0]:.2f}"
    if np.isfinite(swapped).all() and _outside_degrees(area, *swapped) <= 1.0:
        message = (
            f"{name}: easting and northing are the other way round: as they stand they land at "
            f"latitude, longitude {lands}, swapped they fall where {crs_in_words(shift.crs)} is "
            "used. Export it again with the axes swapped."
        )
    else:
        message = (
            f"{name} says {crs_in_words(shift.crs)}, but its coordinates land at latitude, "
            f"longitude {lands}, far from where that grid is used ({area.name.rstrip('.')}); "
            "correct the CRS."
        )
    raise FrameError(message)


def _outside_degrees(
    area: Any, latitude: NDArray[np.float64], longitude: NDArray[np.float64]
) -> float:
    """How many degrees the farthest place lies outside an area of use."""
    south = np.maximum(area.south - latitude, latitude - area.north).max()
    width = (area.east - area.west) % 360 or 360.0
    from_west = (longitude - area.west) % 360
    beyond = np.minimum(from_west - width, 360 - from_west).max()
    return float(max(south, beyond, 0.0))


def _check_accuracy(
    name: str, shift: Shift, allowed: float, accepted_m: float | None, better: str
) -> None:
    """Refuse a shift whose accuracy is coarse, or that is not known and not accepted either."""
    unknown = shift.accuracy_m < 0
    if unknown and accepted_m is not None:
        return
    if not unknown and shift.accuracy_m <= allowed:
        return
    has = "of unknown accuracy" if unknown else f"good to {shift.accuracy_m:g} m only"
    wanted = "100" if unknown else f"{shift.accuracy_m:g}"
    grid = f" A better one ({better}) needs a grid that is not installed." if better else ""
    message = (
        f"{name}: the datum shift from {crs_in_words(shift.crs)} to WGS 84 that is at hand is {has}"
        f" (limit {allowed:g} m).{grid} Export the file in WGS 84 with a program that has the "
        f"grid, or write accept_shift_accuracy_m = {wanted} in [[frame]] to accept it."
    )
    raise FrameError(message)


def _datum_steps(transformer: pyproj.Transformer) -> tuple[str, float]:
    """Name the steps that change the datum, and add up their accuracies; -1 when one is unknown.

    A conversion (grid to degrees on one datum, order of axes) moves nothing. Some versions of PROJ
    report -1 for it, others 0, so the steps are asked and not the whole.
    """
    operations = transformer.operations or ()
    moving = [step for step in operations if step.type_name != "Conversion"]
    if operations and not moving:
        return "", 0.0
    if moving:
        known = all(step.accuracy >= 0 for step in moving)
        accuracy = sum(step.accuracy for step in moving) if known else -1.0
        return " + ".join(step.name for step in moving), float(accuracy)
    alone = -1.0 if transformer.accuracy is None else float(transformer.accuracy)
    return transformer.description, alone


def _source(layer: Layer, crs: pyproj.CRS, crs_from: str, steps: str, accuracy: float) -> str:
    """Write the line for map and sheet."""
    told = f", from {crs_from}" if crs_from else ""
    head = f"{layer.name} ({layer.format}): {crs_in_words(crs)}{told}"
    if accuracy == 0.0:
        return f"{head}; no datum shift needed"
    known = "of unknown accuracy" if accuracy < 0 else f"good to {accuracy:g} m"
    return f"{head}; datum shift {steps}, {known}"


def _notes(name: str, shift: Shift, position_accuracy_m: float | None) -> tuple[str, ...]:
    """Say where a shift is coarser than the receiver, or was accepted blindly."""
    if shift.accuracy_m < 0:
        return (
            f"{name}: its datum shift to WGS 84 is of unknown accuracy and was accepted in the "
            "campaign file; locations may lie off by as much.",
        )
    if position_accuracy_m and shift.accuracy_m > position_accuracy_m:
        return (
            f"{name}: its datum shift to WGS 84 is good to {shift.accuracy_m:g} m, "
            f"coarser than the receiver's {position_accuracy_m:g} m.",
        )
    return ()
