"""Sheets in Chromium with the network off: nothing asked for, nothing wider than a phone."""

from dataclasses import replace
from pathlib import Path

import pytest

from fieldplan.estimate.model import Answers
from fieldplan.packet.sheets.html import set_html
from fieldplan.packet.sheets.plan_sheet import plan_sheet
from fieldplan.packet.sheets.results_sheet import results_sheet
from tests.browser.chromium import DESKTOP, PHONE, Screen, open_page
from tests.factories import make_estimate, make_plan
from tests.unit.packet.sheets.documents import HOSTILE, make_document

pytestmark = pytest.mark.browser


@pytest.mark.parametrize("screen", [PHONE, DESKTOP], ids=["phone", "desktop"])
@pytest.mark.parametrize(
    "words", ["plain words", HOSTILE, "W" * 120], ids=["plain", "hostile", "long"]
)
def test_a_sheet_opens_without_error_and_fits_the_screen(
    screen: Screen, words, tmp_path: Path
) -> None:
    """Wide tables scroll in their own box; the page itself never does sideways."""
    path = tmp_path / "sheet.html"
    path.write_text(set_html(make_document(words=words)), encoding="utf-8")
    with open_page(path, screen) as page:
        assert page.errors == []
        assert page.requests == []
        wide = page.evaluate("document.documentElement.scrollWidth")
        assert wide <= screen.width
        assert page.evaluate("document.images[0].naturalWidth") > 0
        assert (
            page.evaluate("getComputedStyle(document.querySelector('.scroll')).overflowX") == "auto"
        )


def test_the_status_stays_in_sight_while_scrolling(tmp_path: Path) -> None:
    """DRAFT is read on the last screen as on the first."""
    path = tmp_path / "sheet.html"
    path.write_text(set_html(make_document()), encoding="utf-8")
    with open_page(path, PHONE) as page:
        page.evaluate("window.scrollTo(0, document.body.scrollHeight)")
        top = page.evaluate("document.querySelector('.status').getBoundingClientRect().top")
        assert 0 <= top < 60


CUT_CELLS = """[...document.querySelectorAll("table")].filter((t) => t.rows.length <= 13
  && !t.classList.contains("signoff")).flatMap((t) => [...t.querySelectorAll("tbody th, td")])
  .filter((c) => c.textContent).filter((c) => { const b = c.getBoundingClientRect();
    return b.left < 0 || b.right > innerWidth; }).map((c) => c.textContent)"""


@pytest.mark.parametrize("width", [360, 390, 412, 820, 1280])
def test_every_screen_shows_every_cell_of_a_short_table(width: int, tmp_path: Path) -> None:
    """Numbers beyond the right edge, where nobody looks, are numbers not told."""
    plan = make_plan()
    named = {"meadow": "north meadow by the old weir", "yard": "yard"}
    size = replace(
        plan.size, strata=tuple(replace(e, stratum=named[e.stratum]) for e in plan.size.strata)
    )
    sheets = (
        plan_sheet(replace(plan, size=size)),
        results_sheet(plan, Answers(make_estimate())),
    )
    for number, sheet in enumerate(sheets):
        path = tmp_path / f"sheet-{number}.html"
        path.write_text(set_html(sheet), encoding="utf-8")
        with open_page(path, Screen(width, 844, touch=width < 700)) as page:
            assert page.evaluate(CUT_CELLS) == []
            labels = page.evaluate(
                """[...document.querySelectorAll(".cards td")].map((c) =>
                getComputedStyle(c, "::before").content)"""
            )
            assert any("Results" in label for label in labels) == (width < 561)


def test_a_phone_gets_figures_drawn_for_its_width(tmp_path: Path) -> None:
    """A figure for paper, shrunk to a phone, has letters of five pixels; 92 mm are 348 pixels."""
    path = tmp_path / "sheet.html"
    path.write_text(set_html(plan_sheet(make_plan())), encoding="utf-8")
    script = "[...document.images].map((i) => i.naturalWidth)"
    with open_page(path, PHONE) as page:
        widths = page.evaluate(script)
        assert len(widths) >= 2
        assert all(340 <= width <= 356 for width in widths)
    with open_page(path, DESKTOP) as page:
        assert all(width > 600 for width in page.evaluate(script))
