"""The sentence on a patch says the chance that the number reaches, not the one asked for."""

import math
import re

import numpy as np
import pytest

from fieldplan.sizing.asked.smallest_patch import count
from tests.unit.sizing.askings import asked_numbers


@pytest.mark.parametrize(
    ("probability", "length", "width", "area"),
    [(0.95, 40.0, 40.0, 12_000.0), (0.9, 125.0, 90.0, 10_000.0), (0.8, 48.0, 20.0, 12_000.0)],
)
def test_chance_said_is_that_of_thrown_patches(probability, length, width, area) -> None:
    """Simulation: 100 000 ellipses of any direction thrown on an endless square grid."""
    keys = (f"length_m={length:g}", f"width_m={width:g}", f"probability={probability}")
    asked = asked_numbers(question="smallest-patch", area=area, layout="square-grid", keys=keys)
    found = count(asked)
    spacing, throws = math.sqrt(area / sum(found.needed)), 100_000
    rng = np.random.default_rng(17)
    centre = rng.uniform(0.0, spacing, (throws, 2))
    turn = rng.uniform(0.0, math.pi, throws)
    hit = np.zeros(throws, dtype=bool)
    reach = math.ceil(length / 2 / spacing) + 1
    for i in range(-reach, reach + 1):
        for j in range(-reach, reach + 1):
            x, y = i * spacing - centre[:, 0], j * spacing - centre[:, 1]
            along = x * np.cos(turn) + y * np.sin(turn)
            across = y * np.cos(turn) - x * np.sin(turn)
            hit |= (2 * along / length) ** 2 + (2 * across / width) ** 2 <= 1
    true = float(np.mean(hit))
    said = re.search(r"with a chance of ([\d.]+) %", found.finding.answer)
    assert said is not None
    error = math.sqrt(true * (1 - true) / throws)
    assert float(said[1]) / 100 == pytest.approx(true, abs=4 * error + 0.001)
    assert float(said[1]) / 100 >= probability
