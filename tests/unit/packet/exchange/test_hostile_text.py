"""Typed text with markup, formulas and hidden characters stays inert in every file."""

import csv
import io
import re
import zipfile
from pathlib import Path
from xml.etree import ElementTree as ET

import pytest

from fieldplan.packet.exchange import write_point_files
from fieldplan.packet.exchange.plain_text import plain
from fieldplan.packet.exchange.workbook import read_sheet
from tests.unit.packet.plans import FORMULA, HOSTILE_TEXTS, SCRIPT, hostile_plan

Files = dict[str, Path]


@pytest.fixture(scope="module")
def files(tmp_path_factory: pytest.TempPathFactory) -> Files:
    """Write all files of the hostile plan once; each has been read back already."""
    folder = tmp_path_factory.mktemp("hostile")
    (folder / "crew").mkdir()
    (folder / "office").mkdir()
    paths = write_point_files(hostile_plan(), folder / "crew", folder / "office")
    return {path.suffix if "key" not in path.name else "key": path for path in paths}


@pytest.mark.parametrize("kind", [".csv", "key"])
def test_no_csv_cell_opens_a_formula(files: Files, kind: str) -> None:
    """Cells as Python's own csv module splits them, at commas and at semicolons."""
    text = files[kind].read_text(encoding="utf-8-sig")
    for delimiter in ",;":
        for row in csv.reader(io.StringIO(text), delimiter=delimiter):
            for cell in row:
                number = re.fullmatch(r"-?\d+(\.\d+)?", cell)
                assert number or not cell.lstrip().startswith(("=", "+", "-", "@")), cell


def test_negative_numbers_stay_numbers(files: Files) -> None:
    """A guard before -1.9 would turn a longitude into text."""
    text = files[".csv"].read_text(encoding="utf-8-sig")
    for row in csv.DictReader(io.StringIO(text)):
        assert float(row["longitude"]) < 0


@pytest.mark.parametrize("kind", [".gpx", ".kml"])
def test_xml_files_hold_markup_as_text(files: Files, kind: str) -> None:
    """No element that we did not write, and no raw script, exists after parsing."""
    content = files[kind].read_text(encoding="utf-8")
    assert "<script" not in content
    tags = {element.tag.rpartition("}")[2] for element in ET.fromstring(content).iter()}
    assert "script" not in tags
    joined = "".join(ET.fromstring(content).itertext())
    assert "alert(1)" in joined


def test_what_viewers_take_for_html_in_kml_is_escaped_once_more(files: Files) -> None:
    """OGC 07-147r2 lets descriptions hold HTML, so a viewer would run what XML alone unescapes."""
    root = ET.parse(files[".kml"]).getroot()
    space = "{http://www.opengis.net/kml/2.2}"
    for tag in ("description", "value"):
        texts = [element.text or "" for element in root.iter(f"{space}{tag}")]
        assert not any("<script" in text for text in texts)
    assert any("&lt;script&gt;" in (e.text or "") for e in root.iter(f"{space}value"))


def test_workbook_holds_no_formula_and_the_text_as_typed(files: Files) -> None:
    """In a workbook a formula is a cell of its own kind; texts need no apostrophe there."""
    with zipfile.ZipFile(files[".xlsx"]) as package:
        sheets = [name for name in package.namelist() if name.startswith("xl/worksheets/")]
        for name in sheets:
            assert b"<f>" not in package.read(name)
            assert b"<f " not in package.read(name)
    ids = {row["location_id"] for row in read_sheet(files[".xlsx"], "locations")}
    assert {FORMULA, SCRIPT, "1E5"} <= ids


def test_geojson_and_geopackage_keep_the_text_as_data(files: Files) -> None:
    """Read by GDAL: ids as typed, nothing interpreted."""
    from pyogrio import read_dataframe

    for table in (
        read_dataframe(files[".geojson"]),
        read_dataframe(files[".gpkg"], layer="locations"),
    ):
        assert {FORMULA, SCRIPT, "1E5"} <= set(table["location_id"])
    reasons = read_dataframe(files[".gpkg"], layer="exclusions")["name"]
    assert list(reasons) == [plain(text) for text in HOSTILE_TEXTS]


def test_styles_in_the_geopackage_are_well_formed(files: Files) -> None:
    """A stratum's name stands in a style document and must not break it."""
    from pyogrio import read_dataframe

    styles = read_dataframe(files[".gpkg"], layer="layer_styles")
    values = [
        category.get("value")
        for document in styles["styleQML"]
        for category in ET.fromstring(document).iter("category")
    ]
    assert SCRIPT in values
    assert FORMULA in values
