"""What all tables of the campaign file share: strictness, and the kinds of values."""

from typing import Annotated, Any

from pydantic import BaseModel, ConfigDict, Field

PositiveNumber = Annotated[float, Field(gt=0, allow_inf_nan=False)]
NonNegativeNumber = Annotated[float, Field(ge=0, allow_inf_nan=False)]
Share = Annotated[float, Field(ge=0, lt=1, allow_inf_nan=False)]
OpenShare = Annotated[float, Field(gt=0, lt=1, allow_inf_nan=False)]
Count = Annotated[int, Field(ge=1)]
Identifier = Annotated[str, Field(pattern=r"^[A-Za-z0-9][A-Za-z0-9_.-]{0,34}$")]
Words = Annotated[str, Field(min_length=1, max_length=2000)]


class Table(BaseModel):
    """What all tables of the campaign file share: strict types, no unknown keys, no changes."""

    model_config = ConfigDict(frozen=True, extra="forbid", strict=True)


def tables(data: dict[str, Any], name: str) -> list[dict[str, Any]]:
    """Return the tables of one name, as far as they are tables."""
    members = data.get(name)
    if isinstance(members, dict):
        return [members]
    if not isinstance(members, list):
        return []
    return [member for member in members if isinstance(member, dict)]
