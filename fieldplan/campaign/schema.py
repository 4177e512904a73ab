"""The JSON Schema of a campaign file, which lets editors complete and explain its keys."""

import json
from importlib.resources import files
from pathlib import Path
from typing import Any

from pydantic import BaseModel

from fieldplan.campaign.facts import FACTS
from fieldplan.campaign.meaning import MEANING
from fieldplan.campaign.model import FILL_IN, Campaign
from fieldplan.campaign.questions import MODULES, table_of
from fieldplan.campaign.shape import shapes

TITLE = "fieldplan campaign file"
SCHEMA_NAME = "fieldplan.schema.json"


def campaign_schema() -> dict[str, Any]:
    """Generate the JSON Schema of a campaign file as its author types it.

    Returns
    -------
    dict
        Draft 2020-12. Dates are ISO texts, as TOML tools hand them on. Every value may also be
        ``"FILL IN"``, and what the reader fills in is not required.
    """
    schema = Campaign.model_json_schema()
    tables = schema.pop("$defs")
    names = _table_names(Campaign, "")
    for model_name, name in names.items():
        table = schema if model_name == Campaign.__name__ else tables[model_name]
        for key in ("title", "description"):
            table.pop(key, None)
        for key, entry in table["properties"].items():
            path = f"{name}.{key}".lstrip(".")
            table["properties"][key] = _described(entry, MEANING.get(path, ""))
        if name in MEANING:
            table["description"] = MEANING[name]
    _facts(tables["FieldTable"]["properties"]["facts"])
    # The reader makes the id of the only analyte from its name.
    tables["Analyte"]["required"].remove("id")
    # An assurance belongs to every target of a mean but a budget, which nothing can miss.
    tables["Objective"]["anyOf"] = [
        {"oneOf": [{"required": ["assurance"]}, {"required": ["budget"]}]},
        *({"required": [table_of(question)]} for question in MODULES),
    ]
    return {
        "$schema": "https://json-schema.org/draft/2020-12/schema",
        "title": TITLE,
        **schema,
        "$defs": tables,
    }


def schema_text() -> str:
    """Return the schema as shipped: JSON with two blanks of indent and a last line feed."""
    return (files("fieldplan.campaign") / "schema.json").read_text(encoding="utf-8")


def is_our_schema(path: Path) -> bool:
    """Tell whether a file is a schema that this or another version of fieldplan wrote."""
    try:
        return f'"title": "{TITLE}"' in path.read_text(encoding="utf-8")[:500]
    except (OSError, ValueError):
        return False


def generated_text() -> str:
    """Return the schema as it follows from the models; ``schema.json`` must equal it."""
    return json.dumps(campaign_schema(), indent=2, ensure_ascii=False) + "\n"


def _table_names(model: type[BaseModel], name: str) -> dict[str, str]:
    """Map the models of all tables to their dotted names."""
    found = {model.__name__: name}
    for key, shape in shapes(model).items():
        if shape.model is not None:
            found |= _table_names(shape.model, f"{name}.{key}".lstrip("."))
    return found


def _described(entry: dict[str, Any], meaning: str) -> dict[str, Any]:
    """Add what a key is; take out what TOML has not; let it be filled in later."""
    parts = [_plain(part) for part in entry.get("anyOf", [entry]) if part.get("type") != "null"]
    result: dict[str, Any]
    if len(parts) == 1 and "$ref" in parts[0]:
        result = {"allOf": parts}
    elif len(parts) == 1 and (_is_free_text(parts[0]) or "$ref" in parts[0].get("items", {})):
        result = parts[0]
    else:
        result = {"anyOf": [*parts, {"const": FILL_IN}]}
    default = entry.get("default")
    if isinstance(default, str | int | float | bool) and default != "":
        result["default"] = default
    if meaning:
        result["description"] = meaning
    return result


def _plain(part: dict[str, Any]) -> dict[str, Any]:
    """Drop what differs between versions of the generator and says nothing to a reader."""
    dropped = {"title", "default"} | ({"enum"} if "const" in part else set())
    return {key: value for key, value in sorted(part.items()) if key not in dropped}


def _is_free_text(part: dict[str, Any]) -> bool:
    return part.get("type") == "string" and not {"pattern", "format", "const", "enum"} & set(part)


def _facts(entry: dict[str, Any]) -> None:
    """Let editors complete the codes of facts."""
    for part in entry["anyOf"]:
        if part.get("type") == "array":
            part["items"] = {"anyOf": [{"const": k, "description": v} for k, v in FACTS.items()]}
