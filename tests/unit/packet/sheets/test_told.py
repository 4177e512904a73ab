"""Section 2 of the plan sheet knows every question that is asked."""

from dataclasses import replace

import pytest

from fieldplan.campaign.questions import MODULES
from fieldplan.packet.sheets.methods import can_tell, cannot_tell
from fieldplan.packet.sheets.told import TELLS, TELLS_NOT
from fieldplan.plan.model import Plan
from fieldplan.sizing.model import Finding, OtherPrecision
from tests.factories import make_plan, make_size


def asking(question: str) -> Plan:
    """Give a plan whose number answers the question."""
    finding = Finding(question, "t", "a")
    return make_plan(size=replace(make_size(), question=question, findings=(finding,)))


def test_every_question_has_both_sentences() -> None:
    """A question that is added is told of on the sheet, or this fails."""
    assert set(TELLS) == set(TELLS_NOT) == set(MODULES)


@pytest.mark.parametrize("question", MODULES)
def test_the_question_comes_first_in_what_is_told(question: str) -> None:
    """The reader looks for what was asked; the mean comes after it."""
    plan = asking(question)
    assert can_tell(plan)[0] == TELLS[question]
    assert can_tell(plan)[1].startswith("The mean of")
    assert cannot_tell(plan)[0] == TELLS_NOT[question]


def test_a_question_beside_the_mean_is_told_of_once() -> None:
    """Of a finding and of another objective that ask the same, one sentence."""
    other = OtherPrecision("lead", "mg/kg", question="change")
    plan = asking("change")
    plan = replace(plan, size=replace(plan.size, others=(other,)))
    assert can_tell(plan).count(TELLS["change"]) == 1
    assert TELLS["change"] not in can_tell(make_plan())


def test_what_may_be_missed_does_not_deny_the_chance_of_a_hit() -> None:
    """The widest gap is that of this drawing; the chance is an average over the area."""
    lines = " ".join(cannot_tell(asking("smallest-patch")))
    assert "the chance of section 5 is an average" in lines
    assert "can be missed altogether" not in lines
    assert "can be missed altogether" in " ".join(cannot_tell(make_plan()))
