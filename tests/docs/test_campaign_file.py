"""docs/campaign-file.md names every key as the models have it, with examples that hold."""

import json
import re
import tomllib
from pathlib import Path

import jsonschema
import pytest

from fieldplan.campaign.facts import FACTS
from fieldplan.campaign.later import MANY
from fieldplan.campaign.read import inspect_text
from fieldplan.campaign.schema import schema_text
from tests.docs.campaign_reference import rows
from tests.unit.campaign.test_schema import plain

PAGE = (Path(__file__).parents[2] / "docs" / "campaign-file.md").read_text(encoding="utf-8")
SECTION = re.compile(r"^#{2,3} (?:`\[+([a-z._]+)\]+`|The whole file)$", re.MULTILINE)
REFERENCE = list(rows())


def page_rows() -> dict[str, list[str]]:
    """Return the cells of every row of the page's tables of keys, by dotted name."""
    found = {}
    pieces = SECTION.split(PAGE)[1:]
    for name, body in zip(pieces[::2], pieces[1::2], strict=True):
        for line in body.splitlines():
            cells = [cell.strip() for cell in line.strip("|").split(" | ")]
            if line.startswith("| `") and len(cells) == 5:
                key = cells[0].strip("`")
                found[f"{name}.{key}" if name else key] = cells
    return found


@pytest.mark.parametrize(("name", "cells"), REFERENCE, ids=[name for name, _ in REFERENCE])
def test_every_key_is_on_the_page_as_the_models_have_it(name, cells):
    """What it is, what it takes, and what holds when it is left out."""
    assert page_rows()[name][:4] == cells


def test_page_names_no_key_that_is_not_there():
    """A key that was taken out must leave the page as well."""
    assert set(page_rows()) == {name for name, _ in REFERENCE}


@pytest.mark.parametrize("name", [name for name, _ in REFERENCE])
def test_example_of_each_key_is_accepted(name):
    """Examples are what people copy."""
    value = plain(tomllib.loads(f"x = {page_rows()[name][4].strip('`')}"))["x"]
    table, _, key = name.rpartition(".")
    entry = model_named(json.loads(schema_text()), table)["properties"][key]
    assert list(jsonschema.Draft202012Validator(entry).iter_errors(value)) == []


def model_named(schema: dict, table: str) -> dict:
    """Follow dotted names to the model of a table."""
    here = schema
    for step in filter(None, table.split(".")):
        text = json.dumps(here["properties"][step])
        here = schema["$defs"][re.search(r"#/\$defs/(\w+)", text)[1]]
    return here


def test_plain_campaign_on_the_page_reads_and_has_about_thirty_lines():
    """It is the first thing that people copy."""
    text = re.search(r"```toml\n(.*?)```", PAGE, re.DOTALL)[1]
    found = inspect_text(text, Path("campaign.toml"))
    assert (found.problems, found.fill_in) == ((), ())
    assert 25 <= len(text.splitlines()) <= 35
    assert max(map(len, text.splitlines())) <= 90


def test_message_on_the_page_is_the_tools_own():
    """The text block shows what the tool prints."""
    text = re.search(r"```toml\n(.*?)```", PAGE, re.DOTALL)[1]
    bad = text.replace("standard_error = 6.0", 'standard_error = "6,5"')
    (told,) = inspect_text(bad, Path("campaign.toml")).problems
    shown = re.search(r"```text\n(.*?)\n```", PAGE, re.DOTALL)[1]
    assert told == shown


def test_page_names_every_fact_code():
    """The codes are closed; the page is where to look them up."""
    for code, meaning in FACTS.items():
        assert f"| `{code}` | {meaning} |" in PAGE


def test_page_says_what_is_refused_by_name():
    """A reader should not have to try."""
    tail = PAGE.split("## What this version does not do yet")[1]
    for word in ("volumes", "time", "composite", "incremental", *MANY):
        assert word in tail or f"{word}s" in tail or word == "event"
