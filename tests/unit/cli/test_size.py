"""What ``fieldplan size`` prints, and how it refuses."""

import csv
import json
import math
import subprocess
import sys
from pathlib import Path
from statistics import fmean, stdev

import pytest
from click.testing import Result
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldplan.base.errors import DesignError, FieldplanError
from fieldplan.cli import entry
from tests.command_runner import command_runner

DEMO_SITES = Path(__file__).parents[3] / "demo_sites"
THREE = ["--stratum", "0.64,18", "--stratum", "0.22,45", "--stratum", "0.14,90"]


def run(*words: str) -> Result:
    """Run the command as typed."""
    return command_runner().invoke(entry, ["size", *words])


def numbers(*words: str) -> dict[str, object]:
    """Run with ``--json`` and read it back."""
    result = run(*words, "--json")
    assert result.exit_code == 0, result.output
    return dict(json.loads(result.stdout))


def test_sigma_and_standard_error() -> None:
    """(27.57/6)² = 21.11."""
    found = numbers("--sigma", "27.57", "--standard-error", "6")
    assert found["n"] == 22
    assert found["chance_enough"] is None


def test_pilot_gives_chances() -> None:
    """Chi-square on 7 degrees of freedom: 0.459; 31, 39 and 53."""
    found = numbers("--sigma", "27.57", "--standard-error", "6", "--pilot-n", "8")
    assert (found["n"], found["chance_enough"]) == (22, 0.459)
    assert found["n_by_assurance"] == {"0.67": 31, "0.80": 39, "0.90": 53}


def test_short_list() -> None:
    """11.86 becomes 6.42."""
    found = numbers("--population", "14", "--sigma", "3.1", "--standard-error", "0.9")
    assert found["n"] == 7


def test_three_strata() -> None:
    """22.06 and 14.29 before rounding; 5/4/6 (SE 8.80); with a floor 6/6/6 (SE 8.06)."""
    target = ["--standard-error", "9"]
    found = numbers(*THREE, *target, "--allocation", "proportional")
    assert round(float(str(found["plain_unrounded"])), 2) == 22.06
    found = numbers(*THREE, *target, "--allocation", "neyman")
    assert round(float(str(found["plain_unrounded"])), 2) == 14.29
    assert [row["n"] for row in found["strata"]] == [5, 4, 6]  # type: ignore[attr-defined]
    assert round(float(str(found["standard_error"])), 2) == 8.80
    found = numbers(*THREE, *target, "--allocation", "neyman", "--floor", "6")
    assert [row["n"] for row in found["strata"]] == [6, 6, 6]  # type: ignore[attr-defined]
    assert round(float(str(found["standard_error"])), 2) == 8.06


def test_screen_says_the_answer_first_and_little_more() -> None:
    """One answer in a sentence, then what matters; no line beyond 79 columns."""
    result = run("--sigma", "27.57", "--standard-error", "6", "--pilot-n", "8", "--unit", "mg/kg")
    lines = result.stdout.splitlines()
    assert lines[0] == "22 results are needed for a standard error of the mean ≤ 6 mg/kg."
    assert "The chance that 22 are enough is 46 %" in result.stdout
    said = " ".join(result.stdout.split())
    assert "For a chance of 67 %, 80 % and 90 % it takes 31, 39 and 53." in said
    assert len(lines) <= 8
    assert max(map(len, lines)) <= 79


def test_quiet_prints_the_answer_alone() -> None:
    """One sentence on stdout, nothing on stderr."""
    result = run("--sigma", "27.57", "--standard-error", "6", "--quiet")
    assert result.stdout == "22 results are needed for a standard error of the mean ≤ 6.\n"
    assert result.stderr == ""


def test_explain_shows_the_working_and_the_condition() -> None:
    """Numbered steps with inputs, value before and after rounding, source."""
    result = run("--sigma", "58", "--half-width", "20", "--explain")
    assert "1. Results needed with sigma at face value, first pass" in result.stdout
    assert "n0 = 32.3067, rounded 33 results" in result.stdout
    assert "n = 34.7334, rounded 35 results" in result.stdout
    assert "Source: Cochran 1977" in result.stdout
    assert "common practice for data that are not normal (no source)" in result.stdout
    assert max(len(line) for line in result.stdout.splitlines()) <= 79


@pytest.mark.parametrize(
    ("words", "n"),
    [
        (["--sigma", "58", "--half-width", "20"], 35),
        (["--sigma", "58", "--half-width", "20", "--one-sided"], 25),
        (["--sigma", "58", "--relative-half-width", "0.2", "--mean", "95"], 39),
        (["--sigma", "58", "--half-width", "20", "--confidence", "0.9"], 25),
        (["--sigma", "27.57", "--standard-error", "6", "--pilot-n", "8", "--assurance", ".8"], 39),
        (["--sigma", "27.57", "--standard-error", "6", "--assurance", "plain"], 22),
        (["--sigma", "0.5", "--standard-error", "6"], 2),
    ],
)
def test_every_option_counts(words: list[str], n: int) -> None:
    """Two-sided at 0.9 has the quantile of one-sided at 0.95; the rest by the stats tests."""
    assert numbers(*words)["n"] == n


def test_pilots_by_stratum_give_a_chance() -> None:
    """A third number in every stratum says how well its sigma is known."""
    strata = [word if word == "--stratum" else f"{word},8" for word in THREE]
    found = numbers(*strata, "--standard-error", "9", "--assurance", "0.8")
    assert float(str(found["chance_enough"])) >= 0.8
    assert float(str(found["plain_chance_enough"])) < 0.6


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (
            "",
            "give a campaign file, or bare numbers such as --sigma 27.57 --standard-error 6.",
        ),
        ("--sigma 27,57 --standard-error 6", "--sigma '27,57' has a decimal comma; write 27.57."),
        ("--sigma abc --standard-error 6", "--sigma 'abc' is no number; write one such as 27.57."),
        ("--sigma nan --standard-error 6", "--sigma 'nan' is no number; write one such as 27.57."),
        ("--sigma -3 --standard-error 6", "--sigma -3 is out of bounds; it must be above 0."),
        (
            "--sigma 3",
            "no target: give --standard-error, --half-width, --relative-half-width or --budget.",
        ),
        (
            "--sigma 3 --budget 900",
            "--budget 900 needs prices; add --with cost.currency=EUR --with cost.per_location=28 "
            "--with cost.per_analysis=46, with yours.",
        ),
        (
            "--sigma 3 --budget 900 --assurance 0.8 --with cost.currency=EUR",
            "--assurance 0.8 beside --budget: money sets no precision that n could miss; leave it "
            "out.",
        ),
        (
            "--sigma 3 --standard-error 1 --half-width 2",
            "--standard-error and --half-width are both given; keep one target.",
        ),
        (
            "--sigma 3 --relative-half-width 20 --mean 4",
            "--relative-half-width 20 is out of bounds; it must be above 0 and below 10; "
            "0.20 means 20 % of the mean.",
        ),
        (
            "--sigma 3 --relative-half-width 0.2",
            "--relative-half-width 0.2 is a share of the mean; add --mean.",
        ),
        (
            "--sigma 3 --standard-error 1 --mean 4",
            "--mean 4 serves --relative-half-width, --question or --more only; leave it out.",
        ),
        (
            "--sigma 3 --standard-error 1 --confidence 95",
            "--confidence 95 is out of bounds; it must be above 0.5 and below 1; 0.95 means 95 %.",
        ),
        (
            "--sigma 3 --standard-error 1 --assurance 0.8",
            "--assurance 0.8 needs to know how well sigma is known; add --pilot-n.",
        ),
        (
            "--stratum 0.5,3 --stratum 0.5,4,8 --standard-error 1 --assurance 0.8",
            "--assurance 0.8 needs to know how well sigma is known; "
            "add a third number to every --stratum.",
        ),
        (
            "--sigma 3 --standard-error 1 --pilot-n 8 --assurance 80",
            "--assurance 80 is out of bounds; it must be at least 0.5 and below 1 "
            '(0.80 means 80 %), or the word "plain".',
        ),
        (
            "--sigma 3 --standard-error 1 --pilot-n 1",
            "--pilot-n '1' must be a whole number, 2 or more.",
        ),
        (
            "--sigma 3 --standard-error 1 --population 14.5",
            "--population '14.5' must be a whole number, 2 or more.",
        ),
        (
            "--stratum 0.5,3 --stratum 0.4,5 --standard-error 1",
            "the weights of --stratum sum to 0.9; they are shares of the whole and must sum to 1.",
        ),
        (
            "--stratum 0,5,3,7 --standard-error 1",
            "--stratum '0,5,3,7' has 4 numbers; write WEIGHT,SIGMA such as 0.64,18, "
            "or WEIGHT,SIGMA,PILOT_N, with decimal points.",
        ),
        (
            "--stratum 64,18 --stratum 36,45 --standard-error 1",
            "--stratum '64,18': weight 64 must be above 0 and at most 1.",
        ),
        (
            "--stratum 0.5,0 --stratum 0.5,4 --standard-error 1",
            "--stratum '0.5,0': sigma 0 must be above 0.",
        ),
        (
            "--stratum 0.5,3,1.5 --stratum 0.5,4 --standard-error 1",
            "--stratum '0.5,3,1.5': the pilot's n 1.5 must be whole, 2 or more.",
        ),
        (
            "--stratum 0.5,x --stratum 0.5,4 --standard-error 1",
            "--stratum '0.5,x': 'x' is no number; write one such as 27.57.",
        ),
        (
            "--stratum 1,3 --sigma 4 --standard-error 1",
            "--sigma 4 speaks of one whole, and --stratum of its parts; give sigma and the "
            "pilot's n inside each --stratum, a list in a campaign file.",
        ),
        (
            "--sigma 3 --standard-error 1 --floor 4",
            "--floor 4 shares n between strata; add a --stratum for each.",
        ),
        (
            "--stratum 1,3 --standard-error 1 --allocation even",
            "--allocation 'even' is unknown; write proportional, neyman, cost-optimal or "
            "equal-precision.",
        ),
        (
            "some.toml --sigma 3",
            "--sigma beside a campaign file: write it into some.toml, or leave the file out.",
        ),
    ],
)
def test_every_bad_option_gets_one_clear_line(words: str, said: str) -> None:
    """Which option, its value, the rule, the remedy; exit code 2 and nothing on stdout."""
    result = run(*words.split())
    assert result.exit_code == 2
    assert result.stderr == said + "\n"
    assert result.stdout == ""


def test_target_out_of_reach_is_no_typing_error() -> None:
    """It cannot be done: exit code 1 by the error's class."""
    result = run("--sigma", "1e9", "--standard-error", "0.001")
    assert isinstance(result.exception, DesignError)
    assert result.exception.exit_code == 1
    assert "more than 10000000 results" in str(result.exception)


def test_missing_campaign_file_is_said(tmp_path: Path) -> None:
    """The reader's own line."""
    result = run(str(tmp_path / "none.toml"))
    assert result.exception is not None
    assert "none.toml: there is no such file" in str(result.exception)


@pytest.mark.parametrize("site", ["hobbin-ley", "quern-flat"])
def test_demo_campaigns_are_sized(site: str) -> None:
    """From file to answer through every room above sizing."""
    result = run(str(DEMO_SITES / site / "campaign.toml"))
    assert result.exception is None
    assert result.stdout.startswith("Visit ")
    assert "The chance that" in result.stdout


def test_the_second_analyte_of_a_demo_gets_its_standard_error_in_a_sentence() -> None:
    """From the pilot's cells with the standard library alone: √(Σ W² s²/n)."""
    site = DEMO_SITES / "hobbin-ley"
    found = numbers(str(site / "campaign.toml"))
    places: dict[str, dict[str, list[float]]] = {}
    with (site / "pilot.csv").open(encoding="utf-8", newline="") as stream:
        for row in csv.DictReader(stream):
            if row["analyte"] == "Zinc":
                stratum = places.setdefault(row["stratum"], {})
                stratum.setdefault(row["location_id"], []).append(float(row["as_reported"]))
    total = 0.0
    for entry_ in found["strata"]:  # type: ignore[attr-defined]
        values = [fmean(pair) for pair in places[entry_["stratum"]].values()]
        total += (entry_["weight"] * stdev(values)) ** 2 / entry_["n"]
    (zinc,) = found["others"]  # type: ignore[misc]
    assert zinc["standard_error"] == pytest.approx(total**0.5, rel=1e-9)
    printed = " ".join(run(str(site / "campaign.toml")).stdout.split())
    assert zinc["sentence"] in printed
    assert f"a standard error of {total**0.5:.2f} mg/kg" in printed


def test_bare_numbers_load_no_heavy_library() -> None:
    """So that the answer comes at once: nothing of these is needed for it."""
    code = (
        "import sys; from fieldplan.cli import entry;"
        "entry.main(['size','--sigma','27.57','--half-width','9','--pilot-n','8','--json'],"
        "standalone_mode=False);"
        "heavy={'numpy','scipy','pandas','shapely','pydantic','matplotlib'} & set(sys.modules);"
        "sys.exit(str(heavy) if heavy else 0)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr


BEYOND = "is beyond what can be reckoned with, 1e-12 to 1e12; check it and its unit."


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (
            ("--sigma", "1e300", "--standard-error", "6", "--pilot-n", "8"),
            f"--sigma 1e300 {BEYOND}",
        ),
        (("--sigma", "3", "--standard-error", "1e300"), f"--standard-error 1e300 {BEYOND}"),
        (("--sigma", "1e-300", "--standard-error", "6"), f"--sigma 1e-300 {BEYOND}"),
        (
            ("--stratum", "0.5,1e-300", "--stratum", "0.5,3", "--standard-error", "1"),
            f"--stratum '0.5,1e-300': 1e-300 {BEYOND}",
        ),
        (
            ("--sigma", "3", "--half-width", "1", "--confidence", "0.99999999999999999"),
            "--confidence 0.99999999999999999 is out of bounds; it must be above 0.5 and below 1",
        ),
        (
            ("--sigma", "3", "--half-width", "1", "--confidence", "0.9999999999999999"),
            "--confidence 0.9999999999999999 is nearer to 1 than can be reckoned with, 0.999999;",
        ),
    ],
)
def test_numbers_that_would_break_the_arithmetic_are_refused_in_one_line(arguments, words):
    """The square of 1e300 is no float any more; a sigma of 1e-300 has a standard error of 0."""
    result = run(*arguments)
    assert result.exit_code == 2
    assert words in result.stderr
    assert result.stdout == ""


@given(
    sigma=st.floats(-12, 12),
    target=st.floats(-12, 12),
    kind=st.sampled_from(["--standard-error", "--half-width"]),
    pilot=st.sampled_from([(), ("--pilot-n", "2"), ("--pilot-n", "8", "--assurance", "0.999999")]),
    confidence=st.sampled_from(["0.500001", "0.95", "0.999999"]),
)
@settings(max_examples=60, deadline=None)
def test_numbers_within_bounds_are_answered_or_refused_in_words(
    sigma, target, kind, pilot, confidence
):
    """Bounds that let arithmetic break would be no bounds."""
    typed = ("--sigma", f"{10**sigma!r}", kind, f"{10**target!r}", "--confidence", confidence)
    result = run(*typed, *pilot, "--json")
    if result.exit_code == 0:
        assert math.isfinite(json.loads(result.stdout)["standard_error"])
        assert json.loads(result.stdout)["standard_error"] > 0
    else:
        assert isinstance(result.exception, FieldplanError | SystemExit)
        assert "10000000 results" in str(result.exception) + result.stderr


def test_a_budget_buys_what_its_prices_allow():
    """Source: by hand, 900 / (28 + 46) = 12.2, so 12 results; SE = 27/√12."""
    outcome = command_runner().invoke(
        entry,
        ["size", "--sigma", "27", "--budget", "900", "--json", "--with", "cost.currency=EUR",
         "--with", "cost.per_location=28", "--with", "cost.per_analysis=46"],
    )  # fmt: skip
    found = json.loads(outcome.stdout)
    assert (found["n"], found["cost"], found["number_from"]) == (12, 888.0, "budget")
    assert found["standard_error"] == pytest.approx(27 / 12**0.5)


def test_a_loss_typed_beside_bare_numbers_adds_visits():
    """By hand: 22 / (1 − 0.2) = 27.5, so 28 visits."""
    outcome = run("--sigma", "27.57", "--standard-error", "6", "--json", "--with", "loss.share=0.2")
    found = json.loads(outcome.stdout)
    assert (found["n"], found["locations"]) == (22, 28)
