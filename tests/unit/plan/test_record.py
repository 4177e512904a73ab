"""The record keeps everything, and says when it was changed."""

import copy
import json
from datetime import date
from pathlib import Path

import pytest

from fieldplan.base.errors import RecordError
from fieldplan.plan.record import plan_from_record, plan_to_record, read_plan, seal
from tests.factories import make_list_frame, make_plan
from tests.several_analytes import plan_with_zinc


def through_json(record: dict[str, object]) -> dict[str, object]:
    """Write and read as a file would."""
    loaded: dict[str, object] = json.loads(json.dumps(record))
    return loaded


@pytest.mark.parametrize("frame", [None, make_list_frame()], ids=["area", "list"])
def test_a_plan_survives_its_record_unchanged(frame: object) -> None:
    """The estimate is made from the record alone, so nothing may be lost or rounded in it."""
    plan = make_plan() if frame is None else make_plan(frame=frame)
    again = plan_from_record(through_json(plan_to_record(plan)))
    assert again == plan


def test_a_plan_of_several_analytes_survives_and_one_recorded_without_others_is_read() -> None:
    """What n buys for others is part of the record; records from before it came still serve."""
    plan = plan_with_zinc()
    record = through_json(plan_to_record(plan))
    assert plan_from_record(record) == plan
    size = record["size"]
    assert isinstance(size, dict)
    del size["others"]
    record["seal"] = seal(record)
    assert plan_from_record(record).size.others == ()


def test_an_issued_plan_keeps_name_and_date() -> None:
    """Status is printed on every page from the record."""
    plan = make_plan(issued_by="L. Fenn", issued_on=date(2026, 11, 9))
    again = plan_from_record(through_json(plan_to_record(plan)))
    assert again.status == "ISSUED by L. Fenn on 2026-11-09"


def changed_places(value: object, path: tuple[object, ...] = ()) -> list[tuple[object, ...]]:
    """List the paths to every leaf of a JSON value."""
    if isinstance(value, dict):
        return [p for key in value for p in changed_places(value[key], (*path, key))]
    if isinstance(value, list):
        return [p for i, item in enumerate(value) for p in changed_places(item, (*path, i))]
    return [path]


def test_any_changed_leaf_is_noticed() -> None:
    """A hand-edited record must never feed an estimate: every leaf is under the seal."""
    record = through_json(plan_to_record(make_plan()))
    leaves = [p for p in changed_places(record) if p[0] not in {"seal", "record_format"}]
    assert len(leaves) > 300
    for path in leaves:
        edited = copy.deepcopy(record)
        place: object = edited
        for key in path[:-1]:
            place = place[key]  # type: ignore[index]
        place[path[-1]] = "edited"  # type: ignore[index]
        with pytest.raises(RecordError, match="changed after it was written"):
            plan_from_record(edited)


def test_a_later_format_is_refused_by_number() -> None:
    """An older tool must not guess at a newer record."""
    record = plan_to_record(make_plan())
    record["record_format"] = 2
    with pytest.raises(RecordError, match=r"record_format 2; this version reads 1"):
        plan_from_record(record)


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (None, "is not a packet"),
        ("", "cannot be read"),
        ("{", "cannot be read"),
        ("[1]", "holds no record"),
        ("{}", "record_format None"),
        ("[" * 100_000, "cannot be read"),
    ],
)
def test_what_is_no_record_gets_one_clear_line(
    tmp_path: Path, content: str | None, message: str
) -> None:
    """A wrong folder is the commonest slip; it must be told from a damaged packet."""
    if content is not None:
        (tmp_path / "office").mkdir()
        (tmp_path / "office" / "record.json").write_text(content, encoding="utf-8")
    with pytest.raises(RecordError, match=message):
        read_plan(tmp_path)
