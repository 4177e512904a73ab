"""Compact strata from the campaign file to the estimate: cells drawn, recorded and estimated by."""

import csv
import io
import shutil
from pathlib import Path

import pytest

from fieldplan.campaign.read import inspect_campaign
from fieldplan.cli.demo import demo_folder
from fieldplan.plan.record import read_plan
from tests.e2e.conftest import run


def packed_in_cells(place: Path, keys: str) -> Path:
    """Pack the demo's area in compact strata; return the packet."""
    folder = place / "hobbin-ley"
    shutil.copytree(demo_folder() / "hobbin-ley", folder)
    campaign = folder / "campaign.toml"
    text = campaign.read_text(encoding="utf-8")
    text = text.replace('layout = "stratified"', f'layout = "compact-strata"\n{keys}')
    campaign.write_text(text, encoding="utf-8")
    assert inspect_campaign(campaign).campaign is not None
    outcome = run("pack", campaign, "--date", "2026-09-21")
    assert outcome.exit_code == 0, outcome.output
    return folder / "HL-r01"


def invented_results(packet: Path, *, without: int) -> Path:
    """Write a laboratory file: lead rises with easting; some locations have no result."""
    plan = read_plan(packet)
    rows = io.StringIO()
    writer = csv.writer(rows)
    writer.writerow(["Sample ID", "Analyte", "As reported", "Unit", "Reporting limit"])
    west = min(place.easting for place in plan.locations.places)
    random = plan.locations.of_class("random")
    for number, place in enumerate(random):
        if number < without:
            continue
        value = 60 + 0.4 * (place.easting - west) + 7 * (number % 5)
        for sample in plan.samples.at(place.location_id):
            writer.writerow([sample.sample_id, "Lead", f"{value:.1f}", "mg/kg", "5"])
    path = packet.parent / "lab.csv"
    path.write_text(rows.getvalue(), encoding="utf-8")
    return path


@pytest.mark.parametrize(
    ("keys", "words"),
    [
        ("", "pairs: two results of one cell, or the results of two neighbouring cells"),
        ("per_cell = 2", "pairs: two results of one cell, or the results of two neighbouring"),
        ('locations = 66\nvariance = "covariance"', "averaged over 126 curves"),
    ],
)
def test_cells_are_drawn_recorded_and_estimated_by(tmp_path: Path, keys: str, words: str) -> None:
    """One campaign file from end to end; nothing is decided twice."""
    packet = packed_in_cells(tmp_path, keys)
    again = run("redraw", packet)
    assert again.exit_code == 0, again.output
    assert "were drawn again, to the centimetre" in again.output
    plan = read_plan(packet)
    assert all(place.cell for place in plan.locations.of_class("random"))
    results = invented_results(packet, without=1)
    told = run("estimate", packet, results, "--explain")
    assert told.exit_code == 0, told.output
    said = " ".join(told.output.split())
    assert "Σ a·(mean of the cell)" in said or "Mean of the cell means" in said
    page = next((packet.parent).glob("**/*results*.html")).read_text(encoding="utf-8")
    assert words in " ".join(page.split())
    assert "no credit for the layout" in page
