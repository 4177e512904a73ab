"""The demo runs the whole job from an empty folder."""

import csv
from pathlib import Path

import pytest

from tests.e2e.conftest import PLAN_IDS, SITES, run


@pytest.mark.parametrize("name", SITES)
def test_the_demo_ends_with_an_issued_packet_and_a_results_sheet(
    name: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """It is the first thing a stranger runs."""
    monkeypatch.chdir(tmp_path)
    outcome = run("demo", name)
    assert outcome.exit_code == 0, outcome.output
    site = tmp_path / "fieldplan-demo" / name
    packet = site / f"{PLAN_IDS[name]}-r01"
    assert "ISSUED" in (packet / "START_HERE.html").read_text(encoding="utf-8")
    assert (site / f"{packet.name}-results-01" / "results_sheet.pdf").is_file()
    for stage in range(1, 6):
        assert f"[{stage}/5]" in outcome.stderr


def test_a_second_demo_begins_anew_beside_the_first(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """What came back belongs to revision 1; the first run, and what was changed in it, stays."""
    monkeypatch.chdir(tmp_path)
    assert run("demo", "quern-flat").exit_code == 0
    first = tmp_path / "fieldplan-demo" / "quern-flat"
    (first / "wells.csv").write_text("mine", encoding="utf-8")
    before = sorted(first.rglob("*"))
    for number in (2, 3):
        again = run("demo", "quern-flat")
        assert again.exit_code == 0, again.output
        second = first.with_name(f"quern-flat-{number}")
        assert (second / "QF-r01-results-01" / "results_sheet.html").is_file()
        assert not (second / "QF-r02").exists()
        assert f"quern-flat-{number}" in " ".join(again.stderr.split())
    assert sorted(first.rglob("*")) == before
    assert (first / "wells.csv").read_text(encoding="utf-8") == "mine"


def test_the_soil_demo_answers_for_zinc_too(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Two analytes, one file: a sentence on the screen, a sheet, a map and rows of its own."""
    monkeypatch.chdir(tmp_path)
    outcome = run("demo", "hobbin-ley")
    assert outcome.exit_code == 0, outcome.output
    assert outcome.stdout.count("The mean of Zinc over Hobbin Ley (invented) is ") == 1
    results = tmp_path / "fieldplan-demo" / "hobbin-ley" / "HL-r01-results-01"
    for name in ("results_sheet-zinc.html", "results_sheet-zinc.pdf", "results_map-zinc.png"):
        assert (results / name).stat().st_size > 1000
    main = (results / "results_sheet.html").read_text(encoding="utf-8")
    assert "results_sheet-zinc" in main
    with (results / "results.csv").open(encoding="utf-8-sig", newline="") as stream:
        rows = list(csv.DictReader(stream))
    places = [(row["location_id"], row["analyte"]) for row in rows]
    assert len(set(places)) == len(places)
    assert {analyte for _, analyte in places} == {"lead", "zinc"}


def test_an_unknown_demo_is_answered_with_the_known_ones(tmp_path: Path) -> None:
    """A near miss must not end in a traceback."""
    outcome = run("demo", "hobbin", "--out", tmp_path / "x")
    assert outcome.exit_code == 2
    assert "take one of: hobbin-ley, quern-flat, yarrel-water" in outcome.stderr
    assert not (tmp_path / "x").exists()
