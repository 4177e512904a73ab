"""Money on the command line: what is printed, what JSON holds, what is refused."""

import json

import pytest

from fieldplan.cli import entry
from tests.command_runner import command_runner


def keys(*pairs: str) -> list[str]:
    """Type keys of a campaign file as options."""
    return [word for pair in pairs for word in ("--with", pair)]


PRICES = keys("cost.currency=EUR", "cost.per_location=12", "cost.per_analysis=90")
NAME, CORRELATION = keys("field_reading.name=meter"), keys("field_reading.correlation=0.85")
SOURCE, READING = keys("field_reading.source=trial"), keys("field_reading.per_reading=3")
METER = [*NAME, *CORRELATION, *SOURCE, *READING]
STAKES = keys(
    "cost.wrongly_acted=40000", "cost.wrongly_left=250000", "objective.mean_from=90",
    "objective.mean_to=160",
)  # fmt: skip
NUMBERS = ["size", "--sigma", "20", "--standard-error", "4", "--unit", "mg/kg"]


def run(*words: str) -> str:
    """Run a command that succeeds; return what it prints."""
    outcome = command_runner().invoke(entry, [*NUMBERS, *words])
    assert outcome.exit_code == 0, outcome.output
    return outcome.stdout


def test_a_declared_reading_is_answered_without_being_asked_twice() -> None:
    """Who types a reading wants to know; the rest comes with --more."""
    printed = run(*PRICES, *METER)
    assert "With meter a standard error of 4.00 mg/kg would cost 1815 EUR" in printed
    assert "Readings for each result" not in printed
    assert "Readings for each result" in run(*PRICES, *METER, "--more", "two-phase")


def test_the_frontier_comes_when_asked_for_and_fits_eighty_columns() -> None:
    """A table that breaks on the screen cannot be read."""
    assert "Precision for the money" not in run(*PRICES, *METER)
    printed = run(*PRICES, *METER, "--more", "frontier")
    assert "the cheapest with a standard error of 4.00 mg/kg is results with meter" in (
        " ".join(printed.split())
    )
    assert max(map(len, printed.splitlines())) <= 80


def test_json_holds_all_three() -> None:
    """Numbers under plain names, for programs."""
    found = json.loads(run(*PRICES, *METER, *STAKES, "--level", "150", "--json"))["findings"]
    assert {"two-phase", "being-wrong", "frontier"} <= set(found)
    named = {a["name"]: a["value"] for a in found["two-phase"]["amounts"]}
    assert (named["readings"], named["results"], named["cost"]) == (43, 13, 1815)
    assert found["frontier"]["picture"]["kind"] == "frontier"


def test_expected_loss_stands_beside_the_cost() -> None:
    """J8: n moves the loss, and nobody picks n in silence."""
    printed = " ".join(run(*PRICES, *STAKES, "--level", "150").split())
    assert "25 results are needed" in printed
    assert "would lose 3939 EUR on average, beside 2550 EUR for sampling" in printed


@pytest.mark.parametrize(
    ("words", "line"),
    [
        (
            [*PRICES, *keys("cost.per_crew_day=800")],
            "cost.locations_per_day: missing; per_crew_day means nothing without it.",
        ),
        (
            [*PRICES, *NAME, *CORRELATION, *READING],
            "field_reading.source: missing; a typed correlation needs its source.",
        ),
        (
            [*PRICES, *STAKES],
            "cost.wrongly_acted: a wrong decision needs a level to be wrong about",
        ),
        (
            [*keys("field_reading.correlation=1.5"), *NAME, *SOURCE],
            "field_reading.correlation",
        ),
        (
            ["--more", "frontier"],
            "--more frontier: nothing given says anything about it; there are none here.",
        ),
    ],
    ids=["crew-days", "no source", "no level", "impossible correlation", "no prices"],
)
def test_what_does_not_belong_together_is_one_line(words: list[str], line: str) -> None:
    """Exit code 2, nothing on stdout."""
    outcome = command_runner().invoke(entry, [*NUMBERS, *words])
    assert outcome.exit_code == 2
    assert outcome.stdout == ""
    assert line in " ".join(outcome.stderr.split())
