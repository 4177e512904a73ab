"""What the command line refuses before any command reads it."""

from pathlib import Path

import pytest

from fieldplan.cli import entry
from tests.command_runner import command_runner

BROKEN = "Gr" + chr(0xDCFC) + "n"
"""How Python hands on the Latin-1 bytes of a word with u-umlaut where UTF-8 is expected."""


@pytest.mark.parametrize(
    "words",
    [
        ("new", "--title", BROKEN),
        ("size", "--sigma", "3", "--standard-error", "2", "--unit", BROKEN),
        ("check", f"{BROKEN}.toml"),
        ("issue", "HL-r01", "--by", BROKEN),
    ],
    ids=lambda words: words[0],
)
def test_words_that_are_no_text_are_refused_in_one_line(
    words: tuple[str, ...], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """No file can hold them; a question mark in their place would be a title nobody typed."""
    monkeypatch.chdir(tmp_path)
    result = command_runner().invoke(entry, words)
    assert result.exit_code == 2
    assert "has signs (at the ?) that are no UTF-8 text; type it anew, or rename" in result.stderr
    assert "'Gr?n" in result.stderr
    assert list(tmp_path.iterdir()) == []
