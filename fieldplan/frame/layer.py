"""What every format is read into: features with their values, and the CRS that the file names."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

import numpy as np
import pyproj
import shapely
from shapely.geometry.base import BaseGeometry

from fieldplan.base.errors import FrameError

LARGEST_VERTEX_COUNT = 2_000_000
SHOWN_PROBLEMS = 12


@dataclass(frozen=True)
class Feature:
    """One geometry as it stands in a file, with its values as text.

    Parameters
    ----------
    label : str
        How a person finds it: ``feature 3``, ``row 7``.
    geometry : BaseGeometry
        In the coordinates of the file, x (easting, longitude) before y; two dimensions.
    values : mapping of str to str
        Attribute texts, trimmed.
    """

    label: str
    geometry: BaseGeometry
    values: Mapping[str, str] = field(default_factory=dict)


@dataclass(frozen=True)
class Layer:
    """A file as read, before any question is asked of it.

    Parameters
    ----------
    name : str
        The file as typed in the campaign, for messages.
    format : str
        ``GeoJSON``, ``GeoPackage``, ``Shapefile``, ``KML``, ``GPX`` or ``CSV``.
    features : tuple of Feature
        Those that have a geometry.
    crs : pyproj.CRS or None
        As the file names it; None when it names none.
    crs_from : str
        Where the CRS comes from, in words.
    columns : tuple of str
        All value names, in file order.
    titles : tuple of str
        The same as they stand in the file, for messages and ``columns`` of the campaign file.
    notes : tuple of str
        What was skipped or put right while reading.
    """

    name: str
    format: str
    features: tuple[Feature, ...]
    crs: pyproj.CRS | None
    crs_from: str = ""
    columns: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()
    titles: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        """Take the value names as they are where the reader changed nothing about them."""
        if not self.titles:
            object.__setattr__(self, "titles", self.columns)


def check_layer(layer: Layer) -> Layer:
    """Refuse a layer that is empty, holds numbers that are no places, or is beyond all measure.

    Raises
    ------
    FrameError
        No geometry, NaN or infinite coordinates, or more vertices than two million.
    """
    if not layer.features:
        message = f"{layer.name} holds no geometry; export it again with at least one feature."
        raise FrameError(message)
    geometries = [feature.geometry for feature in layer.features]
    count = int(shapely.get_num_coordinates(geometries).sum())
    if count > LARGEST_VERTEX_COUNT:
        message = (
            f"{layer.name} has {count:,} vertices, more than {LARGEST_VERTEX_COUNT:,}; "
            "simplify it to about a metre and export it again."
        )
        raise FrameError(message)
    faults = [
        f"{layer.name} {feature.label}: a coordinate is not a finite number; correct it there."
        for feature in layer.features
        if not np.isfinite(shapely.get_coordinates(feature.geometry)).all()
    ]
    raise_all(faults)
    return layer


def raise_all(faults: Iterable[str]) -> None:
    """Raise one FrameError with all faults, the first dozen in full; do nothing without any."""
    listed = list(faults)
    if not listed:
        return
    shown = listed[:SHOWN_PROBLEMS]
    if len(listed) > SHOWN_PROBLEMS:
        shown.append(f"… and {len(listed) - SHOWN_PROBLEMS} more of the same file.")
    raise FrameError(*shown)


def as_text(value: object) -> str:
    """Turn an attribute value into trimmed text: ``3.0`` becomes ``3``, a missing one empty.

    Examples
    --------
    >>> as_text(" meadow "), as_text(3.0), as_text(None), as_text(float("nan")), as_text(0.5)
    ('meadow', '3', '', '', '0.5')
    """
    if value is None:
        return ""
    if isinstance(value, float | np.floating):
        number = float(value)
        if number != number:
            return ""
        return str(int(number)) if number.is_integer() and abs(number) < 1e15 else str(number)
    return " ".join(str(value).split())
