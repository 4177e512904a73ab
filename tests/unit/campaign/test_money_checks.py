"""Rules for money and field readings: one clear line each."""

import pytest

from tests.unit.campaign.files import bent, inspected, told

COST = '[cost]\ncurrency = "EUR"\nper_location = 9\n'
READING = '[[field_reading]]\nname = "meter"\n'
LEVEL = ('unit = "mg/kg"', 'unit = "mg/kg"\naction_level = 150\naction_level_source = "x"')


def with_tables(*lines: str, level: bool = False, objective: str = "") -> str:
    """The plain file with tables before its draw."""
    changes = [("[draw]", "".join(lines) + "[draw]")]
    if objective:
        changes.append(("standard_error = 6.0", f"standard_error = 6.0\n{objective}"))
    return bent(*changes, *([LEVEL] if level else []))


@pytest.mark.parametrize(
    ("text", "line"),
    [
        (
            with_tables(COST, "per_crew_day = 800\n"),
            "cost.locations_per_day: missing; per_crew_day means nothing without it. "
            "Give both or neither.",
        ),
        (
            with_tables(COST, "locations_per_day = 12\n"),
            "cost.per_crew_day: missing; locations_per_day means nothing without it. "
            "Give both or neither.",
        ),
        (
            with_tables(COST, "wrongly_left = 9000\n", level=True),
            "cost.wrongly_acted: missing; wrongly_left means nothing without it. "
            "Give both or neither.",
        ),
        (
            with_tables(COST, "wrongly_left = 9000\nwrongly_acted = 800\n"),
            "cost.wrongly_acted: a wrong decision needs a level to be wrong about, and the analyte "
            "that decides n has none. Give it an action_level.",
        ),
        (
            with_tables(objective="mean_from = 90"),
            "objective.mean_to: missing; mean_from means nothing without it. Give both or neither.",
        ),
        (
            with_tables(objective="mean_from = 90\nmean_to = 80"),
            "objective.mean_to: must be above mean_from = 90 (got 80). Swap the two.",
        ),
        (
            with_tables(READING),
            "field_reading: needs exactly one of pilot and correlation (got neither). Keep one.",
        ),
        (
            with_tables(READING, 'correlation = 0.8\nsource = "x"\npilot = "p.csv"\n'),
            "field_reading: needs exactly one of pilot and correlation (got both). Keep one.",
        ),
        (
            with_tables(READING, "correlation = 0.8\n"),
            "field_reading.source: missing; a typed correlation needs its source. Give it, or "
            'source = "ASSUMED".',
        ),
        (
            with_tables(READING, 'correlation = 0\nsource = "x"\n'),
            "field_reading.correlation: a reading that follows nothing is of no use (got 0). "
            "Take it out.",
        ),
        (
            with_tables(READING, 'pilot = "p.csv"\nfrom_pairs = 9\n'),
            "field_reading.from_pairs: the pairs of the pilot are counted, not typed. "
            "Take this key out.",
        ),
        (
            with_tables(READING, 'pilot = "p.csv"\ncolumns = { meter = "XRF" }\n'),
            'field_reading.columns.meter: no column of ours that is read here (got "meter"). '
            "Takes reading, result, location_id.",
        ),
        (
            with_tables(*(2 * [READING, 'correlation = 0.8\nsource = "x"\n'])),
            'field_reading[2].name: the reading "meter" stands twice. Rename one.',
        ),
    ],
    ids=lambda value: value.split(":")[0] if len(value) < 200 else "",
)
def test_each_rule_is_told_in_one_line(tmp_path, text, line):
    """Which key, what is wrong with it, what to do."""
    assert [problem.split(": ", 1)[1] for problem in told(tmp_path, text)] == [line]


@pytest.mark.parametrize("value", ["1.0", "-1.0", "1.4", "nan"])
def test_a_correlation_lies_between_minus_one_and_one(tmp_path, value):
    """At either end the reading would be the result."""
    text = with_tables(READING, f'correlation = {value}\nsource = "x"\n')
    (line,) = told(tmp_path, text)
    assert "field_reading.correlation" in line


def test_everything_together_is_read(tmp_path):
    """All keys at once, as docs/campaign-file.md shows them."""
    text = with_tables(
        COST, "per_sample = 3\nper_crew_day = 850\nlocations_per_day = 14\n",
        "wrongly_acted = 60000\nwrongly_left = 250000\n",
        READING, 'correlation = -0.85\nfrom_pairs = 24\nsource = "trial"\nper_reading = 4\n',
        level=True, objective="mean_from = 90\nmean_to = 180",
    )  # fmt: skip
    found = inspected(tmp_path, text)
    assert found.problems == ()
    campaign = found.campaign.campaign
    assert campaign.field_reading[0].analyte == "lead"
    assert (campaign.cost.per_crew_day, campaign.objective[0].mean_to) == (850.0, 180.0)


def test_a_budget_may_be_priced_by_crew_days_alone(tmp_path):
    """Some campaigns pay for days and nothing else."""
    text = with_tables(
        '[cost]\ncurrency = "EUR"\nper_crew_day = 800\nlocations_per_day = 10\n'
    ).replace("standard_error = 6.0", "budget = 4000")
    text = text.replace('assurance = 0.80\nassurance_chosen_by = "L. Fenn"\n', "")
    assert told(tmp_path, text) == []
