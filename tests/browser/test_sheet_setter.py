"""Sheets in Chromium with the network off: nothing asked for, nothing wider than a phone."""

from pathlib import Path

import pytest

from fieldplan.packet.sheets.html import set_html
from tests.browser.chromium import DESKTOP, PHONE, Screen, open_page
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
