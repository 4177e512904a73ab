"""How the tables of a campaign file are shaped, read from the models themselves."""

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import date
from functools import cache
from types import UnionType
from typing import Any, Literal, Union, get_args, get_origin

from pydantic import BaseModel

PATH_KEYS = frozenset({"boundary", "strata", "list_file", "file", "pilot"})
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
