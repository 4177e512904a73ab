"""The crew's return: a form that gives nothing away, read back line by line."""

import csv
import io
import random
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from fieldplan.base.errors import FieldplanError, LabError
from fieldplan.campaign.model import FieldTable
from fieldplan.design.model import Locations
from fieldplan.returns import field_return_blank, read_field_return
from fieldplan.returns.form import FIELD_COLUMNS
from fieldplan.samples.model import Sample, Samples
from tests.factories import make_campaign, make_locations, make_plan, make_samples

Write = Callable[[list[dict[str, str]]], Path]


@pytest.fixture
def write(tmp_path: Path) -> Write:
    """Fill in the blank form: each dict changes the line of its sample, or adds one."""

    def fill(changes: list[dict[str, str]]) -> Path:
        lines = list(csv.DictReader(io.StringIO(field_return_blank(make_plan()))))
        for change in changes:
            line = next((x for x in lines if x["sample_id"] == change.get("sample_id")), None)
            if line is None:
                lines.append(dict.fromkeys(FIELD_COLUMNS, "") | change)
            else:
                line.update(change)
        text = io.StringIO(newline="")
        writer = csv.DictWriter(text, FIELD_COLUMNS)
        writer.writeheader()
        writer.writerows(lines)
        path = tmp_path / "field_return.csv"
        path.write_text(text.getvalue(), encoding="utf-8-sig", newline="")
        return path

    return fill


def problems_of(path: Path) -> tuple[str, ...]:
    """Read a return that must be refused."""
    with pytest.raises(LabError) as caught:
        read_field_return(path, make_plan())
    return caught.value.problems


def test_the_form_has_one_line_a_sample_with_alternates_last() -> None:
    """The crew works down the list; alternates wait at its end."""
    lines = list(csv.DictReader(io.StringIO(field_return_blank(make_plan()))))
    assert len(lines) == len(make_plan().samples.samples)
    classes = [line["class"] for line in lines]
    assert classes == ["random"] * 10 + ["targeted"] + ["alternate"] * 4


def test_the_form_gives_no_duplicate_away() -> None:
    """No role, no parent, and the order of two jars says nothing: they stand by their ids."""
    text = field_return_blank(make_plan())
    assert "duplicate" not in text
    assert "qc" not in text
    swapped = Samples(
        tuple(
            Sample("QF-100", s.location_id, s.role, "QF-204", s.analytes) if s.qc_of else s
            for s in make_samples().samples
        )
    )
    lines = csv.DictReader(io.StringIO(field_return_blank(make_plan(samples=swapped))))
    pair = [line["sample_id"] for line in lines if line["location_id"] == "QF-A-02"]
    assert pair == ["QF-100", "QF-204"]


def test_a_blank_has_no_location_and_says_what_it_is() -> None:
    """A crew cannot rinse an auger for a jar that looks like soil."""
    blank = Sample("QF-321", "", "equipment blank", "", ("lead",))
    samples = Samples((*make_samples().samples, blank))
    lines = list(csv.DictReader(io.StringIO(field_return_blank(make_plan(samples=samples)))))
    (line,) = [line for line in lines if line["sample_id"] == "QF-321"]
    assert (line["location_id"], line["class"]) == ("", "control")
    assert line["note"] == "equipment blank"


def test_ids_of_the_user_survive_a_spreadsheet() -> None:
    """A well called =1+1 or 007 must neither run nor lose its zeros."""
    places = list(make_locations().places)
    places[0] = replace(places[0], location_id="=1+1")
    locations = Locations("stratified", 1, 1, tuple(places), 9, 9)
    first = Sample("QF-731", "=1+1", "field sample", "", ("lead",))
    text = field_return_blank(make_plan(locations=locations, samples=Samples((first,))))
    assert text.splitlines()[1].startswith("'=1+1,")


@pytest.mark.parametrize("written", ["UTC+01:00", "+01:00", "'+01:00", "utc +01:00"])
def test_the_clock_stands_in_the_form_without_apostrophe_and_is_read_either_way(
    write: Write, written: str
) -> None:
    """A quoted cell in every row looks like an error; older forms have one."""
    plan = make_plan()
    plan = replace(plan, campaign=make_campaign(field=FieldTable(utc_offset="+01:00")))
    lines = csv.DictReader(io.StringIO(field_return_blank(plan)))
    assert {line["utc_offset"] for line in lines} == {"UTC+01:00"}
    rows = read_field_return(write([{"sample_id": "QF-731", "utc_offset": written}]), plan)
    assert {row.sample_id: row.utc_offset for row in rows}["QF-731"] == "+01:00"


def test_an_unfilled_form_is_read_as_silence(write: Write) -> None:
    """Nothing written is not the same as not taken."""
    rows = read_field_return(write([]), make_plan())
    assert len(rows) == 15
    assert {row.taken for row in rows} == {None}
    assert rows.file_name == "field_return.csv"


def test_a_filled_line_is_read_whole(write: Write) -> None:
    """Position, alternate by its short name, reason in free spelling, initials."""
    path = write(
        [
            {"sample_id": "QF-731", "taken": "YES", "collected_at": "2026-11-09 10:20",
             "utc_offset": "'+01:00", "actual_latitude": "52.1001", "actual_longitude": "-1.8997",
             "initials": "km", "note": "wet"},
            {"sample_id": "QF-990", "taken": "no", "replaced_by": "qfa05", "reason": "No access"},
        ]
    )  # fmt: skip
    rows = {row.sample_id: row for row in read_field_return(path, make_plan())}
    first, lost = rows["QF-731"], rows["QF-990"]
    assert (first.location_id, first.taken, first.utc_offset) == ("QF-A-01", True, "+01:00")
    assert (first.actual_latitude, first.actual_longitude) == (52.1001, -1.8997)
    assert (lost.taken, lost.replaced_by, lost.reason) == (False, "QF-A-05", "no-access")


@pytest.mark.parametrize(
    ("change", "says"),
    [
        ({"sample_id": "QF-732", "taken": "yes"}, "did you mean 'QF-731'"),
        ({"sample_id": "", "location_id": "QF-Z-01"}, "is no location of the plan"),
        ({"sample_id": "QF-731", "location_id": "QF-B-01"}, "belongs to QF-A-01, not to QF-B-01"),
        ({"sample_id": "QF-731", "taken": "maybe"}, "must be yes or no"),
        ({"sample_id": "QF-731", "reason": "no acces"}, "did you mean 'no-access'"),
        ({"sample_id": "QF-731", "replaced_by": "QF-A-02"}, "is no alternate of the plan"),
        ({"sample_id": "QF-731", "replaced_by": "QF-B-06"}, "only inside its own stratum"),
        ({"sample_id": "QF-731", "taken": "yes", "replaced_by": "QF-A-05"}, "taken or replaced"),
        ({"sample_id": "QF-731", "actual_latitude": "52.1"}, "its partner is not"),
        ({"sample_id": "QF-731", "actual_latitude": "52°6'", "actual_longitude": "1"},
         "decimal degrees"),
        ({"sample_id": "QF-731", "actual_latitude": "1", "actual_longitude": "181"},
         "decimal degrees"),
    ],
)  # fmt: skip
def test_a_line_that_contradicts_the_plan_is_refused(
    write: Write, change: dict[str, str], says: str
) -> None:
    """The row is named, and the remedy is one the crew can carry out."""
    (line,) = problems_of(write([change]))
    assert line.startswith("field_return.csv row ")
    assert says in line


def test_two_lines_for_one_jar_and_one_alternate_for_two_places_are_refused(write: Write) -> None:
    """Either makes the count of results wrong."""
    path = write(
        [
            {"sample_id": "QF-731", "taken": "no", "replaced_by": "QF-A-05"},
            {"sample_id": "QF-418", "taken": "no", "replaced_by": "QF-A-05"},
        ]
    )
    with path.open("a", encoding="utf-8", newline="") as stream:
        stream.write("QF-B-01,,,QF-127,yes,,,,,,,,\r\n")
    lines = problems_of(path)
    assert "One alternate replaces one location" in lines[0]
    assert "Keep one line a sample" in lines[1]


@pytest.mark.parametrize("seed", range(40))
def test_a_damaged_return_is_read_or_refused_in_words(write: Write, seed: int) -> None:
    """A tablet that fell into a ditch still gives a sentence."""
    dice = random.Random(seed)
    path = write([{"sample_id": "QF-731", "taken": "yes", "actual_latitude": "52.1"}])
    content = bytearray(path.read_bytes())
    for _ in range(dice.randint(1, 12)):
        content[dice.randrange(len(content))] = dice.randrange(256)
    path.write_bytes(bytes(content[: dice.randint(1, len(content))]))
    said: tuple[str, ...] = ()
    try:
        rows = read_field_return(path, make_plan())
    except FieldplanError as fault:
        said = fault.problems
    assert said or len(rows) <= 15
