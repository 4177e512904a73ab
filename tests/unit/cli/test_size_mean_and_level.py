"""``fieldplan size --question mean-and-level``: the answer, the numbers and the refusals."""

import json

import pytest
from click.testing import Result

from fieldplan.cli import entry
from tests.command_runner import command_runner

NUMBERS = ["--sigma", "48", "--level", "150", "--unit", "mg/kg", "--one-sided"]
KEYS = ["assume=above-level", "gray_edge=110", "alpha=0.05", "beta=0.2"]
ASKED = ["--question", "mean-and-level", *NUMBERS, *(word for k in KEYS for word in ("--with", k))]


def run(*words: str) -> Result:
    """Run the command as typed."""
    return command_runner().invoke(entry, ["size", *words])


def numbers(*words: str) -> dict[str, object]:
    """Run with ``--json`` and read it back."""
    result = run(*ASKED, *words, "--json")
    assert result.exit_code == 0, result.output
    return dict(json.loads(result.stdout))


def test_the_answer_opens_the_output() -> None:
    """11 by noncentral t; the count first, both chances, where they hold, the rest on request."""
    printed = " ".join(run(*ASKED).stdout.split())
    assert printed.startswith(
        "11 results are needed: a true mean of 110 mg/kg then comes out below 150 mg/kg in at "
        "least 80 % of campaigns, and one of 150 mg/kg or more in at most 5 %."
    )
    assert "s comes out" not in printed
    more = " ".join(run(*ASKED, "--more", "mean-and-level").stdout.split())
    assert "True mean at which 80 % of campaigns come out below: 111" in more
    assert "s comes out a little below sigma" in more


def test_json_holds_the_amounts() -> None:
    """The same numbers, unrounded, for programs."""
    found = numbers("--pilot-n", "8")
    assert found["n"] == 11
    finding = found["findings"]["mean-and-level"]  # type: ignore[index]
    amounts = {entry["name"]: entry["value"] for entry in finding["amounts"]}
    assert amounts["mean_at_80_percent"] == pytest.approx(111.306, abs=5e-4)
    assert amounts["formula_n"] == 11
    assert 0.4 < amounts["chance_enough"] < 0.55


@pytest.mark.parametrize(("test", "n"), [("t", 11), ("sign", 21), ("signed-rank", 13)])
def test_every_test_answers(test: str, n: int) -> None:
    """Numbers as the unit tests of sizing hold them."""
    assert numbers("--with", f"test={test}")["n"] == n


def test_more_prints_the_table_and_the_working() -> None:
    """On request: true means with their shares, and the steps."""
    printed = run(*ASKED, "--explain", "--more", "mean-and-level").stdout
    assert "campaigns that come out below the level" in printed
    assert "n(formula) = 10.2557" in printed
    assert "Sources:" in printed


@pytest.mark.parametrize(
    ("words", "told"),
    [
        (["--with", "beta=0.96"], "together they must stay below 1"),
        (["--with", "gray_edge=150"], "no width"),
        (["--with", "gray_edge=160"], "so the edge lies below it"),
        (["--with", "decisions=3"], "either stand alone or carry one claim"),
        (["--with", "gray_edge=149.9999"], "more than"),
    ],
)
def test_bad_input_is_one_clear_line(words: list[str], told: str) -> None:
    """Exit code 1 or 2, nothing on stdout, no trace."""
    key = words[1].partition("=")[0]
    kept = [word for k in KEYS if not k.startswith(f"{key}=") for word in ("--with", k)]
    result = run("--question", "mean-and-level", *NUMBERS, *kept, *words)
    assert result.exit_code in (1, 2)
    assert result.stdout == ""
    assert told in " ".join(f"{result.stderr} {result.exception}".split())
    assert "Traceback" not in result.stderr


def test_a_missing_level_is_said() -> None:
    """--level is what the mean is compared with."""
    words = [word for word in ASKED if word not in ("--level", "150")]
    result = run(*words)
    assert result.exit_code in (1, 2)
    assert "no level" in result.stderr.replace("\n", " ")
