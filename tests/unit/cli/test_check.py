"""``fieldplan check``: what was understood, all that is wrong, and what is still open."""

import json
import math
import statistics
from datetime import date

import pytest
from click.testing import Result
from scipy.stats import chi2

from fieldplan.base.errors import CampaignError, FrameError
from fieldplan.campaign import read_campaign
from fieldplan.cli.check import command
from fieldplan.cli.size import command as size
from fieldplan.plan.make import make_plan
from tests.command_runner import command_runner
from tests.unit.campaign.files import PLAIN, bent

VALUES = (12, 40, 25, 61, 33, 18, 55, 90)
BOUNDARY = {
    "type": "Polygon",
    "coordinates": [[[-1.9, 52.1], [-1.899, 52.1], [-1.899, 52.101], [-1.9, 52.101], [-1.9, 52.1]]],
}
PILOT = "location_id,analyte,as_reported,unit\n" + "".join(
    f"P{k},Lead,{value},mg/kg\n" for k, value in enumerate(VALUES)
)


@pytest.fixture
def folder(tmp_path, monkeypatch):
    """A folder with a boundary of about 0.76 ha and a pilot of 8."""
    monkeypatch.chdir(tmp_path)
    (tmp_path / "boundary.geojson").write_text(json.dumps(BOUNDARY))
    (tmp_path / "pilot.csv").write_text(PILOT)
    return tmp_path


def check(folder, text: str, *options: str) -> Result:
    """Write a campaign file and check it."""
    (folder / "campaign.toml").write_text(text, encoding="utf-8")
    return command_runner().invoke(command, ["campaign.toml", *options], catch_exceptions=False)


def words(text: str) -> str:
    """Put wrapped output on one line."""
    return " ".join(text.split())


@pytest.mark.parametrize(
    ("fixed_on", "first", "alarms"),
    [
        ("2020-05-04", "2020-04-13", ["The rules are stated to have been fixed", "A plan made on"]),
        ("2020-03-02", "2020-04-13", ["A plan made on"]),
        ("2999-03-02", "2999-04-13", []),
    ],
)
def test_dates_after_the_first_day_of_field_work_are_alarms(folder, fixed_on, first, alarms):
    """What is decided then cannot be shown to come before results; a plan is made today."""
    text = bent(
        ("[[analyte]]", f"fieldwork_from = {first}\n[[analyte]]"),
        ("[draw]", f"[rules]\nfixed_on = {fixed_on}\n[draw]"),
    )
    result = check(folder, text)
    assert result.exit_code == 0
    told = [part.partition(first)[0] for part in words(result.stdout).split("ALARM: ")[1:]]
    assert len(told) == len(alarms)
    assert all(said.startswith(alarm) for said, alarm in zip(told, alarms, strict=True))


def test_sound_campaign_is_told_in_sentences(folder):
    """The reader sees whether the tool understood what the author meant."""
    result = check(folder, PLAIN)
    text = words(result.stdout)
    assert result.exit_code == 0
    assert "Quarry Field, lead in topsoil (QF)." in text
    assert "the mean of Lead with a standard error of at most 6 mg/kg; locations drawn" in text
    assert "n shall be enough with a chance of 80 % (L. Fenn)." in text
    assert "The mean speaks for 100 % of the site" in text
    assert "8 pilot locations (pilot.csv)" in text
    # n = 7 · s² / (χ² of 7 degrees of freedom at 0.20) / 6², by the standard library and scipy.
    n = math.ceil(7 * statistics.variance(VALUES) / chi2.ppf(0.20, 7) / 6**2)
    assert text.endswith(
        f"{n} results are needed for a standard error of the mean ≤ 6 mg/kg. Nothing is left to "
        "fill in. Next: fieldplan pack campaign.toml"
    )
    assert max(map(len, result.stdout.splitlines())) <= 80


def test_what_does_not_decide_n_is_told_apart(folder):
    """An analyte beside the deciding one is either asked about or only measured."""
    more = (
        'unit = "mg/kg"\n\n[[analyte]]\nid = "zinc"\nname = "Zinc"\nunit = "mg/kg"\n'
        '\n[[analyte]]\nid = "tin"\nunit = "mg/kg"'
    )
    objective = (
        'analyte = "lead"\ndecides_n = true\nquestion = "mean"\nstandard_error = 6.0\n'
        'assurance = 0.80\n\n[[objective]]\nanalyte = "zinc"\nquestion = "mean"\nhalf_width = 20'
    )
    text = bent(
        ('name = "Lead"', 'id = "lead"\nname = "Lead"'),
        ('unit = "mg/kg"', more),
        ('question = "mean"\nstandard_error = 6.0', objective),
        ("[[sigma]]", '[[sigma]]\nanalyte = "lead"'),
    )
    said = words(check(folder, text).stdout)
    assert (
        "Also asked: the mean of Zinc with a half-width of at most 20 mg/kg (95 %, two-sided); it "
        "does not decide n." in said
    )
    assert "Measured too, without a target: tin." in said


@pytest.mark.parametrize("word", ["valid", "pass", "safe", "compliant", "approved", " ok"])
def test_check_gives_no_verdict(folder, word):
    """It says what was understood; whether that is right is for people to say."""
    assert word not in check(folder, PLAIN).stdout.lower().replace("passing", "")


@pytest.mark.parametrize(
    ("changes", "words_said"),
    [
        ([("standard_error", "half_width")], "a half-width of at most 6 mg/kg (95 %, two-sided)"),
        (
            [("standard_error = 6.0", "relative_half_width = 0.2")],
            "a half-width of at most 20 % of the mean (95 %, two-sided)",
        ),
        (
            [
                ("standard_error = 6.0", "budget = 900"),
                ('assurance = 0.80\nassurance_chosen_by = "L. Fenn"\n', ""),
                ("[draw]", '[cost]\ncurrency = "EUR"\nper_analysis = 9\n[draw]'),
            ],
            "the mean of Lead with what 900 EUR can buy; locations drawn at random, seed 12. The "
            "budget decides n; no precision is asked for that it could miss.",
        ),
        ([("0.80", '"plain"')], "The bare formula decides n (L. Fenn): it is enough in about half"),
    ],
)
def test_each_target_is_said_in_words(folder, changes, words_said):
    """A half-width read as a standard error doubles the work."""
    assert words_said in words(check(folder, bent(*changes)).stdout)


def test_all_problems_are_listed_and_the_exit_code_is_2(folder):
    """Typed wrong."""
    result = check(folder, bent(("6.0", '"6"'), ("seed = 12", "seed = -1")))
    assert result.exit_code == 2
    lines = result.stderr.splitlines()
    assert [line.split(": ")[:2] for line in lines] == [
        ["campaign.toml:20", "objective.standard_error"],
        ["campaign.toml:28", "draw.seed"],
    ]


def test_text_that_is_no_toml_has_exit_code_2(folder):
    """Typed wrong, before anything can be understood."""
    result = check(folder, bent(("6.0", "6,5")))
    assert result.exit_code == 2
    assert "write 6.5" in result.stderr
    assert result.stdout == ""


def test_what_is_open_comes_last_and_is_no_error(folder):
    """Not to know is an answer."""
    result = check(folder, bent(("6.0", '"FILL IN"')))
    assert result.exit_code == 0
    last = result.stdout.splitlines()[-3:]
    assert last[0] == "Still to fill in:"
    assert last[1].startswith("  line 20: objective.standard_error: the largest standard error")


def test_missing_input_file_is_typed_wrong(folder):
    """The name is in the campaign file."""
    (folder / "pilot.csv").rename(folder / "pilots.csv")
    result = check(folder, PLAIN)
    assert result.exit_code == 2
    assert 'no such file (got "pilot.csv"). Did you mean pilots.csv?' in result.stderr


def test_boundary_that_cannot_serve_has_exit_code_1(folder):
    """The campaign is typed right but cannot be done."""
    line = {"type": "LineString", "coordinates": [[-1.9, 52.1], [-1.8, 52.1]]}
    (folder / "boundary.geojson").write_text(json.dumps(line))
    result = check(folder, PLAIN)
    assert result.exit_code == 1
    assert "boundary.geojson" in result.stderr
    assert "Nothing is left" not in result.stdout


def test_pilot_that_cannot_serve_keeps_what_was_understood_of_the_site(folder):
    """One fault must not hide what was read before it."""
    (folder / "pilot.csv").write_text("location_id,analyte,as_reported,unit\nP1,Lead,x,mg/kg\n")
    result = check(folder, PLAIN)
    assert result.exit_code == 1
    assert "The mean speaks for" in result.stdout
    assert "pilot.csv" in result.stderr


def test_alarm_is_printed(folder):
    """A limit above the level makes non-detects say nothing about the level."""
    level = 'unit = "mg/kg"\naction_level = 5\naction_level_source = "x"\nreporting_limit = 9'
    result = check(folder, bent(('unit = "mg/kg"', level)))
    assert "ALARM: Lead: the reporting limit of 9 mg/kg lies above the action level of 5" in words(
        result.stdout
    )


@pytest.mark.parametrize(
    ("changes", "code"),
    [([], 0), ([("6.0", '"FILL IN"')], 0), ([("6.0", "-6")], 2), ([("6.0", "6,")], 2)],
)
def test_json_holds_the_same_and_nothing_else_is_printed(folder, changes, code):
    """For scripts."""
    result = check(folder, bent(*changes), "--json")
    assert result.exit_code == code
    found = json.loads(result.stdout)
    assert list(found) == ["campaign", "understood", "alarms", "problems", "fill_in", "answer"]
    assert bool(found["problems"]) == (code == 2)
    assert result.stderr == ""


SQUARE = [[-1.9, 52.1], [-1.8995, 52.1], [-1.8995, 52.101], [-1.9, 52.101], [-1.9, 52.1]]
STRATA = {
    "type": "FeatureCollection",
    "features": [
        {
            "type": "Feature",
            "properties": {"stratum": name},
            "geometry": {"type": "Polygon", "coordinates": [[[x + east, y] for x, y in SQUARE]]},
        }
        for name, east in (("west", 0.0), ("east", 0.0005))
    ],
}
IN_STRATA = [('"boundary.geojson"', '"boundary.geojson"\nstrata = "strata.geojson"')]


def test_strata_under_one_population_are_refused_here_and_not_first_by_pack(folder):
    """A number that cannot be drawn helps nobody, so no command gives one."""
    (folder / "strata.geojson").write_text(json.dumps(STRATA))
    result = check(folder, bent(*IN_STRATA))
    assert result.exit_code == 2
    assert "campaign.toml:17: design.layout: draws from one population" in result.stderr
    sized = command_runner().invoke(size, ["campaign.toml"])
    assert isinstance(sized.exception, CampaignError)
    assert sized.stdout == ""


def test_list_in_strata_is_refused_here_and_by_size(folder):
    """Only its file tells that it has any."""
    rows = [f"W{k},52.1,-1.9,{'deep' if k % 2 else 'shallow'}" for k in range(30)]
    (folder / "wells.csv").write_text("\n".join(["location_id,latitude,longitude,stratum", *rows]))
    text = bent(('kind = "area"\nboundary = "boundary.geojson"', LIST))
    result = check(folder, text)
    assert result.exit_code == 1
    assert "wells.csv puts its members into strata (deep, shallow)" in result.stderr
    assert "Nothing is left" not in result.stdout
    sized = command_runner().invoke(size, ["campaign.toml"])
    assert isinstance(sized.exception, FrameError)


LIST = 'kind = "list"\nlist_file = "wells.csv"'


def test_what_cannot_be_drawn_is_found_by_drawing_it(folder):
    """A site of 0.76 ha has no room for 36 places 60 m apart; only the draw knows."""
    changes = [('"simple-random"', '"simple-random"\nminimum_spacing_m = 60')]
    result = check(folder, bent(*changes))
    assert result.exit_code == 1
    assert "60 m" in result.stderr
    assert "8 pilot locations (pilot.csv)" in words(result.stdout)
    assert "Nothing is left" not in result.stdout


def test_packet_that_check_announces_is_the_one_that_pack_decides(folder):
    """One decision, made once: the numbers must be the same."""
    answer = json.loads(check(folder, PLAIN, "--json").stdout)["answer"]
    plan = make_plan(read_campaign(folder / "campaign.toml"), made_on=date(2026, 11, 2))
    assert answer == plan.size.sentences[0]
    assert answer.startswith(f"{len(plan.locations.of_class('random'))} results")


OPEN = ('assurance_chosen_by = "L. Fenn"', 'assurance_chosen_by = "FILL IN"')


def test_missing_file_is_told_beside_what_is_open(folder):
    """Whoever fills in the last word should not meet the next fault only then."""
    result = check(folder, bent(OPEN, ("pilot.csv", "nofile.xlsx")))
    assert result.exit_code == 2
    assert 'sigma.pilot: file with pilot results, CSV or XLSX; there is no such file (got "no' in (
        result.stderr
    )
    assert "objective.assurance_chosen_by" in result.stdout


def test_missing_file_is_told_beside_what_is_typed_wrong(folder):
    """All at once."""
    result = check(folder, bent(("6.0", '"6"'), ("boundary.geojson", "sight.geojson")))
    assert [line.split(": ")[1] for line in result.stderr.splitlines()] == [
        "objective.standard_error",
        "frame.boundary",
    ]


def test_files_are_read_while_something_is_open(folder):
    """The site and the pilot do not depend on who chose the assurance."""
    result = check(folder, bent(OPEN))
    assert result.exit_code == 0
    assert "The mean speaks for 100 % of the site" in words(result.stdout)
    assert "8 pilot locations (pilot.csv)" in words(result.stdout)


def test_bad_boundary_and_bad_pilot_are_both_told_while_something_is_open(folder):
    """Neither waits for the other, nor for the last FILL IN."""
    line = {"type": "LineString", "coordinates": [[-1.9, 52.1], [-1.8, 52.1]]}
    (folder / "boundary.geojson").write_text(json.dumps(line))
    (folder / "pilot.csv").write_text("location_id,analyte,as_reported,unit\nP1,Lead,x,mg/kg\n")
    result = check(folder, bent(OPEN))
    assert result.exit_code == 1
    assert "boundary.geojson" in result.stderr
    assert "pilot.csv row 2" in result.stderr
    assert "Still to fill in" in result.stdout


@pytest.mark.parametrize(
    "opened",
    [
        ('"boundary.geojson"', '"FILL IN"'),
        ('name = "Lead"', 'name = "FILL IN"'),
        ('unit = "mg/kg"', 'unit = "FILL IN"'),
        ('"pilot.csv"', '"FILL IN"'),
        ('"simple-random"', '"FILL IN"'),
        ('"area"', '"FILL IN"'),
        ("seed = 12", 'seed = "FILL IN"'),
        ('"boundary.geojson"', '"boundary.geojson"\nstrata = "FILL IN"'),
        ('"boundary.geojson"', '"boundary.geojson"\ncrs = "FILL IN"'),
        ('"pilot.csv"', '"pilot.csv"\ncolumns = { unit = "FILL IN" }'),
    ],
    ids=lambda pair: pair[1][-24:],
)
def test_what_is_open_makes_no_fault_of_what_is_sound(folder, opened):
    """A stand-in for an open value must never be blamed on the files."""
    changes = [opened]
    if "strata" in opened[1]:
        changes.append(('"simple-random"', '"stratified"'))
    result = check(folder, bent(*changes))
    assert (result.exit_code, result.stderr) == (0, "")
    assert "FILL" not in result.stdout


def test_folder_stands_for_the_campaign_file_in_it(folder):
    """There is usually one."""
    (folder / "campaign.toml").write_text(PLAIN)
    (folder / "pyproject.toml").write_text("[project]\n")
    by_folder = command_runner().invoke(command, ["."], catch_exceptions=False)
    by_name = command_runner().invoke(command, ["campaign.toml"], catch_exceptions=False)
    assert by_folder.exit_code == 0
    assert by_folder.stdout == by_name.stdout


def test_folder_with_several_campaigns_or_none_says_so(folder):
    """To guess one would check the wrong campaign."""
    empty = command_runner().invoke(command, ["."])
    assert str(empty.exception) == (
        ". holds no campaign file (.toml). Run 'fieldplan new' to write one."
    )
    (folder / "spring.toml").write_text(PLAIN)
    (folder / "autumn.toml").write_text(PLAIN)
    several = command_runner().invoke(command, ["."])
    assert str(several.exception) == (
        ". holds 2 campaign files: autumn.toml, spring.toml. Name the one you mean."
    )
    assert several.exception.exit_code == 2
