"""How the tables of a campaign file are shaped, read from the models themselves."""

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import date
from functools import cache
from types import UnionType
from typing import Any, Literal, Union, get_args, get_origin

from pydantic import BaseModel

from fieldplan.campaign.model import Campaign

PATH_KEYS = frozenset({"boundary", "strata", "list_file", "line_file", "file", "pilot"})
"""Keys whose value names a file, relative to the campaign file."""

Kind = Literal["table", "tables", "mapping", "texts", "date", "file", "value"]


@dataclass(frozen=True)
class Shape:
    """What stands behind one key: its kind, and the model of its tables where it has any."""

    kind: Kind
    model: type[BaseModel] | None = None


@cache
def shapes(model: type[BaseModel]) -> dict[str, Shape]:
    """Return the shape of each key of a table."""
    return {
        name: Shape("file") if name in PATH_KEYS else _shape(field.annotation)
        for name, field in model.model_fields.items()
    }


@cache
def key_homes() -> dict[str, list[str]]:
    """Map each key that is not a table to the headers of the tables that take it.

    Examples
    --------
    >>> key_homes()["seed"], key_homes()["pilot"]
    (['[draw]'], ['[[sigma]]', '[[field_reading]]'])
    """
    homes: dict[str, list[str]] = {}
    _note_homes(Campaign, "", homes)
    return homes


def _note_homes(model: type[BaseModel], above: str, homes: dict[str, list[str]]) -> None:
    """Note the keys of the tables below one table."""
    for name, shape in shapes(model).items():
        if shape.model is None:
            continue
        dotted = f"{above}{name}"
        header = f"[[{dotted}]]" if shape.kind == "tables" else f"[{dotted}]"
        for key, inner in shapes(shape.model).items():
            if inner.model is None:
                homes.setdefault(key, []).append(header)
        _note_homes(shape.model, f"{dotted}.", homes)


def _shape(annotation: Any) -> Shape:
    """Read one annotation."""
    origin, members = get_origin(annotation), get_args(annotation)
    if origin in (Union, UnionType):
        inner = [member for member in members if member is not type(None)]
        return _shape(inner[0]) if len(inner) == 1 else Shape("value")
    if origin is tuple:
        inner_shape = _shape(members[0])
        return Shape("tables", inner_shape.model) if inner_shape.model else Shape("texts")
    if origin is not None and isinstance(origin, type) and issubclass(origin, Mapping):
        return Shape("mapping")
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        return Shape("table", annotation)
    return Shape("date") if annotation is date else Shape("value")
