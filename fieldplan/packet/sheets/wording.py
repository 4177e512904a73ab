"""What both setters say alike: numbers, lines of working, and text that no reader can trip on."""

import math
import re
from dataclasses import dataclass

from fieldplan.base.working import Quantity, Step

_UNPRINTABLE = re.compile("[\x00-\x08\x0b-\x1f\x7f-\x9f\u202a-\u202e\u2066-\u2069]")
"""Control characters (category Cc) but tab and line feed, and marks that turn the direction."""


@dataclass(frozen=True)
class StepLines:
    """One step of working in words: what it is, its formula, inputs, result and source."""

    meaning: str
    formula: str
    inputs: tuple[str, ...]
    result: str
    source: str


def printable(text: str) -> str:
    r"""Drop control and reordering characters, which no page may hold; keep all others.

    Parameters
    ----------
    text : str
        As typed by anyone.

    Returns
    -------
    str
        Lines end in ``\n``; tabs stay; lone surrogates become the replacement character.

    Examples
    --------
    >>> printable("pit\x00 A\r\n<b>")
    'pit A\n<b>'
    """
    whole = text.replace("\r\n", "\n").replace("\r", "\n")
    whole = whole.encode("utf-8", "replace").decode("utf-8")
    return _UNPRINTABLE.sub("", whole)


def number(value: float) -> str:
    """Write a number with up to six significant digits, without an exponent where it can be read.

    Parameters
    ----------
    value : float
        Any number; infinite degrees of freedom print as ``infinite``.

    Returns
    -------
    str
        A decimal point, no thousands mark, U+2212 as minus.

    Examples
    --------
    >>> number(16800.0), number(6.2), number(-0.0123456789), number(2e-9)
    ('16800', '6.2', '−0.0123457', '2e−09')
    """
    if math.isnan(value):
        return "not a number"
    if math.isinf(value):
        return "infinite" if value > 0 else "minus infinite"
    size = abs(value)
    if value == round(value) and size < 1e15:
        text = f"{value:.0f}"
    elif 1e-4 <= size < 1e15:
        decimals = max(0, 5 - math.floor(math.log10(size)))
        text = f"{value:.{decimals}f}"
        text = text.rstrip("0").rstrip(".") if "." in text else text
    else:
        text = f"{value:.6g}"
    return "0" if text == "-0" else text.replace("-", "−")


def with_unit(value: float, unit: str) -> str:
    """Write a number and its unit.

    Examples
    --------
    >>> with_unit(9.0, "mg/kg"), with_unit(0.5, "")
    ('9 mg/kg', '0.5')
    """
    return f"{number(value)} {unit}".strip()


def step_lines(step: Step) -> StepLines:
    """Put one step of arithmetic into the lines that every sheet prints.

    Examples
    --------
    >>> inputs = (Quantity("s", "standard deviation", 27.57), Quantity("SE", "target", 6.0))
    >>> step = Step("n", "results needed", "n = (s / SE)²", inputs, 21.114, 22, "results", "[1]")
    >>> step_lines(step).result
    'n = 21.114 → 22 results'
    """
    result = f"{step.symbol} = {number(step.unrounded)}"
    if number(step.unrounded) != number(step.rounded):
        result += f" → {number(step.rounded)}"
    return StepLines(
        meaning=step.meaning,
        formula=step.formula,
        inputs=tuple(_input_line(entry) for entry in step.inputs),
        result=f"{result} {step.unit}".strip(),
        source=step.source,
    )


def _input_line(entry: Quantity) -> str:
    """Write one input: symbol, value with unit, meaning."""
    line = f"{entry.symbol} = {with_unit(entry.value, entry.unit)}"
    return f"{line}: {entry.meaning}" if entry.meaning else line
