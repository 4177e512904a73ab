"""What is known of an incomplete campaign stays usable, whichever value is open."""

import tomllib

import pytest

from fieldplan.campaign import draft, inspect_campaign, missing_files
from fieldplan.campaign.model import FILL_IN
from fieldplan.campaign.read import inspect_text
from tests.docs.campaign_reference import rows
from tests.unit.campaign.files import PLAIN, bent

WHOLE = """\
[plan]
id = "QF"
title = "Quarry Field"
[[analyte]]
id = "lead"
unit = "mg/kg"
[[frame]]
kind = "area"
boundary = "boundary.geojson"
strata = "strata.geojson"
[[frame.exclusion]]
file = "pond.geojson"
buffer_m = 2.0
reason = "water"
[[event]]
[[design]]
layout = "stratified"
[[targeted]]
file = "tank.csv"
reason = "tank"
[[objective]]
question = "mean"
budget = 900.0
[[sigma]]
pilot = "pilot.csv"
[[field_reading]]
name = "meter"
correlation = 0.8
source = "x"
[cost]
currency = "EUR"
per_location = 9.0
[[qc]]
kind = "field blank"
count = 1
source = "x"
[loss]
[rules]
[field]
[[clearance]]
topic = "access and permission"
reference = "letter"
given_on = 2026-09-01
expires_on = 2027-03-31
[draw]
seed = 1
[paper]
"""
KEYS = [name for name, _ in rows() if name != "format"]


def opened(name: str) -> str:
    """Return the whole campaign with one key open."""
    table, _, key = name.rpartition(".")
    if table.startswith("objective."):  # a question's table stands where its objective ends
        header = f'[{table}]\n{key} = "FILL IN"\n[[sigma]]'
        return "format = 1\n" + WHOLE.replace("[[sigma]]", header, 1)
    lines, found = ["format = 1"], False
    for line in WHOLE.splitlines():
        header = line.strip("[]") if line.startswith("[") else ""
        if not (found and line.startswith(f"{key} = ")):
            lines.append(line)
        if header:
            found = header == table
            lines += [f'{key} = "FILL IN"'] if found else []
    return "\n".join(lines)


@pytest.mark.parametrize("name", KEYS)
def test_one_open_value_leaves_the_rest_known(tmp_path, name):
    """Each key of the format, from the models: required or not, of whatever type."""
    text = opened(name)
    assert tomllib.loads(text)
    found = inspect_text(text, tmp_path / "campaign.toml")
    if found.problems:  # a rule between keys that holds for open values as well
        assert draft(found) is None
        assert name.count(".") > 1 or name in {
                        "objective.assurance", "objective.assurance_chosen_by", "sigma.value",
                        "objective.standard_error", "objective.half_width", "sigma.from_results",
                        "objective.relative_half_width", "qc.share", "frame.list_file",
                        "frame.line_file", "frame.branch_column",
                        "analyte.action_level", "frame.depth_top_m", "field_reading.pilot",
                        "cost.per_crew_day", "cost.locations_per_day", "cost.wrongly_acted",
                        "cost.wrongly_left", "objective.mean_from", "objective.mean_to",
                        "design.equal_in", "design.increments_at", "design.replicates",
                        "design.ranking_set_size", "design.ranking_correlation",
                        "rules.promised_class", "rules.declared_shape"}  # fmt: skip
        return
    assert found.campaign is None
    known = draft(found)
    assert known is not None
    assert known.campaign.plan.title in ("Quarry Field", FILL_IN)
    files = {known.campaign.frame[0].boundary, known.campaign.sigma[0].pilot}
    assert files <= {"boundary.geojson", "pilot.csv", None}


def test_whole_campaign_is_its_own_draft(tmp_path):
    """Nothing is left out of it."""
    found = inspect_text(PLAIN, tmp_path / "campaign.toml")
    assert draft(found) is found.campaign is not None


def test_campaign_that_is_typed_wrong_has_no_draft(tmp_path):
    """What is wrong with it comes first."""
    assert draft(inspect_text(bent(("6.0", "-6")), tmp_path / "campaign.toml")) is None


def test_missing_files_of_an_incomplete_campaign_are_told_and_open_ones_are_not(tmp_path):
    """A FILL IN names no file."""
    path = tmp_path / "campaign.toml"
    path.write_text(bent(("boundary.geojson", "FILL IN"), ("pilot.csv", "nofile.xlsx")))
    (told,) = missing_files(inspect_campaign(path))
    assert told.endswith(
        "sigma.pilot: file with pilot results, CSV or XLSX; there is no such file (got "
        '"nofile.xlsx"). Paths start from the campaign file.'
    )


def test_path_that_was_told_already_is_not_told_twice(tmp_path):
    """Backslashes are named with their own remedy."""
    path = tmp_path / "campaign.toml"
    path.write_text(bent(('"pilot.csv"', "'maps\\pilot.csv'"), ("boundary.geojson", "b.geojson")))
    found = inspect_campaign(path)
    assert [line.split(": ")[1] for line in found.problems] == ["sigma.pilot"]
    assert [line.split(": ")[1] for line in missing_files(found)] == ["frame.boundary"]
