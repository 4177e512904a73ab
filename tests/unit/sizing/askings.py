"""Questions made by hand, for tests of what is asked and what stands beside it."""

from typing import Any

from fieldplan.cli.bare_numbers import asked_of_numbers
from fieldplan.cli.size import command
from fieldplan.sizing.asked.model import Asked

NAMES = {
    "results": "pilot_n",
    "keys": "with_keys",
}


def asked_numbers(**typed: Any) -> Asked:
    """Give what bare numbers ask; names as of the options, with underscores."""
    values: dict[str, Any] = {
        parameter.name: () if parameter.multiple else False if parameter.is_flag else None
        for parameter in command.params
        if hasattr(parameter, "is_flag") and parameter.name is not None
    }
    for name in ("more", "as_json", "explain", "quiet"):
        values.pop(name)
    values["question"] = "mean"
    return asked_of_numbers(values | {NAMES.get(k, k): v for k, v in typed.items()})


def asked_mean(**typed: Any) -> Asked:
    """Give what a mean with a target asks."""
    return asked_numbers(**typed)
