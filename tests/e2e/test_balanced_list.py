"""Balanced lists from the campaign file to the estimate: drawn, recorded, estimated."""

import csv
import io
import math
import re
import shutil
from pathlib import Path

import pytest

from fieldplan.cli.demo import demo_folder
from fieldplan.plan.record import read_plan
from tests.e2e.conftest import run


def packed(place: Path, site: str, old: str, new: str) -> Path:
    """Pack a demo with another layout; return the packet."""
    folder = place / site
    shutil.copytree(demo_folder() / site, folder)
    campaign = folder / "campaign.toml"
    text = campaign.read_text(encoding="utf-8")
    assert old in text
    campaign.write_text(text.replace(old, new), encoding="utf-8")
    outcome = run("pack", campaign, "--date", "2026-09-21")
    assert outcome.exit_code == 0, outcome.output
    return next(path for path in folder.iterdir() if path.name.endswith("-r01"))


def invented_results(packet: Path, analyte: str, unit: str) -> Path:
    """Write a laboratory file: results rise with easting; the first random place has none."""
    plan = read_plan(packet)
    rows = io.StringIO()
    writer = csv.writer(rows)
    writer.writerow(["Sample ID", "Analyte", "As reported", "Unit", "Reporting limit"])
    west = min(place.easting for place in plan.locations.places)
    for number, place in enumerate(plan.locations.of_class("random")[1:]):
        value = 60 + 0.4 * (place.easting - west) + 7 * (number % 5)
        for sample in plan.samples.at(place.location_id):
            writer.writerow([sample.sample_id, analyte, f"{value:.1f}", unit, "5"])
    path = packet.parent / "lab.csv"
    path.write_text(rows.getvalue(), encoding="utf-8")
    return path


@pytest.mark.parametrize(
    ("keys", "words"),
    [
        ("", "from how each result differs from its neighbours"),
        ('\nlocations = 66\nvariance = "covariance"', "averaged over 126 curves"),
    ],
)
def test_an_area_goes_from_the_file_to_the_interval(tmp_path: Path, keys: str, words: str) -> None:
    """One campaign file from end to end; the standard error is the one that the layout earned."""
    layout = f'layout = "balanced-list"{keys}'
    packet = packed(tmp_path, "hobbin-ley", 'layout = "stratified"', layout)
    again = run("redraw", packet)
    assert again.exit_code == 0, again.output
    assert "were drawn again, to the centimetre" in again.output
    told = run("estimate", packet, invented_results(packet, "Lead", "mg/kg"), "--explain")
    assert told.exit_code == 0, told.output
    said = " ".join(told.output.split())
    page = next(packet.parent.glob("**/*results*.html")).read_text(encoding="utf-8")
    assert words in " ".join(page.split())
    assert "no credit for the layout" in page
    assert "SE = √(Σ W²·V)" in said
    sheet = (packet / "office" / "plan_sheet.html").read_text(encoding="utf-8")
    assert "balanced list, spread by the local pivotal method" in sheet
    working = (packet / "office" / "working.html").read_text(encoding="utf-8")
    assert "A spread layout is sized as random places" in " ".join(working.split())


def test_wells_go_from_the_file_to_the_interval(tmp_path: Path) -> None:
    """A list is spread by the places of its units, and its variance knows that it is finite."""
    layout = 'layout = "balanced-list"'
    text = (demo_folder() / "quern-flat" / "campaign.toml").read_text(encoding="utf-8")
    old = re.search(r'layout = "[a-z-]+"', text)
    assert old
    packet = packed(tmp_path, "quern-flat", old.group(), layout)
    assert run("redraw", packet).exit_code == 0
    plan = read_plan(packet)
    weights = [place.weight for place in plan.locations.of_class("random")]
    assert math.fsum(weights) == pytest.approx(1.0)
    analyte = plan.campaign.analyte[0]
    results = invented_results(packet, analyte.laboratory_names[0], analyte.unit)
    told = run("estimate", packet, results, "--explain")
    assert told.exit_code == 0, told.output
    assert "V = s′²/n · (1 − n/N)" in " ".join(told.output.split())
