"""A campaign that fixes a method for non-detects, from its file to its results."""

import csv
import json
from pathlib import Path

import numpy as np
import pytest

from fieldplan.stats.censored import bounds_of_mean, censored_mean
from tests.e2e.conftest import run

ROOT = Path(__file__).parents[2]
CAMPAIGN = """\
format = 1
[plan]
id = "HB"
title = "Hollin Bank"
decides = "O. Marsh"
[[analyte]]
id = "zinc"
name = "Zinc"
unit = "mg/kg"
reporting_limit = 14.0
action_level = 40.0
action_level_source = "invented local guideline, 2024"
[[frame]]
kind = "area"
boundary = "boundary.geojson"
[[design]]
layout = "simple-random"
locations = 36
[[objective]]
question = "mean"
standard_error = 5.0
assurance = "plain"
[[sigma]]
value = 24.0
source = "ASSUMED"
[rules]
non_detects = "by-share"
[draw]
seed = 20261102
"""


@pytest.fixture(scope="module")
def packet(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Pack the campaign on the boundary of a demo site."""
    site = tmp_path_factory.mktemp("non-detects")
    boundary = ROOT / "demo_sites" / "hobbin-ley" / "boundary.geojson"
    (site / "boundary.geojson").write_bytes(boundary.read_bytes())
    (site / "campaign.toml").write_text(CAMPAIGN, encoding="utf-8")
    outcome = run("pack", site / "campaign.toml")
    assert outcome.exit_code == 0, outcome.output
    return site / "HB-r01"


@pytest.fixture(scope="module")
def returned(
    packet: Path, tmp_path_factory: pytest.TempPathFactory
) -> tuple[Path, list[float], list[float]]:
    """Answer every sample with one of two limits; give file, detects and limits."""
    with (packet / "office" / "samples_key.csv").open(encoding="utf-8-sig", newline="") as stream:
        ids = [row["sample_id"] for row in csv.DictReader(stream)]
    rng = np.random.default_rng(12)
    values = np.round(rng.lognormal(3.1, 0.8, len(ids)), 1)
    limits = rng.choice([8.0, 16.0], len(ids))
    cells = [f"<{c:g}" if x < c else f"{x:g}" for x, c in zip(values, limits, strict=True)]
    path = tmp_path_factory.mktemp("laboratory") / "laboratory.csv"
    rows = [f"{name},Zinc,{cell},mg/kg" for name, cell in zip(ids, cells, strict=True)]
    path.write_text("\n".join(["sample_id,analyte,as_reported,unit", *rows]), encoding="utf-8")
    below = values < limits
    return path, [float(x) for x in values[~below]], [float(c) for c in limits[below]]


def test_the_plan_sheet_states_the_rule(packet: Path) -> None:
    """Fixed before results, in words that a reader understands."""
    pages = (packet / "office").glob("*.html")
    sheet = " ".join(page.read_text(encoding="utf-8") for page in pages)
    for words in ("by-share", "a method is chosen by the share of non-detects", "declared_shape"):
        assert words in sheet


def test_the_results_are_by_the_method_with_the_bounds_beside(
    packet: Path, returned: tuple[Path, list[float], list[float]], tmp_path: Path
) -> None:
    """Numbers of the files are those of the method by itself; sheet and JSON say why and bounds."""
    path, detects, limits = returned
    assert 0.1 < len(limits) / 36 < 0.4
    outcome = run("estimate", packet, path, "--out", tmp_path)
    assert outcome.exit_code == 0, outcome.output
    (results,) = tmp_path.iterdir()
    content = json.loads((results / "results.json").read_text(encoding="utf-8"))
    expected = censored_mean(detects, limits, "order-statistics")
    assert content["mean"] == pytest.approx(expected.mean, rel=1e-12)
    assert content["interval"]["low"] == pytest.approx(expected.low, rel=1e-12)
    assert content["interval"]["high"] == pytest.approx(expected.high, rel=1e-12)
    low, high = bounds_of_mean(detects, limits)
    assert content["bracket"]["mean_low"] == pytest.approx(low)
    assert content["bracket"]["mean_high"] == pytest.approx(high)
    page = (results / "results_sheet.html").read_text(encoding="utf-8")
    text = " ".join(page.split())
    for words in ("chosen by share", "Whatever the method, with non-detects at 0", "Σ filled"):
        assert words in text
    assert f"{len(limits)} of 36 values are non-detects" in text


def test_a_change_to_a_likelihood_prints_both(
    packet: Path, returned: tuple[Path, list[float], list[float]], tmp_path: Path
) -> None:
    """Changed after results as any other rule is."""
    path, detects, limits = returned
    outcome = run(
        "estimate", packet, path, "--out", tmp_path, "--non-detects", "gamma-likelihood", "--json"
    )
    content = json.loads(outcome.stdout)
    assert content["mean"] == censored_mean(detects, limits, "gamma-likelihood").mean
    (change,) = content["changes_after_results"]
    assert change["mean_recorded"] == censored_mean(detects, limits, "order-statistics").mean
    assert content["sentences"][1].startswith("CHANGED AFTER RESULTS: non_detects was by-share")
