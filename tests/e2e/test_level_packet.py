"""A campaign that asks on which side of a level the mean lies, from its file to its results."""

import csv
import json
import shutil
from pathlib import Path

import pytest

from tests.e2e.conftest import run

ROOT = Path(__file__).parents[2]
OF_A_MEAN = """question = "mean"
standard_error = 10.0
assurance = 0.80
assurance_chosen_by = "L. Fenn"
decides_n = true
"""
OF_A_LEVEL = """question = "mean-and-level"
decides_n = true

[objective.mean_and_level]
assume = "above-level"
gray_edge = 120
alpha = 0.05
beta = 0.20
assurance = 0.80
"""
MEANS = {"A": 45.0, "B": 290.0, "C": 140.0}


@pytest.fixture(scope="module")
def packet(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Pack Hobbin Ley with the question about the level, and the limit that it tests."""
    site = tmp_path_factory.mktemp("level") / "site"
    shutil.copytree(ROOT / "demo_sites" / "hobbin-ley", site)
    campaign = site / "campaign.toml"
    text = campaign.read_text(encoding="utf-8")
    for old, new in ((OF_A_MEAN, OF_A_LEVEL), ('"two-sided"', '"upper-limit"')):
        assert text.count(old) == 1, old
        text = text.replace(old, new)
    campaign.write_text(text, encoding="utf-8")
    outcome = run("pack", campaign)
    assert outcome.exit_code == 0, outcome.output
    return site / "HL-r01"


def test_the_plan_sheet_says_it_in_words_and_the_working_shows_how(packet: Path) -> None:
    """The sentence, who carries the doubt, the picture's caption, the formula."""
    sheet = (packet / "office" / "plan_sheet.html").read_text(encoding="utf-8")
    assert "then comes out below 150 mg/kg in at least 80 % of campaigns" in sheet
    assert "the mean is taken to lie at 150 mg/kg or above" in sheet
    assert "How often 21 results lead to the wrong call, by the true mean" in sheet
    working = (packet / "office" / "working.html").read_text(encoding="utf-8")
    assert "noncentral with shift" in working
    assert "[rules] fixes another" not in sheet


def test_the_record_keeps_the_question_and_draws_it_again(packet: Path) -> None:
    """What was asked stays on record; the same places come out of it."""
    record = json.loads((packet / "office" / "record.json").read_text(encoding="utf-8"))
    assert '"mean-and-level"' in json.dumps(record)
    outcome = run("redraw", packet)
    assert outcome.exit_code == 0, outcome.output
    assert "drawn again, to the centimetre" in " ".join(outcome.stdout.split())


def test_results_meet_the_limit_that_was_planned(packet: Path, tmp_path: Path) -> None:
    """With every result at its stratum's mean the limit lies below the level by arithmetic."""
    laboratory = tmp_path / "laboratory.csv"
    with (packet / "office" / "samples_key.csv").open(encoding="utf-8-sig", newline="") as stream:
        samples = [row for row in csv.DictReader(stream) if row["location_id"].startswith("HL-")]
    lines = ["Sample ID,Analyte,As reported,Unit,Reporting limit"]
    for position, sample in enumerate(samples):
        mean = MEANS[sample["location_id"].split("-")[1]]
        lines.append(f"{sample['sample_id']},Lead,{mean + 5 * (position % 3 - 1)},mg/kg,5")
    laboratory.write_text("\n".join(lines) + "\n", encoding="utf-8")
    outcome = run("estimate", packet, laboratory, "--analyte", "lead")
    assert outcome.exit_code == 0, outcome.output
    said = " ".join(outcome.stdout.split())
    assert "The 95 % upper limit lies below the action level of 150 mg/kg" in said
    assert "L. Fenn decides what follows" in said
