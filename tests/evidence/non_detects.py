"""Coverage and bias of means with non-detects; regenerates the tables of docs/evidence.

Run ``python -m tests.evidence.non_detects 1200`` (samples a cell; 20 minutes on two cores); with
``every`` behind it each cell has its row. Fixed seeds: the same number gives the same tables.
"""

import math
import sys
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor
from dataclasses import dataclass, replace
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldplan.base.errors import DesignError
from fieldplan.stats.censored import CensoredMean, CensoredMethod, censored_mean, weighted_mean
from fieldplan.stats.intervals import IntervalKind, t_interval

Floats = NDArray[np.float64]
Sampler = Callable[[np.random.Generator, int], Floats]
LARGE = 200_000


def _lognormal(cv: float) -> Sampler:
    sigma = math.sqrt(math.log1p(cv**2))
    return lambda rng, n: np.exp(rng.normal(-(sigma**2) / 2, sigma, n))


def _gamma(cv: float) -> Sampler:
    return lambda rng, n: rng.gamma(1 / cv**2, cv**2, n)


def _weibull(shape: float) -> Sampler:
    return lambda rng, n: rng.weibull(shape, n) / math.gamma(1 + 1 / shape)


def _two_parts(rng: np.random.Generator, n: int) -> Floats:
    """Three quarters low, a quarter three times as high, both lognormal, mean 1."""
    high = rng.random(n) < 0.25
    return np.where(high, 2.0, 2 / 3) * np.exp(rng.normal(-0.08, 0.4, n))


POPULATIONS: dict[str, Sampler] = {
    "lognormal, CV 0.5": _lognormal(0.5),
    "lognormal, CV 1": _lognormal(1.0),
    "lognormal, CV 1.5": _lognormal(1.5),
    "gamma, CV 0.5": _gamma(0.5),
    "gamma, CV 1": _gamma(1.0),
    "Weibull, CV 0.7": _weibull(1.45),
    "two lognormal parts": _two_parts,
    "normal, CV 0.3": lambda rng, n: np.maximum(rng.normal(1.0, 0.3, n), 1e-3),
}
"""All have mean 1 (the normal cut at 0.001 to within 0.001)."""


class Sample(NamedTuple):
    """Detects, and the limit of each non-detect."""

    detects: list[float]
    limits: list[float]


@dataclass(frozen=True)
class Cell:
    """What is simulated: a population, n of each stratum, the share below, limits, a method."""

    population: str
    n: int
    share: float
    limits: int
    method: str
    strata: int = 1
    kind: IntervalKind = "two-sided"


@dataclass(frozen=True)
class Found:
    """Shares of the samples that were answered."""

    cell: Cell
    bias: float
    coverage: float
    width: float
    refused: float


def quantiles(population: str, shares: Sequence[float]) -> list[float]:
    """Give quantiles of a population from a large sample of it."""
    return list(np.quantile(POPULATIONS[population](np.random.default_rng(7), LARGE), shares))


def limits_of(cell: Cell) -> list[float]:
    """Give one limit at the share, or three about it, each for a third of the results."""
    shares = [cell.share] if cell.limits == 1 else [cell.share * f for f in (0.6, 1.0, 1.4)]
    return quantiles(cell.population, [min(s, 0.97) for s in shares])


def censor(values: Floats, limits: Sequence[float], rng: np.random.Generator) -> Sample:
    """Set a limit for each result at random, and call non-detect what lies below it."""
    own = np.asarray(limits)[rng.integers(0, len(limits), values.size)]
    below = values < own
    return Sample([float(x) for x in values[~below]], [float(x) for x in own[below]])


def bounds(sample: Sample) -> CensoredMean:
    """Give the widest of Student's intervals with non-detects at 0 and at the limit."""
    low, high = (np.array([*sample.detects, *(at * x for x in sample.limits)]) for at in (0.0, 1.0))
    n = low.size
    ends = [
        t_interval(
            float(x.mean()), float(x.std(ddof=1)) / math.sqrt(n), n - 1,
            confidence=0.95, kind="two-sided",
        )
        for x in (low, high)
    ]  # fmt: skip
    middle = float((low.mean() + high.mean()) / 2)
    return CensoredMean("kaplan-meier", middle, 0.0, ends[0][0], ends[1][1], n, len(sample.limits))


def at_half(sample: Sample) -> CensoredMean:
    """Give Student's interval with half the limit in place of every non-detect."""
    x = np.array([*sample.detects, *(limit / 2 for limit in sample.limits)])
    error = float(x.std(ddof=1)) / math.sqrt(x.size)
    ends = t_interval(float(x.mean()), error, x.size - 1, confidence=0.95, kind="two-sided")
    return CensoredMean("kaplan-meier", float(x.mean()), error, *ends, x.size, len(sample.limits))


def answer(sample: Sample, method: str, kind: IntervalKind = "two-sided") -> CensoredMean:
    """Answer by a method, or by the rule that chooses one: ``by-share``, ``by-share:gamma``."""
    from fieldplan.stats.censored_choice import choose_method

    if method == "bounds":
        return bounds(sample)
    if method == "substitute-half":
        return at_half(sample)
    if method.startswith("by-share"):
        shape = method.partition(":")[2] or None
        n, missing = len(sample.detects) + len(sample.limits), len(sample.limits)
        chosen = choose_method(n, missing, shape=shape).method  # type: ignore[arg-type]
        if chosen == "bounds":
            return bounds(sample)
        return censored_mean(*sample, chosen)
    named: CensoredMethod = method  # type: ignore[assignment]
    return censored_mean(*sample, named, kind=kind)


def weights_and_scales(strata: int) -> list[tuple[float, float]]:
    """Give weight and mean of each stratum; the site's mean is 1."""
    weights = [2 * (k + 1) / (strata * (strata + 1)) for k in range(strata)]
    scales = [1.0 + 0.5 * k for k in range(strata)]
    total = sum(w * s for w, s in zip(weights, scales, strict=True))
    return [(w, s / total) for w, s in zip(weights, scales, strict=True)]


def simulate(cell: Cell, *, repetitions: int, seed: int = 20_261_201) -> Found:
    """Draw samples of a cell and count how often the interval holds the true mean, 1."""
    rng = np.random.default_rng([seed, cell.n, round(1000 * cell.share), cell.limits, cell.strata])
    limits, parts = limits_of(cell), weights_and_scales(cell.strata)
    means, held, widths, refused = [], 0, [], 0
    for _ in range(repetitions):
        try:
            found = [
                answer(
                    censor(
                        scale * POPULATIONS[cell.population](rng, cell.n),
                        [scale * x for x in limits],
                        rng,
                    ),
                    cell.method,
                    cell.kind,
                )
                for _, scale in parts
            ]
        except DesignError:
            refused += 1
            continue
        whole = (
            found[0]
            if len(found) == 1
            else weighted_mean(found, [w for w, _ in parts], kind=cell.kind)
        )
        low, high = whole.low or 0.0, whole.high or math.inf
        means.append(whole.mean)
        held += low <= 1.0 <= high
        widths.append(high - low)
    answered = max(1, repetitions - refused)
    return Found(
        cell,
        float(np.mean(means)) - 1 if means else math.nan,
        held / answered,
        float(np.median(widths)) if widths else math.nan,
        refused / repetitions,
    )


def run(cells: Sequence[Cell], repetitions: int) -> Iterator[Found]:
    """Simulate cells in two processes, in their order."""
    with ProcessPoolExecutor(2) as pool:
        yield from pool.map(_one, cells, [repetitions] * len(cells))


def _one(cell: Cell, repetitions: int) -> Found:
    return simulate(cell, repetitions=repetitions)


def row(found: Found) -> str:
    """Write one row of a table."""
    cell = found.cell
    strata = f"{cell.strata} × " if cell.strata > 1 else ""
    return (
        f"| {cell.population} | {strata}{cell.n} | {cell.share:.0%} | {cell.limits} | "
        f"{100 * found.bias:+.1f} | {100 * found.coverage:.1f} | {found.width:.2f} | "
        f"{100 * found.refused:.1f} |"
    )


HEAD = (
    "| population | n | below | limits | bias % | coverage % | width | refused % |\n"
    "| --- | --- | --- | --- | --- | --- | --- | --- |"
)
LOGNORMALS = ("lognormal, CV 0.5", "lognormal, CV 1", "lognormal, CV 1.5")
UNEVEN = ("lognormal, CV 1", "gamma, CV 1", "Weibull, CV 0.7", "normal, CV 0.3")


def cells(
    method: str,
    populations: Sequence[str],
    sizes: Sequence[int],
    shares: Sequence[float],
    *,
    limits: Sequence[int] = (1, 3),
    strata: int = 1,
) -> list[Cell]:
    """Cross all that is varied."""
    return [
        Cell(name, n, share, count, method, strata)
        for name in populations
        for n in sizes
        for share in shares
        for count in limits
    ]


def tables() -> dict[str, list[Cell]]:
    """Give the cells of every table, by its title."""
    likelihood = "lognormal-likelihood"
    large = ("lognormal, CV 1.5", "two lognormal parts", "normal, CV 0.3")
    uppers = {
        f"upper limit of 95 % by {method}": [
            replace(cell, kind="upper-limit")
            for cell in cells(method, names, (20, 30, 50), (0.2, 0.4), limits=(1,))
        ]
        for method, names in (
            ("order-statistics", ("lognormal, CV 1", "lognormal, CV 1.5", "gamma, CV 1")),
            ("lognormal-likelihood", LOGNORMALS),
            ("kaplan-meier", ("lognormal, CV 1", "gamma, CV 1")),
        )
    }
    return {
        **uppers,
        "order-statistics with many results": cells(
            "order-statistics", large, (100, 200, 500), (0.4,)
        ),
        "lognormal-likelihood on lognormal populations": [
            *cells(likelihood, LOGNORMALS, (20, 50), (0.2, 0.4, 0.6)),
            *cells(likelihood, LOGNORMALS, (50,), (0.75,), limits=(1,)),
        ],
        "lognormal-likelihood on other populations": cells(
            likelihood, UNEVEN[1:], (30,), (0.2, 0.4, 0.6), limits=(1,)
        ),
        "gamma-likelihood on gamma populations": cells(
            "gamma-likelihood", ("gamma, CV 0.5", "gamma, CV 1"), (20, 50), (0.4, 0.6), limits=(1,)
        ),
        "normal-likelihood on a normal population": cells(
            "normal-likelihood", ("normal, CV 0.3",), (20, 50), (0.4, 0.6), limits=(1,)
        ),
        "order-statistics": cells(
            "order-statistics", tuple(POPULATIONS), (20, 30, 50), (0.2, 0.4, 0.6)
        ),
        "kaplan-meier": cells("kaplan-meier", UNEVEN, (30,), (0.2, 0.4, 0.6)),
        "substitute-half": cells("substitute-half", UNEVEN, (30,), (0.4, 0.6)),
        "bounds": cells("bounds", UNEVEN, (30,), (0.4, 0.6)),
        "by-share without a shape": cells(
            "by-share", tuple(POPULATIONS), (30, 50), (0.3, 0.4, 0.5)
        ),
        "by-share with a lognormal shape declared": cells(
            "by-share:lognormal", LOGNORMALS[:2], (20,), (0.4, 0.6), limits=(1,)
        ),
        "three strata by order-statistics": cells(
            "order-statistics", UNEVEN, (10, 15, 30), (0.2, 0.4), strata=3
        ),
        "three strata by kaplan-meier": cells("kaplan-meier", UNEVEN, (15,), (0.2, 0.4), strata=3),
        "three strata by lognormal-likelihood": cells(
            likelihood, LOGNORMALS[:2], (10, 20), (0.4, 0.6), strata=3, limits=(1,)
        ),
        "three strata by gamma- and normal-likelihood": [
            *cells("gamma-likelihood", ("gamma, CV 1",), (15,), (0.4,), strata=3, limits=(1,)),
            *cells("normal-likelihood", ("normal, CV 0.3",), (15,), (0.4,), strata=3, limits=(1,)),
        ],
    }


SHORT = (
    "| population | n | below | bias % | coverage % | refused % |\n"
    "| --- | --- | --- | --- | --- | --- |"
)


def condensed(found: Sequence[Found]) -> list[str]:
    """Write one row for each population and share: the range over n and limits."""
    groups: dict[tuple[str, float], list[Found]] = {}
    for one in found:
        groups.setdefault((one.cell.population, one.cell.share), []).append(one)
    rows = []
    for (population, share), group in groups.items():
        sizes = sorted({one.cell.n for one in group})
        strata = f"{group[0].cell.strata} × " if group[0].cell.strata > 1 else ""
        refused = [100 * one.refused for one in group]
        rows.append(
            f"| {population} | {strata}{', '.join(map(str, sizes))} | {share:.0%} | "
            f"{span([100 * one.bias for one in group], '+.1f')} | "
            f"{span([100 * one.coverage for one in group], '.1f')} | {span(refused, '.1f')} |"
        )
    return rows


def span(values: Sequence[float], form: str) -> str:
    """Write the smallest and the largest of some numbers."""
    low, high = format(min(values), form), format(max(values), form)
    return low if low == high else f"{low} to {high}"


def main(repetitions: int, *, every: bool) -> None:
    """Print all tables, condensed or with every cell."""
    for title, chosen in tables().items():
        print(f"\n### {title}\n\n{HEAD if every else SHORT}", flush=True)
        if every:
            for result in run(chosen, repetitions):
                print(row(result), flush=True)
        else:
            print("\n".join(condensed(list(run(chosen, repetitions)))), flush=True)


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 1200, every="every" in sys.argv[2:])
