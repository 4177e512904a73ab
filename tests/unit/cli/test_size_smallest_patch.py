"""``fieldplan size`` asked about a patch, by options and by a campaign file."""

import json
import math
import shutil
from pathlib import Path

import pytest

from fieldplan.base.errors import FieldplanError
from fieldplan.cli import entry
from fieldplan.cli.demo import demo_folder
from tests.command_runner import command_runner

ASKED = ["size", "--question", "smallest-patch", "--with", "length_m=40"]
TABLE = "\n[objective.smallest_patch]\nlength_m = 60.0\nwidth_m = 30.0\nprobability = 0.9\n"


def test_options_answer_in_one_sentence() -> None:
    """Elementary geometry: 12,000 m² and a circle of 40 m, missed in 5 %."""
    words = [*ASKED, "--with", "probability=0.95", "--area", "12000", "--layout", "square-grid"]
    outcome = command_runner().invoke(entry, [*words, "--quiet"])
    assert outcome.exit_code == 0
    assert outcome.stdout.startswith("11 locations on a square grid hit a round patch 40 m across")


def test_json_holds_the_chance_and_the_smallest_patch() -> None:
    """Unrounded, by names of its own."""
    words = [*ASKED, "--with", "probability=0.95", "--area", "12000", "--json"]
    outcome = command_runner().invoke(entry, words)
    found = json.loads(outcome.stdout)
    amounts = {a["name"]: a["value"] for a in found["findings"]["smallest-patch"]["amounts"]}
    assert (found["question"], found["n"]) == ("smallest-patch", 28)
    assert 0.95 <= amounts["chance_of_hitting"] < 0.955
    by_hand = 2 * math.sqrt(12_000 * (1 - 0.05 ** (1 / 28)) / math.pi)
    assert amounts["smallest_length_m"] == pytest.approx(by_hand, rel=1e-3)
    assert amounts["endless_square_grid"] < 28


def test_campaign_says_the_chance_beside_the_number_of_its_mean(tmp_path: Path) -> None:
    """A table below the mean's objective: its n stays, and the finding stands beside it."""
    site = tmp_path / "site"
    shutil.copytree(demo_folder() / "hobbin-ley", site)
    plain = (site / "campaign.toml").read_text(encoding="utf-8")
    text = plain.replace("decides_n = true\n", "decides_n = true\n" + TABLE, 1)
    (site / "beside.toml").write_text(text, encoding="utf-8")
    before = command_runner().invoke(entry, ["size", str(site / "campaign.toml"), "--quiet"])
    words = ["size", str(site / "beside.toml"), "--more", "smallest-patch"]
    after = command_runner().invoke(entry, words)
    assert after.exit_code == 0
    assert after.stdout.startswith(before.stdout.split("\n")[0])
    said = " ".join(after.stdout.split())
    assert "or larger with a chance of 90 %, and an oval patch of 60 m by 30 m, whichever" in said
    assert "Chance with no location off" in said
    assert "centred outside" in said


@pytest.mark.parametrize(
    ("words", "code", "said"),
    [
        (["--with", "probability=0.95"], 1, "type --area in m²"),
        (["--with", "probability=1.5", "--area", "12000"], 2, "probability"),
        (["--with", "probability=0.9", "--area", "900"], 1, "does not fit into 900 m²"),
        (["--with", "probability=0.9", "--with", "width_m=50", "--area", "9000"], 2, "Exchange"),
        (["--area", "9000"], 2, "probability"),
        (["--with", "probability=0.9", "--population", "30"], 2, "a list has no area"),
    ],
)
def test_bad_options_get_a_clear_line(words: list[str], code: int, said: str) -> None:
    """Which thing, its value, the rule; nothing on stdout."""
    outcome = command_runner().invoke(entry, [*ASKED, *words])
    fault = outcome.exception
    assert (fault.exit_code if isinstance(fault, FieldplanError) else outcome.exit_code) == code
    assert said in (str(fault) if isinstance(fault, FieldplanError) else outcome.stderr)
    assert outcome.stdout == ""


def test_a_screen_of_one_sentence_has_no_empty_lines_behind_it() -> None:
    """One blank line parts two things; two of them part nothing."""
    words = [*ASKED, "--with", "probability=0.95", "--area", "12000", "--quiet"]
    printed = command_runner().invoke(entry, words).stdout
    assert "\n\n" not in printed
