"""The plan sheet of a campaign that asks for a share does not say that it cannot tell one."""

from dataclasses import replace

import pytest

from fieldplan.packet.sheets.methods import can_tell, cannot_tell
from fieldplan.packet.sheets.plan_sheet import plan_sheet
from fieldplan.sizing.asked.all_clear import count
from tests.factories import make_plan, make_size
from tests.unit.packet.sheet_text import words_of
from tests.unit.sizing.asked.asked_for import asked_for


def test_sheet_of_an_all_clear_says_what_it_can_and_cannot_tell() -> None:
    """A share can be told then; the highest value and an empty rest still cannot."""
    finding = count(asked_for("all-clear", share=0.05)).finding
    plan = make_plan(size=replace(make_size(), findings=(finding,)))
    assert any("once the results above the level are counted" in line for line in can_tell(plan))
    assert "The highest value, or that nothing lies above a level." in cannot_tell(plan)
    words = words_of(plan_sheet(plan))
    assert finding.answer in words
    assert "One result above the level ends the claim" in words
    assert "share of the site above a level" not in words


@pytest.mark.parametrize("line", ["The highest value, or the share of the site above a level."])
def test_sheet_of_a_mean_does_not_tell_a_share(line: str) -> None:
    """A mean says nothing of the share above a level."""
    assert line in cannot_tell(make_plan())
