"""One reported cell: the mess that laboratories send, and what is made of it."""

import string
from decimal import Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldplan.base.errors import FieldplanError, LabError
from fieldplan.lab.cells import letters_beside, read_cell, tidy


@pytest.mark.parametrize(
    ("text", "number"),
    [
        ("12", "12"),
        (" 12.50 ", "12.50"),
        ("+3", "3"),
        (".5", "0.5"),
        ("5.", "5"),
        ("1.2E3", "1200"),
        ("1.2e-3", "0.0012"),
        ("\u00a012\u202f", "12"),
        ("12\u200b", "12"),
        ("\ufeff12", "12"),
        ("\t7\r\n", "7"),
    ],
)
def test_plain_numbers_are_read_exactly(text: str, number: str) -> None:
    """A decimal is kept as written, so that no rounding creeps in before the unit is known."""
    reading = read_cell(text)
    assert reading.detected
    assert reading.number == Decimal(number)
    assert reading.limit is None


@pytest.mark.parametrize(
    ("text", "limit"),
    [("<0.5", "0.5"), ("< 0.5", "0.5"), ("<=0.5", "0.5"), ("＜0.5", "0.5"), ("0.5U", "0.5"),
     ("0.5 U", "0.5"), ("0.5 UJ", "0.5"), ("<0.5 J", "0.5"), ("<1E-2", "0.01")],
)  # fmt: skip
def test_a_limit_in_the_cell_makes_a_non_detect(text: str, limit: str) -> None:
    """``<`` and U say that the number is the limit and not a result."""
    reading = read_cell(text)
    assert not reading.detected
    assert reading.number is None
    assert reading.limit == Decimal(limit)


@pytest.mark.parametrize(
    "text", ["ND", "nd", "N.D.", "n.d.", "BDL", "U", "<", "not detected", " Non-Detect ", "<LOD"]
)
def test_words_for_not_detected_leave_the_limit_to_its_column(text: str) -> None:
    """ND states no number, so that the reader must ask the column for it."""
    reading = read_cell(text)
    assert not reading.detected
    assert reading.limit is None


@pytest.mark.parametrize(
    ("text", "number", "letters"),
    [("3.1 J", "3.1", "J"), ("3.1J", "3.1", "J"), ("3.1 J,B", "3.1", "J,B"), ("3E", "3", "E"),
     ("4 *", "4", "*"), ("2 J+", "2", "J+")],
)  # fmt: skip
def test_other_qualifiers_stay_beside_the_number(text: str, number: str, letters: str) -> None:
    """An estimated result is still a number; its letters are kept for the reviewer."""
    reading = read_cell(text)
    assert reading.detected
    assert (reading.number, reading.letters) == (Decimal(number), letters)


@pytest.mark.parametrize(
    ("text", "says"),
    [
        ("", "no result"),
        ("-", "no result"),
        ("n/a", "no result"),
        ("0", "zero"),
        ("0.000", "zero"),
        ("<0", "zero"),
        ("-3", "below 0"),
        ("\u22123", "below 0"),
        (">500", "above what the laboratory can measure"),
        ("TNTC", "not a number"),
        ("nan", "not a number"),
        ("inf", "not a number"),
        ("1_000", "not a number"),
        ("1e400", "outside"),
        ("1e-400", "outside"),
        ("1,200", "thousands or decimals"),
        ("1,200.5", "thousands or decimals"),
        ("8,6", "has a comma"),
        ("3.1 mg/kg", "beside the number"),
        ("12 13", "not a number"),
        ("05/03/2026", "not a number"),
        ("24:00", "not a number"),
        ("#N/A", "not a number"),
        ("١٢", "not a number"),
    ],
)
def test_what_could_be_misread_is_refused_with_a_rule(text: str, says: str) -> None:
    """A cell that two people read differently must not become a number in silence."""
    with pytest.raises(LabError, match=says):
        read_cell(text)


@pytest.mark.parametrize(("text", "number"), [("8,6", "8.6"), ("0,125", "0.125"), ("<0,5", None)])
def test_a_decimal_comma_is_read_where_the_file_uses_it(text: str, number: str | None) -> None:
    """In a semicolon file without decimal points a comma can only be decimal."""
    reading = read_cell(text, decimal_comma=True)
    assert reading.number == (Decimal(number) if number else None)


def test_a_comma_with_three_digits_behind_is_refused_even_there() -> None:
    """1,200 is twelve hundred to one reader and 1.2 to another."""
    with pytest.raises(LabError, match=r"Type 1200 or 1\.200"):
        read_cell("1,200", decimal_comma=True)


@given(st.text(max_size=30))
def test_any_cell_gives_a_reading_or_one_clear_line(text: str) -> None:
    """Whatever stands in a cell, the reader of the message sees a sentence and no traceback."""
    said = ""
    try:
        reading = read_cell(text)
    except FieldplanError as fault:
        said = str(fault)
    assert said.endswith(".") if said else (reading.number is None) != reading.detected


@given(
    st.decimals(min_value="1e-9", max_value="1e9", allow_nan=False, places=9),
    st.sampled_from(["", " ", "\u00a0", "\u2009"]),
    st.sampled_from(["", "<"]),
    st.sampled_from(["", "J", "B"]),
)
def test_every_written_number_comes_back(
    number: Decimal, space: str, less: str, letters: str
) -> None:
    """Spaces of any kind and a qualifier change nothing in the number."""
    text = f"{space}{less}{space}{number}{space}{letters}{space}"
    reading = read_cell(text)
    assert (reading.limit if less else reading.number) == number


@given(st.text(alphabet=string.printable + "\u00a0\u200b"))
def test_tidying_twice_changes_nothing_more(text: str) -> None:
    """A text that was tidied is tidy."""
    assert tidy(tidy(text)) == tidy(text)


def test_letters_behind_a_number_are_found_without_reading_it() -> None:
    """A rejected result need not hold a number that can be read."""
    assert letters_beside("1.2E3 R").endswith("R")
    assert letters_beside("REJ") == "REJ"
