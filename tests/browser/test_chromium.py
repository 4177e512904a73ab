"""The browser check itself must be able to fail."""

from pathlib import Path

import pytest

from tests.browser.chromium import DESKTOP, PHONE, open_page

pytestmark = pytest.mark.browser


def write_page(folder: Path, body: str) -> Path:
    """Write a small page with the given body."""
    path = folder / "page.html"
    path.write_text(
        f"<!doctype html><meta charset=utf-8><meta name=viewport content='width=device-width'>"
        f"<title>t</title><body>{body}",
        encoding="utf-8",
    )
    return path


def test_a_remote_script_is_caught(tmp_path: Path) -> None:
    """A page that needs the network must show both in the requests and in the errors."""
    page_path = write_page(tmp_path, "<script src='https://example.org/remote.js'></script>")
    with open_page(page_path) as page:
        assert page.requests == ["https://example.org/remote.js"]
        assert any("ERR_" in error for error in page.errors)


def test_a_request_made_late_by_a_script_is_caught(tmp_path: Path) -> None:
    """Requests that appear in no attribute of the file are seen as well."""
    script = (
        "<script>setTimeout(() => { new Image().src = 'http://127.0.0.1:9/x.png' }, 100)</script>"
    )
    with open_page(write_page(tmp_path, script)) as page:
        assert page.requests == ["http://127.0.0.1:9/x.png"]


def test_a_script_error_is_caught(tmp_path: Path) -> None:
    """An uncaught exception and a console.error both count."""
    body = "<script>console.error('said aloud'); missing.thing()</script>"
    with open_page(write_page(tmp_path, body)) as page:
        assert "said aloud" in page.errors
        assert any("missing is not defined" in error for error in page.errors)


def test_a_quiet_page_has_nothing_to_report(tmp_path: Path) -> None:
    """A page with everything inside is silent, and its window has the size asked for."""
    page_path = write_page(tmp_path, "<img src='data:image/gif;base64,R0lGODlhAQABAAAAACw='>")
    for screen in (PHONE, DESKTOP):
        with open_page(page_path, screen) as page:
            assert page.errors == []
            assert page.requests == []
            assert page.evaluate("innerWidth") == screen.width
            assert page.screenshot(tmp_path / "p.png").read_bytes()[:4] == b"\x89PNG"
