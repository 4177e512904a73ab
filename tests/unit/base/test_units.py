"""Numbers as people read them."""

import pytest

from fieldplan.base.units import significant


@pytest.mark.parametrize(
    ("value", "text"),
    [(1e30, "1.00E+30"), (-1.37e28, "-1.37E+28"), (1e15, "1.00E+15"), (9.996e14, "1.00E+15"),
     (9.994e14, "999,000,000,000,000"),
     (1.5e-9, "0.00000000150"), (4e-12, "4.00E-12"), (12345.6, "12,300")],
)  # fmt: skip
def test_zeros_are_written_out_until_they_fill_the_line(value: float, text: str) -> None:
    """Thirty digits, most of them rounding noise, tell less than a power of ten."""
    assert significant(value) == text
    assert float(text.replace(",", "")) == pytest.approx(value, rel=5e-3)
