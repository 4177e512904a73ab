"""A workbook for the office: locations, samples with their key, and notes on both."""

import io
import re
import zipfile
from collections.abc import Iterable, Sequence
from datetime import datetime, time
from pathlib import Path
from typing import TYPE_CHECKING
from xml.etree import ElementTree as ET

from fieldplan.frame.projection import site_zone, utm, utm_in_words
from fieldplan.packet.exchange.plain_text import plain
from fieldplan.packet.exchange.points_csv import KEY_COLUMNS, sample_rows
from fieldplan.packet.exchange.read_points import ReadPoint, degrees_of_grid
from fieldplan.packet.exchange.rows import DATUM, OFFICE_COLUMNS, Cell, columns_of, point_rows
from fieldplan.plan.model import Plan

if TYPE_CHECKING:
    from openpyxl.worksheet.worksheet import Worksheet

FORMATS = {
    "latitude": "0.0000000", "longitude": "0.0000000", "easting": "0.0", "northing": "0.0",
    "inclusion_probability": "0.00000000", "weight": "0.00000000",
}  # fmt: skip
_MAIN = "{http://schemas.openxmlformats.org/spreadsheetml/2006/main}"
_LINK = "{http://schemas.openxmlformats.org/officeDocument/2006/relationships}id"


def write_workbook(plan: Plan) -> bytes:
    """Write the three sheets; texts are stored as texts, so that none runs as a formula.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    bytes
        The same plan gives the same bytes.
    """
    from openpyxl import Workbook

    book = Workbook()
    book.remove(book.worksheets[0])
    columns = columns_of(plan, OFFICE_COLUMNS)
    rows = [row.values(columns) for row in point_rows(plan)]
    _fill_sheet(book.create_sheet("locations"), columns, rows)
    _fill_sheet(book.create_sheet("samples"), KEY_COLUMNS, sample_rows(plan))
    _fill_sheet(book.create_sheet("notes"), ("about", "what to know"), _notes(plan))
    book["notes"].column_dimensions["B"].width = 100
    book.properties.creator = "fieldplan"
    book.properties.title = plain(f"{plan.revision_name} {plan.status}")
    book.properties.created = datetime.combine(plan.made_on, time())
    written = io.BytesIO()
    book.save(written)
    return _fixed_dates(written.getvalue(), plan)


def _notes(plan: Plan) -> list[list[Cell]]:
    projection = plan.frame.projection
    centre = utm(projection.latitude, projection.longitude, zone=site_zone(projection))
    notes = [
        ("plan", f"{plan.revision_name}, {plan.campaign.plan.title}"),
        ("status", plan.status),
        ("key", "The sheet 'samples' tells duplicates from their parents. Keep it from the crew "
         "and the laboratory until all results are in."),
        ("latitude, longitude", f"Degrees, datum {DATUM} (EPSG:4326), 7 decimals (about 1 cm)."),
        ("easting, northing", f"{utm_in_words(centre)}, to 0.1 m; one zone for the whole site."),
        ("class", "random: in the mean. alternate: visited only instead of a random location "
         "of its stratum, in list order. targeted: chosen by judgement, never in the mean."),
        ("inclusion_probability", "n/N for a list, n per square metre for an area, n per "
         "metre for lines."),
        ("weight", "Stratum weight divided by its planned random locations."),
    ]  # fmt: skip
    notes += [("population", sentence) for sentence in plan.frame.population.sentences]
    notes += [("source", line) for line in plan.frame.sources]
    notes += [("frame", line) for line in plan.frame.notes]
    notes += [("locations", line) for line in plan.locations.notes]
    return [[about, plain(told)] for about, told in notes]


def _fill_sheet(sheet: "Worksheet", columns: Sequence[str], rows: Iterable[Sequence[Cell]]) -> None:
    from openpyxl.styles import Font
    from openpyxl.utils import get_column_letter

    sheet.append(list(columns))
    for cell in sheet[1]:
        cell.font = Font(bold=True)
    sheet.freeze_panes = "A2"
    widths = [len(name) for name in columns]
    for number, row in enumerate(rows, start=2):
        for position, value in enumerate(row):
            if value is None or value == "":
                continue
            cell = sheet.cell(number, position + 1, value)
            if isinstance(value, str):
                cell.data_type = "s"
                cell.number_format = "@"
            else:
                cell.number_format = FORMATS.get(columns[position], "General")
            widths[position] = max(widths[position], min(len(str(value)), 40))
    for position, width in enumerate(widths, start=1):
        sheet.column_dimensions[get_column_letter(position)].width = width + 2


def _fixed_dates(content: bytes, plan: Plan) -> bytes:
    """Pack the workbook again with the plan's date in place of the clock's."""
    stamp = f"{plan.made_on.isoformat()}T00:00:00Z"
    day = (max(plan.made_on.year, 1980), plan.made_on.month, plan.made_on.day, 0, 0, 0)
    packed = io.BytesIO()
    with (
        zipfile.ZipFile(io.BytesIO(content)) as source,
        zipfile.ZipFile(packed, "w", zipfile.ZIP_DEFLATED) as target,
    ):
        for name in source.namelist():
            part = source.read(name)
            if name == "docProps/core.xml":
                dated = rb"(<dcterms:modified[^>]*>)[^<]*"
                part = re.sub(dated, rb"\g<1>" + stamp.encode(), part)
            entry = zipfile.ZipInfo(name, date_time=day)
            entry.compress_type = zipfile.ZIP_DEFLATED
            target.writestr(entry, part)
    return packed.getvalue()


def read_workbook(path: Path) -> list[ReadPoint]:
    """Read the sheet ``locations`` from the parts of the package (ECMA-376), without its writer.

    Parameters
    ----------
    path : Path

    Returns
    -------
    list of ReadPoint
        Two per row: from the degrees and from the grid coordinate.
    """
    points = []
    for row in read_sheet(path, "locations"):
        name, location = str(row["short_name"]), str(row["location_id"])
        degrees = float(row["latitude"]), float(row["longitude"])
        grid = degrees_of_grid(str(row["utm_zone"]), float(row["easting"]), float(row["northing"]))
        points += [ReadPoint(name, location, *form) for form in (degrees, grid)]
    return points


def read_sheet(path: Path, title: str) -> list[dict[str, str]]:
    """Read one sheet as a list of rows by column name; formulas are an error.

    Parameters
    ----------
    path : Path
    title : str

    Returns
    -------
    list of dict

    Raises
    ------
    ValueError
        A cell holds a formula, which this package never writes.
    """
    with zipfile.ZipFile(path) as package:
        texts = _shared_texts(package)
        sheet = ET.fromstring(package.read(_sheet_part(package, title)))
    if next(sheet.iter(f"{_MAIN}f"), None) is not None:
        message = f"{path.name}: sheet {title!r} holds a formula"
        raise ValueError(message)
    table = [_sheet_row(row, texts) for row in sheet.iter(f"{_MAIN}row")]
    columns = table[0]
    return [{name: row.get(place, "") for place, name in columns.items()} for row in table[1:]]


def _shared_texts(package: zipfile.ZipFile) -> list[str]:
    """List the texts that cells refer to by number; none where cells hold their own."""
    if "xl/sharedStrings.xml" not in package.namelist():
        return []
    return [_text_of(entry) for entry in ET.fromstring(package.read("xl/sharedStrings.xml"))]


def _text_of(holder: ET.Element) -> str:
    return "".join(piece.text or "" for piece in holder.iter(f"{_MAIN}t"))


def _sheet_part(package: zipfile.ZipFile, title: str) -> str:
    book = ET.fromstring(package.read("xl/workbook.xml"))
    links = ET.fromstring(package.read("xl/_rels/workbook.xml.rels"))
    wanted = next(s.get(_LINK) for s in book.iter(f"{_MAIN}sheet") if s.get("name") == title)
    target = str(next(link.get("Target") for link in links if link.get("Id") == wanted))
    return target.lstrip("/") if target.startswith("/") else f"xl/{target}"


def _sheet_row(row: ET.Element, texts: list[str]) -> dict[str, str]:
    """Give the cells of a row by the letters of their column."""
    cells = {}
    for cell in row.iter(f"{_MAIN}c"):
        letters = str(cell.get("r")).rstrip("0123456789")
        value = cell.findtext(f"{_MAIN}v", default="")
        match cell.get("t"):
            case "s":
                cells[letters] = texts[int(value)]
            case "inlineStr":
                cells[letters] = _text_of(cell)
            case _:
                cells[letters] = value
    return cells
