"""GeoPackage and Shapefile, read by GDAL from a copy in a passing folder.

GDAL chooses a reader by content and may leave side files beside its input. So the first bytes
decide before it is asked, it sees a copy, and only these two kinds ever reach it.
"""

import shutil
import tempfile
import warnings
from difflib import get_close_matches
from pathlib import Path
from typing import Any

import numpy as np
import pyogrio
import pyogrio.errors
import pyogrio.raw
import pyproj
import shapely
from pyproj.exceptions import CRSError
from shapely.errors import GEOSException

from fieldplan.base.errors import FrameError
from fieldplan.frame.layer import Feature, Layer, as_text

GEOPACKAGE_MAGIC = b"SQLite format 3\x00"
SHAPEFILE_MAGIC = b"\x00\x00\x27\x0a"

_FAULTS = (
    pyogrio.errors.DataSourceError,
    pyogrio.errors.DataLayerError,
    pyogrio.errors.FeatureError,
    pyogrio.errors.FieldError,
    pyogrio.errors.GeometryError,
    pyogrio.errors.CRSError,
    GEOSException,
    ArithmeticError,
    AttributeError,
    LookupError,
    MemoryError,
    OSError,
    RuntimeError,
    TypeError,
    ValueError,
)
_SHAPEFILE_PARTS = (".shp", ".shx", ".dbf", ".prj", ".cpg")
_KINDS = {
    "polygon": ("Polygon", "Surface"),
    "point": ("Point",),
    "line": ("LineString", "Curve"),
    "any": ("",),
}


def read_geopackage(path: Path, name: str, *, layer: str, wanted: str) -> Layer:
    """Read one layer of a GeoPackage.

    Parameters
    ----------
    path : Path
        The file; a write-ahead log beside it, left by an open editor, is read with it.
    name : str
        What messages call it.
    layer : str
        Its layer; empty for the only one of the wanted kind.
    wanted : str
        ``polygon``, ``point`` or ``any``.

    Returns
    -------
    Layer

    Raises
    ------
    FrameError
        Damaged, no such layer, or several that could be meant.
    """
    with tempfile.TemporaryDirectory(prefix="fieldplan-") as folder:
        copy = Path(folder) / "copy.gpkg"
        _copy(path, copy, name)
        for suffix in ("-wal", "-shm"):
            beside = path.with_name(path.name + suffix)
            if beside.is_file():
                _copy(beside, copy.with_name(copy.name + suffix), name)
        layers = _layers(copy, name)
        chosen = _choose(layers, name, layer, wanted)
        label = name if layer or len(layers) == 1 else f"{name}#{chosen}"
        return _read(copy, label, "GeoPackage", layer=chosen, notes=())


def read_shapefile(path: Path, name: str) -> Layer:
    """Read a shapefile with what lies beside it; a missing index is made again in the copy.

    Parameters
    ----------
    path : Path
        The ``.shp``.
    name : str
        What messages call it.

    Returns
    -------
    Layer
        Without a CRS when there is no ``.prj``.

    Raises
    ------
    FrameError
        Damaged.
    """
    notes: tuple[str, ...] = ()
    with tempfile.TemporaryDirectory(prefix="fieldplan-") as folder:
        copy = Path(folder) / "copy.shp"
        beside = {
            entry.suffix.lower(): entry
            for entry in sorted(path.parent.iterdir())
            if entry.stem.casefold() == path.stem.casefold()
        }
        _copy(path, copy, name)
        for suffix in _SHAPEFILE_PARTS[1:]:
            if suffix in beside:
                _copy(beside[suffix], copy.with_suffix(suffix), name)
        if ".shx" not in beside:
            notes = (f"{name} has no .shx beside it; the index was made again in a copy.",)
        pyogrio.set_gdal_config_options({"SHAPE_RESTORE_SHX": "YES"})
        try:
            return _read(copy, name, "Shapefile", layer=None, notes=notes)
        finally:
            pyogrio.set_gdal_config_options({"SHAPE_RESTORE_SHX": None})


def _copy(source: Path, target: Path, name: str) -> None:
    try:
        shutil.copyfile(source, target)
    except OSError as fault:
        message = f"{name} cannot be read ({source.name}: {fault.strerror or fault})."
        raise FrameError(message) from fault


def _layers(copy: Path, name: str) -> list[tuple[str, str]]:
    """List name and geometry kind of each layer that has a geometry."""
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            listed = pyogrio.list_layers(copy)
        return [(str(layer), str(kind)) for layer, kind in listed if kind is not None]
    except _FAULTS as fault:
        raise _damaged(name, fault) from fault


def _choose(layers: list[tuple[str, str]], name: str, typed: str, wanted: str) -> str:
    """Take the named layer, or the only one that can be meant."""
    names = [layer for layer, _ in layers]
    listed = ", ".join(names) or "none"
    if typed:
        if typed in names:
            return typed
        near = get_close_matches(typed, names, n=1)
        hint = f"did you mean {near[0]!r}?" if near else f"its layers: {listed}."
        message = f"{name}: there is no layer {typed!r}; {hint}"
        raise FrameError(message)
    fitting = [layer for layer, kind in layers if any(k in kind for k in _KINDS[wanted])]
    candidates = fitting or names
    if len(candidates) == 1:
        return candidates[0]
    if not candidates:
        message = f"{name} has no layer with a geometry; export it again."
        raise FrameError(message)
    message = (
        f"{name} has {len(candidates)} layers that could be meant ({', '.join(candidates)}); name "
        f"one behind the file, as in {name}#{candidates[0]}."
    )
    raise FrameError(message)


def _read(copy: Path, name: str, kind: str, *, layer: str | None, notes: tuple[str, ...]) -> Layer:
    """Read all features of a layer."""
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            meta, _, geometry, fields = pyogrio.raw.read(copy, layer=layer, force_2d=True)
        with np.errstate(all="ignore"):
            shapes = shapely.force_2d(shapely.from_wkb(np.asarray(geometry, dtype=object)))
    except _FAULTS as fault:
        raise _damaged(name, fault) from fault
    columns = tuple(str(column) for column in meta["fields"])
    features = tuple(
        Feature(
            f"feature {index + 1}",
            shape,
            {
                column: as_text(values[index])
                for column, values in zip(columns, fields, strict=True)
            },
        )
        for index, shape in enumerate(shapes)
        if shape is not None and not shape.is_empty
    )
    if len(features) < len(shapes):
        missing = len(shapes) - len(features)
        notes = (*notes, f"{name}: {missing} feature(s) without a geometry were skipped.")
    crs, crs_from = _crs(meta, name)
    return Layer(name, kind, features, crs, crs_from, columns, notes)


def _crs(meta: dict[str, Any], name: str) -> tuple[pyproj.CRS | None, str]:
    text = meta.get("crs")
    # What GeoPackage calls an undefined CRS reads as an engineering one without a unit.
    if not text or "undefined" in str(text)[:60].lower():
        return None, ""
    try:
        return pyproj.CRS.from_user_input(text), "the file itself"
    except (CRSError, ValueError, RecursionError) as fault:
        message = f"{name}: its CRS cannot be understood; export it again in WGS 84."
        raise FrameError(message) from fault


def _damaged(name: str, fault: Exception) -> FrameError:
    told = " ".join(str(fault).split()) or type(fault).__name__
    told = told if "fieldplan-" not in told else "it cannot be opened"
    return FrameError(f"{name} is damaged or incomplete ({told[:160]}); export it again.")
