"""Answers become a campaign file that reads back as typed, with nothing made up."""

import re
import tomllib
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldplan.campaign.new import Answers, campaign_text, initials, toml_value
from fieldplan.campaign.read import inspect_text

PLACE = Path("campaign.toml")
FULL = Answers(
    seed=7,
    plan_id="QF",
    title="Quarry Field",
    prepared_by="R. Amadi",
    boundary="boundary.geojson",
    analyte="Lead",
    unit="mg/kg",
    target_kind="half_width",
    target=12.5,
    pilot="pilot.csv",
    assurance=0.8,
    chosen_by="L. Fenn",
)


def changed(**changes: object) -> Answers:
    """Return the full answers with some of them changed."""
    return Answers(**{**FULL.__dict__, **changes})


@settings(max_examples=300, deadline=None, derandomize=True)
@given(st.text())
def test_any_typed_text_comes_back_from_toml_as_it_was(text):
    """A quote, a backslash or a line end in a title must not break the file."""
    assert tomllib.loads(f"x = {toml_value(text)}")["x"] == text


@settings(max_examples=300, deadline=None, derandomize=True)
@given(st.floats(allow_nan=False) | st.integers(0, 2**63 - 1))
def test_any_number_comes_back_from_toml_as_it_was(number):
    """The shortest form that names the same double, for exponents and whole numbers alike."""
    assert tomllib.loads(f"x = {toml_value(number)}")["x"] == number


typed = st.text(st.characters(exclude_categories=("Cc", "Cs")), min_size=1, max_size=60)


@settings(max_examples=200, deadline=None, derandomize=True)
@given(typed, typed, typed)
def test_typed_answers_come_back_through_the_campaign_reader(title, analyte, unit):
    """The whole way: typed, written, read, checked."""
    answers = changed(title=title, analyte=analyte, unit=unit)
    found = inspect_text(campaign_text(answers), PLACE)
    assert found.problems == ()
    if found.fill_in:
        return
    campaign = found.campaign.campaign
    assert (campaign.plan.title, campaign.analyte[0].name) == (title, analyte)
    assert campaign.analyte[0].unit == unit


def test_half_a_surrogate_pair_is_replaced_since_no_file_can_hold_it():
    """Such text comes from file names that are not UTF-8."""
    assert tomllib.loads(f"x = {toml_value(chr(0xD800) + 'a')}")["x"] == "?a"


def test_full_answers_leave_nothing_to_fill_in():
    """A campaign that was answered in full can be sized at once."""
    found = inspect_text(campaign_text(FULL), PLACE)
    assert (found.problems, found.fill_in) == ((), ())
    objective = found.campaign.campaign.objective[0]
    assert (objective.half_width, objective.assurance) == (12.5, 0.8)
    assert objective.assurance_chosen_by == "L. Fenn"


def test_file_teaches_on_less_than_two_pages():
    """Longer, and nobody reads it; what counts already is about half of it."""
    lines = campaign_text(FULL).splitlines()
    live = [line for line in lines if line and not line.startswith("#")]
    assert len(lines) <= 90
    assert 25 <= len(live) <= 35
    assert lines[0] == "#:schema ./fieldplan.schema.json"
    assert max(map(len, lines)) <= 100


WAITING = re.compile(r"^# ((?:[a-z_]+ = |\[+[a-z.]+\]).*)$", re.MULTILINE)
WAITS = {
    "fieldwork_from", "method", "contact", "action_level", "share", "kind", "decision", "decides",
    "site", "per_location", "fixed_by",
}  # fmt: skip


@pytest.mark.parametrize("kind", ["area", "list"])
def test_every_line_that_waits_holds_when_its_mark_is_taken_away(kind):
    """An example that is refused teaches the wrong thing; all of them together, as one file."""
    listed = {"boundary": None, "list_file": "wells.csv"}
    text = campaign_text(changed(**(listed if kind == "list" else {}), prepared_by=None))
    waiting = dict.fromkeys(line.split(" = ")[0] for line in WAITING.findall(text))
    assert set(waiting) > WAITS | (
        {"depth_top_m", "strata", "inset_m"} if kind == "area" else set()
    )
    live = WAITING.sub(r"\1", text)
    if kind == "area":  # the line of the strata says that the layout follows them
        live = live.replace('layout = "simple-random"', 'layout = "stratified"')
    found = inspect_text(live, PLACE)
    assert (found.problems, found.fill_in) == ((), ())
    campaign = found.campaign.campaign
    assert campaign.field.method
    assert campaign.loss.share == 0.08
    assert campaign.qc[0].share == 0.10
    assert campaign.cost is not None


def test_what_was_asked_for_and_is_not_known_is_left_to_fill_in():
    """And each such line says what to do if nobody knows."""
    names = ("site", "prepared_by", "decision", "decides", "action_level", "depth_m", "strata")
    answers = changed(prepared_by=None, left_open=frozenset(names))
    found = inspect_text(campaign_text(answers), PLACE)
    assert found.problems == ()
    assert [entry.key for entry in found.fill_in] == [
        "plan.site",
        "plan.prepared_by",
        "plan.decision",
        "plan.decides",
        "analyte.action_level",
        "analyte.action_level_source",
        "frame.strata",
        "frame.depth_top_m",
        "frame.depth_bottom_m",
    ]
    assert all("take" in entry.meaning for entry in found.fill_in)


def test_answers_that_decide_the_plan_are_written():
    """What the sheet prints as "not typed" otherwise."""
    answers = changed(
        site="Quarry Field",
        decision="Whether it is let.",
        decides="S. Okoro",
        action_level=150.0,
        action_level_source="Note 3",
        depth_m=(0.0, 0.15),
        strata="parts.geojson",
        pilot_columns={"as_reported": 'the "Result"'},
    )
    found = inspect_text(campaign_text(answers), PLACE)
    assert (found.problems, found.fill_in) == ((), ())
    campaign = found.campaign.campaign
    assert (campaign.plan.site, campaign.plan.decides) == ("Quarry Field", "S. Okoro")
    assert campaign.plan.decision == "Whether it is let."
    assert campaign.analyte[0].action_level == 150
    frame = campaign.frame[0]
    assert (frame.depth_top_m, frame.depth_bottom_m, frame.depth_datum) == (
        0,
        0.15,
        "ground surface",
    )
    assert (frame.strata, campaign.design[0].layout) == ("parts.geojson", "stratified")
    assert campaign.sigma[0].columns == {"as_reported": 'the "Result"'}


def test_list_in_strata_is_drawn_in_strata():
    """Simple random would be refused."""
    answers = changed(boundary=None, list_file="wells.csv", list_in_strata=True)
    campaign = inspect_text(campaign_text(answers), PLACE).campaign.campaign
    assert campaign.design[0].layout == "stratified"


def test_guess_with_nothing_behind_it_is_no_dead_end():
    """Nobody can fill in how many results are behind a guess, so the file does not ask for it."""
    answers = changed(pilot=None, sigma=4.0, sigma_source="ASSUMED", assurance="plain")
    assert inspect_text(campaign_text(answers), PLACE).fill_in == ()
    share = changed(pilot=None, sigma=4.0, sigma_source="ASSUMED", assurance=0.8)
    (entry,) = inspect_text(campaign_text(share), PLACE).fill_in
    assert entry.meaning.endswith('take the line out and write assurance = "plain"')


def test_nothing_known_means_fill_in_everywhere_and_no_number():
    """A made-up number would be sampled on."""
    text = campaign_text(Answers(seed=7))
    found = inspect_text(text, PLACE)
    assert found.problems == ()
    assert [entry.key for entry in found.fill_in] == [
        "plan.id",
        "plan.title",
        "analyte.name",
        "analyte.unit",
        "frame.boundary",
        "objective.half_width",
        "objective.assurance",
        "objective.assurance_chosen_by",
        "sigma.pilot",
    ]
    objective = tomllib.loads(text)["objective"][0]
    assert not [value for value in objective.values() if not isinstance(value, str)]


NAMES = [name for name in FULL.__dict__ if name not in ("seed", "pilot_columns", "left_open")]


@pytest.mark.parametrize("asked", [False, True])
@pytest.mark.parametrize("name", NAMES)
def test_any_answer_may_be_left_open(name, asked):
    """Each "don't know" alone still gives a file without problems, asked for or not."""
    left_open = frozenset({name}) if asked else frozenset()
    found = inspect_text(campaign_text(changed(**{name: None}, left_open=left_open)), PLACE)
    assert found.problems == ()


@pytest.mark.parametrize(
    ("changes", "still_open"),
    [
        ({"pilot": None, "sigma": 4.0, "sigma_source": "ASSUMED"}, ["sigma.from_results"]),
        ({"pilot": None, "sigma": 4.0, "from_results": 8}, ["sigma.source"]),
        (
            {"pilot": None, "sigma": 4.0, "sigma_source": "ASSUMED", "assurance": "plain"},
            [],
        ),
        (
            {
                "pilot": None,
                "sigma": 4.0,
                "sigma_source": "x",
                "from_results": 9,
                "target_kind": "relative_half_width",
                "target": 0.2,
            },
            ["sigma.expected_mean"],
        ),
        (
            {"target_kind": "budget", "target": 9000.0},
            ["cost.currency", "cost.per_location", "cost.per_analysis"],
        ),
        ({"boundary": None, "list_file": "wells.csv"}, []),
        ({"boundary_assumed": True}, []),
    ],
)
def test_what_an_answer_calls_for_is_left_to_fill_in(changes, still_open):
    """A budget needs prices, a share of the mean needs a mean: asked for, never supplied."""
    found = inspect_text(campaign_text(changed(**changes)), PLACE)
    assert found.problems == ()
    assert [entry.key for entry in found.fill_in] == still_open


def test_short_id_is_made_of_initials():
    """It becomes part of folder names, so it keeps to plain letters."""
    assert initials("Old glaze works: lead") == "OGWL"
    assert initials("Élan 2 bridge x") == "LBX"
    assert initials("湖") == initials("") == initials("3") == "PLAN"
