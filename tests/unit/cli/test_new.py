"""``fieldplan new``: every path by options and by questions; nothing is replaced or made up."""

import io
import json
import math
import os
import statistics
import tomllib
from pathlib import Path

import click
import pytest
from click.testing import Result

from fieldplan.base.errors import FieldplanError
from fieldplan.campaign import inspect_campaign, read_campaign
from fieldplan.cli.new import command
from tests.command_runner import command_runner

VALUES = (12, 40, 25, 61, 33, 18, 55, 90)
PILOT = "location_id,analyte,as_reported,unit\n" + "".join(
    f"P{k},Lead,{value},mg/kg\n" for k, value in enumerate(VALUES)
)


@pytest.fixture
def folder(tmp_path, monkeypatch):
    """An empty working folder with a boundary, a pilot and a list of wells."""
    monkeypatch.chdir(tmp_path)
    (tmp_path / "site.geojson").write_text("{}")
    (tmp_path / "pilot.csv").write_text(PILOT)
    (tmp_path / "wells.csv").write_text("well,latitude,longitude\n")
    return tmp_path


def new(*arguments: str, answers: str | None = None) -> Result:
    """Run the command, raising what it raises."""
    return command_runner().invoke(command, arguments, input=answers, catch_exceptions=False)


def written(place: Path = Path("campaign.toml")) -> dict:
    """Read a written file with the TOML reader alone."""
    return tomllib.loads(place.read_text("utf-8"))


def said(result: Result) -> str:
    """Return all output on one line."""
    return " ".join((result.stdout + result.stderr).split())


FULL = (
    "--title", "Quarry Field", "--analyte", "Lead", "--unit", "mg/kg", "--boundary",
    "site.geojson", "--pilot", "pilot.csv", "--half-width", "20", "--assurance", "0.8",
    "--chosen-by", "L. Fenn", "--seed", "5",
)  # fmt: skip


def test_options_give_a_whole_campaign_without_a_question(folder):
    """Scripts cannot answer questions."""
    result = new(*FULL)
    assert result.exit_code == 0
    campaign = read_campaign(folder / "campaign.toml").campaign
    assert (campaign.plan.id, campaign.draw.seed) == ("QF", 5)
    assert campaign.objective[0].half_width == 20
    assert result.stdout.splitlines() == [
        "campaign.toml is written. The seed of the draw is 5.",
        "Next: fieldplan check campaign.toml",
    ]


def test_schema_stands_beside_the_campaign_file(folder):
    """The first line points editors at it."""
    new(*FULL)
    first = (folder / "campaign.toml").read_text("utf-8").splitlines()[0]
    assert first == "#:schema ./fieldplan.schema.json"
    assert json.loads((folder / "fieldplan.schema.json").read_text("utf-8"))["title"]


@pytest.mark.parametrize("target", ["--standard-error", "--half-width", "--budget"])
def test_each_target_is_written_under_its_key(folder, target):
    """One of the four, never two."""
    new(target, "9")
    assert written()["objective"][0][target[2:].replace("-", "_")] == 9


@pytest.mark.parametrize("option", [("--assurance", "0.8"), ("--chosen-by", "L. Fenn")])
def test_a_budget_takes_no_assurance(folder, option):
    """It sets no precision that n could miss, so the file has none and the option is refused."""
    new("--budget", "900")
    assert "assurance" not in written()["objective"][0]
    result = new("--budget", "900", *option, "--out", "other.toml")
    assert result.exit_code == 2
    assert f"{option[0]} has nothing to hold to beside --budget; leave it out." in result.output
    assert not (folder / "other.toml").exists()


def test_relative_target_of_a_typed_sigma_asks_for_the_mean(folder):
    """A share of an unknown mean is no number."""
    result = new("--relative-half-width", "0.2", "--sigma", "4", "--sigma-source", "ASSUMED")
    assert written()["sigma"][0]["expected_mean"] == "FILL IN"
    assert "add expected_mean to the file" in said(result)


def test_circle_is_written_and_marked_as_assumed(folder):
    """A circle is nobody's boundary."""
    result = new("--around", "52.1,-1.9", "--radius-m", "150")
    words = "ASSUMED boundary: a circle of 150 m round latitude 52.1, longitude -1.9."
    assert words in said(result)
    frame = written()["frame"][0]
    assert (frame["boundary"], frame["boundary_assumed"]) == ("boundary.geojson", True)
    assert json.loads((folder / "boundary.geojson").read_text())["features"]


def test_corners_are_written_as_an_outline(folder):
    """Typed corners are the author's own, so nothing is assumed."""
    new("--corners", "52.1,-1.9; 52.1,-1.8; 52.2,-1.8")
    frame = written()["frame"][0]
    assert frame["boundary"] == "boundary.geojson"
    assert "boundary_assumed" not in frame
    ring = json.loads((folder / "boundary.geojson").read_text())["features"][0]["geometry"]
    assert len(ring["coordinates"][0]) == 4


def test_stations_make_a_list(folder):
    """Each row is a member of the population."""
    new("--stations", "wells.csv", "--sigma", "3.1", "--sigma-results", "8", "--half-width", "2")
    assert written()["frame"][0] == {"kind": "list", "list_file": "wells.csv"}


def test_paths_are_written_from_the_campaign_file(folder):
    """The folder can then be moved as a whole."""
    result = new(*FULL, "--out", "plans/2026")
    assert "With the pilot's standard deviation" in said(result)
    place = folder / "plans" / "2026" / "campaign.toml"
    assert written(place)["frame"][0]["boundary"] == "../../site.geojson"
    assert read_campaign(place).campaign.sigma[0].pilot == "../../pilot.csv"


def test_seed_is_drawn_and_printed_when_none_is_given(folder):
    """Nobody has to think one up, and two campaigns do not share one."""
    seeds = set()
    for number in range(5):
        result = new("--title", "x", "--out", f"{number}.toml")
        seed = written(Path(f"{number}.toml"))["draw"]["seed"]
        assert f"The seed of the draw is {seed}." in result.stdout
        seeds.add(seed)
    # Five draws from 10^9: the chance that any two agree is about 10 / 10^9.
    assert len(seeds) == 5


def test_what_is_not_given_is_listed_as_still_to_fill_in(folder):
    """One option stands for "no questions"; the rest stays open."""
    result = new("--title", "Quarry Field")
    assert "7 entries are still to fill in: analyte.name, analyte.unit, frame.bound" in said(result)
    assert len(inspect_campaign(folder / "campaign.toml").fill_in) == 7


def test_echo_says_half_width_standard_error_n_and_the_chance(folder):
    """All four belong together: n alone looks surer than it is.

    By hand: n = (27.57 / 6)² = 21.1, so 22, and SE = 27.57 / √22. Oracles: scipy's t for the
    half-width, and its chi-square for P(χ² ≥ 7 · 27.57² / (22 · 6²)) and for n at 80 %.
    """
    from scipy.stats import chi2, t

    width = t.ppf(0.975, 21) * 27.57 / 22**0.5
    chance = chi2.sf(7 * 27.57**2 / (22 * 6**2), 7)
    more = math.ceil(27.57**2 * 7 / chi2.ppf(0.20, 7) / 6**2)
    result = new(
        "--sigma", "27.57", "--sigma-results", "8", "--standard-error", "6", "--unit", "mg/kg"
    )  # fmt: skip
    assert (
        f"that asks for 22 results: standard error 5.88 mg/kg, half-width {width:.1f} mg/kg (95 % "
        f"interval). The chance that 22 are enough is {chance * 100:.0f} %, since sigma is itself "
        f"an estimate from 8 results; for a chance of 80 % it takes {more}."
    ) in said(result)


def test_echo_reads_the_pilot(folder):
    """Oracle: the standard library's statistics.stdev."""
    sigma = statistics.stdev(VALUES)
    assert f"With the pilot's standard deviation of {sigma:.2f} mg/kg that" in said(new(*FULL))


REFUSED = [
    (["--standard-error", "6", "--half-width", "9"], "exclude each other; give one"),
    (["--boundary", "site.geojson", "--corners", "1,1;1,2;2,2"], "exclude each other"),
    (["--pilot", "pilot.csv", "--sigma", "3"], "exclude each other"),
    (["--around", "52,1"], "belong together; give both"),
    (["--radius-m", "5"], "belong together; give both"),
    (["--sigma-source", "x"], "--sigma-source needs --sigma."),
    (["--expected-mean", "50"], "--expected-mean needs --sigma."),
    (["--sigma", "1e300"], "--sigma 1e+300 is beyond what can be reckoned with, 1e-12 to 1e12;"),
    (["--half-width", "-3"], "-3.0 is not in the range x>0"),
    (["--half-width", "1,5"], "'1,5' is not a valid float"),
    (["--seed", "-1"], "-1 is not in the range"),
]


@pytest.mark.parametrize(("arguments", "words"), REFUSED, ids=[case[1] for case in REFUSED])
def test_options_that_do_not_fit_are_typed_wrong_and_write_nothing(folder, arguments, words):
    """Exit code 2, as for any slip on the command line."""
    before = sorted(folder.iterdir())
    result = new(*arguments)
    assert result.exit_code == 2
    assert words in said(result)
    assert sorted(folder.iterdir()) == before


FAULTY = [
    (["--boundary", "sight.geojson"], "sight.geojson: there is no such file. Did you mean site."),
    (["--boundary", os.devnull], f"{os.devnull}: this is no ordinary file (a pipe or a device)."),
    (["--around", "52,1", "--radius-m", "1e-9"], "a radius of at least 1 m and up to 200,000 m"),
    (["--assurance", "80"], r"a share from 0.5 to below 1, such as 0.80, or plain is accepted"),
    (["--around", "520,1", "--radius-m", "5"], "lies off the globe"),
    (["--corners", "52,1; 53,1"], "at least 3 different corners"),
    (["--id", "Quarry Field"], "plan.id: short identifier of the plan; takes up to 35 letters"),
    (["--title", "bell \x07"], "has control characters"),
    (["--half-width", "inf"], "not a finite number"),
    (["--half-width", "nan"], "not a finite number"),
]


@pytest.mark.parametrize(("arguments", "words"), FAULTY, ids=[case[1][:40] for case in FAULTY])
def test_answers_that_cannot_be_are_refused_and_write_nothing(folder, arguments, words):
    """The file is read back before it is written."""
    before = sorted(folder.iterdir())
    with pytest.raises(FieldplanError) as raised:
        new(*arguments)
    assert raised.value.exit_code == 2
    assert words in str(raised.value)
    assert sorted(folder.iterdir()) == before


def test_file_that_is_there_is_never_replaced(folder):
    """Hours of somebody's work may be in it."""
    (folder / "campaign.toml").write_text("mine")
    with pytest.raises(FieldplanError, match=r"campaign\.toml is there already and is never repl"):
        new(*FULL)
    assert (folder / "campaign.toml").read_text() == "mine"
    assert not (folder / "fieldplan.schema.json").exists()


def test_outline_that_is_there_is_never_replaced(folder):
    """A circle must not take the place of a surveyed boundary."""
    (folder / "boundary.geojson").write_text("mine")
    with pytest.raises(FieldplanError, match=r"boundary\.geojson is there already"):
        new("--around", "52,1", "--radius-m", "5")
    assert (folder / "boundary.geojson").read_text() == "mine"
    assert not (folder / "campaign.toml").exists()


def test_schema_of_somebody_else_is_left_alone_and_our_own_is_renewed(folder):
    """A second campaign in the same folder is usual."""
    (folder / "fieldplan.schema.json").write_text("{}")
    with pytest.raises(FieldplanError, match="is no schema of fieldplan"):
        new(*FULL)
    (folder / "fieldplan.schema.json").unlink()
    assert new(*FULL).exit_code == 0
    assert new(*FULL, "--out", "second.toml").exit_code == 0


def test_folder_that_cannot_be_made_is_said(folder):
    """A file stands where the folder should be."""
    with pytest.raises(FieldplanError, match=r"cannot be made .*Name another with --out"):
        new(*FULL, "--out", "wells.csv/deep/campaign.toml")


def conversation(*answers: str) -> Result:
    """Answer the questions one by one."""
    return new("--seed", "5", answers="\n".join(answers) + "\n")


def test_conversation_gives_the_same_file_as_the_options(folder):
    """Two doors, one room."""
    result = conversation(
        "Quarry Field", "", "", "site.geojson", "Lead", "mg/kg", "pilot.csv", "20", "y", "0.8",
        "L. Fenn",
    )  # fmt: skip
    assert result.exit_code == 0
    by_questions = (folder / "campaign.toml").read_text("utf-8")
    new(*FULL, "--out", "options.toml")
    assert (folder / "options.toml").read_text("utf-8") == by_questions


def test_conversation_without_an_answer_writes_fill_in_only(folder):
    """Enter and ? both mean "not known yet"."""
    result = conversation("", "?", "", "?", "", "?", "", "", "?", "")
    assert result.exit_code == 0
    assert "9 entries are still to fill in" in said(result)
    assert inspect_campaign(folder / "campaign.toml").problems == ()


def test_conversation_asks_again_after_an_answer_that_cannot_be_read(folder):
    """A slip must not cost the answers given before."""
    result = conversation(
        "T", "", "", "nowhere.geojson", "site.geojson", "Lead", "mg/kg", "", "27,5", "27.5",
        "ASSUMED", "1", "8", "six", "SE 6", "y", "2", "plain", "L. Fenn",
    )  # fmt: skip
    assert result.exit_code == 0
    text = said(result)
    assert "nowhere.geojson: there is no such file." in text
    assert "(got '27,5'). Write 27.5." in text
    assert "a whole number of at least 2 is accepted (got '1')" in text
    assert "'SE 6' or 'budget 9000' is accepted, with a decimal point (got 'six')" in text
    assert written()["sigma"][0] == {"value": 27.5, "source": "ASSUMED", "from_results": 8}
    assert written()["objective"][0]["standard_error"] == 6
    assert written()["objective"][0]["assurance"] == "plain"


def test_conversation_asks_again_for_what_is_no_text(folder, monkeypatch):
    """A question mark in its place would be a title that nobody typed."""
    typed = iter(["Gr" + chr(0xDCFC) + "n", "Green", *[""] * 9])
    monkeypatch.setattr(click, "prompt", lambda *_, **__: next(typed))
    result = conversation()
    assert "'Gr?n' has signs (at the ?) that are no UTF-8 text; type it anew" in said(result)
    assert written()["plan"]["title"] == "Green"


def test_conversation_ends_at_bytes_of_another_encoding(folder):
    """Nothing can be read behind them; what is said must not call it a fault of the program."""
    with pytest.raises(FieldplanError, match=r"has the byte 0xFC, which is no UTF-8 text\. Set"):
        command_runner().invoke(command, input=b"Gr\xfcn\n\n", catch_exceptions=False)
    assert not (folder / "campaign.toml").exists()


def test_target_can_be_changed_after_its_echo(folder):
    """Seeing n is what makes people reconsider."""
    result = conversation(
        "T", "", "", "", "Lead", "mg/kg", "", "27.57", "x", "8", "SE 6", "n", "SE 9", "y", "", ""
    )
    assert written()["objective"][0]["standard_error"] == 9
    assert "asks for 22 results" in said(result)
    assert "asks for 10 results" in said(result)


def test_corners_can_be_pasted_in_the_conversation(folder):
    """An empty line ends; a bad line is asked again."""
    conversation(
        "T", "", "", "corners", "52.1, -1.9", "52.1", "52.1, -1.8", "52.2, -1.8", "", "Lead",
        "mg/kg", "", "", "20 %", "y", "", "",
    )  # fmt: skip
    ring = json.loads((folder / "boundary.geojson").read_text())["features"][0]["geometry"]
    assert ring["coordinates"][0][0] == [-1.9, 52.1]
    assert written()["objective"][0]["relative_half_width"] == 0.2


def test_circle_can_be_asked_for_in_the_conversation(folder):
    """Centre first, then the radius."""
    conversation(
        "T", "", "", "around", "52.1, -1.9", "150", "Lead", "mg/kg", "", "", "budget 900", "y",
    )  # fmt: skip
    assert written()["frame"][0]["boundary_assumed"] is True
    assert written()["cost"]["currency"] == "FILL IN"


@pytest.mark.parametrize(("kind", "key"), [("station", "list_file"), ("corner", "boundary")])
def test_table_of_places_may_hold_stations_or_corners(folder, kind, key):
    """The file alone does not tell which."""
    conversation("T", "", "", "wells.csv", kind, "Lead", "mg/kg", "", "", "12", "y", "", "")
    assert written()["frame"][0][key] == "wells.csv"


def test_conversation_cut_short_writes_nothing(folder, monkeypatch):
    """End of input, or Ctrl-C; the runner's own end of input differs between versions of click."""
    before = sorted(folder.iterdir())
    monkeypatch.setattr("sys.stdin", io.StringIO("Quarry Field\n\n"))
    with pytest.raises(click.Abort):
        command.main([], standalone_mode=False)
    assert sorted(folder.iterdir()) == before
