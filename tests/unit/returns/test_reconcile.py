"""The returned campaign against its plan."""

from dataclasses import replace

import pytest

from fieldplan.base.errors import LabError
from fieldplan.estimate.population import share_not_reached
from fieldplan.lab.model import LeftOutRow
from fieldplan.returns import reconcile
from fieldplan.returns.model import LocationResult, Returns
from fieldplan.samples.model import Sample, Samples
from tests.factories import degrees, make_plan, make_samples
from tests.unit.returns.returned import CELLS, DUPLICATE, field_rows, lab_row, lab_rows, table


def met(cells: dict[str, str] | None = None, **field: dict[str, object]) -> Returns:
    """Reconcile the plan of the factories with these cells and field lines."""
    plan = make_plan()
    return reconcile(plan, table(lab_rows(plan, cells or CELLS)), field_rows(**field))


def result(returns: Returns, name: str) -> LocationResult:
    """Find one location's result."""
    return next(entry for entry in returns.results if entry.location_id == name)


def notes(returns: Returns) -> str:
    """Join the notes."""
    return " ".join(returns.notes)


def test_a_whole_campaign_comes_back_whole() -> None:
    """Nine random places in the mean, the tank beside it, nothing missing and nothing extra."""
    returns = met()
    used = [entry.location_id for entry in returns.results if entry.used]
    assert used == [name for name in CELLS if name != "TANK"]
    assert (returns.matched, returns.planned_samples, returns.extra) == (11, 11, 0)
    assert (returns.lost, returns.needs_you, returns.notes) == ((), (), ())


def test_a_targeted_place_never_enters_the_mean() -> None:
    """It was chosen by judgement; 910 mg/kg under the old tank says nothing of the field."""
    tank = result(met(), "TANK")
    assert not tank.used
    assert tank.half == 910.0
    assert "chosen by judgement" in tank.why_not


def test_a_duplicate_is_averaged_and_adds_no_location() -> None:
    """64 and 69 at one place are one result of 66.5."""
    returns = met()
    entry = result(returns, "QF-A-02")
    assert (entry.half, entry.as_reported) == (66.5, ("64", "69"))
    assert entry.sample_ids == ("QF-204", DUPLICATE)
    assert returns.duplicate_pairs == (("QF-A-02", 64.0, 69.0),)


def test_under_the_rule_first_the_field_sample_counts() -> None:
    """The plan knows which jar is the blind one, whatever the laboratory calls it."""
    plan = make_plan()
    rules = plan.campaign.rules.model_copy(update={"duplicates": "first"})
    plan = make_plan(campaign=plan.campaign.model_copy(update={"rules": rules}))
    rows = list(reversed(lab_rows(plan)))
    assert result(reconcile(plan, table(rows), field_rows()), "QF-A-02").half == 64.0


def test_a_non_detect_is_kept_as_bounds() -> None:
    """<5 lies between 0 and 5."""
    entry = result(met(), "QF-B-04")
    assert (entry.low, entry.half, entry.high, entry.detected) == (0.0, 2.5, 5.0, False)


def test_a_lost_location_and_its_alternate_are_accounted_for() -> None:
    """The return names the alternate, so it stands in with its own value."""
    cells = {n: c for n, c in CELLS.items() if n != "QF-A-04"} | {"QF-A-05": "58"}
    returns = met(
        cells,
        QF_A_04={"taken": False, "reason": "no-access", "replaced_by": "QF-A-05"},
        QF_A_05={"taken": True},
    )
    (lost,) = returns.lost
    assert (lost.location_id, lost.stratum, lost.reason) == ("QF-A-04", "meadow", "no-access")
    assert lost.replaced_by == "QF-A-05"
    assert result(returns, "QF-A-05").stands_in_for == "QF-A-04"
    assert result(returns, "QF-A-05").used
    assert returns.planned_samples == 12
    assert "No result came for 1 sample: QF-990." in returns.notes


def test_an_alternate_without_a_lost_location_stays_out() -> None:
    """A tenth result picked up on the way would bend the chances of being drawn."""
    returns = met({**CELLS, "QF-A-05": "58"}, QF_A_05={"taken": True})
    entry = result(returns, "QF-A-05")
    assert not entry.used
    assert "no lost location of its stratum" in entry.why_not


def test_an_alternate_of_another_stratum_does_not_stand_in() -> None:
    """The yard's alternate says nothing of the meadow."""
    cells = {n: c for n, c in CELLS.items() if n != "QF-A-04"} | {"QF-B-06": "58"}
    returns = met(cells, QF_A_04={"taken": False, "reason": "dry"}, QF_B_06={"taken": True})
    assert not result(returns, "QF-B-06").used
    assert returns.lost[0].replaced_by == ""


def test_an_alternate_that_the_return_does_not_place_takes_the_first_gap() -> None:
    """No value is looked at; the order of the list decides, and the note says so."""
    cells = {n: c for n, c in CELLS.items() if n not in {"QF-A-02", "QF-A-04"}}
    returns = met({**cells, "QF-A-05": "58"}, QF_A_02={"taken": False}, QF_A_04={"taken": False})
    assert result(returns, "QF-A-05").stands_in_for == "QF-A-02"
    assert "does not say which location QF-A-05 replaces" in notes(returns)


def test_an_alternate_passed_over_without_a_reason_is_noted() -> None:
    """QF-A-06 before QF-A-05 looks like the nearer, easier place."""
    cells = {n: c for n, c in CELLS.items() if n != "QF-A-04"} | {"QF-A-06": "58"}
    lost: dict[str, object] = {"taken": False, "reason": "dry", "replaced_by": "QF-A-06"}
    returns = met(cells, QF_A_04=lost, QF_A_06={"taken": True})
    assert "Alternate QF-A-05 was passed over" in notes(returns)
    tried: dict[str, object] = {"taken": False, "reason": "no-access"}
    returns = met(cells, QF_A_04=lost, QF_A_06={"taken": True}, QF_A_05=tried)
    assert "passed over" not in notes(returns)


def test_a_loss_without_a_stand_in_while_alternates_stood_ready_is_a_departure() -> None:
    """The plan says to take the next alternate; two of the meadow were left where they are."""
    cells = {n: c for n, c in CELLS.items() if n != "QF-A-02"}
    said = "Nothing stands in for QF-A-02, and nothing shows that 2 alternates"
    broken = {"taken": True, "reason": "broken"}
    assert f"{said} of the stratum (QF-A-05 and QF-A-06)" in notes(met(cells, QF_A_02=broken))
    tried: dict[str, object] = {"taken": False, "reason": "no-access"}
    returns = met(cells, QF_A_02=broken, QF_A_05=tried, QF_A_06=tried)
    assert "departure" not in notes(returns)
    assert "departure" not in notes(met({**cells, "QF-A-05": "58"}, QF_A_02=broken))
    assert "departure" not in notes(met())


def test_an_alternate_that_was_taken_and_broke_is_said() -> None:
    """The return promises a result that did not come."""
    cells = {n: c for n, c in CELLS.items() if n != "QF-A-04"}
    returns = met(
        cells,
        QF_A_04={"taken": False, "reason": "dry", "replaced_by": "QF-A-05"},
        QF_A_05={"taken": True, "reason": "broken"},
    )
    assert "QF-A-04 was to be replaced by QF-A-05, which has no result" in notes(returns)
    assert "QF-614" in notes(returns)


def at(easting: float, northing: float) -> dict[str, object]:
    """Give an actual position at these site metres."""
    latitude, longitude = degrees(easting, northing)
    return {"taken": True, "actual_latitude": latitude, "actual_longitude": longitude}


def test_a_move_is_measured_in_site_metres() -> None:
    """From (20, 20) to (23, 24) it is 5 m by Pythagoras; the rule allows 5 + 3 m."""
    returns = met(QF_A_01=at(23, 24))
    assert result(returns, "QF-A-01").moved_m == pytest.approx(5.0, abs=0.02)
    assert returns.notes == ()


def test_a_move_beyond_the_offset_rule_is_said_and_kept() -> None:
    """13 m is more than the 8 m allowed; the result still counts, in its drawn stratum."""
    returns = met(QF_A_01=at(25, 32))
    assert "QF-A-01 was taken 13.0 m from its planned place" in notes(returns)
    assert "allow 8.00 m" in notes(returns)
    assert result(returns, "QF-A-01").used


def test_a_move_into_another_stratum_keeps_the_stratum_it_was_drawn_in() -> None:
    """Its chance of being drawn was that of the planned place, so weight and stratum stay."""
    returns = met(QF_A_04=at(146, 100))
    entry = result(returns, "QF-A-04")
    assert (entry.stratum, entry.used) == ("meadow", True)
    assert "QF-A-04 as taken lies in stratum yard. It was drawn in meadow" in notes(returns)
    assert "outside the population as mapped" in notes(met(QF_B_01=at(150, -9)))


def test_a_moved_jar_without_a_result_is_no_ground_that_could_not_be_reached() -> None:
    """Taken beside the obstacle: the ground was sampled, the laboratory's row is what is missing.

    A place that was not taken keeps its reason, and so does a broken jar.
    """
    plan = make_plan()
    cells = {name: cell for name, cell in CELLS.items() if name != "QF-B-03"}
    moved = {"taken": True, "reason": "obstructed"}
    (lost,) = met(cells, QF_B_03=moved).lost
    assert lost.reason == "taken (obstructed), but no result came from the laboratory"
    assert share_not_reached(plan, [lost]) == 0
    (lost,) = met(cells, QF_B_03={"taken": False, "reason": "obstructed"}).lost
    assert lost.reason == "obstructed"
    assert share_not_reached(plan, [lost]) == pytest.approx(6800 / 23600 / 5)
    for reason in ("broken", "no-recovery"):
        assert met(cells, QF_B_03={"taken": True, "reason": reason}).lost[0].reason == reason


def test_a_place_found_to_lie_outside_the_population_is_left_out() -> None:
    """The crew stood on a road that the map calls meadow; the reason code says so."""
    returns = met(QF_A_04={"taken": True, "reason": "outside"})
    assert not result(returns, "QF-A-04").used
    assert [entry.reason for entry in returns.lost] == ["outside"]


def test_a_position_on_the_other_side_of_the_world_is_refused() -> None:
    """Latitude and longitude swapped is not a moved location."""
    with pytest.raises(LabError, match="Check signs, and that latitude and longitude"):
        met(QF_A_01={"taken": True, "actual_latitude": -1.9, "actual_longitude": 52.1})


def test_a_result_for_a_location_that_was_not_taken_is_a_question() -> None:
    """One of the two is wrong, and only a person can know which."""
    says = (
        "reports '41' for sample 'QF-731' of QF-A-01, but field return row 2 says that it was not"
    )
    with pytest.raises(LabError, match=says):
        met(QF_A_01={"taken": False})


@pytest.mark.parametrize("reason", ["broken", "lost"])
def test_a_jar_that_broke_or_was_lost_cannot_have_a_result(reason: str) -> None:
    """Taken, then gone: a result under its id belongs to something else, or the return is wrong.

    That holds for one jar of two at a location as well.
    """
    with pytest.raises(LabError, match=f"'QF-731' of QF-A-01, but .* says that it is {reason}"):
        met(QF_A_01={"taken": True, "reason": reason})
    plan = make_plan()
    lines = [
        replace(line, reason=reason if line.sample_id == DUPLICATE else "")
        for line in field_rows(plan)
    ]
    with pytest.raises(LabError) as caught:
        reconcile(plan, table(lab_rows(plan)), lines)
    (problem,) = caught.value.problems
    assert f"'69' for sample '{DUPLICATE}' of QF-A-02" in problem
    rows = [row for row in lab_rows(plan) if row.sample_id != DUPLICATE]
    assert reconcile(plan, table(rows), lines).lost == ()


def test_two_different_results_of_one_sample_are_a_question() -> None:
    """A revision or a dilution: the laboratory must say which is the one reported."""
    plan = make_plan()
    rows = [*lab_rows(plan), lab_row(30, "QF-731", "44"), lab_row(31, "QF-418", "22")]
    with pytest.raises(LabError) as caught:
        reconcile(plan, table(rows))
    (line,) = caught.value.problems
    assert "row 30: sample 'QF-731' has a second result '44' beside '41' in row 2" in line


def test_a_repeated_row_is_read_once_and_said() -> None:
    """The same row twice is a copy, not a second measurement."""
    plan = make_plan()
    returns = reconcile(plan, table([*lab_rows(plan), lab_row(31, "QF-418", "22")]))
    assert result(returns, "QF-A-03").as_reported == ("22",)
    assert "rows that repeat a result were read once: row 31" in notes(returns)


def test_a_duplicate_the_plan_did_not_foresee_is_averaged() -> None:
    """The laboratory's role column names it; it still adds no location."""
    plan = make_plan()
    rows = [*lab_rows(plan), lab_row(30, "QF-731", "45", role="field duplicate")]
    assert result(reconcile(plan, table(rows)), "QF-A-01").half == 43.0


def test_blanks_and_the_laboratory_s_own_controls_never_enter_the_mean() -> None:
    """A rinse water of <5 is no soil; a matrix spike of 500 even less."""
    blank = Sample("QF-321", "", "equipment blank", "", ("lead",))
    plan = make_plan(samples=Samples((*make_samples().samples, blank)))
    rows = [
        *lab_rows(plan),
        lab_row(30, "QF-321", "<5"),
        lab_row(31, "QF-731", "500", role="matrix spike"),
    ]
    returns = reconcile(plan, table(rows))
    assert sum(entry.used for entry in returns.results) == 9
    assert "equipment blank QF-321, not in the mean, was reported as '<5'." in returns.notes
    why = "matrix spike, made by the laboratory for itself"
    assert f"Not used ({why}): 'QF-731' with '500' (row 31)." in returns.notes
    assert returns.left_out == (LeftOutRow(31, "QF-731", "lead", "500", why),)


@pytest.mark.parametrize("role", ["laboratory control", "method blank"])
@pytest.mark.parametrize("written", ["QF-{}", "qf {}"])
def test_an_issued_jar_cannot_be_a_control_of_the_laboratory(role: str, written: str) -> None:
    """187 mg/kg, the highest of the yard: dropped in silence, the mean would fall unseen.

    A laboratory control and a method blank are made without the client's material, so a row with
    the id of an issued jar has either the wrong role or the wrong id.
    """
    plan = make_plan()
    name = next(s.sample_id for s in plan.samples.at("QF-B-02"))
    rows = [
        replace(row, role=role, sample_id=written.format(name[3:]))
        if row.sample_id == name
        else row
        for row in lab_rows(plan)
    ]
    with pytest.raises(LabError) as caught:
        reconcile(plan, table(rows))
    (line,) = caught.value.problems
    assert f"role '{role}' with '187'" in line
    assert f"the issued sample {name} of QF-B-02" in line


def test_a_file_of_another_campaign_is_refused() -> None:
    """No id in common means the wrong packet or the wrong column."""
    plan = make_plan()
    with pytest.raises(LabError, match=r"none of its ids .* belongs to QF-r01"):
        reconcile(plan, table([lab_row(2, "XY/1", "5"), lab_row(3, "XY/2", "6")]))


def test_without_a_field_return_it_is_said_that_nothing_was_checked() -> None:
    """Silence of the crew is not proof that nothing moved."""
    plan = make_plan()
    returns = reconcile(plan, table(lab_rows(plan)))
    assert "No field return was given" in notes(returns)
    silent = met(QF_A_01={"taken": None})
    assert "does not say whether QF-A-01 was taken; used" in notes(silent)


def test_rows_of_other_analytes_belong_to_other_questions() -> None:
    """Zinc of the same jar is no second lead."""
    plan = make_plan()
    zinc = replace(lab_row(30, "QF-731", "900"), analyte="zinc")
    assert reconcile(plan, table([*lab_rows(plan), zinc])).matched == 11
