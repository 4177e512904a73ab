"""Keys typed by ``--with``: each has one place, is typed once, and is read by something."""

import tomllib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import date, time
from typing import Any

import click

from fieldplan.cli.size_options import BadOption

OPTION_OF: dict[tuple[str, ...], str] = {
    ("sigma", "value"): "sigma",
    ("sigma", "from_results"): "pilot_n",
    ("sigma", "expected_mean"): "mean",
    ("sigma", "skewness"): "skewness",
    ("sigma", "excess_kurtosis"): "excess_kurtosis",
    ("analyte", "unit"): "unit",
    ("analyte", "action_level"): "level",
    ("design", "layout"): "layout",
    ("design", "allocation"): "allocation",
    ("design", "floor"): "floor",
    ("rules", "confidence"): "confidence",
    ("rules", "interval"): "one_sided",
    ("objective", "question"): "question",
    ("objective", "standard_error"): "standard_error",
    ("objective", "half_width"): "half_width",
    ("objective", "relative_half_width"): "relative_half_width",
    ("objective", "budget"): "budget",
    ("objective", "assurance"): "assurance",
}
"""Key of a campaign file, and the option that stands for it (``sigma``, not ``--sigma``)."""

READ = (
    "objective", "sigma", "design", "cost", "loss", "qc", "field_reading", "field", "analyte",
    "rules",
)  # fmt: skip
"""Tables of a campaign file that bare numbers look at."""

UNREAD = {
    "sigma": ("analyte", "stratum", "part", "pilot", "columns"),
    "objective": ("analyte", "design", "decides_n", "assurance_chosen_by"),
    "design": ("id",),
    "analyte": ("id",),
}
"""Keys of these tables that need a campaign file: they point to another table, or to a file."""


@dataclass(frozen=True)
class WithKey:
    """One ``--with``: where its value stands in a campaign file, and the value."""

    typed: str
    path: tuple[str, ...]
    text: str
    value: Any

    @property
    def name(self) -> str:
        """The key as it was typed, without its value."""
        return self.typed.partition("=")[0].strip()


def options_first(typed: Mapping[str, Any], options: Sequence[click.Parameter]) -> dict[str, Any]:
    """Take keys that an option stands for as that option; refuse what would be overruled.

    Parameters
    ----------
    typed : mapping
        The options of ``fieldplan size``.
    options : sequence of click.Parameter
        The command's own, which read and check a value.

    Returns
    -------
    dict
        The options, with the keys that they stand for taken out of ``with_keys``.

    Raises
    ------
    BadOption
        A key twice, a key that an option was typed for, no key and value, a date, what is not
        known yet, or a table that bare numbers do not look at.
    """
    found, left, seen = dict(typed), [], dict[tuple[str, ...], str]()
    by_name = {option.name: option for option in options}
    question = _question(typed)
    for text in typed["with_keys"]:
        key = read_key(text, question)
        if key.path in seen:
            message = f"--with {text!r}: {key.name} was typed before ({seen[key.path]}); keep one."
            raise BadOption(message)
        seen[key.path] = text
        option = OPTION_OF.get(key.path)
        if option is None or (option == "one_sided" and not typed["one_sided"]):
            left.append(text)
            continue
        _refuse_overruled(key, option, typed)
        parameter = by_name[option]
        value: Any = key.text.strip("\"'")
        context = click.get_current_context()
        found[option] = (
            parameter.callback(context, parameter, value) if parameter.callback else value
        )
    return found | {"with_keys": tuple(left)}


def _question(typed: Mapping[str, Any]) -> str:
    """Name the question, also where ``--with objective.question=`` asks it."""
    for text in typed["with_keys"]:
        key, _, value = text.partition("=")
        if key.strip() == "objective.question" and typed["question"] == "mean":
            return str(value.strip().strip("\"'"))
    return str(typed["question"])


def _refuse_overruled(key: WithKey, option: str, typed: Mapping[str, Any]) -> None:
    """Refuse a key beside the option, or the strata, that say the same."""
    given = typed[option]
    if given and not (option == "question" and given == "mean"):
        name = f"--{option.replace('_', '-')}"
        shown = f"{given:g}" if isinstance(given, float) else given
        shown = name if given is True else f"{name} {shown}"
        message = f"--with {key.typed!r} says again what {shown} says; keep one of them."
        raise BadOption(message)
    if key.path in (("sigma", "value"), ("sigma", "from_results")) and typed["stratum"]:
        message = f"--with {key.typed!r} says again what --stratum says; keep one of them."
        raise BadOption(message)


def read_key(text: str, question: str) -> WithKey:
    """Read ``key=value``: where the key stands in a campaign file, and its value.

    Parameters
    ----------
    text : str
    question : str
        A key without a table stands in the question's own.

    Examples
    --------
    >>> read_key("share=0.05", "all-clear").path
    ('objective', 'all_clear', 'share')
    >>> read_key("cost.per_location=28", "mean").value
    28
    """
    key, equals, value = (piece.strip() for piece in text.partition("="))
    if not (equals and value and all(step.strip() for step in key.split("."))):
        message = f"--with {text!r}: write a key and its value, such as share=0.05."
        raise BadOption(message)
    return WithKey(text, _path(key, text, question), value, _value(value, text))


def _path(key: str, text: str, question: str) -> tuple[str, ...]:
    """Find where a key stands."""
    from fieldplan.campaign.questions import MODULES, table_of

    path = tuple(step.strip() for step in key.split("."))
    tables = {table_of(name) for name in MODULES}
    if len(path) == 1 and question in MODULES:
        return ("objective", table_of(question), *path)
    if len(path) == 1:
        message = (
            f"--with {text!r}: of which table is {key}? Write the table before it, such as "
            "cost.per_location=28."
        )
        raise BadOption(message)
    if path[0] in tables:
        return ("objective", *path)
    if path[0] == "frame":
        message = (
            f"--with {text!r}: bare numbers have no place to look at. Type --population for a list "
            "or --area for an area, or name a campaign file."
        )
        raise BadOption(message)
    return path


def _value(value: str, text: str) -> Any:
    """Read a value as a campaign file would; a bare word is taken as text."""
    from fieldplan.campaign.screen import is_fill_in

    try:
        tables = tomllib.loads(f"value = {value}")
    except tomllib.TOMLDecodeError:
        tables = {}
    found = tables["value"] if set(tables) == {"value"} else value
    if is_fill_in(found):
        message = f"--with {text!r} is not known yet; type a value, or leave it out."
        raise BadOption(message)
    if _has_date(found):
        message = f"--with {text!r} is a date or a time, and none is read here; type a number."
        raise BadOption(message)
    return found


def _has_date(value: Any) -> bool:
    if isinstance(value, list):
        return any(_has_date(item) for item in value)
    if isinstance(value, dict):
        return any(_has_date(item) for item in value.values())
    return isinstance(value, date | time)


def place(data: dict[str, Any], text: str, question: str) -> None:
    """Put ``key=value`` where a campaign file has it.

    Parameters
    ----------
    data : dict
        The tables that the options make; changed.
    text : str
    question : str
    """
    key = read_key(text, question)
    path, sigmas = key.path, data["sigma"]
    if path[0] not in READ or path[1] in UNREAD.get(path[0], ()):
        _refuse_unread(key)
    if path[0] == "sigma" and path[1:] in (("sampling",), ("analysis",)):
        sigmas.append({"part": path[1], "value": key.value, "source": "typed"})
        return
    if path[0] == "sigma" and not sigmas:
        message = f"--with {text!r} speaks of a sigma that was not typed; add --sigma."
        raise BadOption(message)
    if path[0] == "sigma" and len(path) == 2 and len(sigmas) > 1:
        for entry in sigmas:  # typed once, for every stratum
            entry.setdefault(path[1], key.value)
        return
    here: Any = data
    for step in path[:-1]:
        if isinstance(here, dict):
            here = here.setdefault(step, [{}] if here is data and _repeats(step) else {})
        here = here[0] if isinstance(here, list) else here
    if not isinstance(here, dict):
        message = f"--with {text!r}: {'.'.join(path[:-1])} is no table."
        raise BadOption(message)
    here[path[-1]] = key.value


def _refuse_unread(key: WithKey) -> None:
    """Refuse a table that bare numbers do not look at, or that there is not."""
    from fieldplan.campaign.model import Campaign
    from fieldplan.campaign.shape import shapes

    if key.path[0] in shapes(Campaign):
        message = (
            f"--with {key.typed!r}: bare numbers do not look at {_unread(key)}; write it into a "
            "campaign file."
        )
        raise BadOption(message)
    message = f"--with {key.typed!r}: there is no table {key.path[0]}; there are {', '.join(READ)}."
    raise BadOption(message)


def _unread(key: WithKey) -> str:
    return ".".join(key.path[: 2 if key.path[0] in READ else 1])


def _repeats(table: str) -> bool:
    """Tell whether a campaign file may have several tables of a name."""
    from fieldplan.campaign.model import Campaign
    from fieldplan.campaign.shape import shapes

    shape = shapes(Campaign).get(table)
    return shape is not None and shape.kind == "tables"
