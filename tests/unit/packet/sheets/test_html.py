"""Sheets as HTML: everything is there, nothing is asked of the network, markup stays inert."""

import base64
import re
from dataclasses import replace

import lxml.html
import pytest

from fieldplan.base.document import Document, Figure, Paragraph, Table
from fieldplan.packet.sheets.html import set_html
from tests.unit.packet.sheets.documents import HOSTILE, SVG, WIDE, make_document


def page_of(document: Document) -> lxml.html.HtmlElement:
    """Parse a set document with somebody else's parser."""
    return lxml.html.document_fromstring(set_html(document))


def words_of(element) -> str:
    """The text of an element, spaces joined."""
    return " ".join(element.text_content().split())


@pytest.fixture(scope="module")
def page():
    """The document of all blocks, parsed."""
    return page_of(make_document())


def test_every_block_is_on_the_page(page) -> None:
    """A kind of block that is forgotten would lose facts in silence."""
    words = words_of(page.find(".//main"))
    for start in (
        "Sheet", "Under", "Answer", "Plain", "Note", "Part", "Small part", "Label", "Value",
        "Bullet", "First", "Column", "Cell", "Caption", "Figure caption", "Role",
    ):  # fmt: skip
        assert f"{start} plain words" in words, start
    assert "underground utilities" in words
    assert "OPEN: no reference, date and expiry typed" in words
    assert "n = (Σ w·s)² / SE²" in words
    assert "n = 6.2 → 7 results" in words
    assert "Source: Cochran 1977" in words
    assert "QF-A-60" in words


def test_headings_nest_and_the_page_has_one_title(page) -> None:
    """A screen reader walks by headings."""
    assert [h.text_content() for h in page.iter("h1")] == ["Sheet plain words"]
    assert "Part plain words" in [h.text_content() for h in page.iter("h2")]
    assert "Small part plain words" in [h.text_content() for h in page.iter("h3")]
    assert page.get("lang") == "en"


def test_tables_name_their_columns_and_rows(page) -> None:
    """``scope`` tells which header a cell belongs to."""
    table = page.xpath("//table[contains(@class, 'wide')]")[0]
    headers = table.xpath(".//thead//th[@scope='col']")
    assert tuple(h.text_content() for h in headers) == WIDE.columns
    assert len(table.xpath(".//tbody/tr")) == len(WIDE.rows)
    assert len(table.xpath(".//tbody/tr/th[@scope='row']")) == len(WIDE.rows)
    assert words_of(table.find("caption")) == "Locations"
    assert "scroll" in table.getparent().get("class")


def test_columns_of_numbers_stand_flush_right(page) -> None:
    """Header and cells alike."""
    table = page.xpath("//table[contains(@class, 'wide')]")[0]
    place = WIDE.columns.index("easting") + 1
    assert "numeric" in table.xpath(f".//thead//th[{place}]")[0].get("class")
    cells = table.xpath(f".//tbody/tr/*[{place}]")
    assert all(cell.get("class") == "numeric" for cell in cells)


def test_a_figure_has_words_for_those_who_cannot_see_it(page) -> None:
    """And holds its drawing inside the file."""
    image = page.find(".//figure//img")
    assert image.get("alt") == "Alternative plain words"
    kind, _, data = image.get("src").partition(",")
    assert kind == "data:image/svg+xml;base64"
    assert base64.b64decode(data).decode() == SVG
    assert words_of(page.find(".//figcaption")) == "Figure caption plain words"


def test_nothing_is_asked_of_the_network(page) -> None:
    """The crew opens it without signal."""
    text = set_html(make_document())
    outside = re.sub(r"data:[a-z+/]+;base64,[A-Za-z0-9+/=]+", "", text)
    assert not re.findall(r"(?:https?:)?//[a-z]", outside)
    assert not page.xpath("//script | //link | //iframe | //object | //embed")
    assert not re.search(r"url\(|@import", outside)


def test_typed_markup_stays_inert() -> None:
    """Each place that a person can type into, with the same hostile words."""
    document = make_document(words=HOSTILE, status=f"ISSUED by {HOSTILE}")
    text, page = set_html(document), page_of(document)
    assert not page.xpath("//script | //main//b")
    assert "<script" not in text
    for element in ("h1", "h2", "h3", "dt", "dd", "li", "th", "caption", "figcaption", "pre"):
        shown = [e.text_content() for e in page.iter(element)]
        assert any(HOSTILE in words for words in shown), element
    assert page.find(".//figure//img").get("alt") == f"Alternative {HOSTILE}"
    assert not page.xpath("//*[@onload or @onerror or @onclick]")


def test_a_script_inside_a_drawing_cannot_run() -> None:
    """Browsers run no scripts in images."""
    drawing = '<svg xmlns="http://www.w3.org/2000/svg"><script>alert(1)</script></svg>'
    page = page_of(Document("T", "", "QF", "QF-r01", "DRAFT", [Figure(drawing, "", "words")]))
    assert not page.xpath("//script | //svg")
    assert len(page.xpath("//img")) == 1


@pytest.mark.parametrize("status", ["DRAFT", "ISSUED by L. Fenn on 2026-11-05"])
def test_status_and_revision_stand_at_head_and_foot(status: str) -> None:
    """Both repeat on every printed page through the table groups of the print style."""
    text = set_html(make_document(status=status))
    page = lxml.html.document_fromstring(text)
    (head,), (foot,) = page.xpath("//div[contains(@class,'running')]"), page.find_class("foot")
    for element in (head, foot):
        assert status in words_of(element)
        assert "QF-r01" in words_of(element)
    assert "table-header-group" in text
    assert "table-footer-group" in text


def test_an_open_caution_is_told_apart_without_colour(page) -> None:
    """Bold words in a frame; grey prints stay readable."""
    (caution,) = page.find_class("open")
    assert "Hold point: no work before this is settled" in words_of(caution)
    assert words_of(caution.find_class("state")[0]).startswith("OPEN")


def test_control_characters_never_reach_the_page() -> None:
    """NUL and its kin are errors in HTML; reordering marks make text read backwards."""
    text = set_html(
        Document("T", "", "QF", "QF-r01", "DRAFT", [Paragraph("a\x00\x1b\u202eb\ud800c\nd")])
    )
    assert not re.search(r"[\x00-\x08\x0b-\x1f\u202e]", text)
    assert "ab?c\nd" in text
    text.encode("utf-8")


def test_the_same_document_gives_the_same_page() -> None:
    """Packets are compared byte by byte."""
    assert set_html(make_document()) == set_html(make_document())


def test_an_empty_table_is_a_header_alone() -> None:
    """No targeted places: the table still says what it would hold."""
    document = Document("T", "", "QF", "QF-r01", "DRAFT", [Table(("a", "b"), ())])
    assert [h.text for h in page_of(document).iter("th")] == ["a", "b"]


def test_short_tables_of_sentences_become_cards_on_a_phone():
    """Three columns of words on 390 pixels are columns of single words."""
    words = "the mean is shown for all three, with half in the middle"
    long, short = (
        set_html(replace(make_document(), blocks=[Table(("Rule", "Recorded", "Meaning"), (row,))]))
        for row in (("non_detects", "bounds", words), ("16", "36 %", "the plain formula"))
    )
    assert '<table class="cards">' in long
    assert f'<td class="words" data-label="Meaning">{words}</td>' in long
    assert "<table>" in short
