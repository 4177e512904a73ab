"""What the laboratory rejected: named, left out, and the answer with it beside the answer."""

from dataclasses import replace

import pytest

from fieldplan.estimate import estimate
from fieldplan.estimate.export import estimate_json
from fieldplan.estimate.several import brief_sentences
from fieldplan.estimate.text import results_paragraph
from fieldplan.lab.model import REJECTED, LabRow, LabTable, LeftOutRow
from fieldplan.returns import reconcile
from fieldplan.returns.model import Returns
from tests.factories import make_plan
from tests.unit.returns.returned import CELLS, field_rows, lab_row, lab_rows, table

NAME = "QF-B-02"


def rejecting(cell: str, *accepted: LabRow) -> LabTable:
    """Give the file in which the laboratory rejects the result of QF-B-02."""
    plan = make_plan()
    rows = lab_rows(plan, {**CELLS, NAME: cell})
    sample = plan.samples.at(NAME)[0].sample_id
    (row,) = (entry for entry in rows if entry.sample_id == sample)
    whole = table([*(entry for entry in rows if entry is not row), *accepted])
    left = LeftOutRow(row.row, sample, "lead", f"{cell} R", REJECTED)
    return replace(whole, rejected=(row,), left_out=(left,))


def met(lab_table: LabTable) -> Returns:
    """Meet it with a field return in which everything was taken."""
    plan = make_plan()
    return reconcile(plan, lab_table, field_rows(plan))


def test_a_rejected_result_is_lost_for_that_reason_and_listed_with_its_value() -> None:
    """'No result came' would hide 187 mg/kg, the highest of the yard."""
    returns = met(rejecting("187"))
    (lost,) = returns.lost
    assert (lost.location_id, lost.reason) == (NAME, "the laboratory rejected its result")
    assert [entry.as_reported for entry in returns.left_out] == ["187 R"]


@pytest.mark.parametrize("cell", ["187", "1870"])
def test_the_answer_with_a_rejected_result_is_the_one_as_if_it_were_not_rejected(
    cell: str,
) -> None:
    """The same file without the qualifier gives mean and interval from an independent run."""
    plan = make_plan()
    answer = estimate(plan, met(rejecting(cell)))
    whole = estimate(plan, met(table(lab_rows(plan, {**CELLS, NAME: cell}))))
    assert answer.mean.n == whole.mean.n - 1
    sample = plan.samples.at(NAME)[0].sample_id
    said = answer.rejected_sentence
    assert f"rejected it (qualifier R): '{cell}' of {sample} at {NAME}." in said
    start = "Counted all the same, the mean would be "
    counted = said.split(start)[1]
    expected = whole.sentences[0].split(" is ")[1].split(" (")[0]
    assert counted.startswith(expected)
    assert ("which then spans the action level" in said) == (cell == "1870")
    assert said in answer.sentences
    assert said in results_paragraph(plan, answer)
    assert estimate_json(answer)["rejected"] == said


def test_the_sentence_of_another_analyte_says_that_results_were_rejected() -> None:
    """Its numbers stand on page one of the main analyte's sheet."""
    plan = make_plan()
    answer = estimate(plan, met(rejecting("187")))
    (said,) = brief_sentences(plan, answer)
    assert "without results that the laboratory rejected" in said
    (plain,) = brief_sentences(plan, estimate(plan, met(table(lab_rows(plan)))))
    assert "rejected" not in plain


def test_of_two_jars_at_one_place_only_the_rejected_one_is_named() -> None:
    """The field sample of QF-A-02, 64, is rejected; its blind duplicate of 69 stands."""
    plan = make_plan()
    rows = lab_rows(plan)
    (row,) = (entry for entry in rows if entry.sample_id == "QF-204")
    whole = replace(table([entry for entry in rows if entry is not row]), rejected=(row,))
    answer = estimate(plan, met(whole))
    assert "(qualifier R): '64' of QF-204 at QF-A-02. Counted" in answer.rejected_sentence


def test_a_rejected_first_run_beside_an_accepted_second_one_changes_nothing() -> None:
    """The laboratory measured again; the jar has its result, the first one is only listed."""
    plan = make_plan()
    again = lab_row(40, plan.samples.at(NAME)[0].sample_id, "150")
    returns = met(rejecting("187", again))
    assert (returns.lost, returns.with_rejected) == ((), None)
    assert [entry.row for entry in returns.left_out] == [returns.left_out[0].row]
    assert estimate(plan, returns).rejected_sentence == ""


def test_a_rejected_result_of_no_planned_sample_leaves_the_answer_alone() -> None:
    """A stranger's jar is no part of the mean, rejected or not."""
    plan = make_plan()
    whole = table(lab_rows(plan))
    strange = lab_row(50, "ZZTOP/99", "900")
    returns = met(replace(whole, rejected=(strange,)))
    assert estimate(plan, returns).rejected_sentence == ""
