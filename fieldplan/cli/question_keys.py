"""Which keys a question needs on the command line, with an example made from its own table."""

from collections.abc import Collection
from difflib import get_close_matches
from typing import TYPE_CHECKING, Any, get_args, get_origin

if TYPE_CHECKING:
    from pydantic.fields import FieldInfo

    from fieldplan.campaign.table import Table

WAYS: dict[str, tuple[tuple[str, ...], ...]] = {
    "all-clear": (("share",), ("units",)),
    "change": (
        ("difference", "alpha", "beta", "correlation"),
        ("half_width", "sigma_of_differences"),
    ),
    "share": (("expected", "margin"), ("compare_with", "expected", "alpha", "beta")),
}
"""Ways to ask a question whose table requires no key by itself; the first is the example."""


BESIDE: dict[str, tuple[tuple[str, str], ...]] = {
    "mean-and-level": (("sigma", "30"), ("level", "50")),
    "mean-and-background": (("sigma", "30"),),
    "change": (("sigma", "30"),),
    "smallest-patch": (("area", "10000"),),
    "which-exceed": (("population", "200"),),
}
"""Options without which a question has no answer, with an example."""


def needed_keys(question: str, given: Collection[str] = ()) -> str:
    """Say which keys a question needs, with an example.

    Parameters
    ----------
    question : str
    given : collection of str
        Options that were typed; they are not asked for again.

    Examples
    --------
    >>> needed_keys("all-clear")
    'all-clear needs --with share=0.05 (or units=…), with your numbers.'
    """
    first, *others = ways(question)
    options = [f"--{name} {value}" for name, value in BESIDE.get(question, ()) if name not in given]
    typed = [*options, *(f"--with {text}" for text in example_keys(question, first))]
    example = " ".join(typed)
    choice = "".join(f" (or {' '.join(f'{key}=…' for key in way)})" for way in others)
    return f"{question} needs {example}{choice}, with your numbers."


def ways(question: str) -> tuple[tuple[str, ...], ...]:
    """Give the sets of keys with which a question is whole.

    Examples
    --------
    >>> ways("upper-share")
    (('share',),)
    """
    if question in WAYS:
        return WAYS[question]
    fields = table_model(question).model_fields
    return (tuple(key for key, field in fields.items() if field.is_required()),)


def example_keys(question: str, keys: tuple[str, ...]) -> list[str]:
    """Write each key with a value that its table takes.

    Examples
    --------
    >>> example_keys("upper-share", ("share",))
    ['share=0.95']
    """
    fields = table_model(question).model_fields
    return [f"{key}={_example(fields[key])}" for key in keys]


def _example(field: "FieldInfo") -> str:
    """Take a word of a key that takes words, else a number within its bounds."""
    low, high = _bounds(field)
    for annotation in (field.annotation, *get_args(field.annotation)):
        if get_origin(annotation) is not None and str(annotation).startswith("typing.Literal"):
            return str(get_args(annotation)[0])
    if high > 1:
        return "20"
    return "0.05" if low < 0.05 and high == 1 else "0.95"


def _bounds(field: "FieldInfo") -> tuple[float, float]:
    """Read the bounds of a number from the model; also where the key may be left out."""
    found: list[Any] = list(field.metadata)
    for part in get_args(field.annotation):
        for note in getattr(part, "__metadata__", ()):
            found.extend(getattr(note, "metadata", [note]))
    lows = [getattr(note, name, None) for note in found for name in ("gt", "ge")]
    highs = [getattr(note, name, None) for note in found for name in ("lt", "le")]
    return (
        max((float(low) for low in lows if low is not None), default=0.0),
        min((float(high) for high in highs if high is not None), default=1e12),
    )


def table_model(question: str) -> "type[Table]":
    """Give the model of a question's own table."""
    from fieldplan.campaign.model import Objective
    from fieldplan.campaign.questions import table_of
    from fieldplan.campaign.shape import shapes

    model: Any = shapes(Objective)[table_of(question)].model
    return model  # type: ignore[no-any-return]


def misplaced(question: str, key: str) -> str:
    """Say which keys a question takes instead, and which one is probably meant.

    Parameters
    ----------
    question, key : str

    Examples
    --------
    >>> misplaced("share", "share").partition("? ")[0]
    'the question share has no such key; did you mean expected'
    """
    from fieldplan.campaign.questions import MODULES

    known = list(table_model(question).model_fields)
    near = get_close_matches(key, known, n=1, cutoff=0.6)
    said = MODULES[question].MEANING
    near += [name for name in known if key.rstrip("s") in said.get(name, "").replace("-", " ")]
    start = f"the question {question} has no such key"
    meant = f"; did you mean {near[0]}?" if near else "."
    return f"{start}{meant} It takes {', '.join(known)}."
