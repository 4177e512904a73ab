"""Sheets and maps as PDF, read back by poppler: a parser that this project does not use."""

import re
import shutil
import subprocess
from pathlib import Path

import pytest

from fieldplan.base.document import Document, Paragraph, Table
from fieldplan.packet.maps.printed import printed_map
from fieldplan.packet.sheets.pdf import set_pdf
from tests.factories import make_plan
from tests.unit.packet.maps.sites import make_area_plan, make_outline
from tests.unit.packet.sheets.documents import HOSTILE, WIDE, make_document

pytestmark = pytest.mark.oracle


def run(*command: object) -> str:
    """Run one of poppler's programs and return what it says."""
    program = shutil.which(str(command[0]))
    assert program, f"{command[0]} is missing: install poppler-utils"
    done = subprocess.run(
        [program, *map(str, command[1:])], capture_output=True, text=True, check=True, timeout=60
    )
    return done.stdout


def pages_of(pdf: bytes, folder: Path) -> list[str]:
    """The words of each page."""
    path = folder / "sheet.pdf"
    path.write_bytes(pdf)
    return run("pdftotext", "-layout", path, "-").split("\f")[:-1]


@pytest.mark.parametrize("paper", ["A4", "Letter"])
def test_status_revision_and_page_stand_on_every_page(paper, tmp_path: Path) -> None:
    """A page that falls out of its folder must still say DRAFT."""
    pages = pages_of(set_pdf(make_document(), paper=paper), tmp_path)
    assert len(pages) >= 4
    for number, words in enumerate(pages, start=1):
        assert words.count("DRAFT") == 2
        assert f"QF-r01 · page {number} of {len(pages)}" in words


def test_a_unit_is_never_broken_at_its_stroke(tmp_path: Path) -> None:
    """A line that ends in "6.15 µg/" reads as another unit."""
    lines = [Paragraph("of lead " * count + "12 mg/kg found.") for count in range(5, 45)]
    table = Table(("Location", "Value (mg/kg)", "Why"), (("QF-A-01", "3", "words " * 60),))
    document = Document("T", "", "QF", "QF-r01", "DRAFT", [*lines, table])
    words = "\n".join(pages_of(set_pdf(document, paper="A4"), tmp_path))
    assert words.count("12 mg/kg") + len(re.findall(r"12\s*\n\s*mg/kg", words)) == len(lines)
    assert "(mg/kg)" in words


def test_table_headers_repeat_and_no_id_is_cut(tmp_path: Path) -> None:
    """Sixty rows of thirteen columns run over pages."""
    pages = pages_of(set_pdf(make_document(), paper="A4"), tmp_path)
    with_rows = [words for words in pages if re.search(r"QF-A-\d\d", words)]
    assert len(with_rows) >= 2
    for words in with_rows:
        assert "location_id" in words
        assert "inclusion_probability" in words
    everything = "\n".join(pages)
    for row in WIDE.rows:
        assert row[0] in everything
        assert row[1] in everything
    assert everything.count("5776543.2") == len(WIDE.rows)


def test_all_words_lie_on_the_paper(tmp_path: Path) -> None:
    """Boxes of words from poppler against the size of the page."""
    path = tmp_path / "sheet.pdf"
    path.write_bytes(set_pdf(make_document(words="W" * 120), paper="A4"))
    listing = run("pdftotext", "-bbox", path, "-")
    for page in listing.split("<page ")[1:]:
        width, height = map(float, re.findall(r'(?:width|height)="([\d.]+)"', page)[:2])
        boxes = re.findall(
            r'xMin="([\d.-]+)" yMin="([\d.-]+)" xMax="([\d.]+)" yMax="([\d.]+)"', page
        )
        assert boxes
        for box in boxes:
            left, top, right, bottom = map(float, box)
            assert left > 25
            assert top > 10
            assert right < width - 25
            assert bottom < height - 15


def test_hostile_words_are_printed_as_typed(tmp_path: Path) -> None:
    """Signs and all; spaces may fall at line ends."""
    pages = pages_of(set_pdf(make_document(words=HOSTILE), paper="A4"), tmp_path)
    printed = re.sub(r"\s+", "", "".join(pages)).replace("\u200b", "")
    assert printed.count(re.sub(r"\s+", "", HOSTILE)) >= 10


def test_no_font_is_left_to_the_readers_machine(tmp_path: Path) -> None:
    """pdffonts: every face is embedded."""
    path = tmp_path / "sheet.pdf"
    for pdf in (set_pdf(make_document(), paper="A4"), printed_map(make_plan()).pdf):
        path.write_bytes(pdf)
        rows = run("pdffonts", path).splitlines()[2:]
        assert rows
        assert all(re.search(r"\byes +(yes|no) +(yes|no) +\d+ +\d+$", row) for row in rows)


def test_every_location_is_named_on_the_printed_map(tmp_path: Path) -> None:
    """As text, so that it can be searched."""
    plan = make_area_plan(make_outline(900.0), 90, strata=2)
    pages = pages_of(printed_map(plan).pdf, tmp_path)
    assert len(pages) > 1
    assert all(words.count("DRAFT") == 2 for words in pages)
    inside = " ".join(pages[1:])
    assert {p.short_name for p in plan.locations.places} <= set(re.findall(r"HLA\d{3}", inside))


def test_the_scale_bar_is_true_in_the_finished_picture(tmp_path: Path) -> None:
    """Counted in dark pixels of a picture that poppler made at 254 dots to the inch (10 a mm)."""
    from matplotlib import image

    path = tmp_path / "map.pdf"
    path.write_bytes(printed_map(make_plan()).pdf)
    run("pdftoppm", "-r", "254", "-gray", "-png", path, tmp_path / "map")
    picture = image.imread(next(tmp_path.glob("map*.png")))
    dark = (picture if picture.ndim == 2 else picture[..., 0]) < 0.5
    # Quarry Field is 200 m wide at 1 : 1 250, so its upper edge is 160 mm = 1600 dots long
    runs = [
        max(len(part) for part in "".join("#" if d else " " for d in row).split())
        for row in dark[300:1500]
        if row.any()
    ]
    assert any(abs(length - 1600) <= 8 for length in runs)
