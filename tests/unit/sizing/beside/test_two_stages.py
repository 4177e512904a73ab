"""What two stages cost, beside a half-width."""

from dataclasses import replace

from fieldplan.cli import entry
from fieldplan.sizing import size_asked
from fieldplan.stats.two_stage import resize_outlook, stein_total
from tests.command_runner import command_runner
from tests.unit.sizing.askings import asked_mean


def test_the_finding_says_the_averages_of_the_rules():
    """The sentence must carry the numbers of the functions that tests hold to simulation."""
    asked = asked_mean(sigma=10.0, half_width=2.0, results=20, assurance=0.8)
    found = size_asked(asked, beside=["two-stages"]).findings[-1]
    outlook = resize_outlook(10.0, 2.0, first=59, assurance=0.8, confidence=0.95)
    amounts = {amount.name: amount.value for amount in found.amounts}
    assert amounts["first_stage"] == 59  # 60 % of the plain 99
    assert amounts["resized_results"] == outlook.results
    total = stein_total(10.0, 2.0, first=20, confidence=0.95)
    assert f"{total - 20} more, and the mean of all {total}" in found.answer
    assert found.steps[0].rounded == total


def test_nothing_is_said_of_a_list_or_of_a_standard_error():
    """Stein's rule is for a half-width and an endless population."""
    listed = asked_mean(sigma=10.0, half_width=2.0, results=20, population=120)
    assert size_asked(listed, beside=["two-stages"]).findings == ()
    asked = asked_mean(sigma=10.0, half_width=2.0, results=20)
    target = replace(asked.question, target="standard_error")
    assert size_asked(replace(asked, question=target), beside=["two-stages"]).findings == ()


def test_a_first_stage_can_be_named_on_the_command_line():
    """The key of the campaign file, by --with."""
    outcome = command_runner().invoke(
        entry,
        ["size", "--sigma", "10", "--half-width", "2", "--pilot-n", "20", "--more", "two-stages",
         "--with", "objective.first_stage=40"],
    )  # fmt: skip
    assert outcome.exit_code == 0, outcome.output
    assert "If 40 results came back" in outcome.stdout
