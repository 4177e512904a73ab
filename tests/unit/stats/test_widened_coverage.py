"""The shipped coverage table: read right, and spot-checked against simulations of its own."""

import math

import pytest

from fieldplan.base.errors import DesignError
from fieldplan.stats.skew_interval import FEWEST
from fieldplan.stats.widened_coverage import populations_simulated, widened_coverage
from fieldplan.stats.widened_table import TABLE
from tests.evidence.interval_coverage import cell, of_class, populations
from tests.evidence.interval_table import LEVELS, SIZES

CLASSES = ("cv-up-to-1", "cv-up-to-2")
KINDS = ("two-sided", "upper-limit", "lower-limit")


def test_every_cell_of_the_table_is_read() -> None:
    """Two classes, three kinds, three levels, nine sizes."""
    assert len(TABLE.splitlines()) == 2 * 3 * len(LEVELS) * len(SIZES)
    for line in TABLE.splitlines():
        name, kind, level, n, worst, middle = line.split()
        found = widened_coverage(
            int(n),
            population_class=name,  # type: ignore[arg-type]
            confidence=float(level),
            kind=kind,  # type: ignore[arg-type]
        )
        assert (round(found.worst * 1e4), round(found.middle * 1e4)) == (int(worst), int(middle))
        assert found.worst <= found.middle <= 1


def test_between_cells_coverage_lies_between_theirs() -> None:
    """Straight in 1/√n, and in what is short of nominal between levels."""
    ends = [
        widened_coverage(n, population_class="cv-up-to-2", confidence=0.95, kind="two-sided").worst
        for n in (20, 24, 30)
    ]
    assert min(ends[0], ends[2]) <= ends[1] <= max(ends[0], ends[2])
    levels = [
        widened_coverage(30, population_class="cv-up-to-1", confidence=c, kind="upper-limit").worst
        for c in (0.90, 0.925, 0.95)
    ]
    assert levels[1] - 0.925 == pytest.approx((levels[0] - 0.90 + levels[2] - 0.95) / 2)


@pytest.mark.parametrize(("n", "confidence"), [(4, 0.95), (30, 0.8), (30, 0.999)])
def test_outside_the_table_nothing_is_said(n: int, confidence: float) -> None:
    """A share that nobody simulated is no share."""
    with pytest.raises(DesignError, match="is simulated for 5 results or more"):
        widened_coverage(n, population_class="cv-up-to-1", confidence=confidence, kind="two-sided")


@pytest.mark.parametrize("name", CLASSES)
def test_the_promise_is_kept_from_the_fewest_results_on(name: str) -> None:
    """Bars of the evidence page at 95 %: two-sided 94 %, upper limits 93.5 and 93 %."""
    bars = {"two-sided": 0.94, "upper-limit": 0.935 if name == "cv-up-to-1" else 0.93}
    for kind, bar in bars.items():
        for n in (n for n in SIZES if n >= FEWEST[name]):  # type: ignore[index]
            found = widened_coverage(
                n,
                population_class=name,  # type: ignore[arg-type]
                confidence=0.95,
                kind=kind,  # type: ignore[arg-type]
            )
            assert found.worst >= bar, (kind, n)


@pytest.mark.parametrize("name", CLASSES)
@pytest.mark.parametrize(
    ("n", "kind"), [(10, "two-sided"), (20, "upper-limit"), (30, "lower-limit")]
)
def test_a_listed_population_holds_no_less_than_the_worst(name: str, n: int, kind: str) -> None:
    """Source: simulation anew; the worst of the table is a floor, less four standard errors."""
    repetitions = 4000
    member = [p for p in populations() if of_class(p, name)][5]
    floor = widened_coverage(
        n,
        population_class=name,  # type: ignore[arg-type]
        confidence=0.95,
        kind=kind,  # type: ignore[arg-type]
    ).worst
    held, _ = cell(member, n, name, kind, repetitions=repetitions, seed=7)  # type: ignore[arg-type]
    assert held >= floor - 4 * math.sqrt(floor * (1 - floor) / repetitions)
    assert populations_simulated(name) >= 50  # type: ignore[arg-type]
