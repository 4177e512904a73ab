"""Money in a packet: readings calibrated by a file, the frontier, what being wrong costs."""

import json
import shutil
from pathlib import Path

import pytest

from fieldplan.cli import entry
from fieldplan.plan import record as plan_record
from tests.command_runner import command_runner

ROOT = Path(__file__).parents[2]
READING = """
[[field_reading]]
name = "XRF meter"
analyte = "lead"
pilot = "pairs.csv"
columns = { reading = "Meter", result = "Lead", location_id = "Tag" }
per_reading = 4
"""
PAIRS = """Tag,Meter,Lead
P1,88,101
P2,140,166
P3,61,70
P4,33,48
P5,20,<5
P6,150,161
P7,97,120
P8,75,
P9,110,118
"""


@pytest.fixture(scope="module")
def packet(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Pack Hobbin Ley with readings, crew-days and stakes."""
    site = tmp_path_factory.mktemp("money") / "site"
    shutil.copytree(ROOT / "demo_sites" / "hobbin-ley", site)
    campaign = site / "campaign.toml"
    text = campaign.read_text(encoding="utf-8")
    more = "per_analysis = 46.0\nper_crew_day = 700\nlocations_per_day = 14\n"
    more += "wrongly_acted = 60000\nwrongly_left = 200000"
    assert text.count("per_analysis = 46.0") == 1
    campaign.write_text(text.replace("per_analysis = 46.0", more) + READING, encoding="utf-8")
    (site / "pairs.csv").write_text(PAIRS, encoding="utf-8")
    outcome = command_runner().invoke(entry, ["pack", str(campaign)])
    assert outcome.exit_code == 0, outcome.output
    return site / "HL-r01"


def test_the_sheet_has_the_three_sentences_and_the_picture(packet: Path) -> None:
    """Sentences and picture on the sheet, numbers in the working."""
    page = (packet / "office" / "plan_sheet.html").read_text(encoding="utf-8")
    for words in (
        "Precision for the money",
        "Readings in the field beside laboratory results",
        "What a wrong decision would cost",
        "Dots are designs that no other beats",
    ):
        assert words in page
    working = (packet / "office" / "working.html").read_text(encoding="utf-8")
    for words in (
        "Correlation below which readings stop paying",
        "Non-detects among the results of the pairs (1)",
        "Rows without both a reading and a result were left out (1).",
    ):
        assert words in page + working


def test_the_record_keeps_the_pairs_and_gives_the_same_plan(packet: Path) -> None:
    """Whoever reads it years later sees what the correlation came from."""
    plan = plan_record.read_plan(packet)
    (pairs,) = plan.spread.pairs
    assert (len(pairs.readings), pairs.non_detects, pairs.unpaired) == (8, 1, 1)
    assert pairs.results[4] == 2.5
    again = plan_record.plan_from_record(json.loads(json.dumps(plan_record.plan_to_record(plan))))
    assert again == plan
    assert "pairs.csv" in plan.inputs


def test_days_of_the_crew_are_in_the_cost(packet: Path) -> None:
    """33 locations and 3 targeted places at 14 a day are 3 days."""
    plan = plan_record.read_plan(packet)
    visits = plan.size.planned + 3
    controls = sum(entry.count for entry in plan.size.qc)
    assert plan.size.cost == 900 + 28 * visits + 46 * (visits + controls) + 700 * -(-visits // 14)
