"""Workbooks: what a cell holds and what it shows are two things."""

import io
import re
import zipfile
from collections.abc import Callable
from datetime import date
from pathlib import Path
from typing import Any

import pytest
from openpyxl import Workbook

from fieldplan.base.errors import LabError
from fieldplan.lab import read_lab
from fieldplan.lab import workbook as workbook_reader
from fieldplan.lab.tables import CellFault, read_tables
from fieldplan.lab.workbook import LAST_COLUMN
from tests.factories import make_campaign

HEADER = ["location_id", "analyte", "as_reported", "unit"]


def book(*rows: list[Any], title: str = "Results") -> Workbook:
    """Make a workbook of one sheet with our header."""
    workbook = Workbook()
    sheet = workbook.active
    assert sheet is not None
    sheet.title = title
    for row in [HEADER, *rows]:
        sheet.append(row)
    return workbook


def saved(workbook: Workbook, path: Path) -> Path:
    """Save it."""
    workbook.save(path)
    return path


@pytest.fixture
def problem(tmp_path: Path) -> Callable[[Workbook], str]:
    """Read a workbook that must be refused; give the message."""

    def read(workbook: Workbook) -> str:
        with pytest.raises(LabError) as caught:
            read_lab(saved(workbook, tmp_path / "labs.xlsx"), make_campaign())
        return str(caught.value)

    return read


def test_numbers_and_ids_come_out_as_they_are_shown(tmp_path: Path) -> None:
    """123.0 was typed as 123, and 007 is stored as 7 with three zeros as its format."""
    workbook = book([7, "lead", 12.0, "mg/kg"], ["B", "lead", 0.1, "mg/kg"])
    sheet = workbook["Results"]
    sheet["A2"].number_format = "000"
    table = read_lab(saved(workbook, tmp_path / "labs.xlsx"), make_campaign())
    assert [(r.location_id, r.as_reported, r.result) for r in table.rows] == [
        ("007", "12", 12.0),
        ("B", "0.1", 0.1),
    ]


def test_a_sheet_with_a_false_dimension_is_read_whole(tmp_path: Path) -> None:
    """Some programs declare A1:A1 for a full sheet; cells past it must not vanish."""
    path = saved(book(["A", "lead", 12, "mg/kg"], ["B", "lead", 13, "mg/kg"]), tmp_path / "a.xlsx")
    changed = io.BytesIO()
    with zipfile.ZipFile(path) as old, zipfile.ZipFile(changed, "w") as new:
        for name in old.namelist():
            content = old.read(name)
            if name == "xl/worksheets/sheet1.xml":
                content = re.sub(rb'<dimension ref="[^"]*"', b'<dimension ref="A1"', content)
            new.writestr(name, content)
    path.write_bytes(changed.getvalue())
    assert len(read_lab(path, make_campaign()).rows) == 2


def test_an_id_turned_into_a_date_is_refused(problem: Callable[[Workbook], str]) -> None:
    """The well 3-5 became the third of May; nobody can tell from the cell."""
    message = problem(book([date(2026, 5, 3), "lead", 12, "mg/kg"]))
    assert "cell A2 is a date for the spreadsheet" in message
    assert "location_id" in message


def test_an_error_cell_is_not_a_blank(problem: Callable[[Workbook], str]) -> None:
    """#N/A from a failed look-up is no missing value that may be skipped."""
    assert "holds the error #N/A" in problem(book(["A", "lead", "#N/A", "mg/kg"]))


def test_a_formula_without_a_saved_value_is_refused(problem: Callable[[Workbook], str]) -> None:
    """A file made by a program holds formulas that no spreadsheet has computed yet."""
    assert "formula without a saved value" in problem(book(["A", "lead", "=6*2", "mg/kg"]))


@pytest.mark.parametrize(
    "number_format",
    ['"<"0.0', '[<0.5]"<0.5";0.0', "0.0%", '0.0" J"', r"0.0\ \U", ";;;", "0.0,"],
)
def test_a_number_format_that_shows_something_else_is_refused(
    problem: Callable[[Workbook], str], number_format: str
) -> None:
    """A cell that shows <0.5 and holds 0.5 would turn a non-detect into a result."""
    workbook = book(["A", "lead", 0.5, "mg/kg"])
    workbook["Results"]["C2"].number_format = number_format
    assert "its number format" in problem(workbook)


def test_a_text_that_the_sheet_hides_or_extends_is_refused(
    problem: Callable[[Workbook], str],
) -> None:
    """A cell that shows nothing, or a U behind the text 0.5, was seen so by whoever sent it."""
    for number_format in (";;;", '@" U"'):
        workbook = book(["A", "lead", "0.5", "mg/kg"])
        workbook["Results"]["C2"].number_format = number_format
        assert "its number format" in problem(workbook)


def test_cells_merged_over_rows_are_refused(problem: Callable[[Workbook], str]) -> None:
    """Only the first cell of a merge has the id; the others look blank."""
    workbook = book(["A", "lead", 12, "mg/kg"], [None, "lead", 13, "mg/kg"])
    workbook["Results"].merge_cells("A2:A3")
    assert "merged over several rows" in problem(workbook)


@pytest.mark.parametrize("place", ["A1048576", "XFD5000"])
def test_only_cells_that_hold_something_are_visited(
    problem: Callable[[Workbook], str], monkeypatch: pytest.MonkeyPatch, place: str
) -> None:
    """One stray cell far away makes a sheet of millions of cells, nine of which hold something."""
    visited = []

    def counted(cell: Any, formula: Any) -> tuple[str, CellFault | None]:
        visited.append(cell.coordinate)
        assert len(visited) < 100
        return cell_text(cell, formula)

    cell_text = workbook_reader._cell_text
    monkeypatch.setattr(workbook_reader, "_cell_text", counted)
    workbook = book(["A", "lead", 12, "mg/kg"])
    workbook["Results"][place] = "x"
    assert f"row {place.lstrip('AXFD')}: analyte '' is blank" in problem(workbook)
    assert len(visited) == 9


def test_a_stray_cell_beside_the_header_is_no_column(tmp_path: Path) -> None:
    """A space typed in the last column must not make every row that wide."""
    workbook = book(*(["A", "lead", 12, "mg/kg"] for _ in range(50)))
    workbook["Results"]["XFD1"] = "x"
    (table,) = read_tables(saved(workbook, tmp_path / "labs.xlsx"))
    assert max(len(cells) for _, cells in table.rows) == len(table.header) == LAST_COLUMN


def test_a_merge_over_the_whole_sheet_is_refused_before_it_is_opened(tmp_path: Path) -> None:
    """A file of 7 kB can merge all cells there are, and opening it makes each of them."""
    workbook = book(["A", "lead", 12, "mg/kg"])
    workbook["Results"].merge_cells("Z1:Z2")
    path, changed = saved(workbook, tmp_path / "labs.xlsx"), io.BytesIO()
    with zipfile.ZipFile(path) as old, zipfile.ZipFile(changed, "w") as new:
        for name in old.namelist():
            new.writestr(name, old.read(name).replace(b'"Z1:Z2"', b'"Z1:XFD1048576"'))
    path.write_bytes(changed.getvalue())
    with pytest.raises(LabError, match="more than 100,000 merged cells"):
        read_tables(path)


def test_the_sheet_used_is_named_and_hidden_ones_are_not_read(tmp_path: Path) -> None:
    """A cover sheet beside the results is usual; a hidden old version is a trap."""
    workbook = book(["A", "lead", 12, "mg/kg dw"])
    workbook.create_sheet("Cover").append(["Report 17"])
    hidden = workbook.create_sheet("Old")
    for row in (HEADER, ["A", "lead", 99, "mg/kg"]):
        hidden.append(row)
    hidden.sheet_state = "hidden"
    table = read_lab(saved(workbook, tmp_path / "labs.xlsx"), make_campaign())
    assert [row.result for row in table.rows] == [12.0]
    assert table.notes == ("labs.xlsx: sheet 'Results' was read, 'Cover' was not.",)


def test_two_sheets_with_results_are_a_question(problem: Callable[[Workbook], str]) -> None:
    """Taking the first would drop half of the results in silence."""
    workbook = book(["A", "lead", 12, "mg/kg"])
    second = workbook.create_sheet("Zinc")
    for row in (HEADER, ["A", "lead", 13, "mg/kg"]):
        second.append(row)
    assert "several sheets ('Results' and 'Zinc')" in problem(workbook)


def test_hidden_rows_are_read_and_said(tmp_path: Path) -> None:
    """A filter left on must not thin the results."""
    workbook = book(["A", "lead", 12, "mg/kg"], ["B", "lead", 13, "mg/kg"])
    workbook["Results"].row_dimensions[3].hidden = True
    table = read_lab(saved(workbook, tmp_path / "labs.xlsx"), make_campaign())
    assert len(table.rows) == 2
    assert "1 rows that the sheet hides" in table.notes[0]


def test_an_empty_workbook_and_a_foreign_archive_are_refused(tmp_path: Path) -> None:
    """Neither holds results, and each has its own remedy."""
    with pytest.raises(LabError, match="shows no sheet with cells"):
        read_tables(saved(Workbook(), tmp_path / "empty.xlsx"))
    archive = tmp_path / "labs.xlsx"
    with zipfile.ZipFile(archive, "w") as content:
        content.writestr("labs.csv", "a,b")
    with pytest.raises(LabError, match="an archive but no"):
        read_tables(archive)
