"""Shapes that the site may have by what is known of it, and what the interval is worth then."""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Part, Question
from fieldplan.stats.mean_expansion import expanded_misses
from fieldplan.stats.mean_shape import Shape, fitting_shapes, n_by_skewness
from fieldplan.stats.mean_simulation import FEWEST, TOO_MANY, Sampled, simulate_coverage
from fieldplan.stats.shape import Family, skewness_of_mean, t_misses

if TYPE_CHECKING:
    from fieldplan.lab.model import StratumSpread
QUICK_DRAWS = 150_000
"""Values drawn for one shape that the table does not hold, which takes about 4 ms."""

TABLE_ENDS = 36.0
"""Skewness beyond which the table of simulated t statistics holds nothing."""

LARGE, LONG = 10, 1_000
"""A list of so many times the results, or of so many units, is taken as a large population."""

AS_SKEWED = " of the skewness seen or typed"

MOST_CONFIDENCE = 0.99
"""The table of simulated t statistics ends there."""


@dataclass(frozen=True)
class SiteShape:
    """One shape for every part of a site, all of one family.

    Parameters
    ----------
    name : str
        The family, e.g. ``lognormal`` or ``gamma with 20 % zeros``.
    parts : tuple of Shape
        In the order of the question's parts.
    """

    name: str
    parts: tuple[Shape, ...]

    @property
    def by_skewness(self) -> bool:
        """Whether a skewness seen or typed made it, not the coefficient of variation."""
        return AS_SKEWED in self.name

    @property
    def zeros(self) -> bool:
        """Whether a part holds a lump of zeros."""
        return any(part.zeros > 0 for part in self.parts)


@dataclass(frozen=True)
class Misses:
    """How often the interval misses: the true mean above it, and below it.

    ``standard_error`` is that of simulating it, of their sum.
    """

    too_low: float
    too_high: float
    standard_error: float

    @property
    def held(self) -> float:
        """Share of campaigns whose interval holds the mean."""
        return 1 - self.too_low - self.too_high


def site_shapes(asked: Asked) -> tuple[SiteShape, ...]:
    """List shapes that fit what is known of the site.

    Parameters
    ----------
    asked : Asked

    Returns
    -------
    tuple of SiteShape
        Gamma and lognormal by the coefficient of variation of each part; with zeros or
        non-detects in the pilot also both above a lump at 0; with a skewness beyond those, both
        of that skewness. Empty where a part has neither a mean nor a skewness.
    """
    question = asked.question
    entries = {entry.stratum: entry for entry in asked.entries}
    lists = [_part_shapes(question, part, entries.get(part.name)) for part in question.parts]
    if not lists or not all(lists) or question.confidence > MOST_CONFIDENCE:
        return ()
    names = dict.fromkeys(name for shapes in lists for name in shapes)
    found = []
    for name in names:
        family = name.split()[0]
        parts = tuple(shapes.get(name, shapes[family]) for shapes in lists)
        found.append(SiteShape(_named(name, parts), parts))
    return tuple(found)


def _part_shapes(question: Question, part: Part, entry: "StratumSpread | None") -> dict[str, Shape]:
    """Give the shapes of one part by family, and by family with what sets it apart."""
    mean = part_mean(question, part)
    if not part.sigma > 0:
        return {}
    if not mean > 0:
        lean = part.skewness or 0.0
        by_lean = fitting_shapes(abs(lean) / 6 or 1.0, skewness=lean or None)[2:]
        return {shape.family: shape for shape in by_lean}
    found = {}
    for shape in fitting_shapes(part.sigma / mean, skewness=part.skewness):
        name = f"{shape.family} by skewness" if shape.family in found else shape.family
        found[name] = shape
    zeros, cv = _zeros(entry)
    if 0 < zeros < 1:
        lumps = [shape for shape in fitting_shapes(cv, zeros=zeros) if shape.zeros]
        found |= {f"{shape.family} with zeros": shape for shape in lumps}
    return found


def part_mean(question: Question, part: Part) -> float:
    """Give the mean to expect in a part; 0 where nobody said."""
    whole = question.mean if len(question.parts) == 1 else None
    return part.mean or whole or 0.0


def pilot_values(entry: "StratumSpread") -> tuple[list[float], list[float]]:
    """Split a pilot into detects, and the limits of its non-detects, which stand at half."""
    detected = entry.detected or (True,) * len(entry.values)
    pairs = list(zip(entry.values, detected, strict=True))
    return [v for v, seen in pairs if seen], [2 * v for v, seen in pairs if not seen]


def _zeros(entry: "StratumSpread | None") -> tuple[float, float]:
    """Give the share of zeros and non-detects of a pilot, and its CV with non-detects at 0."""
    if entry is None or not entry.values:
        return 0.0, 0.0
    detected = entry.detected or (True,) * len(entry.values)
    values = [v if seen else 0.0 for v, seen in zip(entry.values, detected, strict=True)]
    mean = math.fsum(values) / len(values)
    lump = sum(value == 0 for value in values) / len(values)
    if not mean > 0 or len(values) < 2:
        return 0.0, 0.0
    spread = math.sqrt(math.fsum((v - mean) ** 2 for v in values) / (len(values) - 1))
    return lump, spread / mean


def _named(name: str, parts: Sequence[Shape]) -> str:
    if name.endswith("by skewness"):
        side = ", long tail on the low side" if any(part.mirrored for part in parts) else ""
        return f"{name.split()[0]}{AS_SKEWED}{side}"
    if name.endswith("zeros"):
        family = name.split()[0]
        shares = [part.zeros for part in parts if part.zeros]
        low, high = (f"{100 * end:.0f}" for end in (min(shares), max(shares)))
        return f"{family} with {low if low == high else f'{low} to {high}'} % zeros"
    return name


def misses(question: Question, shape: SiteShape, counts: Sequence[int]) -> Misses:
    """Say how often the planned interval would miss the mean of a site of this shape.

    Parameters
    ----------
    question : Question
    shape : SiteShape
    counts : sequence of int
        Results by stratum, each at least 2.

    Returns
    -------
    Misses

    Notes
    -----
    Without zeros from the table of simulated t statistics (200,000 samples a cell), strata by the
    single sample whose mean leans as much; with zeros, for short lists and beyond the table,
    simulated on the spot; above 2,000 results by the Edgeworth expansion.
    """
    if question.widened:
        return _by_widened(question, shape, counts)
    lean_most = max(abs(part.skewness) for part in shape.parts)
    if shape.zeros and sum(counts) > TOO_MANY and len(counts) == 1:
        return _expanded(question, shape.parts[0], counts[0])
    if shape.zeros or short_list(question, counts) or lean_most > TABLE_ENDS:
        parts = sampled(question, shape, counts)
        found = simulate_coverage(
            parts,
            confidence=question.confidence,
            kind=question.interval,
            campaigns=max(FEWEST, min(10_000, QUICK_DRAWS // sum(part.drawn for part in parts))),
        )
        return Misses(found.too_low, found.too_high, found.standard_error)
    n, lean = equivalent(question, shape, counts)
    low, high = t_misses(
        n, lean, confidence=question.confidence, kind=question.interval, family=_family(shape)
    )
    return Misses(low, high, math.sqrt((low + high) * (1 - low - high) / 200_000))


def _by_widened(question: Question, shape: SiteShape, counts: Sequence[int]) -> Misses:
    """Simulate the interval that the rules fix for skewed results; many as ``TOO_MANY`` results."""
    from fieldplan.sizing.widened import promise_of
    from fieldplan.stats.widened_reach import widened_misses

    n = min(max(3, counts[0]), TOO_MANY)
    campaigns = max(FEWEST, min(10_000, 2 * QUICK_DRAWS // n))
    low, high = widened_misses(shape.parts[0], n, promise_of(question), campaigns=campaigns)
    error = math.sqrt((low + high) * (1 - low - high) / campaigns)
    return Misses(low, high, error)


def _expanded(question: Question, shape: Shape, n: int) -> Misses:
    low, high = expanded_misses(
        n,
        shape.skewness,
        shape.excess_kurtosis,
        confidence=question.confidence,
        kind=question.interval,
    )
    return Misses(low, high, 0.0)


def sampled(question: Question, shape: SiteShape, counts: Sequence[int]) -> tuple[Sampled, ...]:
    """Set the parts as a simulation takes them."""
    return tuple(
        Sampled(
            part.weight,
            part.sigma,
            max(2, count),
            form,
            part.population if _is_short(part, count) else None,
        )
        for part, count, form in zip(question.parts, counts, shape.parts, strict=True)
    )


def short_list(question: Question, counts: Sequence[int]) -> bool:
    """Tell whether a part is a list that the results take a good share of."""
    return any(map(_is_short, question.parts, counts))


def _is_short(part: Part, count: int) -> bool:
    return part.population is not None and part.population < min(LARGE * count, LONG)


def equivalent(question: Question, shape: SiteShape, counts: Sequence[int]) -> tuple[int, float]:
    """Give the single sample whose mean leans as that of the strata: n, and its skewness."""
    if len(counts) == 1:
        return max(2, counts[0]), shape.parts[0].skewness
    known = Precision(question).degrees_of_freedom(counts)
    n = sum(counts) if math.isinf(known) else max(2, round(known + 1))
    lean = skewness_of_mean(
        [part.weight for part in question.parts],
        [part.sigma for part in question.parts],
        [part.skewness for part in shape.parts],
        counts=counts,
    )
    return n, lean * math.sqrt(n)


def n_within(question: Question, shape: SiteShape, counts: Sequence[int]) -> int | None:
    """Count the results from which on the interval falls short by one point at most.

    Parameters
    ----------
    question : Question
    shape : SiteShape
        One with zeros is taken by its skewness.
    counts : sequence of int
        Their shares between strata are kept.

    Returns
    -------
    int or None
        None where more than 100,000 are needed, or than a list has.
    """
    n, lean = equivalent(question, shape, counts)
    alone = n_by_skewness(
        lean, confidence=question.confidence, kind=question.interval, family=_family(shape)
    )
    if alone is None or len(counts) == 1:
        return alone
    return max(2 * len(counts), math.ceil(alone * sum(counts) / n))


def _family(shape: SiteShape) -> Family:
    return shape.parts[0].family


def scaled(counts: Sequence[int], total: int) -> list[int]:
    """Scale counts to another total, each at least 2.

    Examples
    --------
    >>> scaled([10, 30], 20), scaled([3, 40], 10)
    ([5, 15], [2, 9])
    """
    return [max(2, round(count * total / sum(counts))) for count in counts]


def places(question: Question, counts: Sequence[int]) -> str:
    """Say from what the results are taken to come."""
    if short_list(question, counts):
        return (
            "Units are drawn at random without replacement from a list of such a shape, simulated "
            "anew for each campaign; the mean is that of the list."
        )
    return "Results are independent, at random places of a large population."


def within_lists(question: Question, counts: list[int]) -> list[int] | None:
    """Keep counts that lists can give and that leave something undrawn; None for others."""
    populations = [part.population for part in question.parts]
    pairs = list(zip(counts, populations, strict=True))
    kept = all(whole is None or count <= whole for count, whole in pairs)
    return counts if kept and any(count != whole for count, whole in pairs) else None
