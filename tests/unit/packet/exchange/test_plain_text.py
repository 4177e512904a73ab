"""Typed text stays text."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldplan.packet.exchange.plain_text import plain, spreadsheet_cell


@pytest.mark.parametrize(
    "text", ["=1+1", "+1", "-1+1", "@SUM(A1)", "\t=1", " =1", "\uff1d1+1", "\r=1", "=cmd|'x'!A0"]
)
def test_what_a_spreadsheet_would_run_gets_an_apostrophe(text: str) -> None:
    """Openers of formulas: OWASP's page on CSV injection, from memory."""
    assert spreadsheet_cell(text).startswith("'")


@pytest.mark.parametrize(
    "text",
    ["MAR-01", "mar01", "DEC2", "1-2", "3/4", "12:30", "2-Sep", "1E5", "12e3", "007", "1.50", "5.",
     "1234567890123456", "5%", "1,5", "SEPT 3", "2026-11-02"],
)  # fmt: skip
def test_ids_that_would_turn_into_dates_or_numbers_get_an_apostrophe(text: str) -> None:
    """A well called MAR-01 must not come back from the office as the first of March."""
    assert spreadsheet_cell(text) == f"'{text}"


@pytest.mark.parametrize(
    "text", ["MW-12", "QFA01", "12", "0", "pond, north", "open water", "", "QF-204 QF-655", "30N",
             "52°06′00.647″ N", "Marsh", "any in meadow", "123456789012345"]
)  # fmt: skip
def test_ordinary_text_is_left_alone(text: str) -> None:
    """A guard that changes ordinary ids would make more mistakes than it prevents."""
    assert spreadsheet_cell(text) == text


def test_no_cell_starts_inside_a_text_where_semicolons_separate() -> None:
    """In many countries a spreadsheet splits at semicolons, inside a comma-separated file too."""
    assert ";=" not in spreadsheet_cell("a;=1+1").replace(";'=", "")
    assert spreadsheet_cell("a;b") == "a;b"


@given(st.text())
def test_plain_text_fits_into_xml_on_one_line(text: str) -> None:
    """XML 1.0 forbids most control characters; a line end would break a row."""
    from xml.etree import ElementTree

    flat = plain(text)
    element = ElementTree.Element("a")
    element.text = flat
    assert ElementTree.fromstring(ElementTree.tostring(element)).text in (flat, None)
    assert len(flat.splitlines()) <= 1


@given(st.text())
def test_guarding_never_leaves_a_formula(text: str) -> None:
    """Whatever is typed, the cell's first character cannot open a formula."""
    assert not spreadsheet_cell(text).lstrip().startswith(("=", "+", "-", "@"))


def test_hidden_direction_is_removed_and_script_of_every_language_kept() -> None:
    """An override would show gnp.exe as exe.png; Hebrew and Arabic need none to read rightly."""
    assert plain("\u202egnp.exe") == "gnp.exe"
    assert plain("שדה مرج 草地") == "שדה مرج 草地"
