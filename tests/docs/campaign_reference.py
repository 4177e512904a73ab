"""The tables of docs/campaign-file.md as they follow from the models, without their examples.

After a change of the models ``python -m tests.docs.campaign_reference`` prints the rows anew.
"""

from collections.abc import Iterator

from pydantic import BaseModel
from pydantic_core import PydanticUndefined

from fieldplan.campaign.meaning import MEANING
from fieldplan.campaign.model import Campaign
from fieldplan.campaign.problems import accepted, shown
from fieldplan.campaign.shape import shapes

FILLED_IN = {
    "analyte.id": "made from the name",
    "design.frame": "the only frame",
    "objective.design": "the only design",
    "objective.analyte": "the only analyte",
    "sigma.analyte": "the only analyte",
    "field_reading.analyte": "the only analyte",
}
"""What the reader fills in where there is one of a thing."""


def rows(model: type[BaseModel] = Campaign, above: str = "") -> Iterator[tuple[str, list[str]]]:
    """Yield (dotted name, [key, what it is, what it takes, unless given]) of every key."""
    for key, shape in shapes(model).items():
        name = f"{above}{key}"
        if shape.model is not None:
            yield from rows(shape.model, f"{name}.")
            continue
        default = _default(model, key, name)
        yield name, [f"`{key}`", MEANING[name], accepted(model.__name__, key), default]


def _default(model: type[BaseModel], key: str, name: str) -> str:
    """Say what holds when a key is left out."""
    if name in FILLED_IN:
        return FILLED_IN[name]
    field = model.model_fields[key]
    if field.default is PydanticUndefined:
        return "required"
    return f"`{shown(field.default)}`" if field.default not in (None, "", (), {}) else "—"


if __name__ == "__main__":
    for dotted, cells in rows():
        print(dotted, "|", " | ".join(cells))
