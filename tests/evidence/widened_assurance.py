"""How often a stated assurance of the skew-widened half-width is kept; outside CI.

``python -m tests.evidence.widened_assurance`` prints the table of docs/evidence/intervals.md: a
pilot is drawn, n is sized from it at 80 %, n new results are drawn, and their half-width compared.
"""

import argparse
import math

import numpy as np

from fieldplan.sizing.counting import assured_counts
from fieldplan.sizing.question import Part, Question
from fieldplan.stats import widened_reach
from fieldplan.stats.mean_shape import Shape
from fieldplan.stats.mean_simulation import draw_standardised
from fieldplan.stats.skew_interval import sample_shape, skew_factors

SHAPES = (
    Shape("gamma", 0.5),
    Shape("gamma", 1.0),
    Shape("lognormal", 0.5),
    Shape("lognormal", 1.0),
)
PILOTS = (12, 20)


def kept(shape: Shape, pilot: int, *, campaigns: int, seed: int) -> tuple[float, float]:
    """Give the share of campaigns that keep the half-width, and the middle n."""
    rng = np.random.Generator(np.random.PCG64(seed))
    wanted, found, numbers = 0.6, 0, []  # in standard deviations of single results
    for _ in range(campaigns):
        seen = draw_standardised(shape, (1, pilot), rng)[0] + 1 / shape.cv
        part = Part("site", 1.0, float(seen.std(ddof=1)), results=pilot, mean=float(seen.mean()))
        question = Question(
            (part,), "half_width", wanted, assurance=0.8,
            mean_interval="skew-widened", promised_class="cv-up-to-2",
        )  # fmt: skip
        (n,) = assured_counts(question, 0.8) or [0]
        values = draw_standardised(shape, (1, n), rng)[0] + 1 / shape.cv
        below, above = skew_factors(n, *sample_shape(values), population_class="cv-up-to-2")
        reach = (float(above) - float(below)) / 2 * float(values.std(ddof=1)) / math.sqrt(n)
        found += reach <= wanted
        numbers.append(n)
    return found / campaigns, float(np.median(numbers))


def main() -> None:
    """Print one row a shape and pilot."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--campaigns", type=int, default=400)
    campaigns = parser.parse_args().campaigns
    widened_reach.DRAWS, widened_reach.MOST = 60_000, 2_000  # coarser nodes: a new shape each time
    print("| population | pilot results | n at a stated 80 %, middle | kept |")
    print("| --- | ---: | ---: | ---: |")
    for seed, shape in enumerate(SHAPES):
        for pilot in PILOTS:
            share, n = kept(shape, pilot, campaigns=campaigns, seed=seed)
            print(f"| {shape.name} | {pilot} | {n:.0f} | {100 * share:.0f} % |", flush=True)


if __name__ == "__main__":
    main()
