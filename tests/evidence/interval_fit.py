"""The search for the constants of the skew-widened interval; outside CI.

``python -m tests.evidence.interval_fit cv-up-to-2 two-sided`` draws populations of a class at
random, keeps the hardest at each n, and moves the constants by Nelder & Mead (1965, The Computer
Journal 7:308) so that the worst of them hold their share while the widths stay small. What it finds
is rounded by hand and scored on other populations by ``tests.evidence.interval_table``.
"""

import argparse
import math
from dataclasses import astuple, dataclass

import numpy as np
from scipy.optimize import minimize

from fieldplan.stats.intervals import IntervalKind, t_quantile
from fieldplan.stats.skew_interval import FEWEST, Widening, hall_factor, low_skewness, widening
from tests.evidence.interval_coverage import Array, Population, moments
from tests.evidence.random_populations import random_population, shown_to

FIT_SEED = 11
SIZES = (8, 10, 15, 20, 30, 50, 100, 200)
HARDEST = 12
WORST = 4
"""The lowest coverages of a size that count."""

WANTED = {
    ("cv-up-to-1", "two-sided"): 0.946,
    ("cv-up-to-1", "upper-limit"): 0.942,
    ("cv-up-to-2", "two-sided"): 0.943,
    ("cv-up-to-2", "upper-limit"): 0.940,
}
"""Coverage that the worst populations shall have: the bars with a margin for other ones."""

MOST_WIDE = {15: 1.01, 30: 0.82, 50: 0.685, 200: 0.497}
"""Mean width over Chebyshev's of two ends in cv-up-to-2, over all populations drawn."""


@dataclass(frozen=True)
class Drawn:
    """Samples of one size: (true − mean)·√n/s, g and c, in an array (populations, 3, samples)."""

    n: int
    values: Array

    def held(self, wide: Widening, kind: IntervalKind) -> tuple[Array, float]:
        """Give coverage by population, and the mean width over Chebyshev's."""
        z, g, c = self.values[:, 0], self.values[:, 1], self.values[:, 2]
        t, root = t_quantile(self.n - 1, confidence=0.95, kind=kind), math.sqrt(self.n)
        above = hall_factor(t, wide.raised(self.n, g, c) / root) * wide.stretched(self.n)
        if kind == "upper-limit":
            return (z <= above).mean(axis=1), float(above.mean()) / math.sqrt(19)
        below = hall_factor(-t, low_skewness(self.n, g) / root)
        kept = (z >= below) & (z <= above)
        return kept.mean(axis=1), float((above - below).mean()) / 2 / math.sqrt(20)


def draw(members: list[Population], n: int, *, repetitions: int, salt: int) -> Drawn:
    """Draw samples of every population that n results meet often enough."""
    rows = []
    for k, population in enumerate(members):
        if shown_to(population, n):
            rng = np.random.default_rng([FIT_SEED, salt, k, n])
            parts = [moments(population.draw(rng, (500, n))) for _ in range(repetitions // 500)]
            mean, deviation, g = (np.concatenate(part) for part in zip(*parts, strict=True))
            safe = np.where(deviation > 0, deviation, 1e-9)
            z = (population.mean - mean) * math.sqrt(n) / safe
            rows.append(np.stack([z, g, deviation / np.maximum(mean, 1e-12)]))
    return Drawn(n, np.stack(rows).astype(np.float32))


def hardest(members: list[Population], start: Widening, kind: IntervalKind, n: int) -> Drawn:
    """Keep the populations that the present constants serve worst, and draw them anew."""
    shown = [p for p in members if shown_to(p, n)]
    first = draw(shown, n, repetitions=1500, salt=1).held(start, kind)[0]
    return draw([shown[k] for k in np.argsort(first)[:HARDEST]], n, repetitions=16_000, salt=2)


def main() -> None:
    """Print the constants found, with worst coverage and width by n, before and after."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("name", choices=list(FEWEST))
    parser.add_argument("kind", choices=["two-sided", "upper-limit"])
    parser.add_argument("--populations", type=int, default=200)
    parser.add_argument("--evaluations", type=int, default=120)
    typed = parser.parse_args()
    rng = np.random.default_rng(FIT_SEED)
    members = [random_population(rng, typed.name) for _ in range(typed.populations)]
    start = widening(typed.name, typed.kind)
    sizes = [n for n in SIZES if n >= FEWEST[typed.name]]
    hard = [hardest(members, start, typed.kind, n) for n in sizes]
    every = [draw(members, n, repetitions=500, salt=3) for n in sizes]
    wanted, caps = WANTED[typed.name, typed.kind], {}
    if (typed.name, typed.kind) == ("cv-up-to-2", "two-sided"):
        caps = MOST_WIDE

    def made(free: Array) -> Widening:
        return Widening(free[0], free[1], start.cubic, free[2], free[3])

    def loss(free: Array) -> float:
        wide, total = made(free), 0.0
        for difficult, all_of_them in zip(hard, every, strict=True):
            lowest = np.sort(difficult.held(wide, typed.kind)[0])[:WORST]
            width = all_of_them.held(wide, typed.kind)[1]
            total += 25 * float(np.maximum(0, wanted - lowest).sum()) + width / len(sizes)
            total += 60 * max(0.0, width - caps.get(difficult.n, math.inf))
        return total

    a0, a1, _, a3, a4 = astuple(start)
    found = minimize(
        loss, np.array([a0, a1, a3, a4]), method="Nelder-Mead",
        options={"maxfev": typed.evaluations},
    ).x  # fmt: skip
    for wide in (start, made(found)):
        print(", ".join(f"{value:.3f}" for value in astuple(wide)))
        for difficult, all_of_them in zip(hard, every, strict=True):
            lowest = np.sort(difficult.held(wide, typed.kind)[0])[:WORST]
            width = all_of_them.held(wide, typed.kind)[1]
            print(f"  n = {difficult.n}: {np.round(100 * lowest, 1)}, width {width:.3f}")


if __name__ == "__main__":
    main()
