"""What README and docs show is what the tool does today.

A ``console`` block holds commands after ``$`` and what they print; a line ``…`` stands for lines
left out. Commands run in order in one folder per page that holds copies of the demo sites. A
``python`` block with ``>>>`` runs as a doctest.
"""

import doctest
import re
import shlex
import shutil
from pathlib import Path

import pytest

from fieldplan.cli import entry
from tests.command_runner import command_runner

ROOT = Path(__file__).parents[2]
PAGES = [ROOT / "README.md", *sorted((ROOT / "docs").rglob("*.md"))]
FENCE = re.compile(r"^```(\w+)[^\n]*\n(.*?)^```", re.MULTILINE | re.DOTALL)


def blocks(page: Path, language: str) -> list[str]:
    """Return the fenced blocks of one language."""
    text = page.read_text(encoding="utf-8")
    return [body for name, body in FENCE.findall(text) if name == language]


def commands(body: str) -> list[tuple[str, list[str]]]:
    """Split a console block into commands and the lines expected after each."""
    found: list[tuple[str, list[str]]] = []
    for line in body.splitlines():
        if line.startswith("$ "):
            found.append((line[2:], []))
        elif found:
            found[-1][1].append(line.rstrip())
    return found


def fits(expected: list[str], printed: list[str]) -> bool:
    """Compare lines; ``…`` matches any number of lines."""
    if not expected:
        return True
    if expected[0].strip() == "…":
        return any(fits(expected[1:], printed[i:]) for i in range(len(printed) + 1))
    return bool(printed) and same(expected[0], printed[0]) and fits(expected[1:], printed[1:])


def same(expected: str, printed: str) -> bool:
    """Compare two lines; ``…`` inside one stands for any text, such as today's date."""
    pattern = ".*".join(re.escape(part) for part in expected.split("…"))
    return re.fullmatch(pattern, printed) is not None


@pytest.mark.parametrize("page", PAGES, ids=lambda p: p.name)
def test_console_blocks_print_what_they_show(
    page: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A reader types what stands there and compares."""
    shutil.copytree(ROOT / "demo_sites", tmp_path / "demo_sites")
    monkeypatch.chdir(tmp_path)
    for body in blocks(page, "console"):
        for command, expected in commands(body):
            words = shlex.split(command)
            if words[0] == "cd":
                monkeypatch.chdir(words[1])
                continue
            assert words[0] == "fieldplan", f"{page.name}: only our own commands run: {command}"
            outcome = command_runner().invoke(entry, words[1:], catch_exceptions=False)
            printed = [line.rstrip() for line in outcome.stdout.splitlines()]
            while expected and not expected[-1]:
                expected.pop()
            assert fits([*expected, "…"], printed), f"{command}\n{outcome.stdout}"


@pytest.mark.parametrize("page", PAGES, ids=lambda p: p.name)
def test_python_examples_on_pages_hold(page: Path) -> None:
    """A doctest on a page is a promise like one in the code."""
    parser = doctest.DocTestParser()
    runner = doctest.DocTestRunner(optionflags=doctest.NORMALIZE_WHITESPACE)
    space: dict[str, object] = {}
    for number, body in enumerate(blocks(page, "python")):
        test = parser.get_doctest(body, space, f"{page.name}[{number}]", str(page), 0)
        runner.run(test, clear_globs=False)
        space.update(test.globs)
    assert runner.summarize(verbose=False).failed == 0


def test_the_comparison_can_fail() -> None:
    """A check that accepts anything would hide every change."""
    assert fits(["a", "…", "d"], ["a", "b", "c", "d"])
    assert not fits(["a", "d"], ["a", "b", "d"])
    assert not fits(["a"], [])
    assert fits(["on … today"], ["on 1 May today"])
    assert not fits(["on … today"], ["on 1 May"])


def test_links_between_pages_lead_somewhere() -> None:
    """A dead link costs a reader more than a missing page."""
    for page in [*PAGES, ROOT / "DEVELOPERS.md"]:
        for target in re.findall(r"\]\(([^)#\s]+)[^)]*\)", page.read_text(encoding="utf-8")):
            if not target.startswith(("http:", "https:")):
                assert (page.parent / target).exists(), f"{page.name}: {target}"
