"""Links between pages lead somewhere."""

import re
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
PAGES = [ROOT / "README.md", ROOT / "DEVELOPERS.md", *sorted((ROOT / "docs").rglob("*.md"))]
LINK = re.compile(r"\]\(([^)\s]+)\)")


def anchors(page: Path) -> set[str]:
    """Give the anchors of a page's headings, as repository sites make them."""
    headings = re.findall(r"^#+ (.+)$", page.read_text(encoding="utf-8"), re.MULTILINE)
    plain = (re.sub(r"[^\w\- ]", "", heading.lower()) for heading in headings)
    return {heading.replace(" ", "-") for heading in plain}


@pytest.mark.parametrize("page", PAGES, ids=lambda page: page.name)
def test_every_link_leads_to_a_file_and_heading_that_exist(page: Path) -> None:
    """A dead link is a promise of more that nobody kept."""
    for target in LINK.findall(page.read_text(encoding="utf-8")):
        if re.match(r"[a-z]+:", target):
            continue
        name, _, anchor = target.partition("#")
        found = (page.parent / name).resolve() if name else page
        assert found.exists(), target
        if anchor:
            assert anchor in anchors(found), target


def test_every_question_page_is_named_on_the_page_that_leads_to_them() -> None:
    """A page that nothing leads to is not found."""
    index = (ROOT / "docs" / "sizing.md").read_text(encoding="utf-8")
    for page in (ROOT / "docs" / "sizing").glob("*.md"):
        assert f"(sizing/{page.name})" in index
    assert "(docs/sizing.md)" in (ROOT / "README.md").read_text(encoding="utf-8")
