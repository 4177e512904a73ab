"""Numbers and lines that both setters print."""

import math

import pytest

from fieldplan.base.working import Quantity, Step
from fieldplan.packet.sheets.wording import number, printable, step_lines


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (0.0, "0"),
        (-0.0, "0"),
        (22.0, "22"),
        (21.1141, "21.1141"),
        (0.1 + 0.2, "0.3"),
        (-3.5, "−3.5"),
        (123456.789, "123457"),
        (1234567.4, "1234567"),
        (0.000123456, "0.000123456"),
        (1e-7, "1e−07"),
        (1e20, "1e+20"),
        (math.inf, "infinite"),
        (math.nan, "not a number"),
    ],
)
def test_numbers_print_six_significant_digits(value: float, text: str) -> None:
    """Enough to check the working by hand, without noise of binary fractions."""
    assert number(value) == text


@pytest.mark.parametrize("value", [1.5, 0.00123, 98765.4, 12345678.0])
def test_printed_numbers_read_back_within_their_digits(value: float) -> None:
    """Python's own float() is the reader."""
    assert float(number(value)) == pytest.approx(value, rel=1e-5)


def test_a_step_shows_formula_inputs_result_and_source() -> None:
    """Cochran's n for s = 27.57 and SE = 6: (27.57/6)² = 21.114, next integer 22."""
    step = Step(
        symbol="n",
        meaning="Results needed",
        formula="n = (s / SE)²",
        inputs=(Quantity("s", "spread", 27.57, "mg/kg"), Quantity("SE", "target", 6.0, "mg/kg")),
        unrounded=21.114,
        rounded=22,
        unit="results",
        source="Cochran 1977",
    )
    lines = step_lines(step)
    assert lines.inputs == ("s = 27.57 mg/kg: spread", "SE = 6 mg/kg: target")
    assert lines.result == "n = 21.114 → 22 results"
    assert lines.source == "Cochran 1977"


def test_a_step_that_is_not_rounded_shows_one_number() -> None:
    """An arrow from 9 to 9 would make people look for a difference."""
    step = Step("SE", "target", "SE = t", (), 9.0, 9.0, "mg/kg")
    assert step_lines(step).result == "SE = 9 mg/kg"


def test_printable_text_keeps_all_scripts_and_signs() -> None:
    """Names are typed in any script."""
    words = "Žďár, 土壤, سطح, σ ≤ ½, 1′ 2″\ttab\nline"
    assert printable(words) == words
