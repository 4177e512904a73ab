"""Simulate Student's statistic for skewed populations and write the table that ships with stats.

Run from the project folder: ``python -m tests.reference.make_t_coverage``. The seed is fixed, so
that the table comes out the same with the numpy named in its heading.

For each number of results n and each skewness, ``REPLICATES`` samples are drawn from a gamma and
from a lognormal population of that skewness. Kept is the share of t statistics that lie at or
below the Student quantiles of the probabilities in ``LEVELS``.
"""

from pathlib import Path

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import brentq
from scipy.special import stdtrit

COUNTS = (2, 3, 4, 5, 6, 8, 10, 13, 17, 22, 30, 40, 60, 100, 200, 500)
SKEWNESS = (0.25, 0.5, 1.0, 1.5, 2.0, 3.0, 4.0, 6.0, 9.0, 14.0, 22.0, 36.0)
LEVELS = (
    0.005,
    0.01,
    0.025,
    0.05,
    0.1,
    0.15,
    0.2,
    0.25,
    0.75,
    0.8,
    0.85,
    0.9,
    0.95,
    0.975,
    0.99,
    0.995,
)
REPLICATES = 200_000
SEED = 1908
TABLE = Path(__file__).parents[2] / "fieldplan" / "stats" / "coverage_table.py"


def draw(
    family: str, skewness: float, shape: tuple[int, int], generator: np.random.Generator
) -> tuple[NDArray[np.float64], float]:
    """Draw from a population of this skewness; also give its mean."""
    if family == "gamma":
        k = 4 / skewness**2
        return generator.standard_gamma(k, size=shape), k
    root = brentq(lambda w: (w + 2) * np.sqrt(w - 1) - skewness, 1 + 1e-12, 100)
    sigma = float(np.sqrt(np.log(root)))
    return np.exp(sigma * generator.standard_normal(shape)), float(np.exp(sigma**2 / 2))


def shares(family: str, skewness: float, n: int, generator: np.random.Generator) -> list[float]:
    """Give the share of t statistics at or below each Student quantile."""
    bounds = np.array([stdtrit(n - 1, level) for level in LEVELS])
    below = np.zeros(len(LEVELS))
    block = max(1000, 2_000_000 // n)
    left = REPLICATES
    while left:
        size = min(block, left)
        values, mean = draw(family, skewness, (size, n), generator)
        error = values.std(axis=1, ddof=1) / np.sqrt(n)
        off = values.mean(axis=1) - mean
        with np.errstate(divide="ignore"):
            t = np.where(error > 0, off / np.where(error > 0, error, 1), np.sign(off) * np.inf)
        below += (t[:, None] <= bounds).sum(axis=0)
        left -= size
    return [float(share) for share in below / REPLICATES]


def main() -> None:
    """Write the table as a module: one line a cell, shares in units of 0.0001."""
    generator = np.random.Generator(np.random.PCG64(SEED))
    lines = [
        '"""Simulated shares of t statistics below Student\'s quantiles, for skewed populations.',
        "",
        f"Made by tests/reference/make_t_coverage.py with numpy {np.__version__}:",
        f"{REPLICATES} samples a cell, seed {SEED}. Each line is n, skewness, then the shares",
        "in units of 0.0001.",
        '"""',
        "",
        'LEVELS = """' + " ".join(f"{level:g}" for level in LEVELS) + '"""',
    ]
    for family in ("gamma", "lognormal"):
        lines += ["", f'{family.upper()} = """\\']
        for n in COUNTS:
            for skewness in SKEWNESS:
                cells = [
                    f"{round(1e4 * share):d}" for share in shares(family, skewness, n, generator)
                ]
                lines.append(f"{n} {skewness:g} " + " ".join(cells))
            print(family, n, flush=True)
        lines.append('"""')
    TABLE.write_text("\n".join(lines) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
