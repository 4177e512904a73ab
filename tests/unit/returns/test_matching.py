"""Laboratory rows against planned samples: exact ids match, likeness is only proposed."""

from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldplan.base.errors import LabError
from fieldplan.lab.model import LabRow
from fieldplan.returns import matches_csv, propose_matches, read_matches, reconcile
from fieldplan.returns.ids import likeness, plain_id
from fieldplan.returns.matching import ConfirmedMatch, match_rows
from fieldplan.returns.model import ConfirmedId, NearMatch
from tests.factories import make_plan
from tests.unit.returns.returned import lab_row, lab_rows, table


def proposed(*rows: LabRow) -> list[tuple[int, str]]:
    """Give row and proposal for rows beside the nine good ones."""
    plan = make_plan()
    others = [r for r in lab_rows(plan) if r.sample_id not in {"QF-731", "QF-127"}]
    near = propose_matches(plan, table([*others, *rows]))
    return [(match.row, match.proposed) for match in near]


@pytest.mark.parametrize("written", ["QF-731", " QF-731 ", "'QF-731", "\u00a0QF-731"])
def test_an_exact_sample_id_matches_at_once(written: str) -> None:
    """Spaces that nobody sees, and the apostrophe of our own CSV, are no difference."""
    matching = match_rows(make_plan(), [lab_row(2, written, "41")], analyte="lead")
    assert list(matching.by_sample) == ["QF-731"]


@pytest.mark.parametrize(
    "written", ["qf-731", "QF 731", "QF_731", "QF731", "QF-0731", "QF–731", "QF-73I", "QF-713"]
)
def test_a_likeness_is_proposed_and_not_applied(written: str) -> None:
    """Two real samples may be as alike as two spellings of one; the user decides."""
    assert proposed(lab_row(40, written, "41")) == [(40, "QF-731")]
    rows = [*lab_rows(make_plan())[1:], lab_row(40, written, "41")]
    returns = reconcile(make_plan(), table(rows))
    assert returns.needs_you[0].as_written == written
    assert "QF-A-01" not in {result.location_id for result in returns.results}


def test_an_id_like_nothing_planned_is_extra() -> None:
    """A jar of another site is named and left out."""
    plan = make_plan()
    returns = reconcile(plan, table([*lab_rows(plan), lab_row(50, "ZZTOP/99", "7")]))
    assert (returns.matched, returns.extra, returns.needs_you) == (11, 1, ())
    said = "Not used (belongs to no planned sample): 'ZZTOP/99' with '7' (row 50)."
    assert said in returns.notes


@pytest.mark.parametrize(
    ("written", "expected"),
    [("OT-00731", []), ("ZZ 731", []), ("FQ-731", [(40, "QF-731")]), ("OF-731", [(40, "QF-731")]),
     ("Q-731", [(40, "QF-731")]), ("S-QF-731", [(40, "QF-731")]), ("6-QF-731", [(40, "QF-731")])],
)  # fmt: skip
def test_the_number_of_another_job_is_not_proposed(
    written: str, expected: list[tuple[int, str]]
) -> None:
    """Numbers of jars repeat from job to job; one slip in the letters makes no other job."""
    assert proposed(lab_row(40, written, "41")) == expected


def test_a_location_id_settles_what_the_sample_id_does_not() -> None:
    """The laboratory's own number in the sample column, our location beside it: no doubt."""
    row = lab_row(2, "2026-4101", "41", location_id="QF-A-01")
    matching = match_rows(make_plan(), [row], analyte="lead")
    assert list(matching.by_sample) == ["QF-731"]
    short = lab_row(2, "QFA01", "41")
    assert list(match_rows(make_plan(), [short], analyte="lead").by_sample) == ["QF-731"]


def test_a_location_does_not_overrule_a_sample_of_another_place() -> None:
    """qf-127 belongs to QF-B-01; a row that says QF-A-01 contradicts itself: both are proposed."""
    row = lab_row(2, "qf-127", "41", location_id="QF-A-01")
    matching = match_rows(make_plan(), [row], analyte="lead")
    assert not matching.by_sample
    assert {near.proposed for near in matching.near} == {"QF-127", "QF-731"}


def test_rows_of_a_doubled_location_are_shared_out_when_they_average() -> None:
    """Both jars of QF-A-02 are averaged, so which is which does not matter."""
    rows = [lab_row(n, "", cell, location_id="QF-A-02") for n, cell in ((2, "64"), (3, "69"))]
    matching = match_rows(make_plan(), rows, analyte="lead")
    assert set(matching.by_sample) == {"QF-204", "QF-655"}


def test_under_the_rule_first_a_doubled_location_asks() -> None:
    """There it matters which jar is the field sample, and no row says so."""
    plan = make_plan()
    rules = plan.campaign.rules.model_copy(update={"duplicates": "first"})
    plan = make_plan(campaign=plan.campaign.model_copy(update={"rules": rules}))
    rows = [lab_row(n, "", cell, location_id="QF-A-02") for n, cell in ((2, "64"), (3, "69"))]
    matching = match_rows(plan, rows, analyte="lead")
    assert {(near.row, near.proposed) for near in matching.near} == {
        (n, sample) for n in (2, 3) for sample in ("QF-204", "QF-655")
    }
    named = [rows[0], lab_row(3, "", "69", location_id="QF-A-02", role="field duplicate")]
    assert set(match_rows(plan, named, analyte="lead").by_sample) == {"QF-204", "QF-655"}


def test_an_answer_settles_a_proposal_either_way() -> None:
    """Yes makes it the sample's result; no makes it a row of no planned sample."""
    plan = make_plan()
    rows = [*lab_rows(plan)[1:], lab_row(40, "qf 731", "41")]
    yes = ConfirmedMatch(40, "qf 731", "QF-731", confirmed=True)
    returns = reconcile(plan, table(rows), confirmed=[yes])
    assert not returns.needs_you
    assert returns.results[0].location_id == "QF-A-01"
    no = ConfirmedMatch(40, "qf 731", "QF-731", confirmed=False)
    returns = reconcile(plan, table(rows), confirmed=[no])
    assert (returns.needs_you, returns.extra) == ((), 1)
    open_answer = ConfirmedMatch(40, "qf 731", "QF-731", confirmed=None)
    assert reconcile(plan, table(rows), confirmed=[open_answer]).needs_you


@pytest.mark.parametrize(
    ("answers", "says"),
    [
        ([ConfirmedMatch(41, "qf 731", "QF-731", True)], "is not in this laboratory file"),
        ([ConfirmedMatch(40, "other", "QF-731", True)], "is not in this laboratory file"),
        ([ConfirmedMatch(40, "qf 731", "QF-999", True)], "is no sample of the plan"),
        ([ConfirmedMatch(40, "qf 731", "QF-A-02", True)], "is no sample of the plan"),
        (
            [ConfirmedMatch(40, "qf 731", name, True) for name in ("QF-731", "QF-127")],
            "is confirmed twice",
        ),
    ],
)
def test_an_answer_that_does_not_fit_is_refused(answers: list[ConfirmedMatch], says: str) -> None:
    """Answers belong to one laboratory file; an old matches.csv must not be applied to another."""
    plan = make_plan()
    rows = [*lab_rows(plan)[1:], lab_row(40, "qf 731", "41")]
    with pytest.raises(LabError, match=says):
        reconcile(plan, table(rows), confirmed=answers)


@pytest.mark.parametrize("name", ["QF-731", "QF-A-01", "QF-583"])
def test_an_answer_that_was_never_proposed_is_refused(name: str) -> None:
    """Whoever edits matches.csv cannot give a stranger's jar to a place of the plan.

    X118/2 resembles nothing; 'qf 731' resembles one jar and no other.
    """
    plan = make_plan()
    stranger = [*lab_rows(plan)[1:], lab_row(40, "X118/2", "45")]
    with pytest.raises(LabError, match="'X118/2' was never proposed as QF-"):
        reconcile(plan, table(stranger), confirmed=[ConfirmedMatch(40, "X118/2", name, True)])
    alike = [*lab_rows(plan)[1:], lab_row(40, "qf 731", "41")]
    answer = ConfirmedMatch(40, "qf 731", name, True)
    if name == "QF-583":
        with pytest.raises(LabError, match="'qf 731' was never proposed as QF-583"):
            reconcile(plan, table(alike), confirmed=[answer])
    else:
        assert reconcile(plan, table(alike), confirmed=[answer]).matched == 11


def test_ids_that_a_person_confirmed_are_kept_with_the_name_of_that_person() -> None:
    """A match by judgement is a decision somebody must answer for; an exact one is none."""
    plan = make_plan()
    rows = [*lab_rows(plan)[1:], lab_row(40, "qf 731", "41")]
    answer = ConfirmedMatch(40, "qf 731", "QF-731", True, "M. Rey")
    kept = reconcile(plan, table(rows), confirmed=[answer]).confirmed
    assert kept == (ConfirmedId(40, "qf 731", "QF-731", "M. Rey"),)
    assert reconcile(plan, table(lab_rows(plan))).confirmed == ()
    nobody = replace(answer, by="")
    assert reconcile(plan, table(rows), confirmed=[nobody]).confirmed[0].by == ""


def test_what_is_proposed_once_another_row_is_answered_may_be_answered() -> None:
    """QF-471 may be 731 or 418; once it is 731, a second QF-471 is proposed as 418 alone."""
    plan = make_plan()
    rows = [row for row in lab_rows(plan) if row.sample_id not in {"QF-731", "QF-418"}]
    rows += [lab_row(40, "QF-471", "41"), lab_row(41, "QF 471", "22")]
    asked = {(n.row, n.proposed) for n in reconcile(plan, table(rows)).needs_you}
    assert asked == {(row, name) for row in (40, 41) for name in ("QF-731", "QF-418")}
    first = ConfirmedMatch(40, "QF-471", "QF-731", True)
    again = reconcile(plan, table(rows), confirmed=[first]).needs_you
    assert [(near.row, near.proposed) for near in again] == [(41, "QF-418")]
    both = [first, ConfirmedMatch(41, "QF 471", "QF-418", True)]
    returns = reconcile(plan, table(rows), confirmed=both)
    assert (returns.matched, returns.needs_you) == (11, ())


def test_the_file_to_answer_comes_back_as_it_was_answered(tmp_path: Path) -> None:
    """Ids that a spreadsheet would change are kept by an apostrophe, which is taken off again."""
    near = [NearMatch(7, "007", "3-5", "case"), NearMatch(9, "=1+1", "QF-731", "case")]
    earlier = [ConfirmedMatch(4, "mar-1", "MAR-01", confirmed=True, by="A. Osei")]
    text = matches_csv(near, confirmed=earlier)
    assert "'=1+1" in text
    path = tmp_path / "matches.csv"
    path.write_text(
        text.replace("case,,\r\n", "case,No,M. Rey\r\n", 1), encoding="utf-8", newline=""
    )
    assert read_matches(path) == (
        ConfirmedMatch(4, "mar-1", "MAR-01", True, "A. Osei"),
        ConfirmedMatch(7, "007", "3-5", False, "M. Rey"),
        ConfirmedMatch(9, "=1+1", "QF-731", None),
    )


def test_an_answer_other_than_yes_or_no_is_refused(tmp_path: Path) -> None:
    """Maybe is not an answer; all such rows are named at once."""
    path = tmp_path / "matches.csv"
    path.write_text(
        "row,as_written,proposed,confirm\n7,a,b,maybe\nseven,a,b,yes\n", encoding="utf-8"
    )
    with pytest.raises(LabError) as caught:
        read_matches(path)
    assert caught.value.problems == (
        "matches.csv row 2: confirm 'maybe' must be yes or no.",
        "matches.csv row 3: row 'seven' is no row number.",
    )


@given(st.text(max_size=12))
def test_likeness_is_settled_after_one_pass(text: str) -> None:
    """An id and its plain form are alike, whatever was typed."""
    assert likeness(plain_id(text)) == likeness(text)
