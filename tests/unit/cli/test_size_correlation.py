"""``fieldplan size`` with visits in a row and with a pilot on the map."""

import json
import shutil
from pathlib import Path

import pytest

from fieldplan.base.errors import FieldplanError
from fieldplan.cli import entry
from tests.command_runner import command_runner

SITES = Path(__file__).parents[3] / "demo_sites" / "sizing"
RHO = ["--with", "sigma.correlation_between_visits=0.35"]
PLAIN = ["size", "--sigma", "6", "--standard-error", "1"]


def run(*words: str) -> tuple[int, str, str]:
    """Run a command; return its code, its answer, and what it says of a fault."""
    outcome = command_runner().invoke(entry, [*words])
    fault = outcome.exception
    if isinstance(fault, FieldplanError):
        return fault.exit_code, outcome.stdout, str(fault)
    return outcome.exit_code, outcome.stdout, outcome.stderr


def amounts(text: str, topic: str) -> dict[str, float]:
    """Give the numbers of one finding by name."""
    return {a["name"]: a["value"] for a in json.loads(text)["findings"][topic]["amounts"]}


def test_options_raise_36_results_to_75_visits() -> None:
    """36 × 1.35/0.65 = 74.8, and 75 × 0.65/1.35 = 36.1; in the answer and in JSON."""
    code, out, _ = run(*PLAIN, *RHO)
    assert code == 0
    assert out.startswith("75 results are needed")
    assert "75 visits tell as much of the long-run mean as 36.1 independent ones" in " ".join(
        out.split()
    )
    found = json.loads(run(*PLAIN, *RHO, "--json")[1])
    assert found["n"] == 75
    assert amounts(run(*PLAIN, *RHO, "--json")[1], "time")["visits_ends_counted"] == 74


def test_without_the_key_nothing_changes() -> None:
    """No sentence on visits, and 36."""
    code, out, _ = run(*PLAIN)
    assert code == 0
    assert out.startswith("36 results")
    assert "visit" not in out


@pytest.mark.parametrize(
    ("key", "words"),
    [
        ("visit_spacing_days=30", "days say nothing without correlation_between_visits"),
        ("correlation_between_visits=1.2", "got 1.2"),
        ("correlation_between_visits=high", "Write a number"),
    ],
)
def test_impossible_keys_are_one_line_and_code_2(key: str, words: str) -> None:
    """Typed wrong, so 2; nothing on stdout."""
    code, out, err = run(*PLAIN, "--with", f"sigma.{key}")
    assert (code, out) == (2, "")
    assert words in " ".join(err.split())


def test_a_pilot_of_visits_is_read_and_declared_in_the_campaign(tmp_path: Path) -> None:
    """The pilot speaks; once its correlation is written down, n counts it."""
    shutil.copytree(SITES / "weir", tmp_path / "weir")
    file = tmp_path / "weir" / "campaign.toml"
    _, out, _ = run("size", str(file))
    assert "The 36 visits of the pilot, usually 30.0 days apart" in " ".join(out.split())
    before = json.loads(run("size", str(file), "--json")[1])
    text = file.read_text(encoding="utf-8").replace(
        'pilot = "pilot.csv"', 'pilot = "pilot.csv"\ncorrelation_between_visits = 0.59'
    )
    file.write_text(text, encoding="utf-8")
    after = json.loads(run("size", str(file), "--json")[1])
    assert before["n"] == 39
    assert after["n"] > 100
    assert after["findings"]["time"]["amounts"][0] == {
        "name": "rho",
        "meaning": "Correlation of neighbouring planned visits",
        "value": 0.59,
        "unit": "",
    }


def test_a_pilot_on_the_map_says_what_spreading_saves_on_request() -> None:
    """Not on the first screen; in full, and unrounded in JSON, where it is asked for."""
    file = str(SITES / "survey" / "campaign.toml")
    assert "compact part" not in run("size", file)[1]
    code, out, _ = run("size", file, "--more", "space")
    assert code == 0
    assert "One place in each of 20 compact parts of the site" in " ".join(out.split())
    numbers = amounts(run("size", file, "--json")[1], "space")
    assert numbers["compact_strata_n"] == 20
    assert json.loads(run("size", file, "--json")[1])["n"] == 41


def test_a_day_that_cannot_be_read_is_one_line_with_its_row(tmp_path: Path) -> None:
    """File, row, column, value, rule; nothing is sized."""
    shutil.copytree(SITES / "weir", tmp_path / "weir")
    pilot = tmp_path / "weir" / "pilot.csv"
    lines = pilot.read_text(encoding="utf-8").splitlines()
    lines[3] = lines[3].rsplit(",", 1)[0] + ",12/03/22"
    pilot.write_text("\n".join(lines) + "\n", encoding="utf-8")
    code, out, err = run("size", str(tmp_path / "weir" / "campaign.toml"))
    assert (code, out) == (1, "")
    assert "pilot.csv row 4: collected_on '12/03/22' must be year, month and day" in " ".join(
        err.split()
    )


def test_a_key_of_sigma_typed_once_holds_for_every_stratum() -> None:
    """Two like strata must ask for as many visits as the whole: 75."""
    strata = ["--stratum", "0.5,6", "--stratum", "0.5,6", "--standard-error", "1"]
    found = json.loads(run("size", *strata, *RHO, "--json")[1])
    assert found["n"] == 75
    assert [row[1] for row in found["findings"]["time"]["rows"]] == ["0.35", "0.35"]
