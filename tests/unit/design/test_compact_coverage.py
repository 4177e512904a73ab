"""Ten cells of the tables in docs/evidence/layouts.md, tried again with fewer fields."""

import math

import numpy as np
import pytest

from fieldplan.design.cell_estimate import VarianceRule, estimate_by_cells
from tests.evidence import compact_strata as evidence
from tests.simulated_fields import KINDS, SITES, SLOPES, Kind, draw_fields

PER_SIDE = 44
FIELDS = 40
CELLS: list[tuple[Kind, int, int, VarianceRule]] = [
    (KINDS[0], 20, 1, "covariance"),
    (KINDS[4], 20, 1, "covariance"),
    (KINDS[6], 20, 1, "covariance"),
    (KINDS[9], 20, 1, "covariance"),
    (SLOPES[0], 20, 1, "covariance"),
    (KINDS[4], 50, 1, "covariance"),
    (SLOPES[1], 50, 1, "covariance"),
    (KINDS[1], 20, 2, "pairs"),
    (SLOPES[0], 50, 2, "pairs"),
    (KINDS[6], 20, 1, "pairs"),
]


@pytest.mark.slow
@pytest.mark.parametrize(
    ("kind", "count", "per_cell", "rule"),
    CELLS,
    ids=[f"{kind.label}, {n}, {each} a cell, {rule}" for kind, n, each, rule in CELLS],
)
def test_intervals_hold_as_often_as_the_table_says(
    monkeypatch: pytest.MonkeyPatch, kind: Kind, count: int, per_cell: int, rule: VarianceRule
) -> None:
    """Simulation: 95 % less 4 standard errors at least, and narrower than without the layout."""
    monkeypatch.setitem(evidence.PER_SIDE, "realised", PER_SIDE)
    found = []
    for at, name in enumerate(SITES):
        rng = np.random.default_rng([at, count])
        for field in draw_fields(name, PER_SIDE, kind, fields=FIELDS, seed=40 + at):
            values = evidence.estimated(name, field, rng, count=count, per_cell=per_cell)
            answer = estimate_by_cells([values], rule=rule, single_result="refuse")
            found.append(evidence.held_and_width(answer, field))
    held, width = np.array(found).mean(axis=0)
    assert held >= 0.95 - 4 * math.sqrt(0.95 * 0.05 / len(found))
    assert width < (1.06 if rule == "pairs" else 0.95)


@pytest.mark.slow
@pytest.mark.parametrize(
    ("count", "per_cell", "least", "most"),
    [(20, 1, 1.45, 1.55), (20, 2, 1.25, 1.35), (50, 1, 1.80, 1.95), (50, 2, 1.50, 1.65)],
)
def test_the_layout_beats_random_places_by_what_the_table_says(
    monkeypatch: pytest.MonkeyPatch, count: int, per_cell: int, least: float, most: float
) -> None:
    """Exact for each of 45 models; geometric mean, on a coarser raster than the table's."""
    monkeypatch.setitem(evidence.PER_SIDE, "models", PER_SIDE)
    found = [
        evidence.efficiency(name, kind, count, per_cell)
        for name in SITES
        for kind in evidence.MODELS
    ]
    assert least <= math.exp(float(np.mean(np.log(found)))) <= most
