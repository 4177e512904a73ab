"""The sheet attributes what it cannot know: who fixed the rules when, and for which population."""

from datetime import date

import pytest

from fieldplan.campaign import alarms
from fieldplan.campaign.model import PlanTable, Rules
from fieldplan.packet.sheets.answer import answer_words
from fieldplan.packet.sheets.methods import methods_paragraph, rules_sentence
from fieldplan.packet.sheets.number_section import declared_lines
from fieldplan.packet.sheets.plan_sheet import plan_sheet
from fieldplan.packet.sheets.rules import rules_blocks, rules_fingerprint, rules_table
from fieldplan.packet.sheets.working_sheet import working_sheet
from fieldplan.plan.model import Plan
from fieldplan.stats.shape import t_coverage
from tests.factories import make_campaign, make_plan
from tests.unit.packet.sheet_text import text_of, words_of

FIRST_DAY = date(2026, 10, 12)


def dated(*, fixed_on: date | None = None, by: str = "L. Fenn", **changes: object) -> Plan:
    """Plan Quarry Field with field work from 12 October."""
    campaign = make_campaign(
        plan=PlanTable(id="QF", title="Quarry Field", fieldwork_from=FIRST_DAY),
        rules=Rules(fixed_by=by, fixed_on=fixed_on),
    )
    return make_plan(**{"campaign": campaign, "made_on": date(2026, 9, 7), **changes})


def page_one(plan: Plan) -> str:
    """The words of page one."""
    return " ".join(map(text_of, answer_words(plan)))


def test_nothing_on_the_sheet_asserts_that_rules_came_before_results():
    """It was typed by somebody; no tool was there."""
    plan = dated(fixed_on=date(2026, 9, 1))
    text = words_of(plan_sheet(plan)) + words_of(working_sheet(plan))
    for claim in ("before any result was seen", "fixed before results", "Rules fixed"):
        assert claim not in text
    assert "as stated by L. Fenn, fixed on 2026-09-01: the" in text


def test_rules_that_nobody_signed_or_dated_are_said_to_be_so():
    """A blank must not read like a date."""
    said = rules_sentence(dated(by=""))
    assert "as stated in the campaign file, fixed on a day that nobody typed" in said


def test_the_rules_say_how_their_date_can_be_verified():
    """Whoever received the fingerprint before field work can show what it was made from."""
    rules = dated().campaign.rules
    text = " ".join(map(text_of, rules_blocks(rules)))
    assert "this tool cannot verify it" in text
    assert "Lodge the fingerprint with somebody outside before field work" in text
    assert rules_fingerprint(rules) in text


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"fixed_on": date(2026, 12, 24)}, "stated to have been fixed on 2026-12-24, after the"),
        ({"made_on": date(2026, 10, 13)}, "A plan made on 2026-10-13 comes after the first day"),
        (
            {"issued_by": "L. Fenn", "issued_on": date(2026, 10, 14)},
            "A plan issued on 2026-10-14 comes after the first day",
        ),
    ],
)
def test_a_date_after_the_first_day_of_field_work_is_an_alarm_on_page_one(changes, words):
    """Results may have been known by then, whatever is stated."""
    text = page_one(dated(**changes))
    assert words in text
    assert "2026-10-12" in text


def test_late_rules_are_late_in_the_report_too():
    """The paragraph is pasted without page one."""
    said = methods_paragraph(dated(fixed_on=date(2026, 12, 24)))
    assert "fixed on 2026-12-24, after the first day of field work, 2026-10-12" in said


def test_dates_up_to_the_first_day_raise_no_alarm():
    """A morning may precede an afternoon; without a first day nothing is late."""
    plan = dated(fixed_on=FIRST_DAY, made_on=FIRST_DAY, issued_by="L. Fenn", issued_on=FIRST_DAY)
    assert "first day" not in page_one(plan)
    undated = make_campaign(rules=Rules(fixed_on=date(2030, 1, 1)))
    assert alarms(undated, made_on=date(2030, 1, 1), issued_on=date(2030, 1, 2)) == ()


def declared(text: str) -> str:
    """What section 5 says of a declared class; the hand-made plan expects 3 and 4 results."""
    campaign = make_campaign(rules=Rules(promised_for=text))
    return " ".join(declared_lines(make_plan(campaign=campaign)))


def test_a_declared_class_stands_beside_what_t_holds_there():
    """By hand: terms (W s)²/n are 54.7 and 42.0, so df = 96.8²/(54.7²/2 + 42.0²/3) = 4.5; n = 5."""
    said = declared("a mean of locations whose skewness is no larger than 2")
    held = t_coverage(5, 2.0, confidence=0.95, kind="two-sided")
    assert held < 0.92
    assert said == (
        "The 95 % is declared for a mean of locations whose skewness is no larger than 2. At a "
        "skewness of 2, which ends that class, t from 5 results holds the true mean in about "
        f"{100 * held:.0f} % of campaigns."
    )


def test_a_class_without_a_number_is_not_vouched_for():
    """It was declared; a plan cannot show that the population belongs to it."""
    assert declared("soils like those of 2019") == (
        "The 95 % is declared for soils like those of 2019. Nothing here shows that the population "
        "belongs to that class."
    )
    assert declared("") == ""


def test_no_rule_is_said_to_promise():
    """The confidence is nominal wherever the mean is not near normal."""
    text = words_of(plan_sheet(dated())) + words_of(working_sheet(dated()))
    assert "promised for" not in text
    assert "the confidence is promised" not in text
    assert "nominal: where the mean is near normal" in text


def test_the_report_names_the_interval_for_skewed_results_and_its_class() -> None:
    """Student's t is what a reader expects; another interval has to be named."""
    rules = Rules(mean_interval="skew-widened", promised_class="cv-up-to-1")
    campaign = make_campaign(rules=rules)
    said = rules_sentence(make_plan(campaign=campaign))
    assert "for the mean is given, skew-widened as promised for cv-up-to-1;" in said
    assert "skew-widened" not in rules_sentence(make_plan())
    rows = {row[0]: row[1:] for row in rules_table(rules).rows}
    assert rows["promised_class"][0] == "cv-up-to-1"
    assert "no larger than the mean" in rows["promised_class"][1]
