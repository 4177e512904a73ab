"""``fieldplan size`` asked about shares, background and change, by options and by a campaign."""

import json
import shutil
from pathlib import Path

import pytest

from fieldplan.base.errors import FieldplanError
from fieldplan.cli import entry
from fieldplan.cli.demo import demo_folder
from tests.command_runner import command_runner


def run(*words: str) -> str:
    """Run ``size`` and return what it prints, on one line."""
    outcome = command_runner().invoke(entry, ["size", *words])
    assert outcome.exit_code == 0, outcome.output
    return " ".join(outcome.stdout.split())


def keys(*pairs: str) -> list[str]:
    """Write ``--with`` before each key."""
    return [word for pair in pairs for word in ("--with", pair)]


RISKS = keys("alpha=0.05", "beta=0.2")


@pytest.mark.parametrize(
    ("words", "said"),
    [
        # Wilks 1941: 59 for 95/95; Cannon & Roe 1982: 45 of 100.
        (["all-clear", *keys("share=0.05")], "59 results, none of them above the level, would"),
        (
            ["all-clear", *keys("units=5"), "--population", "100"],
            "45 results, none of them above the level, would show with 95 % confidence that fewer "
            "than 5 of the 100 units of the list exceed it.",
        ),
        (["upper-share", *keys("share=0.95", "allowed=1")], "93 results, no more than 1 of them"),
        (
            [
                "upper-share", *keys("share=0.95", "method=normal", "power=0.8"), "--sigma", "20",
                "--mean", "90", "--level", "150", "--unit", "mg/kg",
            ],
            "15 results would put the bound mean + 2.566 s below 150 mg/kg",
        ),
        # Krejcie & Morgan 1970: 132 of 200.
        (
            ["share", *keys("margin=0.05", "method=normal"), "--population", "200"],
            "132 results pin down the share of the 200 units of the list",
        ),
        (
            ["share", *keys("compare_with=0.3", "expected=0.15"), *RISKS],
            "49 results, no more than 9 of them having it, would show the share",
        ),
        # Cohen 1988: 64 in each at half a sigma, two-sided.
        (
            [
                "mean-and-background", *keys("difference=1", "assume=no-difference"),
                *keys("variances=alike"), *RISKS, "--sigma", "2",
            ],
            "64 site results and 64 background results (to be taken), compared by a pooled t test",
        ),
        # Univ. of Nebraska hand-out: 34 at half a sigma, two-sided.
        (
            ["change", *keys("difference=1", "sigma_of_differences=2"), *RISKS],
            "34 locations visited in both rounds",
        ),
    ],
)  # fmt: skip
def test_options_answer_in_a_sentence(words: list[str], said: str) -> None:
    """The answer comes first; the sources of the numbers stand beside them."""
    assert run("--question", *words).startswith(said)


def test_json_holds_every_number_by_name() -> None:
    """Unrounded, for the office's own sheets."""
    outcome = command_runner().invoke(
        entry, ["size", "--question", "upper-share", *keys("share=0.95"), "--json"]
    )
    found = json.loads(outcome.stdout)
    amounts = {a["name"]: a["value"] for a in found["findings"]["upper-share"]["amounts"]}
    assert (found["question"], found["n"], amounts["allowed"]) == ("upper-share", 59, 0)
    assert amounts["confidence"] == pytest.approx(1 - 0.95**59)
    assert amounts["chance_at_a_fifth"] == pytest.approx(0.99**59)


def test_working_is_shown_on_request() -> None:
    """Formula, inputs, number before and after rounding, source."""
    said = run("--question", "all-clear", *keys("share=0.05"), "--explain")
    for piece in ("n = ln(1 − C) / ln(1 − p)", "n = 58.404, rounded 59 results", "Wilks 1941"):
        assert piece in said


TABLES = {
    "upper_share": "share = 0.9\n",
    "all_clear": "share = 0.1\n",
    "share": "margin = 0.15\nexpected = 0.2\n",
    "mean_and_background": 'difference = 30.0\nassume = "at-background"\nalpha = 0.05\nbeta = 0.2\n'
    "background_results = 20\n",
    "change": "difference = 25.0\ncorrelation = 0.5\nalpha = 0.05\nbeta = 0.2\n",
}


@pytest.mark.parametrize("table", TABLES)
def test_campaign_asks_the_question_or_says_it_beside_the_mean(tmp_path: Path, table: str) -> None:
    """With the question the table decides n; below a mean it says what that n buys."""
    site = tmp_path / "site"
    shutil.copytree(demo_folder() / "hobbin-ley", site)
    plain = (site / "campaign.toml").read_text(encoding="utf-8")
    ending = "decides_n = true\n"
    below = f"{ending}[objective.{table}]\n{TABLES[table]}"
    (site / "beside.toml").write_text(plain.replace(ending, below, 1), encoding="utf-8")
    before = run(str(site / "campaign.toml"), "--quiet")
    beside = run(str(site / "beside.toml"))
    assert beside.startswith(before)
    question = table.replace("_", "-")
    mean = 'question = "mean"\nstandard_error = 10.0\nassurance = 0.80\n'
    chosen = 'assurance_chosen_by = "L. Fenn"\n'
    assert f"{mean}{chosen}{ending}" in plain
    asked = plain.replace(f"{mean}{chosen}{ending}", f'question = "{question}"\n{below}', 1)
    (site / "asked.toml").write_text(asked, encoding="utf-8")
    outcome = command_runner().invoke(entry, ["size", str(site / "asked.toml"), "--json"])
    found = json.loads(outcome.stdout)
    assert found["question"] == question
    assert found["n"] == sum(entry["n"] for entry in found["strata"])
    assert question in found["findings"]


@pytest.mark.parametrize(
    ("words", "code", "said"),
    [
        (["upper-share", *keys("share=0.95", "method=normal")], 2, "power"),
        (["upper-share", *keys("share=95")], 2, "share"),
        (["all-clear", *keys("units=80"), "--population", "50"], 1, "the list has 50"),
        (["share", *keys("margin=0.0001")], 1, "allow a wider margin"),
        (
            ["mean-and-background", *keys("difference=5", "assume=at-background"), *RISKS],
            2,
            "sigma",
        ),
        (["change", *keys("difference=8", "correlation=0.5"), *RISKS], 2, "--sigma"),
        (["change", *keys("difference=8", "sigma_of_differences=-3"), *RISKS], 2, "above 0"),
        (
            ["change", *keys("difference=8", "sigma_of_differences=3", "alpha=0.7", "beta=0.3")],
            2,
            "sum to 1",
        ),
    ],
)
def test_bad_words_get_a_line(words: list[str], code: int, said: str) -> None:
    """One line with the key, and the exit code of its kind."""
    outcome = command_runner().invoke(entry, ["size", "--question", *words])
    if isinstance(outcome.exception, FieldplanError):
        assert outcome.exception.exit_code == code
        assert said in str(outcome.exception)
    else:
        assert outcome.exit_code == code
        assert said in outcome.stderr


@pytest.mark.parametrize(
    ("words", "n"),
    [
        # Closed form, ln(1 - C)/ln(0.95) upwards; 1 - C(37, n)/C(40, n) for the list of 40.
        (["all-clear", *keys("share=0.05")], 90),
        (["upper-share", *keys("share=0.95")], 90),
        (["all-clear", *keys("units=3"), "--population", "40"], 31),
    ],
)
def test_confidence_option_counts_where_a_question_has_a_confidence_of_its_own(words, n) -> None:
    """A planner who asks for 99 % gets what the key of the question gives, not 95 %."""
    typed_once = run("--question", *words, "--confidence", "0.99")
    assert typed_once.startswith(f"{n} results")
    assert "95 % confidence" not in typed_once
    assert run("--question", *words, *keys("confidence=0.99")).startswith(f"{n} results")
    both = run("--question", *words, *keys("confidence=0.99"), "--confidence", "0.99")
    assert both.startswith(f"{n} results")


def test_two_confidences_that_differ_are_refused_by_the_name_of_the_key() -> None:
    """Neither can be meant more than the other."""
    words = ["all-clear", *keys("share=0.05", "confidence=0.9"), "--confidence", "0.99"]
    outcome = command_runner().invoke(entry, ["size", "--question", *words])
    assert outcome.exit_code != 0
    told = str(outcome.exception) if outcome.exception is not None else ""
    assert "objective.all_clear.confidence; keep one" in outcome.stderr + told
