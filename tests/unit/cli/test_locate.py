"""``fieldplan locate``: what is printed, what is written, what is refused."""

import csv
import io
import json
from pathlib import Path
from typing import Protocol

import pytest

from fieldplan.base.errors import CampaignError, DesignError
from fieldplan.cli.locate import command, table
from tests.factories import make_locations

DEMOS = Path(__file__).parents[3] / "demo_sites"
SOIL, WELLS = DEMOS / "hobbin-ley" / "campaign.toml", DEMOS / "quern-flat" / "campaign.toml"


class Run(Protocol):
    """Run the command; return what went to stdout and to stderr."""

    def __call__(self, *arguments: str | Path) -> tuple[str, str]: ...


@pytest.fixture
def run(capsys: pytest.CaptureFixture[str]) -> Run:
    """Call the command as ``main`` does: an error that a person can mend is raised."""

    def call(*arguments: str | Path) -> tuple[str, str]:
        capsys.readouterr()
        command.main(list(map(str, arguments)), standalone_mode=False)
        printed = capsys.readouterr()
        return printed.out, printed.err

    return call


def test_locations_are_those_that_the_plan_would_issue(run: Run) -> None:
    """Looking must show what packing would give."""
    from datetime import date

    from fieldplan.campaign import read_campaign
    from fieldplan.plan.make import make_plan

    plan = make_plan(read_campaign(SOIL), made_on=date(2026, 9, 7))
    printed = json.loads(run(SOIL, "--json")[0])["locations"]["places"]
    assert [(p["location_id"], p["latitude"], p["longitude"]) for p in printed] == [
        (p.location_id, p.latitude, p.longitude) for p in plan.locations.places
    ]


def test_the_answer_comes_first_and_fits_a_terminal(run: Run) -> None:
    """One sentence, then the table, no line over 80."""
    lines = run(SOIL)[0].splitlines()
    assert lines[0].startswith("33 locations in 3 strata, beside 6 alternates and 3 targeted")
    assert max(map(len, lines)) <= 80
    assert any(line.startswith("HLA01  HL-A-01") for line in lines)


def test_quiet_prints_the_sentence_alone(run: Run) -> None:
    """For scripts that only want to know how many."""
    assert len(run(WELLS, "--quiet")[0].splitlines()) == 1


def test_count_layout_and_seed_replace_what_the_file_says(run: Run) -> None:
    """The file stays as it is; each option has its effect."""
    before = SOIL.read_bytes()
    words = run(SOIL, "--count", "15", "--layout", "triangular-grid", "--seed", "9", "--quiet")[0]
    assert words.startswith("15 locations in 3 strata")
    assert "layout triangular-grid, seed 9." in " ".join(words.split())
    assert SOIL.read_bytes() == before
    seeds = {run(SOIL, "--seed", str(s), "--json")[0] for s in (1, 2)}
    assert len(seeds) == 2


def test_csv_on_stdout_is_csv_and_nothing_else(run: Run) -> None:
    """A pipe reads it with any CSV reader."""
    rows = list(csv.DictReader(io.StringIO(run(SOIL, "--csv", "-")[0])))
    assert len(rows) == 42
    assert rows[0]["location_id"] == "HL-A-01"
    assert float(rows[0]["latitude"]) == pytest.approx(53.31, abs=0.01)


def test_files_are_written_where_asked(run: Run, tmp_path: Path) -> None:
    """CSV and map, and what was written is said on stderr."""
    wanted = tmp_path / "points.csv", tmp_path / "map.html"
    _, told = run(SOIL, "--csv", wanted[0], "--map", wanted[1])
    assert wanted[0].read_bytes().startswith(b"\xef\xbb\xbflocation_id,")
    assert wanted[1].read_text(encoding="utf-8").lower().startswith("<!doctype html>")
    assert str(wanted[0]) in told.replace("\n", "")
    assert sorted(tmp_path.iterdir()) == sorted(wanted)


def test_comparison_names_one_layout_and_measures_all_that_fit(run: Run) -> None:
    """One answer in a sentence, then a short table."""
    printed, told = run(SOIL, "--compare")
    lines = printed.splitlines()
    assert "leaves the smallest gap" in lines[0]
    assert [line.split()[0] for line in lines[-5:]] == [
        "stratified", "square-grid", "triangular-grid", "compact-strata", "balanced-list",
    ]  # fmt: skip
    assert "no credit" in " ".join(told.split())
    found = json.loads(run(SOIL, "--compare", "--json")[0])
    assert {layout["locations"] for layout in found["layouts"]} == {33}


def test_census_visits_all_wells(run: Run) -> None:
    """The layout option works on lists too."""
    assert run(WELLS, "--layout", "census", "--quiet")[0].startswith("22 locations: layout census")


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ((SOIL, "--layout", "simple-random"), 'Write layout = "stratified"'),
        ((SOIL, "--layout", "census"), "a census visits every unit"),
        ((WELLS, "--layout", "square-grid"), "needs an area"),
        ((WELLS, "--layout", "census", "--count", "5"), "--count 5 beside a census"),
        ((WELLS, "--compare"), "for areas only"),
        ((SOIL, "--compare", "--csv", "-"), "--compare draws several layouts; - has room for one"),
    ],
)
def test_what_cannot_be_drawn_is_refused_in_one_line(
    run: Run, arguments: tuple[str | Path, ...], message: str, tmp_path: Path
) -> None:
    """The remedy is in the line, nothing is printed or written."""
    with pytest.raises((CampaignError, DesignError), match=message) as caught:
        run(*arguments)
    assert len(caught.value.problems) == 1
    assert list(tmp_path.iterdir()) == []


def test_long_names_are_cut_in_the_table_only() -> None:
    """The table must fit 80 columns whatever the wells are called."""
    import dataclasses

    place = dataclasses.replace(
        make_locations().places[0], location_id="W" * 35, stratum="S" * 60, longitude=-123.1234567
    )
    lines = table([place])
    assert max(map(len, lines)) <= 80
    assert lines[1].count("…") == 2
