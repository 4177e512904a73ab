"""Composites from a campaign file: sized, and never packed as locations."""

import json
import shutil
from pathlib import Path

import pytest
from click.testing import Result

from fieldplan.base.errors import FieldplanError
from fieldplan.cli import entry
from tests.command_runner import command_runner

DEMO = Path(__file__).parents[3] / "demo_sites" / "hobbin-ley"
ANALYSIS = """[[sigma]]
analyte = "lead"
part = "analysis"
value = 8.0
source = "control chart of the laboratory"
from_results = 40

[cost]
per_increment = 4.0
"""


@pytest.fixture
def site(tmp_path: Path) -> Path:
    """Copy a demo site whose design takes composites."""
    folder = tmp_path / "site"
    shutil.copytree(DEMO, folder)
    path = folder / "campaign.toml"
    text = path.read_text(encoding="utf-8")
    text = text.replace("alternates = 2\n", 'increments = "choose"\n', 1)
    path.write_text(text.replace("[cost]\n", ANALYSIS, 1), encoding="utf-8")
    return folder


def run(*words: str) -> Result:
    """Run a command."""
    return command_runner().invoke(entry, list(words))


def test_a_campaign_of_composites_is_sized_with_increments_beside_n(site: Path) -> None:
    """Results are composites; losses are counted in composites too."""
    outcome = run("size", str(site / "campaign.toml"), "--json")
    assert outcome.exit_code == 0, outcome.output
    found = json.loads(outcome.stdout)
    assert found["increments"] > 1
    assert found["n"] == found["replicates"] == sum(entry["n"] for entry in found["strata"])
    assert {"composites", "parts"} <= set(found["findings"])
    planned = found["locations"] * found["increments"]
    assert f"{planned} increments in all" in " ".join(found["sentences"])


@pytest.mark.parametrize("command", ["pack", "locate"])
def test_forms_that_cannot_show_increments_are_not_written(site: Path, command: str) -> None:
    """One clear line, exit code 1, and nothing in the folder that was not there."""
    before = sorted(path.name for path in site.iterdir())
    outcome = run(command, str(site / "campaign.toml"))
    assert isinstance(outcome.exception, FieldplanError)
    assert outcome.exception.exit_code == 1
    (line,) = outcome.exception.problems
    assert line.startswith("design.increments")
    assert "not done yet in this version" in line
    assert sorted(path.name for path in site.iterdir()) == before


def test_composites_without_a_known_laboratory_say_what_is_missing(site: Path) -> None:
    """Zinc's pilot has too few duplicates to tell anything; lead's part is taken out here."""
    path = site / "campaign.toml"
    text = path.read_text(encoding="utf-8").replace(ANALYSIS, "[cost]\nper_increment = 4.0\n")
    pilot = site / "pilot.csv"
    rows = pilot.read_text(encoding="utf-8").splitlines(keepends=True)
    kept = [row for row in rows if "field duplicate" not in row]
    pilot.write_text("".join(kept), encoding="utf-8")
    path.write_text(text, encoding="utf-8")
    outcome = run("size", str(path))
    assert isinstance(outcome.exception, FieldplanError)
    assert 'part = "analysis", or a pilot with duplicates' in str(outcome.exception)
