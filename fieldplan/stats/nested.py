"""Places, samples, analyses: what duplicates say about the parts of sigma.

Nested analysis of variance. The rows of one place share its level, the analyses of one jar share
the jar's; what is left between them is sampling, then the laboratory.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

from fieldplan.base.errors import DesignError

Results = Sequence[Sequence[Sequence[float]]]
"""Places, each of samples, each of analyses."""

STAGES = ("between locations", "sampling", "analysis")


@dataclass(frozen=True)
class MeanSquare:
    """Variation at one stage: ``value`` with its degrees of freedom."""

    stage: str
    value: float
    degrees_of_freedom: int


@dataclass(frozen=True)
class Component:
    """One part of sigma, as a variance, with its interval.

    Parameters
    ----------
    stage : str
        ``between locations``, ``sampling``, ``analysis`` or ``sampling and analysis`` where no jar
        was analysed twice.
    variance : float
        Never below 0.
    low, high : float
        Ends of its interval, never below 0.
    raw : float
        Before it was cut at 0.
    degrees_of_freedom : float
        Effective (Satterthwaite); 0 where ``raw`` is not above 0.
    """

    stage: str
    variance: float
    low: float
    high: float
    raw: float
    degrees_of_freedom: float

    @property
    def sigma(self) -> float:
        """Standard deviation."""
        return math.sqrt(self.variance)

    @property
    def cut_at_zero(self) -> bool:
        """Whether the estimate came out negative, which no variance can be."""
        return self.raw < 0


@dataclass(frozen=True)
class Nested:
    """Sigma by parts, from duplicates.

    Parameters
    ----------
    locations, samples, analyses : int
    components : tuple of Component
        From the largest scale down.
    mean_squares : tuple of MeanSquare
        Those with degrees of freedom, same order.
    balanced : bool
        Every place has as many samples, every sample as many analyses; the intervals of the
        larger scales are approximate otherwise.
    confidence : float
    """

    locations: int
    samples: int
    analyses: int
    components: tuple[Component, ...]
    mean_squares: tuple[MeanSquare, ...]
    balanced: bool
    confidence: float

    def component(self, stage: str) -> Component:
        """Return the component of one stage; KeyError when the data do not part it."""
        for entry in self.components:
            if entry.stage == stage:
                return entry
        raise KeyError(stage)

    @property
    def total(self) -> float:
        """Variance of a single analysis of a single sample: the sum of the parts."""
        return math.fsum(entry.variance for entry in self.components)


def nested_components(results: Results, *, confidence: float = 0.90) -> Nested:
    """Split the variance of results into between locations, sampling and analysis.

    Parameters
    ----------
    results : sequence of sequence of sequence of float
        ``results[place][sample][analysis]``; numbers of samples and analyses may differ.
    confidence : float
        Of each component's two-sided interval.

    Returns
    -------
    Nested
        Two components where no sample was analysed twice.

    Raises
    ------
    DesignError
        Fewer than 2 places; no place with 2 samples; a place or sample without results.

    Notes
    -----
    Mean squares are set equal to their expectations (Searle 1971, Linear Models, ch. 11; unbalanced
    data too). Estimates below 0 are cut at 0. Intervals: chi-square for the smallest scale, the
    modified large-sample method for differences of mean squares (Ting and others 1990, Journal of
    Statistical Computation and Simulation 35:135). For unbalanced data the mean squares are taken
    as independent chi-squares, which is approximate.

    Examples
    --------
    >>> found = nested_components([[[8.0, 8.4], [9.0, 9.2]], [[3.0, 3.6], [4.2, 4.0]],
    ...                            [[6.0, 6.2], [5.0, 5.4]]])
    >>> [(part.stage, round(part.sigma, 2)) for part in found.components]
    [('between locations', 2.46), ('sampling', 0.59), ('analysis', 0.26)]
    """
    if not 0 < confidence < 1:
        message = f"confidence is {confidence!r}; it must lie between 0 and 1, e.g. 0.90."
        raise DesignError(message)
    _check(results)
    squares, divisors = _mean_squares(results)
    weights = _weights(squares, divisors)
    stages = STAGES if len(squares) == 3 else (STAGES[0], "sampling and analysis")
    components = tuple(
        _component(stage, squares, coefficients, confidence=confidence)
        for stage, coefficients in zip(stages, weights, strict=True)
    )
    samples = [sample for place in results for sample in place]
    return Nested(
        locations=len(results),
        samples=len(samples),
        analyses=sum(len(sample) for sample in samples),
        components=components,
        mean_squares=squares,
        balanced=len({len(p) for p in results}) == 1 and len({len(s) for s in samples}) == 1,
        confidence=confidence,
    )


def _check(results: Results) -> None:
    if len(results) < 2:
        message = f"{len(results)} location was sampled; the split of sigma needs 2 or more."
        raise DesignError(message)
    if any(not place or any(not sample for sample in place) for place in results):
        message = "a location or sample has no result; leave it out."
        raise DesignError(message)
    if max(len(place) for place in results) < 2:
        message = (
            f"none of the {len(results)} locations has a second sample, so nothing tells sampling "
            "from the differences between locations; take field duplicates at 8 or more of them."
        )
        raise DesignError(message)
    numbers = [x for place in results for sample in place for x in sample]
    if not all(math.isfinite(x) for x in numbers):
        message = "a result is no number; leave it out."
        raise DesignError(message)
    if min(numbers) == max(numbers):
        message = f"all {len(numbers)} results are {numbers[0]:g}; they show no spread to split."
        raise DesignError(message)


def _mean(values: Sequence[float]) -> float:
    return math.fsum(values) / len(values)


def _mean_squares(
    results: Results,
) -> tuple[tuple[MeanSquare, ...], tuple[float, float, float]]:
    """Give the mean squares, and k1, k2, k3 of their expectations.

    E(analysis) = a; E(samples) = a + k1·s; E(places) = a + k2·s + k3·b.
    """
    places = [[x for sample in place for x in sample] for place in results]
    everything = [x for place in places for x in place]
    total = len(everything)
    centre = _mean(everything)
    between = math.fsum(len(p) * (_mean(p) - centre) ** 2 for p in places)
    samples = math.fsum(
        len(s) * (_mean(s) - _mean(p)) ** 2
        for place, p in zip(results, places, strict=True)
        for s in place
    )
    analyses = math.fsum((x - _mean(s)) ** 2 for place in results for s in place for x in s)
    count = sum(len(place) for place in results)
    known = len(places) - 1, count - len(places), total - count
    within = math.fsum(
        math.fsum(len(s) ** 2 for s in place) / len(p)
        for place, p in zip(results, places, strict=True)
    )
    whole = math.fsum(len(s) ** 2 for place in results for s in place) / total
    k1 = (total - within) / known[1]
    k2 = (within - whole) / known[0]
    k3 = (total - math.fsum(len(p) ** 2 for p in places) / total) / known[0]
    sums = zip(STAGES, (between, samples, analyses), known, strict=True)
    squares = tuple(MeanSquare(stage, ss / df, df) for stage, ss, df in sums if df > 0)
    return squares, (k1, k2, k3)


def _weights(
    squares: Sequence[MeanSquare], divisors: tuple[float, float, float]
) -> tuple[tuple[float, ...], ...]:
    """Solve the expectations: each component as coefficients over the mean squares."""
    k1, k2, k3 = divisors
    if len(squares) == 2:
        # No second analysis: k1 = k2 = 1 and the laboratory stays inside sampling.
        return ((1 / k3, -1 / k3), (0.0, 1.0))
    return (
        (1 / k3, -k2 / k1 / k3, (k2 / k1 - 1) / k3),
        (0.0, 1 / k1, -1 / k1),
        (0.0, 0.0, 1.0),
    )


def _effective(squares: Sequence[MeanSquare], coefficients: Sequence[float]) -> float:
    """Give Satterthwaite's degrees of freedom of Σ c·MS; 0 where the sum is not above 0."""
    terms = [c * square.value for c, square in zip(coefficients, squares, strict=True)]
    below = math.fsum(
        term**2 / square.degrees_of_freedom for term, square in zip(terms, squares, strict=True)
    )
    total = math.fsum(terms)
    return total**2 / below if total > 0 and below > 0 else 0.0


def _component(
    stage: str,
    squares: Sequence[MeanSquare],
    coefficients: Sequence[float],
    *,
    confidence: float,
) -> Component:
    raw = math.fsum(c * square.value for c, square in zip(coefficients, squares, strict=True))
    plus = [c if c > 0 else 0.0 for c in coefficients]
    minus = [-c if c < 0 else 0.0 for c in coefficients]
    low, high = _difference_interval(
        _gathered(squares, plus), _gathered(squares, minus), tail=(1 - confidence) / 2
    )
    return Component(
        stage=stage,
        variance=max(raw, 0.0),
        low=max(low, 0.0),
        high=max(high, 0.0),
        raw=raw,
        degrees_of_freedom=_effective(squares, coefficients),
    )


def _gathered(squares: Sequence[MeanSquare], coefficients: Sequence[float]) -> tuple[float, float]:
    """Add mean squares into one with effective degrees of freedom."""
    value = math.fsum(c * square.value for c, square in zip(coefficients, squares, strict=True))
    return value, _effective(squares, coefficients)


def _difference_interval(
    first: tuple[float, float], second: tuple[float, float], *, tail: float
) -> tuple[float, float]:
    """Give both ends for first − second, each an independent value with degrees of freedom.

    Modified large-sample limits of Ting et al. (1990); exact chi-square where second is 0.
    """
    (a, known_a), (b, known_b) = first, second
    if a == 0:
        return 0.0, 0.0
    to_low, to_high = _reach(known_a, tail)
    if b == 0:
        return a * (1 - to_low), a * (1 + to_high)
    b_to_low, b_to_high = _reach(known_b, tail)
    upper = _f_quantile(1 - tail, known_a, known_b)
    lower = _f_quantile(tail, known_a, known_b)
    cross_low = ((upper - 1) ** 2 - (to_low * upper) ** 2 - b_to_high**2) / upper
    cross_high = ((1 - lower) ** 2 - (to_high * lower) ** 2 - b_to_low**2) / lower
    down = (to_low * a) ** 2 + (b_to_high * b) ** 2 + cross_low * a * b
    up = (to_high * a) ** 2 + (b_to_low * b) ** 2 + cross_high * a * b
    return a - b - math.sqrt(max(down, 0.0)), a - b + math.sqrt(max(up, 0.0))


def _reach(known: float, tail: float) -> tuple[float, float]:
    """Give how far the limits of one variance lie below and above it, as shares of it."""
    from scipy.special import chdtri

    high = float(chdtri(known, tail))  # exceeded with chance ``tail``
    low = float(chdtri(known, 1 - tail))
    return 1 - known / high, known / low - 1


def _f_quantile(level: float, above: float, below: float) -> float:
    from scipy.special import fdtri

    return float(fdtri(above, below, level))
