"""Bare numbers for ``fieldplan size``: the options, and one clear line for each that is wrong."""

import math
from collections.abc import Callable, Mapping
from typing import TYPE_CHECKING, Any, TypeVar

import click

from fieldplan.base.bounds import magnitude_fault, share_fault

if TYPE_CHECKING:
    pass

Command = TypeVar("Command")


class BadOption(click.ClickException):
    """An option is typed wrong: one line, exit code 2."""

    exit_code = 2

    def show(self, file: Any = None) -> None:
        """Print the line without a usage block."""
        click.echo(self.format_message(), file=file, err=True)


def number(text: str, name: str) -> float:
    """Read one typed number; say what is wrong with it.

    Parameters
    ----------
    text : str
    name : str
        The option, for the message.

    Examples
    --------
    >>> number("27.57", "--sigma")
    27.57
    """
    try:
        value = float(text)
    except ValueError:
        value = math.nan
    if math.isfinite(value):
        return _of_bearable_size(value, text, name)
    whole, comma, digits = text.partition(",")
    if comma and whole.strip().lstrip("-").isdigit() and digits.strip().isdigit():
        message = f"{name} {text!r} has a decimal comma; write {whole}.{digits}."
    else:
        message = f"{name} {text!r} is no number; write one such as 27.57."
    raise BadOption(message)


def _refuse_near_one(value: float, text: str, name: str) -> None:
    """Refuse a share whose complement is lost in rounding."""
    fault = share_fault(value)
    if fault:
        message = f"{name} {text} is {fault}; take a smaller share."
        raise BadOption(message)


def _of_bearable_size(value: float, text: str, name: str) -> float:
    """Refuse a number whose square or ratio would leave what a computer can hold."""
    fault = magnitude_fault(value)
    if fault:
        message = f"{name} {text} is {fault}; check it and its unit."
        raise BadOption(message)
    return value


Callback = Callable[[click.Context, click.Parameter, str | None], Any]


def _number_between(above: float, below: float = math.inf, hint: str = "") -> Callback:
    """Make a callback that reads a number inside open bounds."""

    def read(_context: click.Context, option: click.Parameter, text: str | None) -> float | None:
        if text is None:
            return None
        value = number(text, option.opts[0])
        if below == 1:
            _refuse_near_one(value, text, option.opts[0])
        if above < value < below:
            return value
        bounds = f"above {above:g}" + (f" and below {below:g}" if math.isfinite(below) else "")
        message = f"{option.opts[0]} {text} is out of bounds; it must be {bounds}"
        raise BadOption(f"{message}; {hint}." if hint else f"{message}.")

    return read


def _count_of_two_or_more(
    _context: click.Context, option: click.Parameter, text: str | None
) -> int | None:
    """Read a whole number from 2 up."""
    if text is None:
        return None
    digits = text.strip()
    if digits.isascii() and digits.isdecimal() and len(digits) < 13 and int(digits) >= 2:
        return int(digits)
    message = f"{option.opts[0]} {text!r} must be a whole number, 2 or more."
    raise BadOption(message)


def _assurance(_context: click.Context, option: click.Parameter, text: str | None) -> float | None:
    """Read a share such as 0.80; the word plain asks for none."""
    if text is None or text.strip().lower() == "plain":
        return None
    value = number(text, option.opts[0])
    _refuse_near_one(value, text, option.opts[0])
    if 0.5 <= value < 1:
        return value
    message = (
        f"{option.opts[0]} {text} is out of bounds; it must be at least 0.5 and below 1 "
        '(0.80 means 80 %), or the word "plain".'
    )
    raise BadOption(message)


def _typed_number(name: str, callback: Callback, text: str) -> Any:
    return click.option(name, metavar="NUMBER", callback=callback, help=text)


_POSITIVE = _number_between(0)
_OPTIONS = (
    _typed_number("--sigma", _POSITIVE, "Standard deviation of single results."),
    _typed_number("--standard-error", _POSITIVE, "Target: standard error of the mean."),
    _typed_number("--half-width", _POSITIVE, "Target: how far the interval may reach."),
    _typed_number(
        "--relative-half-width",
        _number_between(0, 10, "0.20 means 20 % of the mean"),
        "Target: the same as a share of the mean, e.g. 0.20.",
    ),
    _typed_number("--budget", _POSITIVE, "Target: the money that may be spent; needs prices."),
    _typed_number("--mean", _POSITIVE, "Expected mean, for a relative half-width."),
    _typed_number(
        "--confidence",
        _number_between(0.5, 1, "0.95 means 95 %"),
        "Confidence of the interval; 0.95 unless given.",
    ),
    click.option("--one-sided", is_flag=True, help="An upper limit instead of an interval."),
    _typed_number("--population", _count_of_two_or_more, "Units in the list, where it is one."),
    _typed_number("--pilot-n", _count_of_two_or_more, "Number of results behind sigma."),
    _typed_number("--assurance", _assurance, "Chance that n shall be enough, e.g. 0.80; or plain."),
    click.option(
        "--stratum",
        multiple=True,
        metavar="WEIGHT,SIGMA[,PILOT_N]",
        help="One stratum; repeat for each.",
    ),
    click.option(
        "--allocation",
        metavar="NAME",
        help="How strata share n: proportional (unless given), neyman, cost-optimal or "
        "equal-precision.",
    ),
    _typed_number(
        "--floor", _count_of_two_or_more, "Fewest results in any stratum; 2 unless given."
    ),
    click.option("--unit", help="The laboratory's unit, for the sentences."),
    click.option(
        "--question",
        default="mean",
        metavar="NAME",
        help="What is asked, as in a campaign file; 'mean' unless given.",
    ),
    click.option(
        "--with",
        "with_keys",
        multiple=True,
        metavar="KEY=VALUE",
        help="A key of the question's table, or table.key of a campaign file; repeat for each.",
    ),
    _typed_number("--level", _POSITIVE, "Action level."),
    _typed_number("--area", _POSITIVE, "Area of the population in m²."),
    click.option("--layout", metavar="NAME", help="Layout of the design; random unless given."),
    _typed_number("--skewness", _number_between(-100, 100), "Skewness of single results."),
    _typed_number(
        "--excess-kurtosis",
        _number_between(-1e-12, 1000, "6 for an exponential shape"),
        "Excess kurtosis of single results, where heavy tails are declared.",
    ),
)


def bare_number_options(command: Command) -> Command:
    """Add all options of bare numbers to a command."""
    for option in reversed(_OPTIONS):
        command = option(command)
    return command


def given_names(typed: Mapping[str, Any]) -> list[str]:
    """Name the options that were typed, as they are typed."""
    given = {name: value for name, value in typed.items() if value and value != "mean"}
    return [f"--{name.removesuffix('_keys').replace('_', '-')}" for name in given]
