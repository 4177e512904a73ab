"""A campaign that fixes the interval for skewed results, from its file to its results."""

import csv
import json
from pathlib import Path

import numpy as np
import pytest

from fieldplan.stats.skew_interval import skew_interval
from tests.e2e.conftest import run

ROOT = Path(__file__).parents[2]
CAMPAIGN = """\
format = 1
[plan]
id = "LM"
title = "Lower Marl"
[[analyte]]
id = "lead"
name = "Lead"
unit = "mg/kg"
[[frame]]
kind = "area"
boundary = "boundary.geojson"
[[design]]
layout = "simple-random"
[[objective]]
question = "mean"
half_width = 25.0
assurance = "plain"
[[sigma]]
value = 30.0
source = "an earlier survey"
from_results = 15
expected_mean = 40.0
[rules]
mean_interval = "skew-widened"
promised_class = "cv-up-to-2"
[draw]
seed = 77
"""


@pytest.fixture(scope="module")
def packet(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Pack the campaign on the boundary of a demo site."""
    site = tmp_path_factory.mktemp("widened")
    boundary = ROOT / "demo_sites" / "hobbin-ley" / "boundary.geojson"
    (site / "boundary.geojson").write_bytes(boundary.read_bytes())
    (site / "campaign.toml").write_text(CAMPAIGN, encoding="utf-8")
    outcome = run("pack", site / "campaign.toml")
    assert outcome.exit_code == 0, outcome.output
    return site / "LM-r01"


@pytest.fixture(scope="module")
def laboratory(packet: Path, tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, np.ndarray]:
    """Answer every sample with a skewed value; give the file and the values."""
    key = packet / "office" / "samples_key.csv"
    with key.open(encoding="utf-8-sig", newline="") as stream:
        ids = [row["sample_id"] for row in csv.DictReader(stream)]
    values = np.round(np.random.default_rng(4).lognormal(3.3, 0.8, len(ids)), 1)
    path = tmp_path_factory.mktemp("laboratory") / "laboratory.csv"
    rows = [f"{name},Lead,{value},mg/kg" for name, value in zip(ids, values, strict=True)]
    path.write_text("\n".join(["sample_id,analyte,as_reported,unit", *rows]), encoding="utf-8")
    return path, values


def test_the_plan_sheet_says_for_which_interval_n_is(packet: Path) -> None:
    """The interval, Student's n, what the class keeps, and both rules on record."""
    pages = (packet / "office").glob("*.html")
    sheet = " ".join(page.read_text(encoding="utf-8") for page in pages)
    for words in (
        "Sized for the interval that the rules fix (skew-widened, cv-up-to-2)",
        "would ask for",
        "populations of cv-up-to-2",
        "promised_class",
        "its ends are set wider for skewed results",
    ):
        assert words in sheet, words


def test_check_says_for_which_interval_the_half_width_is(packet: Path) -> None:
    """Who reads the campaign back sees what the rules fix."""
    outcome = run("check", packet.parent / "campaign.toml")
    said = " ".join(outcome.stdout.split())
    assert "25 mg/kg (95 %, two-sided, skew-widened for cv-up-to-2)" in said


def test_results_have_the_ends_of_the_interval_that_was_fixed(
    packet: Path, laboratory: tuple[Path, np.ndarray], tmp_path: Path
) -> None:
    """Oracle: the same values through ``skew_interval``, which has its own by hand."""
    path, values = laboratory
    outcome = run("estimate", packet, path, "--out", tmp_path, "--json")
    assert outcome.exit_code == 0, outcome.output
    found = json.loads(outcome.stdout)
    low, high = skew_interval(values, population_class="cv-up-to-2")
    assert found["interval"]["low"] == pytest.approx(low, rel=1e-9)
    assert found["interval"]["high"] == pytest.approx(high, rel=1e-9)
    assert "promised for cv-up-to-2" in found["interval_rule"]
    (results,) = tmp_path.iterdir()
    sheet = (results / "results_sheet.html").read_text(encoding="utf-8")
    assert "in the worst of them" in sheet
    assert "This t interval" not in sheet


def test_a_change_after_results_shows_both(
    packet: Path, laboratory: tuple[Path, np.ndarray], tmp_path: Path
) -> None:
    """The recorded answer stands beside Student's."""
    path, _ = laboratory
    outcome = run(
        "estimate", packet, path, "--out", tmp_path, "--mean-interval", "student-t", "--quiet"
    )
    assert outcome.exit_code == 0, outcome.output
    said = " ".join(outcome.stdout.split())
    assert "CHANGED AFTER RESULTS: mean_interval was skew-widened, is student-t." in said


def test_strata_are_refused_in_one_line_with_the_reason(tmp_path: Path) -> None:
    """What has no evidence is refused before anything is drawn."""
    text = CAMPAIGN.replace('layout = "simple-random"', 'layout = "stratified"')
    text = text.replace(
        'boundary = "boundary.geojson"', 'boundary = "boundary.geojson"\nstrata = "s.geojson"'
    )
    (tmp_path / "campaign.toml").write_text(text, encoding="utf-8")
    outcome = run("check", tmp_path / "campaign.toml")
    assert outcome.exit_code != 0
    said = " ".join((outcome.stdout + outcome.stderr).split())
    assert "this design has strata, and its coverage is simulated for independent results" in said
