"""The table of docs/lines.md is what its script prints, spot-checked."""

import re
from pathlib import Path

import pytest

from tests.evidence.even_spacing import RANGES, measured

PAGE = (Path(__file__).parents[2] / "docs" / "lines.md").read_text(encoding="utf-8")


def cell(starts, practical_range):
    """Gain, width and coverage as printed."""
    row = next(line for line in PAGE.splitlines() if re.match(rf"\| {starts} \|", line))
    text = row.split("|")[2 + RANGES.index(practical_range)]
    return [float(number) for number in re.findall(r"[\d.]+", text)]


@pytest.mark.parametrize(("starts", "practical_range"), [(1, 0.25), (4, 0.07), (5, 0.75)])
def test_three_cells_are_those_of_the_script(starts, practical_range):
    """Streams of normal numbers may change with numpy: 10 % of a gain, 2 points of a share."""
    gain, width, held = cell(starts, practical_range)
    found = measured(practical_range, starts)
    assert found[0] == pytest.approx(gain, rel=0.1)
    assert found[1] == pytest.approx(width, rel=0.05)
    assert 100 * found[2] == pytest.approx(held, abs=2.0)
