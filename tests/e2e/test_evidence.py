"""A packet that was changed is not vouched for."""

import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from fieldplan.base.errors import RecordError
from fieldplan.packet.evidence import examine, packet_fingerprint, rely_on
from fieldplan.plan.record import read_plan, seal
from tests.e2e.conftest import Packed, run


def reseal(packet: Path, change: Callable[[dict[str, Any]], None]) -> None:
    """Change a record and seal it again, as somebody who reads the source could."""
    path = packet / "office" / "record.json"
    record = json.loads(path.read_text(encoding="utf-8"))
    change(record)
    record["seal"] = seal(record)
    path.write_text(json.dumps(record), encoding="utf-8")


def lower_confidence(record: dict[str, Any]) -> None:
    """Fix another rule after the fact."""
    record["campaign"]["rules"]["confidence"] = 0.6


def shift_weights(record: dict[str, Any]) -> None:
    """Give the first stratum a weight that it does not have."""
    record["frame"]["strata"][0]["weight"] *= 0.5


def enlarge(record: dict[str, Any]) -> None:
    """Give the first stratum a measure that it does not have."""
    record["frame"]["strata"][0]["measure"] *= 2


def outweigh(record: dict[str, Any]) -> None:
    """Give one location the weight of two."""
    record["locations"]["places"][0]["weight"] *= 2


@pytest.mark.parametrize(
    ("change", "said"),
    [
        (lower_confidence, r"differs from its own text in \[rules\]"),
        (shift_weights, "weight it does not have"),
        (enlarge, "measure it does not have"),
        (outweigh, "do not carry its weight"),
    ],
)
def test_a_record_sealed_again_is_refused_even_without_its_manifest(
    packed: Packed, tmp_path: Path, change: Callable[[dict[str, Any]], None], said: str
) -> None:
    """The seal is no secret; what follows from a changed part still contradicts it."""
    site = packed.copied_to(tmp_path)
    reseal(site.packet, change)
    with pytest.raises(RecordError, match="not the file that the manifest names"):
        rely_on(site.packet, read_plan(site.packet))
    (site.packet / "office" / "manifest.json").unlink()
    with pytest.raises(RecordError, match=said):
        rely_on(site.packet, read_plan(site.packet))


def test_redraw_names_an_edited_point_list_and_ends_with_1(packed: Packed, tmp_path: Path) -> None:
    """The crew walks to the point list, not to the record."""
    site = packed.copied_to(tmp_path)
    points = site.packet / "crew" / f"{site.packet.name}-points.csv"
    points.write_text(points.read_text(encoding="utf-8-sig").replace("1", "2"), encoding="utf-8")
    outcome = run("redraw", site.packet)
    assert outcome.exit_code == 1
    assert f"crew/{points.name} was changed or removed" in " ".join(outcome.stdout.split())


def test_a_packet_without_its_manifest_is_not_vouched_for(packed: Packed, tmp_path: Path) -> None:
    """Deleting the list must not make a packet look whole."""
    site = packed.copied_to(tmp_path)
    (site.packet / "office" / "manifest.json").unlink()
    evidence = examine(site.packet, read_plan(site.packet))
    assert evidence.fingerprint == ""
    assert "manifest.json is missing" in evidence.others[0]
    assert run("redraw", site.packet).exit_code == 1


def test_a_form_filled_in_where_it_lies_and_files_added_are_no_tampering(
    packed: Packed, tmp_path: Path
) -> None:
    """Crews write into the form they were given."""
    site = packed.copied_to(tmp_path)
    form = site.packet / "crew" / "field_return.csv"
    form.write_text(form.read_text(encoding="utf-8-sig") + "\n", encoding="utf-8")
    (site.packet / "photo.txt").write_text("x", encoding="utf-8")
    assert examine(site.packet, read_plan(site.packet)).sentences == ()


def test_the_fingerprint_is_told_at_issue_and_changes_with_any_file(
    packed: Packed, tmp_path: Path
) -> None:
    """Lodged with somebody else, it is the one thing that cannot be written again."""
    site = packed.copied_to(tmp_path)
    outcome = run("issue", site.packet, "--by", "L. Fenn", "--date", "2026-09-22")
    told = packet_fingerprint(site.packet)
    assert len(told) == 16
    assert told in outcome.stdout
    assert told != packet_fingerprint(packed.packet)


def test_an_estimate_from_a_changed_record_is_refused_and_writes_nothing(
    packed: Packed, tmp_path: Path
) -> None:
    """A confidence or a weight changed after results must not look recorded."""
    site = packed.copied_to(tmp_path)
    reseal(site.packet, lower_confidence)
    lab = next((site.folder / "returned").glob("lab_results.*"))
    outcome = run("estimate", site.packet, lab)
    assert outcome.exit_code == 1
    assert "not the file that the manifest names" in str(outcome.exception)
    assert not list(site.folder.glob("*results-*"))


def test_a_results_sheet_names_files_of_the_packet_that_were_changed(
    packed: Packed, tmp_path: Path
) -> None:
    """The crew walked to the point list; whoever reads the mean must know of its change."""
    site = packed.copied_to(tmp_path)
    told = packet_fingerprint(site.packet)
    (site.packet / "office" / "plan_sheet.pdf").unlink()
    returned = site.folder / "returned"
    outcome = run(
        "estimate",
        site.packet,
        next(returned.glob("lab_results.*")),
        "--field",
        returned / "field_return.csv",
        "--matches",
        returned / "matches.csv",
    )
    assert outcome.exit_code == 0, outcome.output
    assert "plan_sheet.pdf was changed or removed" in outcome.stderr
    sheet = next(site.folder.glob("*results-01")) / "results_sheet.html"
    text = sheet.read_text(encoding="utf-8")
    assert "office/plan_sheet.pdf was changed or removed" in text
    assert told in text
