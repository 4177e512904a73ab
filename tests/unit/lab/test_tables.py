"""Encodings, separators and row numbers."""

import os
from collections.abc import Callable
from pathlib import Path

import pytest

from fieldplan.base.errors import LabError
from fieldplan.lab.tables import capped, read_tables

WRITE = Callable[..., Path]


@pytest.mark.parametrize(
    "encoding", ["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "utf-16-be", "cp1252"]
)
@pytest.mark.parametrize("separator", [",", ";", "\t"])
@pytest.mark.parametrize("line_end", ["\n", "\r\n", "\r"])
def test_every_encoding_separator_and_line_end_gives_the_same_cells(
    lab_file: WRITE, encoding: str, separator: str, line_end: str
) -> None:
    """What a spreadsheet saved must not decide what the laboratory said."""
    lines = [["location_id", "unit"], ["Hügel 1", "µg/L"], ["B", "mg/L"]]
    text = line_end.join(separator.join(line) for line in lines) + line_end
    table = read_tables(lab_file(text.encode(encoding)))[0]
    assert table.header == ("location_id", "unit")
    assert table.rows == ((2, ("Hügel 1", "µg/L")), (3, ("B", "mg/L")))
    assert bool(table.notes) == (encoding == "cp1252")


def test_rows_are_numbered_as_a_spreadsheet_counts_them(lab_file: WRITE) -> None:
    """Blank rows and a cell with a line break count, so that a message finds its row."""
    text = 'a,b\n\n"two\nlines",1\n,\nlast,2\n'
    assert [number for number, _ in read_tables(lab_file(text))[0].rows] == [3, 5]


def test_a_separator_told_in_the_first_line_is_obeyed(lab_file: WRITE) -> None:
    """Spreadsheets write sep=; above the header; it is no header."""
    table = read_tables(lab_file("sep=;\na;b\n1;2\n"))[0]
    assert (table.header, table.rows) == (("a", "b"), ((3, ("1", "2")),))


def test_a_separator_inside_a_quoted_header_does_not_count(lab_file: WRITE) -> None:
    """The header "a,b,c";d has two cells."""
    assert read_tables(lab_file('"a,b";d\n1;2\n'))[0].separator in {";", ","}
    assert read_tables(lab_file('"a;b;c",d\n1,2\n'))[0].header == ("a;b;c", "d")


@pytest.mark.parametrize(
    ("content", "says"),
    [
        (b"", "is empty"),
        (b"\xef\xbb\xbf\r\n", "is empty"),
        (b",,\n,,\n", "holds no cells"),
        (b"\xd0\xcf\x11\xe0 old", "old .xls"),
        (b"%PDF-1.7", "PDF"),
        (b"PK\x03\x04rubbish", "damaged workbook"),
        (b"a,b\n1,2,3\n", r"row 2 has 3 cells, the header 2"),
        (b'a,b\n"1,2\n', "quotation mark"),
        (b"a,b\n\x81\x8d,2\n", "neither UTF-8"),
        (b"\x01\x02\x00\x00\x03a", "not a text file"),
    ],
)
def test_a_file_of_another_kind_is_refused_by_name(
    lab_file: WRITE, content: bytes, says: str
) -> None:
    """The remedy depends on what the file is."""
    with pytest.raises(LabError, match=says):
        read_tables(lab_file(content))


def test_a_missing_file_and_a_folder_are_named(tmp_path: Path) -> None:
    """The path typed is what the user can check."""
    with pytest.raises(LabError, match=r"gone\.csv cannot be read"):
        read_tables(tmp_path / "gone.csv")
    with pytest.raises(LabError, match="is a folder"):
        read_tables(tmp_path)


def test_a_decimal_comma_before_a_blank_cell_is_not_two_numbers(lab_file: WRITE) -> None:
    """49,6 and a limit left blank make one cell too many, and the surplus one is blank."""
    head = "sample_id,analyte,unit,as_reported,reporting_limit,role\n"
    mixed = f"{head}A,Lead,mg/kg,49,6,,\nB,Lead,mg/kg,48,5,\n"
    with pytest.raises(LabError, match=r"row 2 has 7 cells, the header 6; a comma inside a cell"):
        read_tables(lab_file(mixed))
    every = f"{head}A,Lead,mg/kg,49,6,,\nB,Lead,mg/kg,<48,5,,\n"
    with pytest.raises(LabError) as caught:
        read_tables(lab_file(every))
    assert len(caught.value.problems) == 2


def test_blanks_at_the_end_of_every_row_are_the_programs_own(lab_file: WRITE) -> None:
    """Some exports end each row in a separator that their header has not."""
    (table,) = read_tables(lab_file("a,b\nx,1,,\ny,2,,\n"))
    assert table.rows == ((2, ("x", "1")), (3, ("y", "2")))
    assert len(read_tables(lab_file("a;b\n1;2;\n3;4;\n"))[0].rows) == 2


def test_a_pipe_or_a_device_is_no_ordinary_file(tmp_path: Path) -> None:
    """A pipe that nobody writes to waits for ever, and a device gives bytes without end."""
    pipe = tmp_path / "labs.csv"
    os.mkfifo(pipe)
    for path in (pipe, Path(os.devnull), Path("/dev/zero")):
        with pytest.raises(LabError, match="is no ordinary file"):
            read_tables(path)


def test_a_cell_without_end_is_refused_in_words(
    lab_file: WRITE, read: Callable[..., object]
) -> None:
    """A picture pasted into a certificate must end in a sentence, wherever it stands."""
    for text in (f"{'x' * 200_000},b\n1,2\n", f"a,b\n{'x' * 200_000},2\n"):
        with pytest.raises(LabError, match="cannot be cut into cells"):
            read_tables(lab_file(text))
        with pytest.raises(LabError, match="cannot be cut into cells"):
            read(text)


def test_many_problems_are_capped_and_counted() -> None:
    """A thousand lines of errors hide the first."""
    lines = capped([f"row {number}" for number in range(100)])
    assert len(lines) == 20
    assert lines[-1] == "… and 81 more."
