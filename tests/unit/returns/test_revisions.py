"""Jars labelled under another revision are none of this packet's, and that is said."""

from dataclasses import replace
from pathlib import Path

import pytest

from fieldplan.base.errors import LabError
from fieldplan.plan.model import Plan
from fieldplan.returns import field_return_blank, propose_matches, read_field_return, reconcile
from fieldplan.returns.revisions import other_revision
from fieldplan.samples import assign
from tests.factories import make_plan
from tests.unit.returns.returned import lab_rows, table


def plan_of(revision: int) -> Plan:
    """Give the plan of the factories with the ids that its revision has."""
    plan = make_plan()
    samples = assign(plan.campaign, plan.locations, plan.size, revision=revision)
    return replace(plan, samples=samples, revision=revision)


def test_results_of_another_revision_are_refused_by_its_name() -> None:
    """Under r03 the number of a jar of r02 may stand for another place, in silence."""
    second, third = plan_of(2), plan_of(3)
    assert reconcile(second, table(lab_rows(second))).extra == 0
    rows = lab_rows(third)
    rows[4] = replace(rows[4], sample_id=lab_rows(second)[4].sample_id.lower().replace("-", " 0"))
    for refused in (
        lambda: reconcile(third, table(rows)),
        lambda: propose_matches(third, table(rows)),
    ):
        with pytest.raises(LabError) as caught:
            refused()
        assert caught.value.problems == (
            f"laboratory file row 6: '{rows[4].sample_id}' belongs to QF-r02; this packet is "
            "QF-r03. Estimate with the packet of QF-r02, or ask which labels the jars carried.",
        )


def test_a_right_location_beside_the_id_of_another_revision_does_not_help() -> None:
    """The jar says one plan, the row another: a person has to look."""
    third = plan_of(3)
    rows = [
        replace(row, location_id=sample.location_id, sample_id=old.sample_id)
        for row, old, sample in zip(
            lab_rows(third), lab_rows(plan_of(1)), third.samples.samples, strict=False
        )
    ]
    with pytest.raises(LabError, match=r"rows 2, 3, 4, 5 and 7 more: .* belong to QF-r01; this"):
        reconcile(third, table(rows))


def test_a_return_of_another_revision_is_refused_by_its_name(tmp_path: Path) -> None:
    """The crew's form of r02 tells of places that r03 may not have."""
    path = tmp_path / "field_return.csv"
    path.write_text(field_return_blank(plan_of(2)), encoding="utf-8", newline="")
    assert len(read_field_return(path, plan_of(2))) == 15
    with pytest.raises(LabError) as caught:
        read_field_return(path, plan_of(3))
    (line,) = caught.value.problems
    assert line.startswith("field_return.csv rows 2, 3, 4, 5 and 11 more: 'QF2-")
    assert "belong to QF-r02; this packet is QF-r03. Read it with the packet of QF-r02." in line


def test_a_well_may_be_called_like_a_sample_of_another_revision() -> None:
    """Ids of the list are the owner's; they are looked up before anything is read into them."""
    plan = plan_of(3)
    name = plan_of(2).samples.samples[0].sample_id
    assert other_revision(plan, name) == "QF-r02"
    places = (replace(plan.locations.places[0], location_id=name), *plan.locations.places[1:])
    assert (
        other_revision(replace(plan, locations=replace(plan.locations, places=places)), name) == ""
    )
