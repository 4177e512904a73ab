"""Certificates: a letterhead above the table and remarks below it are said, results never lost."""

import csv
import io
from collections.abc import Callable
from pathlib import Path

import pytest
from openpyxl import Workbook

from fieldplan.base.errors import LabError
from fieldplan.lab import read_lab
from fieldplan.lab.model import LabTable
from tests.factories import make_campaign

Read = Callable[..., LabTable]
LETTERHEAD = [
    ["INVENTED ANALYTICAL LTD"],
    ["Certificate of analysis 26-118", "", "page 1 of 1"],
    ["Client: R. Amadi, Quern Field, received 12.11.2026"],
    [],
]
HEADER = ["Sample ID", "Lab no.", "Analyte", "As reported", "Unit", "Reporting limit"]
RESULTS = [
    ["QF-01", "26-1", "Lead", "41", "mg/kg", "5"],
    ["QF-02", "26-2", "Lead", "<5", "mg/kg", "5"],
    ["QF-03", "26-3", "Lead", "12.5", "mg/kg", "5"],
]
REMARKS = [
    [],
    ["Results apply to the samples as received, and to them alone"],
    ["Authorised by:", "J. Doe, laboratory manager"],
    ["*** END ***"],
]


@pytest.fixture(params=["csv", "xlsx", "bare csv"])
def read(request: pytest.FixtureRequest, tmp_path: Path) -> Read:
    """Save rows as CSV, as CSV whose text lines are not quoted, or as a workbook, and read them."""

    def save(rows: list[list[str]], **options: object) -> LabTable:
        path = tmp_path / ("labs.xlsx" if request.param == "xlsx" else "labs.csv")
        if request.param == "xlsx":
            book = Workbook()
            for row in rows:
                book.worksheets[0].append([float(c) if c.isdigit() else c for c in row])
            book.save(path)
        elif request.param == "csv":
            text = io.StringIO(newline="")
            csv.writer(text).writerows([[*row, *[""] * (6 - len(row))] for row in rows])
            path.write_text(text.getvalue(), encoding="utf-8", newline="")
        else:
            path.write_text("\n".join(",".join(row) for row in rows), encoding="utf-8")
        return read_lab(path, make_campaign(), **options)  # type: ignore[arg-type]

    return save


def test_letterhead_and_remarks_are_passed_over_and_said(read: Read) -> None:
    """Practitioners get certificates, not tables; the numbers are those of the table alone."""
    plain = read([HEADER, *RESULTS])
    table = read([*LETTERHEAD, HEADER, *RESULTS, *REMARKS])
    assert [(row.sample_id, row.result, row.detected) for row in table.rows] == [
        (row.sample_id, row.result, row.detected) for row in plain.rows
    ]
    assert [row.row for row in table.rows] == [6, 7, 8]
    name = table.file_name
    above, below = [note for note in table.notes if "not read" in note]
    assert above.startswith(
        f"{name}: rows 1, 2 and 3 above the header in row 5 not read: 'INVENTED ANALYTICAL LTD', "
    )
    assert below.startswith(f"{name}: rows 10, 11 and 12 below the results not read: 'Results ")
    assert "'*** END ***'" in below
    assert not any("not read" in note for note in plain.notes)


def test_titles_that_need_a_map_are_found_below_a_letterhead_too(read: Read) -> None:
    """The remedy names the columns of the table, not the name of the laboratory."""
    header = ["Client sample ID", "Lab no.", "Parameter", "Result", "Units", "LOR"]
    rows = [*LETTERHEAD, header, *RESULTS]
    with pytest.raises(LabError, match="is it 'Parameter'") as caught:
        read(rows)
    assert "INVENTED" not in str(caught.value)
    columns = {"sample_id": "Client sample ID", "analyte": "Parameter", "as_reported": "Result",
               "unit": "Units", "reporting_limit": "LOR"}  # fmt: skip
    assert len(read(rows, columns=columns).rows) == 3
    strange = ["Probe", "Nr.", "Stoff", "Befund", "Einheit", "BG"]
    columns = {"sample_id": "Probe", "analyte": "Stoff", "as_reported": "Befund",
               "unit": "Einheit", "reporting_limit": "BG"}  # fmt: skip
    assert len(read([*LETTERHEAD, strange, *RESULTS], columns=columns).rows) == 3


def test_a_file_without_a_known_header_is_told_so(read: Read) -> None:
    """Neither 'its columns are INVENTED ANALYTICAL LTD' nor a comma that splits a cell."""
    strange = ["Probe", "Nr.", "Stoff", "Befund", "Einheit", "BG"]
    with pytest.raises(LabError) as caught:
        read([*LETTERHEAD, strange, *RESULTS])
    (line,) = caught.value.problems
    assert "none of its first 60 rows has titles that are known here" in line
    assert "If row 5 or one above it is the header" in line


@pytest.mark.parametrize(
    "row",
    [
        ["QF-04", "26-4", "Lead", "", "mg/kg", "5"],
        ["QF-04", "26-4", "Lead", "", "", ""],
        ["QF-04", "26-4", "", "17", "mg/kg", ""],
        ["QF-04", "", "", "", "", ""],
        ["North well", "", "", "", "", ""],
        ["QF-04", "26-4", "", "", "mg/kg", ""],
    ],
)
def test_a_last_row_that_may_be_a_result_is_refused_and_not_passed_over(
    read: Read, row: list[str]
) -> None:
    """A result whose cells went astray must be seen to, wherever it stands."""
    for rows in ([HEADER, *RESULTS, row], [*LETTERHEAD, HEADER, *RESULTS, row, *REMARKS]):
        with pytest.raises(LabError, match=rf"row {rows.index(row) + 1}: "):
            read(rows)


def test_a_remark_between_results_is_refused(read: Read) -> None:
    """Only the end of a table is known to be one; what stands between results is looked at."""
    with pytest.raises(LabError, match="row 3: analyte '' is blank"):
        read([HEADER, RESULTS[0], ["see the note on page 2 below"], *RESULTS[1:]])


def test_results_above_the_header_found_keep_it_from_being_one(read: Read) -> None:
    """Two tables in one sheet: half of the results must not pass for a letterhead."""
    first = ["Probe", "Nr.", "Stoff", "Befund", "Einheit", "BG"]
    with pytest.raises(LabError):
        read([first, *RESULTS, HEADER, *RESULTS])


def test_the_header_is_the_first_of_two_alike(read: Read) -> None:
    """A certificate of two pages repeats its header; the second one hides no result."""
    table = read([*LETTERHEAD, HEADER, *RESULTS[:2], HEADER, RESULTS[2]])
    assert [row.sample_id for row in table.rows] == ["QF-01", "QF-02", "QF-03"]


def test_a_last_row_of_unsaved_formulas_is_refused(tmp_path: Path) -> None:
    """It looks blank here and holds a result in the workbook."""
    book = Workbook()
    for row in [HEADER, *RESULTS, ["=A1&B1", "", "=C2", "=6*7", "=E2", ""]]:
        book.worksheets[0].append(row)
    book.save(tmp_path / "labs.xlsx")
    with pytest.raises(LabError, match="row 5"):
        read_lab(tmp_path / "labs.xlsx", make_campaign())


def test_a_letterhead_decides_no_separator(tmp_path: Path) -> None:
    """Commas in the address of the laboratory are not those of the table."""
    path = tmp_path / "labs.csv"
    lines = ["Invented Analytical, 12 High St, Town, Country, Planet, Space, Time"]
    lines += [";".join(row) for row in [HEADER, *RESULTS]]
    path.write_text("\n".join(lines).replace("12.5", "12,5"), encoding="utf-8")
    assert [row.result for row in read_lab(path, make_campaign()).rows] == [41.0, None, 12.5]
