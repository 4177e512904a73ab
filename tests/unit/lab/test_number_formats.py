"""Number formats: digits alone are plain, whatever else a format shows is not.

The grammar is that of ISO/IEC 29500-1, 18.8.31 (from memory); openpyxl's own table of built-in
formats is the outside source for which ones there are.
"""

import pytest
from openpyxl.styles.numbers import BUILTIN_FORMATS, is_date_format

from fieldplan.lab.number_formats import shows_number, shows_text

PLAIN = (
    "General", "", "@", "0", "0.0", "0.00", "0000", "#", "#.##", "#,##0", "#,##0.00", "0.00E+00",
    "##0.0E+0", "# ##0.0", r"#\ ##0.0", "0.0_)", "_-* #,##0.00_-;-* #,##0.00_-;_-@_-",
    "#,##0.00_);(#,##0.00)", "[Red]0.0", "0.0;[Red]-0.0", "[$-409]0.0", "[Blue][$-407]0.00",
    "???.?", '0.0" "', "+0.0;-0.0",
)  # fmt: skip
CHANGED = (
    r"0.0\ \U", '0.0" U"', '"<"0.0', "<0.0", r"\<0.0", ";;;", ";0.0", "0.0,", "#,##0,", "0.0,,",
    "0%", "# ?/?", '[<0.5]"<0.5";0.0', "[>100]0;0.0", "-0.0", r"\-0.0", "(0.0)", "0.0€", "$0.0",
    "[$€-407]0.0", "[White]0.0", "0.0*x", "000-000", '"ND"', '"7"0.0',
)  # fmt: skip


@pytest.mark.parametrize("number_format", PLAIN)
def test_digits_rounded_spaced_or_coloured_are_the_number(number_format: str) -> None:
    """What a person reads off the sheet is what the cell holds, to the digits shown."""
    assert shows_number(number_format, 49.6)


@pytest.mark.parametrize("number_format", CHANGED)
def test_whatever_stands_beside_the_digits_or_scales_them_is_seen(number_format: str) -> None:
    """A U, a sign, a unit, a per cent, a thousandth, or nothing at all: another result."""
    assert not shows_number(number_format, 49.6)


def test_each_value_is_shown_by_its_own_section() -> None:
    """Above 0, below 0 and 0 have a section each, so that one may be plain and another not."""
    number_format = '0.0;"below";"none"'
    assert shows_number(number_format, 49.6)
    assert not shows_number(number_format, -1.0)
    assert not shows_number(number_format, 0.0)
    assert shows_number("0.0;(0.0)", -1.0)
    assert shows_number("0.0;(0.0)", 0.0)


def test_of_the_built_in_formats_only_scaled_and_parted_ones_change_the_number() -> None:
    """Per cent, fractions, money and dates; a laboratory's workbook has mostly the others."""
    numbers = {f for f in BUILTIN_FORMATS.values() if not is_date_format(f)}
    changed = {f for f in numbers if not shows_number(f, 49.6)}
    assert {"0%", "0.00%", "# ?/?", "# ??/??"} <= changed
    assert all("%" in f or "/" in f or "$" in f for f in changed)


@pytest.mark.parametrize(
    ("number_format", "plain"),
    [("General", True), ("0.0", True), ("0.0;-0.0", True), ("@", True), ("0;0;0;@", True),
     ("_-@_-", True), (";;;", False), ('@" U"', False), ('"<"@', False), ("0;0;0;", False)],
)  # fmt: skip
def test_a_text_is_hidden_or_changed_only_by_a_section_of_its_own(
    number_format: str, plain: bool
) -> None:
    """Three semicolons hide it; an @ with something beside it adds to it."""
    assert shows_text(number_format) == plain
