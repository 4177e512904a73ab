"""Bare numbers for ``fieldplan size``: the options, and one clear line for each that is wrong."""

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, TypeVar, cast

import click

from fieldplan.base.bounds import magnitude_fault, share_fault

if TYPE_CHECKING:
    from fieldplan.sizing.question import Part, Question, TargetKind
    from fieldplan.stats.allocation import Allocation

Command = TypeVar("Command")

ALLOCATIONS = ("proportional", "neyman")
TARGETS: "tuple[TargetKind, ...]" = ("standard_error", "half_width", "relative_half_width")


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
        metavar="proportional|neyman",
        help="How strata share n; proportional unless given.",
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


def _refuse_unknown_question(question: str) -> None:
    from difflib import get_close_matches

    from fieldplan.campaign.questions import MODULES

    known = ["mean", *MODULES]
    if question not in known:
        near = get_close_matches(question, known, n=1)
        hint = f"Did you mean {near[0]}?" if near else f"Takes {', '.join(known)}."
        message = f"--question {question!r} is not known. {hint}"
        raise BadOption(message)


@dataclass(frozen=True)
class BareNumbers:
    """What was typed; ``question`` checks that it belongs together."""

    sigma: float | None
    standard_error: float | None
    half_width: float | None
    relative_half_width: float | None
    mean: float | None
    confidence: float | None
    one_sided: bool
    population: int | None
    pilot_n: int | None
    assurance: float | None
    stratum: tuple[str, ...]
    allocation: str | None
    floor: int | None
    unit: str | None
    question: str
    with_keys: tuple[str, ...]
    level: float | None
    area: float | None
    layout: str | None
    skewness: float | None
    excess_kurtosis: float | None

    def check_question(self) -> None:
        """Refuse a question that nobody asks here, and targets of a mean beside another one."""
        self._check()
        if self.question == "mean":
            return
        _refuse_unknown_question(self.question)
        for kind in (*TARGETS, "assurance"):
            if getattr(self, kind) is not None:
                message = (
                    f"--{kind.replace('_', '-')} belongs to the question 'mean', not to "
                    f"'{self.question}'; leave it out."
                )
                raise BadOption(message)

    def refuse_idle(self) -> None:
        """Refuse what the plain question about a mean does not look at."""
        kind, _ = self.target()
        idle = {"level": self.level, "area": self.area, "layout": self.layout}
        if kind != "relative_half_width":
            idle["mean"] = self.mean
        for name, value in idle.items():
            if value is not None:
                shown = f"--{name} {value:g}" if isinstance(value, float) else f"--{name} {value}"
                purpose = "--relative-half-width, --question or --more"
                if name != "mean":
                    purpose = "--question or --more"
                message = f"{shown} serves {purpose} only; leave it out."
                raise BadOption(message)

    def parts(self) -> "tuple[Part, ...]":
        """Give the whole, or its strata; sigma is 0 where nobody typed one."""
        return self._strata() if self.stratum else (self._whole(),)

    def as_question(self) -> "Question":
        """Turn the options into the question that sizing answers."""
        from fieldplan.sizing.question import Question

        kind, value = self.target()
        parts = self.parts()
        if kind == "standard_error" and self.assurance and any(p.results is None for p in parts):
            message = (
                f"--assurance {self.assurance:g} needs to know how well sigma is known; add "
                + ("a third number to every --stratum." if self.stratum else "--pilot-n.")
            )
            raise BadOption(message)
        return Question(
            parts=parts,
            target=kind,
            value=value,
            mean=self.mean,
            assurance=self.assurance,
            confidence=self.confidence or 0.95,
            interval="upper-limit" if self.one_sided else "two-sided",
            allocation=cast("Allocation", self.allocation or "proportional"),
            floor=self.floor or 2,
            unit=self.unit or "",
        )

    def target(self) -> "tuple[TargetKind, float]":
        """Give the one target of a mean, and its number."""
        given = [(kind, getattr(self, kind)) for kind in TARGETS if getattr(self, kind)]
        if len(given) != 1:
            names = " and ".join(f"--{kind.replace('_', '-')}" for kind, _ in given)
            message = (
                f"{names} are both given; keep one target."
                if given
                else "no target: give --standard-error, --half-width or --relative-half-width."
            )
            raise BadOption(message)
        kind, value = given[0]
        if kind == "relative_half_width" and self.mean is None:
            message = f"--relative-half-width {value:g} is a share of the mean; add --mean."
            raise BadOption(message)
        return kind, value

    def _check(self) -> None:
        """Refuse options that do not go together."""
        if self.question == "mean" and self.sigma is None and not self.stratum:
            message = (
                "give a campaign file, or bare numbers such as --sigma 27.57 --standard-error 6."
            )
            raise BadOption(message)
        if self.allocation not in (None, *ALLOCATIONS):
            message = (
                f"--allocation {self.allocation!r} is unknown; write {' or '.join(ALLOCATIONS)}."
            )
            raise BadOption(message)
        alone = {"--sigma": self.sigma, "--population": self.population, "--pilot-n": self.pilot_n}
        shared = {"--allocation": self.allocation, "--floor": self.floor}
        for name, value in (alone if self.stratum else shared).items():
            if value is not None:
                shown = f"{name} {value:g}" if isinstance(value, float) else f"{name} {value}"
                message = (
                    f"{shown} speaks of one whole, and --stratum of its parts; give sigma "
                    "and the pilot's n inside each --stratum, a list in a campaign file."
                    if self.stratum
                    else f"{shown} shares n between strata; add a --stratum for each."
                )
                raise BadOption(message)

    def _whole(self) -> "Part":
        from fieldplan.sizing.question import Part

        return Part(
            "site",
            1.0,
            self.sigma or 0.0,
            results=self.pilot_n,
            population=self.population,
            mean=self.mean,
            skewness=self.skewness,
            excess_kurtosis=self.excess_kurtosis,
        )

    def _strata(self) -> "tuple[Part, ...]":
        from fieldplan.sizing.question import Part

        rows = [_stratum_numbers(text) for text in self.stratum]
        total = math.fsum(row[0] for row in rows)
        if abs(total - 1) > 0.0011:
            message = (
                f"the weights of --stratum sum to {total:.6g}; they are shares of the whole and "
                "must sum to 1."
            )
            raise BadOption(message)
        return tuple(
            Part(
                f"stratum {k}",
                weight / total,
                sigma,
                results=results,
                skewness=self.skewness,
                excess_kurtosis=self.excess_kurtosis,
            )
            for k, (weight, sigma, results) in enumerate(rows, start=1)
        )


def _stratum_numbers(text: str) -> tuple[float, float, int | None]:
    """Read ``WEIGHT,SIGMA`` or ``WEIGHT,SIGMA,PILOT_N``."""
    pieces = [piece.strip() for piece in text.split(",")]
    if len(pieces) not in (2, 3):
        message = (
            f"--stratum {text!r} has {len(pieces)} numbers; write WEIGHT,SIGMA such as 0.64,18, "
            "or WEIGHT,SIGMA,PILOT_N, with decimal points."
        )
        raise BadOption(message)
    name = f"--stratum {text!r}:"
    weight, sigma = number(pieces[0], name), number(pieces[1], name)
    results = number(pieces[2], name) if len(pieces) == 3 else None
    if not 0 < weight <= 1:
        message = f"--stratum {text!r}: weight {weight:g} must be above 0 and at most 1."
        raise BadOption(message)
    if sigma <= 0:
        message = f"--stratum {text!r}: sigma {sigma:g} must be above 0."
        raise BadOption(message)
    if results is not None and (results < 2 or results != int(results)):
        message = f"--stratum {text!r}: the pilot's n {results:g} must be whole, 2 or more."
        raise BadOption(message)
    return weight, sigma, None if results is None else int(results)
