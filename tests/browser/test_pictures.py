"""The README shows what the tool draws today."""

import re
from pathlib import Path

import matplotlib.image
import numpy as np
import pytest

from tests.browser.make_pictures import PICTURES, draw_pictures

README = Path(__file__).parents[2] / "README.md"


@pytest.mark.browser
def test_the_pictures_of_the_readme_are_what_the_tool_draws(tmp_path: Path) -> None:
    """A reader compares the page with the picture; type may differ by a hair between builds."""
    drawn = draw_pictures(tmp_path)
    shown = re.findall(r"\]\(docs/pictures/([\w.]+)\)", README.read_text(encoding="utf-8"))
    assert len(shown) >= 3
    for name in shown:
        kept = np.asarray(matplotlib.image.imread(PICTURES / name), dtype=float)[..., :3]
        today = np.asarray(matplotlib.image.imread(drawn[name]), dtype=float)[..., :3]
        assert kept.shape == today.shape, name
        assert np.mean(np.abs(kept - today) > 0.25) < 0.01, name
