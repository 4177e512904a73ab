"""Even spacing along a line against random places: variance and width, by starts and correlation.

``python -m tests.evidence.even_spacing`` prints the table of docs/lines.md, in about five seconds.
"""

import math

import numpy as np
from numpy.typing import NDArray
from scipy import stats

from fieldplan.stats.random_starts import variance_between_starts

SLOTS, PLACES, RIVERS = 400, 20, 4000
STARTS = (1, 2, 4, 5, 10)
RANGES = (0.07, 0.25, 0.75)
"""Practical ranges, at which correlation falls to 5 %, as shares of the line's length."""

Numbers = NDArray[np.float64]


def rivers(generator: np.random.Generator, practical_range: float) -> Numbers:
    """Lines of near-normal results whose correlation falls exponentially with distance."""
    alike = 0.05 ** (1 / (practical_range * SLOTS))
    lines = np.empty((RIVERS, SLOTS))
    lines[:, 0] = generator.normal(size=RIVERS)
    for slot in range(1, SLOTS):
        fresh = generator.normal(size=RIVERS) * math.sqrt(1 - alike**2)
        lines[:, slot] = alike * lines[:, slot - 1] + fresh
    return lines


def spaced(generator: np.random.Generator, lines: Numbers, starts: int) -> Numbers:
    """Results of each start, shape (rivers, starts, places of a start)."""
    share = PLACES // starts
    step = SLOTS // share
    first = generator.integers(0, step, size=(RIVERS, starts))
    at = (first[:, :, None] + step * np.arange(share)).reshape(RIVERS, PLACES)
    return np.take_along_axis(lines, at, axis=1).reshape(RIVERS, starts, share)


def measured(practical_range: float, starts: int) -> tuple[float, float, float]:
    """Gain in variance over random places, and width and coverage of the interval in its terms."""
    generator = np.random.default_rng(20261201)
    lines = rivers(generator, practical_range)
    truth = lines.mean(axis=1)
    random = np.take_along_axis(lines, generator.integers(0, SLOTS, size=(RIVERS, PLACES)), axis=1)
    plain = stats.t.ppf(0.975, PLACES - 1) * random.std(axis=1, ddof=1) / math.sqrt(PLACES)
    values = spaced(generator, lines, starts)
    off = values.mean(axis=(1, 2)) - truth
    gain = np.mean((random.mean(axis=1) - truth) ** 2) / np.mean(off**2)
    if starts == 1:
        flat = values.reshape(RIVERS, PLACES)
        reach = stats.t.ppf(0.975, PLACES - 1) * flat.std(axis=1, ddof=1) / math.sqrt(PLACES)
    else:
        counts = [PLACES // starts] * starts
        variance = [variance_between_starts(row, counts) for row in values.mean(axis=2)]
        reach = stats.t.ppf(0.975, starts - 1) * np.sqrt(variance)
    return float(gain), float(reach.mean() / plain.mean()), float(np.mean(np.abs(off) <= reach))


def table() -> str:
    """The table as docs/lines.md has it."""
    head = "| starts | " + " | ".join(f"range {100 * r:g} % of the length" for r in RANGES) + " |"
    rows = [head, "| --- |" + " --- |" * len(RANGES)]
    for starts in STARTS:
        cells = [
            f"{gain:.2g}, {width:.2f}, {100 * held:.0f} %"
            for gain, width, held in (measured(r, starts) for r in RANGES)
        ]
        rows.append(f"| {starts} | " + " | ".join(cells) + " |")
    return "\n".join(rows)


if __name__ == "__main__":
    print(table())
