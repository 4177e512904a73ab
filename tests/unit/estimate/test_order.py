"""Dates on record: what is later than the first sample is said, and nothing is sworn to."""

from dataclasses import replace
from datetime import date

import pytest

from fieldplan.estimate import estimate
from fieldplan.estimate.export import estimate_json
from fieldplan.estimate.order import dated_late, standing_sentence
from fieldplan.estimate.text import results_paragraph
from fieldplan.plan.model import Plan
from fieldplan.returns import reconcile
from tests.factories import make_plan, make_returns
from tests.unit.returns.returned import field_rows, lab_rows, table


def issued(**changes: object) -> Plan:
    """The plan of the factories, issued the day after it was made."""
    return make_plan(issued_by="L. Fenn", issued_on=date(2026, 11, 4), **changes)


def with_rules_of(day: date) -> Plan:
    """The same with rules of another day."""
    campaign = make_plan().campaign
    rules = campaign.rules.model_copy(update={"fixed_on": day})
    return issued(campaign=campaign.model_copy(update={"rules": rules}))


@pytest.mark.parametrize(
    ("plan", "first", "late"),
    [
        (issued(), "2026-11-09", ()),
        (issued(), "2026-11-04", ()),
        (issued(), "2026-11-03", ("its issue (2026-11-04)",)),
        (issued(), "2026-11-01", ("the rules (2026-11-02)", "the plan (2026-11-03)",
                                  "its issue (2026-11-04)")),
        (with_rules_of(date(2026, 12, 24)), "2026-11-09", ("the rules (2026-12-24)",)),
        (with_rules_of(date(2026, 12, 24)), "", ()),
    ],
)  # fmt: skip
def test_what_is_dated_after_the_first_sample_is_named(
    plan: Plan, first: str, late: tuple[str, ...]
) -> None:
    """The same day may be either; a later day speaks against the order, whatever the reason."""
    returns = replace(make_returns(), first_collected=first)
    assert dated_late(plan, returns) == late
    assert bool(standing_sentence(plan, returns)) == bool(late)


def test_a_late_date_stands_on_page_one_and_in_the_report() -> None:
    """A note further down would be read by nobody."""
    plan = with_rules_of(date(2026, 12, 24))
    answer = estimate(plan, replace(make_returns(), first_collected="2026-11-09"))
    said = "Dated after the first sample of 2026-11-09: the rules (2026-12-24)."
    assert answer.standing_sentence.startswith(said)
    assert answer.standing_sentence == answer.sentences[1]
    assert said in results_paragraph(plan, answer)
    assert estimate_json(answer)["standing"] == answer.standing_sentence


def test_a_plan_that_was_never_issued_says_so_in_the_answer_and_in_the_report() -> None:
    """Anybody can pack a draft after the samples are in."""
    answer = estimate(make_plan(), make_returns())
    assert "QF-r01 was never issued: it is a DRAFT" in answer.sentences[1]
    assert "was never issued" in results_paragraph(make_plan(), answer)
    assert estimate(issued(), make_returns()).standing_sentence == ""


def test_the_first_date_of_collection_is_that_of_the_return() -> None:
    """The earliest line counts; a date that can be read in two ways is not read."""
    plan = make_plan()
    lines = [replace(line, collected_at="2026-11-10 09:30") for line in field_rows(plan)]
    lines[3] = replace(lines[3], collected_at="2026-11-09T15:00")
    lines[4] = replace(lines[4], collected_at="03/04/26")
    assert reconcile(plan, table(lab_rows(plan)), lines).first_collected == "2026-11-09"
    assert reconcile(plan, table(lab_rows(plan)), field_rows(plan)).first_collected == ""
