"""The predicted gain of spread layouts, against fields whose true variance is known."""

import math

import numpy as np
import pytest
from numpy.typing import NDArray

from fieldplan.base.errors import DesignError
from fieldplan.stats.assurance import chance_of_half_width
from fieldplan.stats.field_integrals import pair_distances
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.spatial import Field, correlation_at, distances, weigh_field
from fieldplan.stats.spread_layouts import (
    SpreadLayout,
    layout_variance,
    n_for_layout,
    random_variance,
    spacing_of,
    standard_errors,
)
from tests.simulated_fields import (
    KINDS,
    SITES,
    SLOPES,
    cells_of,
    compact_parts,
    draw_fields,
    true_variance,
)

LAYOUTS: tuple[SpreadLayout, ...] = (
    "compact-strata",
    "local-pivotal",
    "square-grid",
    "triangular-grid",
)


def known(reach: float, nugget: float, variance: float = 1.0) -> Field:
    """One curve that is known for certain, from a pilot of 30."""
    return Field(
        ("exponential",),
        np.array([reach]),
        np.array([nugget]),
        np.array([variance]),
        np.array([1.0]),
        30,
    )


def square_cells(per_side: int) -> NDArray[np.float64]:
    """Cells of a unit square."""
    at = (np.arange(per_side) + 0.5) / per_side
    return np.column_stack([grid.ravel() for grid in np.meshgrid(at, at)])


@pytest.mark.parametrize("layout", LAYOUTS)
def test_without_structure_every_layout_is_simple_random(layout: SpreadLayout) -> None:
    """σ²/n, as there is nothing that spreading could catch."""
    field = known(0.3, 1.0, variance=36.0)
    assert layout_variance(field, 9, layout=layout, area=500.0) == pytest.approx(4.0)
    cells = square_cells(10)
    assert random_variance(field, 9, pairs=pair_distances(cells, 0.1)) == pytest.approx(4.0)


@pytest.mark.parametrize(("reach", "nugget"), [(0.1, 0.0), (0.5, 0.25), (2.0, 0.5)])
def test_squares_of_a_square_site_have_the_variance_of_their_cells(
    reach: float, nugget: float
) -> None:
    """Brute force: Σ W² σ² (1 − mean correlation inside), 25 squares of 6 × 6 cells each."""
    cells = square_cells(30)
    part = (cells[:, 0] * 5).astype(int) * 5 + (cells[:, 1] * 5).astype(int)
    whole = (1 - nugget) * correlation_at(distances(cells, cells), reach, shape="exponential")
    whole += nugget * np.eye(len(cells))
    brute = 0.0
    for k in range(25):
        inside = whole[np.ix_(part == k, part == k)]
        m = len(inside)
        brute += (1 - (inside.sum() - m) / (m * (m - 1))) / 25**2
    found = layout_variance(known(reach, nugget), 25, layout="compact-strata", area=1.0)
    assert found == pytest.approx(brute, rel=0.02)


def test_random_places_have_the_variance_inside_the_site() -> None:
    """Brute force over all pairs of cells of an irregular site."""
    cells = cells_of("Lhole", 24)
    whole = correlation_at(distances(cells, cells), 0.4, shape="exponential")
    m = len(cells)
    brute = (1 - (whole.sum() - m) / (m * (m - 1))) / 12
    found = random_variance(known(0.4, 0.0), 12, pairs=pair_distances(cells, 1 / 24))
    assert found == pytest.approx(brute, rel=0.01)


@pytest.mark.parametrize("curve", [(0.05, 0.0), (0.3, 0.25), (1.5, 0.0)])
def test_spreading_never_loses_and_more_places_never_hurt(curve: tuple[float, float]) -> None:
    """Grid ≤ compact strata ≤ simple random for falling curves, each falling with n."""
    field = known(*curve)
    pairs = pair_distances(square_cells(20), 1 / 20)
    counts = np.arange(4, 90, 5)
    strata = standard_errors(field, counts, layout="compact-strata", area=1.0)
    grid = standard_errors(field, counts, layout="square-grid", area=1.0)
    assert (np.diff(strata) < 0).all()
    assert (np.diff(grid) < 0).all()
    for n, between, even in zip(counts, strata, grid, strict=True):
        thrown = math.sqrt(random_variance(field, int(n), pairs=pairs))
        assert even <= between * (1 + 1e-9)
        assert between <= thrown * 1.001


def test_averages_lie_between_the_curves() -> None:
    """Two curves of equal weight: the middle is their geometric mean."""
    both = Field(
        ("exponential", "exponential"),
        np.array([0.1, 1.0]),
        np.array([0.0, 0.2]),
        np.array([1.0, 4.0]),
        np.array([0.5, 0.5]),
        30,
    )
    one, two = (
        layout_variance(known(*curve), 20, layout="compact-strata", area=1.0)
        for curve in ((0.1, 0.0, 1.0), (1.0, 0.2, 4.0))
    )
    found = layout_variance(both, 20, layout="compact-strata", area=1.0)
    assert found == pytest.approx(math.sqrt(one * two))


@pytest.mark.parametrize("assurance", [None, 0.8, 0.9])
def test_no_smaller_number_keeps_the_standard_error(assurance: float | None) -> None:
    """Counting upward; the chance is that of the house's predictive F."""
    field, target = known(0.4, 0.2, 25.0), 0.6

    def keeps(n: int) -> bool:
        variance = layout_variance(field, n, layout="compact-strata", area=1.0)
        if assurance is None:
            return variance <= target**2
        width = t_quantile(n - 1, confidence=0.95, kind="two-sided") * target
        chance = chance_of_half_width(variance, width, main=n - 1, pilot=29, confidence=0.95)
        return chance >= assurance

    n = n_for_layout(field, target, layout="compact-strata", area=1.0, assurance=assurance)
    assert n == next(k for k in range(2, 500) if keeps(k))


def test_predictions_are_right_in_the_middle_for_pilots_of_thirty_and_more() -> None:
    """Median of predicted over true standard error within 10 %: one site, three kinds, 15 fields.

    The truth is exact for each simulated field; the long table is tests/evidence/spread_layouts.
    """
    assert _medians(SITES[:1], KINDS[1:8:3], per_side=32, fields=15, pilots=(30, 50)) == (
        pytest.approx([1.0, 1.0], abs=0.10)
    )


@pytest.mark.slow
def test_predictions_are_right_on_every_site_and_kind_of_field() -> None:
    """Median within 10 % over three sites and eleven kinds without a slope, pilots of 30 and 50."""
    found = _medians(SITES, KINDS, per_side=36, fields=8, pilots=(30, 50))
    assert found == pytest.approx([1.0, 1.0], abs=0.10)


@pytest.mark.slow
def test_a_slope_is_no_reason_to_plan_too_few_places_in_compact_strata() -> None:
    """Under a strong slope the prediction for compact strata stays within 15 % in the middle."""
    found = _medians(SITES, SLOPES, per_side=36, fields=12, pilots=(30, 50))
    assert found == pytest.approx([1.0, 1.0], abs=0.15)


def _medians(
    sites: tuple[str, ...],
    kinds: tuple[object, ...],
    *,
    per_side: int,
    fields: int,
    pilots: tuple[int, ...],
) -> list[float]:
    """Median over sites and kinds of predicted over true standard error at 45 places."""
    random = np.random.default_rng(17)
    ratios: dict[int, list[float]] = {pilot: [] for pilot in pilots}
    for name in sites:
        cells = cells_of(name, per_side)
        parts = compact_parts(name, per_side, 45)
        area = len(cells) / per_side**2
        for kind in kinds:
            for drawn in draw_fields(name, per_side, kind, fields=fields, seed=23):  # type: ignore[arg-type]
                for pilot in pilots:
                    seen = random.choice(len(cells), pilot, replace=False)
                    field = weigh_field(cells[seen], drawn[seen], extent=1.0)
                    found = layout_variance(field, 45, layout="compact-strata", area=area)
                    ratios[pilot].append(math.sqrt(found / true_variance(drawn, parts)))
    return [float(np.median(each)) for each in ratios.values()]


def test_the_spacing_is_the_side_of_one_share() -> None:
    """By hand: 10,000 m² over 25 places are squares of 20 m."""
    assert spacing_of(25, 10_000.0) == 20.0


def test_impossible_layouts_are_refused() -> None:
    """Each message carries the number that is wrong."""
    field = known(0.3, 0.5)
    with pytest.raises(DesignError, match="n = 1 on"):
        layout_variance(field, 1, layout="compact-strata", area=1.0)
    with pytest.raises(DesignError, match=r"area of 0\.0"):
        layout_variance(field, 5, layout="compact-strata", area=0.0)
    with pytest.raises(DesignError, match="standard error of 0"):
        n_for_layout(field, 0, layout="compact-strata", area=1.0)
    with pytest.raises(DesignError, match="1e-05 takes more than 100,000"):
        n_for_layout(field, 1e-5, layout="compact-strata", area=1.0)
    with pytest.raises(DesignError, match="assurance is 1"):
        n_for_layout(field, 1.0, layout="compact-strata", area=1.0, assurance=1.0)
