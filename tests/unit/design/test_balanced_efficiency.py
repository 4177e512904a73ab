"""Ten cells of the efficiency table, tried again with other draws than the table was made from."""

import pytest

from tests.evidence.balanced_list import MODELS, drawn, efficiency, square_errors

DRAWS = 20
CELLS: tuple[tuple[str, int, tuple[tuple[str, float, float], ...]], ...] = (
    (
        "blob2holes",
        20,
        (
            ("exponential 0.05, nugget 0", 1.073, 0.001),
            ("matern32 0.2, nugget 0", 2.099, 0.015),
        ),
    ),
    ("blob2holes", 50, (("exponential 0.2, nugget 0", 2.150, 0.007),)),
    (
        "Lhole",
        20,
        (
            ("exponential 0.1, nugget 0", 1.186, 0.002),
            ("exponential 0.5, nugget 0.25", 1.703, 0.006),
        ),
    ),
    ("Lhole", 50, (("exponential 0.5, nugget 0", 3.440, 0.015),)),
    (
        "crescent+box",
        20,
        (
            ("exponential 0.1, nugget 0.25", 1.211, 0.002),
            ("exponential 0.2, nugget 0.5", 1.264, 0.002),
            ("matern32 0.5, nugget 0", 6.366, 0.112),
        ),
    ),
    ("crescent+box", 50, (("matern32 0.1, nugget 0", 2.152, 0.011),)),
)
"""Site, n, and by model the efficiency over 150 draws with its standard error."""


@pytest.mark.slow
@pytest.mark.parametrize(("site", "count", "cells"), CELLS, ids=[f"{c[0]} {c[1]}" for c in CELLS])
def test_efficiency_is_that_of_the_table(
    site: str, count: int, cells: tuple[tuple[str, float, float], ...]
) -> None:
    """Exact for a model and a draw, averaged over draws: both agree within 4 standard errors."""
    kinds = {kind.label: kind for kind in MODELS}
    errors = square_errors(site, [drawn(site, count, seed)[:count] for seed in range(DRAWS)])
    for label, stated, doubt in cells:
        kind = kinds[label]
        found, own = efficiency(site, kind, errors[kind.curve, kind.reach], count)
        assert abs(found - stated) <= 4 * (doubt**2 + own**2) ** 0.5
        assert found > 1.0
