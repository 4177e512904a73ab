"""Several analytes of one file: each is met by itself, faults stop all, a jar is asked for once."""

import pytest

from fieldplan.base.errors import LabError
from fieldplan.lab.model import LabRow
from fieldplan.returns import reconcile, reconcile_all
from fieldplan.returns.matching import ConfirmedMatch
from tests.several_analytes import plan_with_zinc
from tests.unit.returns.returned import CELLS, field_rows, lab_row, lab_rows, table

PLAN = plan_with_zinc()
ZINC_FROM = 40
"""Row numbers of zinc lie this far below those of lead."""


def zinc_rows(cells: dict[str, str] | None = None) -> list[LabRow]:
    """Give zinc twice the number of lead, in rows further down."""
    doubled = {
        name: cell if "<" in cell else f"{2 * float(cell):g}" for name, cell in CELLS.items()
    }
    rows = []
    for row in lab_rows(PLAN, cells or doubled):
        number = row.row + ZINC_FROM
        rows.append(lab_row(number, row.sample_id, row.as_reported, analyte="zinc", unit="µg/g"))
    return rows


def renamed(rows: list[LabRow], position: int, written: str) -> list[LabRow]:
    """Write another sample id into one row."""
    row = rows[position]
    changed = lab_row(row.row, written, row.as_reported, analyte=row.analyte, unit=row.unit)
    return [*rows[:position], changed, *rows[position + 1 :]]


def test_each_analyte_has_its_own_values_from_the_same_jars() -> None:
    """Zinc of QF-A-01 was written as twice 41."""
    received = reconcile_all(PLAN, table([*lab_rows(PLAN), *zinc_rows()]), field_rows(PLAN))
    assert [returns.analyte for returns in received.every] == ["lead", "zinc"]
    assert received.missing == ()
    lead, zinc = received.every
    assert [r.location_id for r in lead.results] == [r.location_id for r in zinc.results]
    assert (lead.results[0].half, zinc.results[0].half) == (41.0, 82.0)
    assert (lead.matched, zinc.matched) == (11, 11)


def test_an_analyte_met_by_itself_gives_what_it_gives_among_others() -> None:
    """The option and the whole file must not disagree."""
    everything = table([*lab_rows(PLAN), *zinc_rows()])
    alone = reconcile_all(PLAN, everything, field_rows(PLAN), analyte="zinc")
    assert alone.main == reconcile_all(PLAN, everything, field_rows(PLAN)).others[0]
    assert (alone.others, alone.missing) == ((), ())


def test_an_analyte_without_a_result_is_named_and_stops_nothing() -> None:
    """The laboratory's own controls of it are no results."""
    control = lab_row(60, "LCS-1", "195", analyte="zinc", role="laboratory control")
    received = reconcile_all(PLAN, table([*lab_rows(PLAN), control]), field_rows(PLAN))
    assert (received.others, received.missing) == ((), ("zinc",))


def test_a_file_without_the_deciding_analyte_says_which_one_it_has() -> None:
    """The remedy is the option."""
    with pytest.raises(LabError) as caught:
        reconcile_all(PLAN, table(zinc_rows()), field_rows(PLAN))
    assert "labs.csv has no result of lead that counts; it has zinc." in str(caught.value)
    assert "--analyte zinc" in str(caught.value)
    assert reconcile(PLAN, table(zinc_rows()), field_rows(PLAN), analyte="zinc").matched == 11
    controls = [lab_row(2, "MB-1", "<5", role="method blank")]
    with pytest.raises(LabError, match="only controls of the laboratory"):
        reconcile_all(PLAN, table(controls), field_rows(PLAN))


def test_faults_in_the_rows_of_any_analyte_stop_all_and_are_said_together() -> None:
    """A file is right or it is not: a second zinc result of one jar is as bad as one of lead."""
    lead, zinc = lab_rows(PLAN), zinc_rows()
    again = [
        lab_row(90, lead[0].sample_id, "55"),
        lab_row(91, zinc[1].sample_id, "77", analyte="zinc", unit="µg/g"),
    ]
    with pytest.raises(LabError) as caught:
        reconcile_all(PLAN, table([*lead, *zinc, *again]), field_rows(PLAN))
    assert [line.split(":")[0] for line in caught.value.problems] == [
        "labs.csv row 90",
        "labs.csv row 91",
    ]


def test_a_jar_that_two_analytes_name_alike_is_asked_for_once() -> None:
    """The laboratory retyped one label; it stands in two rows of the file."""
    rows = [*renamed(lab_rows(PLAN), 0, "qf 731"), *renamed(zinc_rows(), 0, "qf 731")]
    received = reconcile_all(PLAN, table(rows), field_rows(PLAN))
    assert [match.row for match in received.needs_you] == [2]
    assert [len(returns.needs_you) for returns in received.every] == [1, 1]


@pytest.mark.parametrize("asked_at", [2, 2 + ZINC_FROM])
@pytest.mark.parametrize("yes", [True, False])
def test_an_answer_holds_for_the_jar_under_every_analyte(asked_at: int, yes: bool) -> None:
    """Whichever row it was given at, yes matches both and no leaves both out."""
    rows = [*renamed(lab_rows(PLAN), 0, "qf 731"), *renamed(zinc_rows(), 0, "qf 731")]
    answer = [ConfirmedMatch(asked_at, "qf 731", "QF-731", confirmed=yes)]
    received = reconcile_all(PLAN, table(rows), field_rows(PLAN), confirmed=answer)
    assert received.needs_you == ()
    assert [returns.matched for returns in received.every] == [11, 11] if yes else [10, 10]
    assert [returns.extra for returns in received.every] == [0, 0] if yes else [1, 1]


def test_answers_that_differ_for_one_written_id_are_not_carried_over() -> None:
    """Two rows of lead with one label went to two jars; zinc's row could be either: ask."""
    lead = renamed(renamed(lab_rows(PLAN), 0, "QF-471"), 3, "QF-471")
    zinc = renamed(zinc_rows(), 0, "QF-471")
    first, second = lab_rows(PLAN)[0].sample_id, lab_rows(PLAN)[3].sample_id
    answers = [
        ConfirmedMatch(lead[0].row, "QF-471", first, confirmed=True),
        ConfirmedMatch(lead[3].row, "QF-471", second, confirmed=True),
    ]
    received = reconcile_all(PLAN, table([*lead, *zinc]), field_rows(PLAN), confirmed=answers)
    lead_found, zinc_found = received.every
    assert lead_found.matched == 11
    assert zinc_found.matched == 10
    assert zinc_found.extra + len(zinc_found.needs_you) == 1


def test_an_answer_is_not_carried_to_an_analyte_where_it_would_not_be_proposed() -> None:
    """Asked for lead alone, an answer given at a zinc row must not make a stranger's lead count."""
    lead = [*lab_rows(PLAN)[1:], lab_row(30, "X118/2", "45")]
    zinc = [*zinc_rows()[1:], lab_row(80, "X118/2", "90", analyte="zinc", unit="µg/g")]
    answer = [ConfirmedMatch(80, "X118/2", lab_rows(PLAN)[0].sample_id, confirmed=True)]
    found = reconcile(PLAN, table([*lead, *zinc]), field_rows(PLAN), confirmed=answer)
    assert (found.matched, found.extra) == (10, 1)
    with pytest.raises(LabError, match="was never proposed"):
        reconcile_all(PLAN, table([*lead, *zinc]), field_rows(PLAN), confirmed=answer)


def test_an_answer_for_a_row_that_the_file_does_not_hold_is_refused_for_any_analyte() -> None:
    """Answers belong to one file."""
    rows = [*lab_rows(PLAN), *zinc_rows()]
    wrong = [ConfirmedMatch(2 + ZINC_FROM, "qf 731", "QF-731", confirmed=True)]
    for analyte in (None, "lead", "zinc"):
        with pytest.raises(LabError, match="is not in this laboratory file"):
            reconcile_all(PLAN, table(rows), field_rows(PLAN), confirmed=wrong, analyte=analyte)
