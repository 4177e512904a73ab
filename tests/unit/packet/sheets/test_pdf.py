"""Sheets as PDF: pages, repeated bytes, inert markup, and what goes over to typst."""

import json
import re

import pytest

from fieldplan.base.document import Document, Figure, Heading, Paragraph, Table, Verbatim
from fieldplan.packet.sheets.pdf import set_pdf, sheet_facts
from tests.unit.packet.sheets.documents import HOSTILE, WIDE, make_document


def page_boxes(pdf: bytes) -> list[tuple[float, float]]:
    """Width and height of every page, in points, read from the file itself."""
    found = re.findall(rb"/MediaBox ?\[ ?0 0 ([\d.]+) ([\d.]+) ?\]", pdf)
    return [(float(width), float(height)) for width, height in found]


@pytest.mark.parametrize(
    ("paper", "short", "long"), [("A4", 595.28, 841.89), ("Letter", 612.0, 792.0)]
)
def test_pages_have_the_size_of_the_paper(paper, short: float, long: float) -> None:
    """ISO 216: 210 × 297 mm; ANSI/ASME Y14.1: 8.5 × 11 in; 72 points an inch."""
    boxes = page_boxes(set_pdf(make_document(), paper=paper))
    assert len(boxes) >= 4
    for width, height in boxes:
        assert sorted((width, height)) == pytest.approx([short, long], abs=0.02)


def test_a_table_too_wide_for_an_upright_page_lies() -> None:
    """Thirteen columns do not fit 174 mm at a size one can read."""
    document = Document("T", "", "QF", "QF-r01", "DRAFT", [Heading("Places"), WIDE])
    title, *places = page_boxes(set_pdf(document, paper="A4"))
    assert title[0] < title[1]
    assert places
    assert all(width > height for width, height in places)


@pytest.mark.parametrize(
    ("paper", "lines"), [("A4", 14), ("A4", 16), ("Letter", 10), ("Letter", 13)]
)
def test_a_figure_that_would_just_not_fit_is_set_smaller(paper, lines: int) -> None:
    """Page one keeps its map; a figure turned over alone leaves half a page blank."""
    square = '<svg xmlns="http://www.w3.org/2000/svg" width="300" height="300"/>'
    blocks = [Paragraph("One line.")] * lines + [Figure(square, "Caption.", "A square.")]
    document = Document("T", "", "QF", "QF-r01", "DRAFT", blocks)
    assert len(page_boxes(set_pdf(document, paper=paper))) == 1
    far = Document("T", "", "QF", "QF-r01", "DRAFT", blocks[:1] * 25 + blocks[-1:])
    assert len(page_boxes(set_pdf(far, paper=paper))) == 2


@pytest.mark.parametrize(("lines", "pages"), [(26, 1), (30, 2)])
def test_a_flat_chart_keeps_its_letters_or_is_turned_over(lines: int, pages: int) -> None:
    """Of two charts on a page, one with far smaller letters reads as a footnote."""
    flat = '<svg xmlns="http://www.w3.org/2000/svg" width="330" height="160"/>'
    blocks = [Paragraph("One line.")] * lines + [Figure(flat, "Caption.", "A chart.")]
    document = Document("T", "", "QF", "QF-r01", "DRAFT", blocks)
    assert len(page_boxes(set_pdf(document, paper="A4"))) == pages


def test_a_form_lies_and_its_empty_columns_take_the_room() -> None:
    """People write larger than printers; every page of the form lies, the first too."""
    table = Table(("Sample", "Note"), (("QF-1", ""),) * 30, by_hand=(("Note", 1.0),))
    form = Document("T", "", "QF", "QF-r01", "DRAFT", [table], lying=True)
    boxes = page_boxes(set_pdf(form, paper="A4"))
    assert len(boxes) == 2
    assert all(width > height for width, height in boxes)


def test_a_table_of_few_columns_stands_upright() -> None:
    """Turning pages for nothing annoys."""
    table = Table(("a", "b"), (("1", "2"),) * 5)
    boxes = page_boxes(set_pdf(Document("T", "", "QF", "QF-r01", "DRAFT", [table]), paper="A4"))
    assert len(boxes) == 1
    assert boxes[0][0] < boxes[0][1]


def test_the_same_document_gives_the_same_bytes() -> None:
    """No clock, no folder name, no font of the machine in the file."""
    first, second = (set_pdf(make_document(), paper="A4") for _ in range(2))
    assert first == second
    assert b"CreationDate" not in first


def test_typed_markup_goes_over_as_data() -> None:
    """The setter gets strings from JSON; a template never sees typed text as its own source."""
    facts = sheet_facts(make_document(words=HOSTILE), "A4")
    text = json.dumps(facts, ensure_ascii=False)
    assert json.dumps(HOSTILE, ensure_ascii=False)[1:-1] in text
    assert set_pdf(make_document(words=HOSTILE), paper="A4").startswith(b"%PDF-")


@pytest.mark.parametrize(
    "words",
    [
        "#panic()",
        "$",
        "\\",
        "]",
        "*",
        "```",
        "//",
        "/*",
        "@a",
        "<a>",
        '#import "x"',
        "\u200b" * 50,
        "",
    ],
)
def test_no_typed_text_stops_the_setting(words: str) -> None:
    """Each of these ends or opens something in typst's own markup."""
    blocks = [Paragraph(words), Verbatim(words), Heading(words), Table((words,), ((words,),))]
    pdf = set_pdf(Document(words, words, "QF", "QF-r01", words or "DRAFT", blocks), paper="A4")
    assert len(page_boxes(pdf)) == 1


def test_words_longer_than_any_page_break_instead_of_leaving_it() -> None:
    """A fingerprint of 400 signs in a table cell still fits the paper."""
    blocks = [Table(("id", "n"), (("X" * 400, "1"),)), Verbatim("0123456789abcdef" * 30)]
    document = Document("T", "", "QF", "QF-r01", "DRAFT", blocks)
    assert len(page_boxes(set_pdf(document, paper="A4"))) == 1


def test_what_leads_into_a_lying_table_turns_with_it() -> None:
    """A heading alone at the foot of the page before would be lost."""
    lead = [Paragraph("Before."), Heading("Places"), Paragraph("All of them.")]
    facts = sheet_facts(Document("T", "", "QF", "QF-r01", "DRAFT", [*lead, WIDE]), "A4")
    kinds = [block["kind"] for block in facts["blocks"]]
    assert kinds == ["Paragraph", "Table"]
    assert [block["kind"] for block in facts["blocks"][1]["lead"]] == ["Heading", "Paragraph"]
