"""The schema that editors use is the models', and real files satisfy it."""

import json
import tomllib
from datetime import date
from pathlib import Path

import jsonschema
import pytest

from fieldplan.campaign.meaning import MEANING
from fieldplan.campaign.model import Campaign
from fieldplan.campaign.new import Answers, campaign_text
from fieldplan.campaign.schema import campaign_schema, generated_text, schema_text
from fieldplan.campaign.shape import PATH_KEYS, shapes
from tests.unit.campaign.files import PLAIN, bent
from tests.unit.campaign.test_new import FULL, changed

SITES = Path(__file__).parents[3] / "demo_sites"


def all_keys(model=Campaign, above=""):
    """Yield the dotted name of every table and key."""
    for key, shape in shapes(model).items():
        yield f"{above}{key}"
        if shape.model is not None:
            yield from all_keys(shape.model, f"{above}{key}.")


def plain(content):
    """Turn TOML dates into text, as editors do before they validate."""
    if isinstance(content, dict):
        return {key: plain(value) for key, value in content.items()}
    if isinstance(content, list):
        return [plain(value) for value in content]
    return content.isoformat() if isinstance(content, date) else content


def faults(text: str) -> list[str]:
    """Validate a campaign text with an independent validator."""
    validator = jsonschema.Draft202012Validator(json.loads(schema_text()))
    return [error.json_path for error in validator.iter_errors(plain(tomllib.loads(text)))]


def test_shipped_schema_is_the_one_that_follows_from_the_models():
    """After a change of the models write generated_text() over schema.json."""
    assert json.loads(schema_text()) == json.loads(generated_text())
    jsonschema.Draft202012Validator.check_schema(campaign_schema())


@pytest.mark.parametrize(
    "text",
    [
        PLAIN,
        campaign_text(Answers(seed=1)),
        campaign_text(FULL),
        campaign_text(changed(target_kind="budget", pilot=None, sigma=3.0, boundary_assumed=True)),
        campaign_text(changed(boundary=None, list_file="wells.csv", assurance="plain")),
        *[path.read_text("utf-8") for path in sorted(SITES.glob("*/campaign.toml"))],
    ],
)
def test_files_that_the_reader_takes_satisfy_the_schema(text):
    """An editor that underlines a sound file is switched off."""
    assert faults(text) == []


def test_demo_sites_are_among_the_files_tested():
    """An empty folder would make the test above pass by itself."""
    assert len(list(SITES.glob("*/campaign.toml"))) >= 2


@pytest.mark.parametrize(
    ("change", "path"),
    [
        (("6.0", '"6.0"'), "$.objective[0].standard_error"),
        (("title =", "titel ="), "$.plan"),
        (('"area"', '"time"'), "$.frame[0].kind"),
        (("[[analyte]]", "[analyte]"), "$.analyte"),
        (("0.80", "80"), "$.objective[0].assurance"),
        (("assurance = 0.80\n", ""), "$.objective[0]"),
        (("standard_error = 6.0", "budget = 900"), "$.objective[0]"),
    ],
)
def test_schema_finds_what_the_reader_refuses(change, path):
    """The editor's underline and the command's line agree."""
    assert path in faults(bent(change))


def test_every_key_says_what_it_is():
    """Editors show it on hover, errors and the reference print it."""
    assert set(all_keys()) == set(MEANING)
    assert all(text and not text.endswith(".") for text in MEANING.values())


def test_schema_describes_every_key():
    """The words reach the shipped file."""
    tables = [campaign_schema(), *campaign_schema()["$defs"].values()]
    for table in tables:
        for key, entry in table["properties"].items():
            assert entry.get("description"), key


def test_keys_that_name_files_are_keys_of_the_models():
    """A renamed key would lose its checks of paths."""
    assert {key.split(".")[-1] for key in all_keys()} >= PATH_KEYS
