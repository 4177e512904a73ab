"""Rules for the correlation of visits in a campaign file."""

from pathlib import Path

import pytest

from fieldplan.campaign import inspect_campaign

START = """format = 1
[plan]
id = "WR"
title = "Weir, nitrate"
[[analyte]]
id = "nitrate"
unit = "mg/L"
[[frame]]
kind = "list"
list_file = "days.csv"
[[design]]
layout = "simple-random"
[[objective]]
question = "mean"
standard_error = 1.0
assurance = "plain"
assurance_chosen_by = "L. Fenn"
[draw]
seed = 4
[[sigma]]
value = 6.0
source = "station record 2021"
"""


def problems(tmp_path: Path, keys: str) -> list[str]:
    """Check a campaign with these keys in its [[sigma]] table."""
    path = tmp_path / "campaign.toml"
    path.write_text(START + keys, encoding="utf-8")
    return [str(line) for line in inspect_campaign(path).problems]


@pytest.mark.parametrize(
    "keys",
    [
        "correlation_between_visits = 0.35",
        "correlation_between_visits = 0.35\nvisit_spacing_days = 30",
        "correlation_between_visits = 0.35\nvisit_spacing_days = 90\ncorrelation_days = 30",
        "correlation_between_visits = -0.2\nvisit_spacing_days = 30\ncorrelation_days = 30",
    ],
)
def test_a_correlation_and_its_days_are_taken(tmp_path: Path, keys: str) -> None:
    """Days are needed only where planned visits differ from those that were seen."""
    assert problems(tmp_path, keys) == []


@pytest.mark.parametrize(
    ("keys", "words"),
    [
        ("visit_spacing_days = 30", "days say nothing without correlation_between_visits (got 30)"),
        ("correlation_days = 30", "days say nothing without correlation_between_visits (got 30)"),
        (
            "correlation_between_visits = 0.35\ncorrelation_days = 30",
            "belongs to visits 30 days apart",
        ),
        (
            "correlation_between_visits = -0.2\nvisit_spacing_days = 60\ncorrelation_days = 30",
            "below 0 (got -0.2) says nothing about visits 60 days apart",
        ),
        ("correlation_between_visits = 1.0", "1.0"),
        ("correlation_between_visits = 0.3\nvisit_spacing_days = 0", "0"),
    ],
)
def test_each_fault_is_one_line_with_its_value(tmp_path: Path, keys: str, words: str) -> None:
    """One problem, its value in it, and what to do."""
    found = problems(tmp_path, keys)
    assert len(found) == 1
    assert words in found[0]
