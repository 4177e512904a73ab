"""What single samples would cost for the same target stands in the answer about composites."""

import math

import pytest

from fieldplan.sizing import size_asked
from fieldplan.sizing.beside.composites import finding
from tests.unit.sizing.askings import asked_mean

PRICES = ("cost.currency=EUR", "cost.per_increment=4", "cost.per_location=30",
          "cost.per_analysis=60")  # fmt: skip


@pytest.mark.parametrize("increments", ["choose", "10"])
def test_single_samples_are_priced_for_the_same_target(increments: str) -> None:
    """By hand: first n with 26.5/√n ≤ 3 is 79; each costs 30 + 60 and no increment."""
    keys = ("sigma.analysis=5", f"design.increments={increments}", *PRICES)
    asked = asked_mean(sigma=26.5, standard_error=3.0, keys=keys)
    size = size_asked(asked)
    found = finding(asked, size)
    n = math.ceil((26.5 / 3.0) ** 2)
    assert found is not None
    assert f"Single samples would take {n} results" in found.answer
    assert f"cost {90 * n} EUR, against {size.cost:.0f} EUR here" in found.answer


def test_without_prices_nothing_is_compared() -> None:
    """A cost that nobody gave is not made up."""
    asked = asked_mean(
        sigma=26.5, standard_error=3.0, keys=("sigma.analysis=5", "design.increments=10")
    )
    found = finding(asked, size_asked(asked))
    assert found is not None
    assert "Single samples" not in found.answer
