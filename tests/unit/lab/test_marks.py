"""Decimal marks: what the numbers of a file can only mean settles it, and nothing else does."""

from collections.abc import Callable

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldplan.base.errors import LabError
from fieldplan.lab.marks import decimal_marks
from fieldplan.lab.model import LabTable
from fieldplan.lab.tables import TextTable

HEAD = "location_id;analyte;as_reported;unit;reporting_limit"
Reader = Callable[..., LabTable]


def lines(*cells: str) -> str:
    """Write a semicolon file of these results; a limit may stand behind a bar."""
    parts = [cell.partition("|") for cell in cells]
    rows = [f"P{n};lead;{cell};mg/kg;{limit}" for n, (cell, _, limit) in enumerate(parts)]
    return "\n".join([HEAD, *rows])


@pytest.mark.parametrize("between", [";", "\t"])
def test_a_point_before_three_digits_is_refused_where_it_may_part_thousands(
    read: Reader, between: str
) -> None:
    """1.200 is twelve hundred where semicolons are used, and 1.2 elsewhere."""
    with pytest.raises(LabError) as caught:
        read(lines("1.200", "<2.500", "18", "ND|3.000", "7.125 J").replace(";", between))
    assert [line.split(":")[0] for line in caught.value.problems] == [
        f"labs.csv row {number}" for number in (2, 3, 5, 6)
    ]
    assert "Type 1200 if that is meant" in caught.value.problems[0]
    assert "reporting_limit '3.000'" in caught.value.problems[2]


@pytest.mark.parametrize(
    "other", ["3.14", "1.2005", "0.512", "1234.567", ".125", "1.200E1", "<0.5", "ND|0.5"]
)
def test_a_number_that_can_only_be_decimal_settles_it(read: Reader, other: str) -> None:
    """One file is written by one program in one way."""
    assert read(lines("1.200", other)).rows[0].result == 1.2


def test_a_decimal_comma_beside_it_unsettles_it_again(read: Reader) -> None:
    """Else typing 8.6 for 8,6, as asked for, would turn 1.200 into 1.2 in the next run."""
    with pytest.raises(LabError) as caught:
        read(lines("1.200", "8,6", "3.14"))
    assert "row 2: as_reported '1.200' has a point" in caught.value.problems[0]
    assert "row 3: as_reported '8,6' has a comma" in caught.value.problems[1]


def test_where_commas_part_cells_the_point_is_decimal(read: Reader) -> None:
    """The comma cannot be decimal there, so nothing but the point can."""
    assert read(lines("1.200").replace(";", ",")).rows[0].result == 1.2


@given(st.lists(st.integers(1000, 999_999).map(lambda n: f"{n // 1000}.{n % 1000:03}"), min_size=1))
def test_numbers_that_all_may_be_whole_settle_nothing(cells: list[str]) -> None:
    """Thousands parted by points, as a spreadsheet of many countries writes them."""
    rows = tuple((n, (cell,)) for n, cell in enumerate(cells, start=2))
    table = TextTable("labs.csv", "", ("as_reported",), 1, rows, separator=";")
    assert decimal_marks(table, {"as_reported": 0}).point_unclear
