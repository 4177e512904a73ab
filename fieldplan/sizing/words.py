"""The answer in sentences, and under what condition it holds."""

import math
from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from fieldplan.sizing.question import Question


def figure(value: float, digits: int = 3) -> str:
    """Write a computed number with so many significant digits and no exponent.

    Examples
    --------
    >>> figure(8.7972), figure(27.5), figure(16800.4), figure(0.0004567), figure(9.999)
    ('8.80', '27.5', '16800', '0.000457', '10.0')
    """
    if value == 0 or not math.isfinite(value):
        return f"{value:g}"
    shown = float(f"{value:.{digits}g}")
    return f"{shown:.{max(0, digits - 1 - math.floor(math.log10(abs(shown))))}f}"


def typed(value: float) -> str:
    """Write a number as a person typed it.

    Examples
    --------
    >>> typed(9.0), typed(27.57), typed(4250.0)
    ('9', '27.57', '4250')
    """
    return f"{value:.10g}"


def percent(share: float) -> str:
    """Write a computed share as a whole percentage, with one decimal near the ends.

    Examples
    --------
    >>> percent(0.459), percent(0.95), percent(0.9987), percent(0.004)
    ('46 %', '95 %', '99.9 %', '0.4 %')
    """
    if share >= 0.9995:
        return "over 99.9 %" if share < 1 else "100 %"
    return f"{100 * share:.0f} %" if 0.015 < share < 0.985 else f"{100 * share:.1f} %"


def typed_percent(share: float) -> str:
    """Write a share that a person typed, with all its digits.

    Examples
    --------
    >>> typed_percent(0.975), typed_percent(0.9)
    ('97.5 %', '90 %')
    """
    return f"{typed(100 * share)} %"


def counted(number: int, word: str) -> str:
    """Write a count with its noun.

    Examples
    --------
    >>> counted(1, "location"), counted(22, "location")
    ('1 location', '22 locations')
    """
    return f"{number} {word}" + ("" if number == 1 else "s")


def targeted_words(question: "Question", before: str) -> str:
    """Name the targeted places that the cost holds, behind ``before``; empty without any.

    Examples
    --------
    >>> from fieldplan.sizing.question import Part, Question
    >>> asked = Question((Part("site", 1.0, 20.0),), "standard_error", 9.0, targeted=3)
    >>> targeted_words(asked, " and ")
    ' and 3 targeted places'
    """
    return before + counted(question.targeted, "targeted place") if question.targeted else ""


def listed(items: list[str]) -> str:
    """Join words as a sentence does.

    Examples
    --------
    >>> listed(["5 in a", "4 in b", "6 in c"])
    '5 in a, 4 in b and 6 in c'
    """
    return items[0] if len(items) == 1 else ", ".join(items[:-1]) + " and " + items[-1]


FEW = 8
"""Up to so many strata a sentence names every one; of more it names the largest three."""


def in_strata(counts: Sequence[int], names: Sequence[str]) -> str:
    """Say how many lie in each stratum; of many strata name the largest three and sum up the rest.

    Examples
    --------
    >>> in_strata([5, 4, 6], ["a", "b", "c"])
    '5 in a, 4 in b and 6 in c'
    >>> in_strata([2, 9, 2, 3, 4, 2, 2, 2, 2], "abcdefghi")
    '9 in b, 4 in e, 3 in d and 12 in 6 others'
    """
    pairs = list(zip(counts, names, strict=True))
    if len(pairs) <= FEW:
        return listed([f"{n} in {name}" for n, name in pairs])
    pairs.sort(key=lambda pair: -pair[0])
    rest = sum(n for n, _ in pairs[3:])
    shown = [f"{n} in {name}" for n, name in pairs[:3]]
    return listed([*shown, f"{rest} in {len(pairs) - 3} others"])


def named(names: Sequence[str]) -> str:
    """Name a few, or the first three of many and count the rest.

    Examples
    --------
    >>> named(["a", "b"]), named("abcdefghijk")
    ('a and b', 'a, b, c and 8 others')
    """
    if len(names) <= FEW:
        return listed(list(names))
    return listed([*names[:3], f"{len(names) - 3} others"])


def with_unit(value: str, unit: str) -> str:
    """Set a number before its unit, if it has one."""
    return f"{value} {unit}" if unit else value


def target_words(question: "Question") -> str:
    """Say the target as the sheet prints it.

    Examples
    --------
    >>> from fieldplan.sizing.question import Part, Question
    >>> target_words(Question((Part("site", 1.0, 20.0),), "standard_error", 9.0, unit="mg/kg"))
    'standard error of the mean ≤ 9 mg/kg'
    """
    if question.also:
        others = [f"{target_words(other)} for {other.analyte}" for other in question.also]
        own = target_words(replace(question, also=()))
        return listed([f"{own} for {question.analyte}", *others])
    if question.target == "standard_error":
        return f"standard error of the mean ≤ {with_unit(typed(question.value), question.unit)}"
    if question.target == "budget":
        currency = question.prices.currency if question.prices else ""
        return f"the smallest standard error that {typed(question.value)} {currency} buys"
    width = question.target_half_width or 0.0
    reach = with_unit(typed(float(f"{width:.4g}")), question.unit)
    if question.target == "relative_half_width":
        mean = with_unit(typed(float(f"{question.mean or 0.0:.4g}")), question.unit)
        reach += f" ({typed_percent(question.value)} of an expected mean of {mean})"
    share = typed_percent(question.confidence)
    if question.interval == "two-sided":
        return f"half-width of the two-sided {share} interval ≤ {reach}"
    side = "above" if question.interval == "upper-limit" else "below"
    name = question.interval.replace("-", " ")
    return f"{share} {name} no more than {reach} {side} the mean"
