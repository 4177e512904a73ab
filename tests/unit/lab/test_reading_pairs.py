"""Pairs of a field reading and a result, read from files as people write them."""

from pathlib import Path

import openpyxl
import pytest

from fieldplan.base.errors import LabError
from fieldplan.campaign.field_reading import FieldReading
from fieldplan.lab.reading_pairs import read_pairs

TOLD = FieldReading(name="meter", analyte="lead", pilot="pairs.csv")
ROWS = "location_id,reading,result\nA,10,21\nB,12.5,30\nC,-0.5,2.5\nD,18,41\n"


def written(folder: Path, text: str | bytes, name: str = "pairs.csv") -> Path:
    """Write a file of pairs."""
    path = folder / name
    path.write_bytes(text.encode() if isinstance(text, str) else text)
    return path


def test_pairs_are_read_in_order(tmp_path: Path) -> None:
    """A meter may read below 0; a laboratory does not."""
    found = read_pairs(written(tmp_path, ROWS), TOLD)
    assert found.readings == (10.0, 12.5, -0.5, 18.0)
    assert found.results == (21.0, 30.0, 2.5, 41.0)
    assert (found.name, found.analyte, found.source) == ("meter", "lead", "pairs.csv")


def test_columns_of_other_names_and_decimal_commas(tmp_path: Path) -> None:
    """As a spreadsheet south of the Channel writes it."""
    text = "XRF;Pb\n10,5;21\n12,25;30,5\n−1,5;4,5\n18;41\n"
    told = TOLD.model_copy(update={"columns": {"reading": "XRF", "result": "Pb"}})
    found = read_pairs(written(tmp_path, text), told)
    assert found.readings == (10.5, 12.25, -1.5, 18.0)
    assert found.results == (21.0, 30.5, 4.5, 41.0)


def test_a_workbook_gives_the_same(tmp_path: Path) -> None:
    """Written by another library."""
    book = openpyxl.Workbook()
    for row in (("reading", "result"), (10, 21), (12.5, 30), (14, 33), (18, 41)):
        book.active.append(row)
    path = tmp_path / "pairs.xlsx"
    book.save(path)
    found = read_pairs(path, TOLD)
    assert found.readings == (10.0, 12.5, 14.0, 18.0)


def test_non_detects_stand_at_half_and_single_values_are_left_out(tmp_path: Path) -> None:
    """Both are counted, so that the finding can say so."""
    found = read_pairs(written(tmp_path, ROWS + "E,3,<5\nF,,12\nG,7,\n,,\n"), TOLD)
    assert found.results[-1] == 2.5
    assert (found.non_detects, found.unpaired, len(found.results)) == (1, 2, 5)


@pytest.mark.parametrize(
    ("text", "line"),
    [
        (
            "reading,result\n1,2\n2,3\n3,4\n",
            "pairs.csv has 3 pairs of reading and result; a correlation needs 4 or more. "
            "Add rows, or type the correlation.",
        ),
        (
            ROWS + "E,high,12\n",
            "pairs.csv row 6: the reading 'high' is no number. Correct it, or leave it blank.",
        ),
        (
            ROWS + "E,1_000,12\n",
            "pairs.csv row 6: the reading '1_000' is no number. Correct it, or leave it blank.",
        ),
        (
            ROWS + "E,nan,12\n",
            "pairs.csv row 6: the reading 'nan' is no number. Correct it, or leave it blank.",
        ),
        (
            ROWS + "E,11,ND\n",
            "pairs.csv row 6: the result 'ND' gives no limit. Write it as < and the limit.",
        ),
    ],
)
def test_what_cannot_be_read_is_told_by_row(tmp_path: Path, text: str, line: str) -> None:
    """Which file, which row, which value, what to do."""
    with pytest.raises(LabError) as fault:
        read_pairs(written(tmp_path, text), TOLD)
    assert fault.value.problems == (line,)


def test_a_point_that_may_part_thousands_is_refused(tmp_path: Path) -> None:
    """In files cut by semicolons 1.200 may mean 1200."""
    text = "reading;result\n1.200;21\n2.300;30\n1.400;41\n1.800;50\n"
    with pytest.raises(LabError, match="may part thousands"):
        read_pairs(written(tmp_path, text), TOLD)


def test_a_missing_column_names_the_table_to_write_it_in(tmp_path: Path) -> None:
    """The remedy must point at [[field_reading]], not at a pilot's [[sigma]]."""
    with pytest.raises(LabError) as fault:
        read_pairs(written(tmp_path, "XRF,result\n1,2\n2,3\n3,4\n4,9\n"), TOLD)
    told = " ".join(fault.value.problems)
    assert "has no column 'reading'" in told
    assert "[[field_reading]] table" in told
    assert "[[sigma]]" not in told
