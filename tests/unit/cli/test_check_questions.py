"""``fieldplan check`` of a campaign that asks for something other than a mean."""

import shutil
from pathlib import Path

import pytest

from fieldplan.campaign.questions import meanings
from fieldplan.cli import entry
from fieldplan.cli.demo import demo_folder
from tests.command_runner import command_runner
from tests.unit.cli.test_size_shares_and_change import TABLES

MEAN = (
    'question = "mean"\nstandard_error = 10.0\nassurance = 0.80\nassurance_chosen_by = "L. Fenn"\n'
)


@pytest.mark.parametrize("table", TABLES)
def test_question_is_said_in_words(tmp_path: Path, table: str) -> None:
    """What is asked of which analyte, and that no precision decides; the zinc's mean beside it."""
    site = tmp_path / "site"
    shutil.copytree(demo_folder() / "hobbin-ley", site)
    file = site / "campaign.toml"
    text = file.read_text(encoding="utf-8")
    question = f'question = "{table.replace("_", "-")}"\n'
    ending = "decides_n = true\n"
    assert MEAN + ending in text
    below = f"{question}{ending}[objective.{table}]\n{TABLES[table]}"
    file.write_text(text.replace(MEAN + ending, below, 1), encoding="utf-8")
    outcome = command_runner().invoke(entry, ["check", str(file)])
    said = " ".join(outcome.stdout.split())
    assert outcome.exit_code == 0, outcome.output
    assert f"Asked of Lead: {meanings()[f'objective.{table}']}; locations" in said
    assert "The question decides n; no precision of a mean is asked for." in said
    assert "Also asked: the mean of Zinc with a standard error of at most 12 mg/kg" in said
