"""``fieldplan new``: every path by options and by questions; nothing is replaced or made up."""

import io
import json
import math
import os
import re
import statistics
import tomllib
from pathlib import Path

import click
import pytest
from click.testing import Result
from pyproj import Geod
from scipy.stats import chi2, t

from fieldplan.base.errors import FieldplanError
from fieldplan.campaign import inspect_campaign, read_campaign
from fieldplan.cli.new import command
from fieldplan.cli.size import command as size
from tests.command_runner import command_runner
from tests.unit.cli.test_check import BOUNDARY

RING = BOUNDARY["coordinates"][0]

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
    assert f"{option[0]} has nothing to hold to beside --budget; leave it out." in result.stderr
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
    width = t.ppf(0.975, 21) * 27.57 / 22**0.5
    chance = chi2.sf(7 * 27.57**2 / (22 * 6**2), 7)
    more = math.ceil(27.57**2 * 7 / chi2.ppf(0.20, 7) / 6**2)
    result = new(
        "--sigma", "27.57", "--sigma-results", "8", "--standard-error", "6", "--unit", "mg/kg"
    )  # fmt: skip
    text = said(result)
    assert "With a standard deviation of 27.57 mg/kg: 22 results are needed" in text
    assert "a standard error of 5.88 mg/kg and a 95 % interval of ±" in text
    assert f"±{width:.1f} mg/kg" in text
    assert f"The chance that 22 are enough is {chance * 100:.0f} %" in text
    assert re.search(rf"67 %, 80 % and 90 % it takes \d+, {more} and \d+", text)


def test_echo_reads_the_pilot(folder):
    """Oracle: the standard library's statistics.stdev."""
    sigma = statistics.stdev(VALUES)
    assert f"With the pilot's standard deviation of {sigma:.2f} mg/kg:" in said(new(*FULL))


def test_echo_and_size_say_the_same(folder):
    """Two formulas for one number would part one day."""
    (folder / "site.geojson").write_text(json.dumps(BOUNDARY))
    text = said(new(*FULL, "--assurance", "plain"))
    sized = command_runner().invoke(size, ["campaign.toml", "--json"], catch_exceptions=False)
    for sentence in json.loads(sized.stdout)["sentences"][:3]:
        assert sentence in text


def test_echo_counts_on_the_list(folder):
    """Of 24 wells 13 and 16, by the formulas for a finite list; without it 28 and 44.

    By hand, with f = 1 − n / 24: n = 13 is the smallest with t(n − 1) · 3 · √(f / n) ≤ 1.3 (scipy).
    """
    wells(folder, 24)
    n = next(
        n for n in range(2, 25) if t.ppf(0.975, n - 1) * 3 * math.sqrt((1 - n / 24) / n) <= 1.3
    )
    text = said(
        new("--stations", "wells.csv", "--sigma", "3", "--sigma-results", "9", "--half-width",
            "1.3", "--unit", "µg/L", "--assurance", "0.8")
    )  # fmt: skip
    assert f"{n} results are needed" in text
    listed = json.loads(
        command_runner().invoke(
            size, ["--sigma", "3", "--pilot-n", "9", "--half-width", "1.3", "--population", "24",
                   "--assurance", "0.8", "--json"], catch_exceptions=False
        ).stdout
    )  # fmt: skip
    assert listed["plain_n"] == n
    assert f"For the chance of 80 % asked for it takes {listed['n']}." in text


def test_list_in_strata_is_drawn_in_strata(folder):
    """Its file says so; the layout of the new file must be one that can be drawn."""
    rows = [f"W{k},52.1,-1.9{k:02d},{'deep' if k % 2 else 'shallow'}" for k in range(20)]
    (folder / "wells.csv").write_text("\n".join(["Well ID,Lat,Long,stratum", *rows]))
    text = said(
        new("--stations", "wells.csv", "--sigma", "3", "--sigma-results", "9", "--half-width", "2")
    )  # fmt: skip
    assert written()["design"][0]["layout"] == "stratified"
    assert re.search(r"\d in deep and \d in shallow", text)


def wells(folder: Path, count: int) -> None:
    """Write a list of wells as its owner keeps it."""
    rows = [f"MW-{k},52.1,{-1.9 + k / 1000:.3f}" for k in range(count)]
    (folder / "wells.csv").write_text("\n".join(["Well ID,Lat,Long", *rows]))


def test_answers_that_decide_the_plan_have_options(folder):
    """Scripts say what the conversation asks."""
    (folder / "parts.geojson").write_text("{}")
    new(
        *FULL, "--site", "Quarry Field", "--decision", "Whether it is let.", "--decides",
        "S. Okoro", "--action-level", "150", "--action-level-source", "Note 3", "--depth",
        "0 to 15 cm", "--strata", "parts.geojson",
    )  # fmt: skip
    campaign = read_campaign(folder / "campaign.toml").campaign
    assert (campaign.plan.site, campaign.plan.decides) == ("Quarry Field", "S. Okoro")
    assert (campaign.frame[0].depth_bottom_m, campaign.frame[0].strata) == (0.15, "parts.geojson")
    assert campaign.design[0].layout == "stratified"
    assert campaign.analyte[0].action_level == 150


def test_column_that_a_message_proposes_can_be_given(folder):
    """Advice that cannot be followed is worse than none."""
    (folder / "pilot.csv").write_text(PILOT.replace("as_reported", "Result"))
    assert 'columns = { as_reported = "Result" }' in said(new(*FULL, "--out", "first.toml"))
    text = said(new(*FULL, "--column", "as_reported=Result"))
    assert "With the pilot's standard deviation of 25.87 mg/kg" in text
    assert written()["sigma"][0]["columns"] == {"as_reported": "Result"}


@pytest.mark.parametrize("share", ["20 %", "0.2", "20 percent"])
def test_share_of_the_mean_may_be_typed_in_per_cent(folder, share):
    """As in the conversation."""
    new(*FULL[:8], "--pilot", "pilot.csv", "--relative-half-width", share)
    assert written()["objective"][0]["relative_half_width"] == 0.2


REFUSED = [
    (["--standard-error", "6", "--half-width", "9"], "exclude each other; give one"),
    (["--boundary", "site.geojson", "--corners", "1,1;1,2;2,2"], "exclude each other"),
    (["--pilot", "pilot.csv", "--sigma", "3"], "exclude each other"),
    (["--around", "52,1"], "belong together; give both"),
    (["--radius-m", "5"], "belong together; give both"),
    (["--sigma-source", "x"], "--sigma-source needs --sigma."),
    (["--column", "unit=U"], "--column needs --pilot."),
    (["--action-level-source", "x"], "--action-level-source needs --action-level."),
    (["--depth", "0-1 m", "--stations", "wells.csv"], "--depth needs --boundary or --corners or"),
    (["--strata", "x", "--stations", "wells.csv"], "--strata needs --boundary or"),
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
    (["--assurance", "8"], "a share from 50 % to below 100 %, such as 80 %, or plain is accepted"),
    (["--boundary", "site.geojson", "--depth", "15"], "top and bottom with a unit are accepted"),
    (["--pilot", "pilot.csv", "--column", "unit"], 'a column is named like "location_id=Well ID"'),
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


LEFT_OPEN = ("",) * 20
PLAN = ("Quarry Field", "Quarry", "", "R. Amadi")
AREA = (*PLAN, "site.geojson", "none", "Lead", "mg/kg", "none", "none")
END = ("Whether it is let.", "S. Okoro")


def test_conversation_gives_the_same_file_as_the_options(folder):
    """Two doors, one room."""
    result = conversation(*AREA, "pilot.csv", "20", "0.8", "L. Fenn", *END)
    assert result.exit_code == 0
    by_questions = (folder / "campaign.toml").read_text("utf-8")
    new(
        *FULL, "--site", "Quarry", "--prepared-by", "R. Amadi", "--decision", END[0], "--decides",
        END[1], "--out", "options.toml",
    )  # fmt: skip
    assert (folder / "options.toml").read_text("utf-8") == by_questions
    assert inspect_campaign(folder / "campaign.toml").fill_in == ()


@pytest.mark.parametrize("typed", ["", "?", "don't know", "Don’t know.", "unknown"])
def test_every_question_may_be_left_open_and_the_file_says_so(folder, typed):
    """The first sentence of the talk promises it, for every question."""
    result = conversation(*[typed] * 20)
    assert result.exit_code == 0
    found = inspect_campaign(folder / "campaign.toml")
    assert found.problems == ()
    assert [entry.key for entry in found.fill_in] == [
        "plan.id",
        "plan.title",
        "plan.site",
        "plan.prepared_by",
        "plan.decision",
        "plan.decides",
        "analyte.name",
        "analyte.unit",
        "analyte.action_level",
        "analyte.action_level_source",
        "frame.boundary",
        "frame.strata",
        "frame.depth_top_m",
        "frame.depth_bottom_m",
        "objective.half_width",
        "objective.assurance",
        "objective.assurance_chosen_by",
        "sigma.pilot",
    ]
    assert "18 entries are still to fill in" in said(result)


@pytest.mark.parametrize("at", range(30))
def test_no_question_is_wider_than_the_terminal_or_ends_the_talk(folder, at):
    """Whichever question gets an answer that it cannot take, it comes again within 80 columns."""
    answers = [*PLAN, "wells.csv", "station", "Lead", "mg/kg", "12", "Note 3", "none", "27.57",
               "a report", "8", "20 %", "30", "80 %", "L. Fenn", *END]  # fmt: skip
    odd = "x" * 60 + " y, = %"
    result = conversation(*answers[:at], odd, *answers[at:])
    assert result.exit_code == 0
    assert max(map(len, (result.stdout + result.stderr).splitlines())) <= 80
    assert written()["format"] == 1


@pytest.mark.parametrize(
    ("typed", "words"),
    [
        ("Bramley orchard", "'Bramley orchard' cannot open the name of a folder: up to 35 letters"),
        ("Bramley orchard", "Write Bramley-orchard."),
        ("-x", "Write x."),
        ("ö", "a letter or digit first."),
    ],
)
def test_bad_id_is_refused_at_its_question(folder, typed, words):
    """Refused at the end it would cost all answers."""
    result = conversation(*PLAN[:2], typed, "BO", "R. Amadi", *AREA[4:], *LEFT_OPEN)
    assert words in said(result)
    assert written()["plan"]["id"] == "BO"


def test_whatever_the_file_cannot_hold_is_refused_at_its_question(folder):
    """The campaign reader is asked after each answer, so no rule waits until the last one."""
    result = conversation(*PLAN, "site.geojson", "none", "Lead", "m" * 3000, "mg/kg", *LEFT_OPEN)
    assert "up to 2000 characters are accepted (got 3000)" in said(result)
    assert written()["analyte"][0]["unit"] == "mg/kg"


def test_back_goes_one_question_back_as_often_as_wanted(folder):
    """A slip is seen when the next question is read."""
    result = conversation(
        "back", "Quary Field", "back", "Quarry Field", "Quarry", "back", "back", "Stone Field",
        "Stone", "", "R. Amadi", *LEFT_OPEN,
    )  # fmt: skip
    assert "This is the first question." in said(result)
    assert (written()["plan"]["title"], written()["plan"]["id"]) == ("Stone Field", "SF")
    assert written()["plan"]["site"] == "Stone"


def test_back_takes_what_followed_from_the_answer_back_too(folder):
    """A list that became a boundary must not leave its layout behind."""
    wells(folder, 5)
    conversation(
        *PLAN, "wells.csv", "station", "back", "back", "site.geojson", "none", "Lead", "mg/kg",
        "none", "none", "", "", "", "", "", "",
    )  # fmt: skip
    frame = written()["frame"][0]
    assert (frame["kind"], frame["boundary"]) == ("area", "site.geojson")


def test_conversation_asks_again_after_an_answer_that_cannot_be_read(folder):
    """A slip must not cost the answers given before."""
    result = conversation(
        "T", "", "", "", "nowhere.geojson", "site.geojson", "none", "Lead", "mg/kg", "none", "15",
        "0 to 15 cm", "none", "27,5", "27.5", "a report", "1", "8", "six", "SE 6", "2", "plain",
        "L. Fenn", "", "",
    )  # fmt: skip
    assert result.exit_code == 0
    text = said(result)
    assert "nowhere.geojson: there is no such file." in text
    assert "(got '27,5'). Write 27.5." in text
    assert "a whole number of at least 2 is accepted (got '1')" in text
    assert "'SE 6' or 'budget 9000' is accepted, with a decimal point (got 'six')" in text
    assert "such as 80 %, or plain is accepted (got '2', which is 2 %)" in text
    assert written()["sigma"][0] == {"value": 27.5, "source": "a report", "from_results": 8}
    assert written()["objective"][0]["standard_error"] == 6
    assert written()["objective"][0]["assurance"] == "plain"


def test_conversation_asks_again_for_what_is_no_text(folder, monkeypatch):
    """A question mark in its place would be a title that nobody typed."""
    typed = iter(["Gr" + chr(0xDCFC) + "n", "Green", *LEFT_OPEN])
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
        *AREA, "none", "27.57", "x", "8", "SE 6", "back", "SE 9", "plain", "L. Fenn", "", ""
    )
    assert written()["objective"][0]["standard_error"] == 9
    assert "22 results are needed" in said(result)
    assert "10 results are needed" in said(result)
    assert "To change the target, type back." in said(result)


@pytest.mark.parametrize(
    ("target", "key", "amount"),
    [
        ("20 %", "relative_half_width", 0.2),
        ("within 20 %", "relative_half_width", 0.2),
        ("± 12 mg/kg", "half_width", 12),
        ("within 12", "half_width", 12),
    ],
)
@pytest.mark.parametrize("assurance", ["80 %", "80", "0.8", "80 percent"])
def test_shares_are_taken_in_the_same_ways_throughout(folder, target, key, amount, assurance):
    """'20 %' taken and '80 %' refused at the next question is a trap."""
    conversation(*AREA, "pilot.csv", target, assurance, "L. Fenn", "", "")
    objective = written()["objective"][0]
    assert (objective[key], objective["assurance"]) == (amount, 0.8)


def test_guess_of_sigma_leads_to_a_file_that_can_be_sized(folder):
    """Nobody is led to invent the number of results behind a guess."""
    (folder / "site.geojson").write_text(json.dumps(BOUNDARY))
    result = conversation(
        *AREA, "none", "27.57", "assumed", "SE 6", "80 %", "plain", "L. Fenn", *END
    )
    text = said(result)
    assert "How many results are behind it?" not in text
    assert "Since no number of results is behind sigma, no chance can be worked out." in text
    assert "a chance can be worked out only from a pilot or from the number of results" in text
    sigma = written()["sigma"][0]
    assert sigma == {"value": 27.57, "source": "ASSUMED"}
    sized = command_runner().invoke(size, ["campaign.toml", "--json"], catch_exceptions=False)
    assert json.loads(sized.stdout)["n"] == 22


def test_number_of_results_that_nobody_knows_is_not_asked_for_again(folder):
    """Enter says so at its own question."""
    conversation(*AREA, "none", "27.57", "an old report", "", "SE 6", "plain", "L. Fenn", *END)
    assert written()["sigma"][0] == {"value": 27.57, "source": "an old report"}
    assert inspect_campaign(folder / "campaign.toml").fill_in == ()


def test_files_are_looked_at_where_they_are_named(folder):
    """What they hold is a check of having named the right ones; area by pyproj's geodesics."""
    hectares = Geod(ellps="WGS84").polygon_area_perimeter(*zip(*RING, strict=True))[0] / 10_000
    (folder / "site.geojson").write_text(json.dumps(BOUNDARY))
    text = said(conversation(*AREA, "pilot.csv", "", "", "", ""))
    assert f"That is {hectares:.4f} ha (" in text
    assert "8 pilot locations (pilot.csv) have a mean of 41.8 mg/kg" in text


def test_file_that_cannot_be_used_is_told_where_it_is_named(folder):
    """A few of its faults; the file is kept, since it may be mended."""
    rows = "".join(f"P{k},Lead,x{k},mg/kg\n" for k in range(9))
    (folder / "pilot.csv").write_text("location_id,analyte,as_reported,unit\n" + rows)
    text = said(conversation(*AREA, "pilot.csv", "", "", "", ""))
    assert "pilot.csv is kept, but cannot be used as it stands ('back' names another):" in text
    assert "… and 6 more; 'fieldplan check' will list them." in text
    assert written()["sigma"][0]["pilot"] == "pilot.csv"


def test_columns_of_the_pilot_are_asked_for(folder):
    """The laboratory's own names are usual; the file then says which is which."""
    renamed = PILOT.replace("as_reported", "Result").replace("location_id", "Well ID")
    (folder / "pilot.csv").write_text(renamed)
    text = said(
        conversation(*AREA, "pilot.csv", "well id", "Well ID", "Nothing", "Result", *LEFT_OPEN)
    )
    assert (
        "Which column of pilot.csv holds the names of the locations? It has 'Well ID', 'an" in text
    )
    assert "'Well ID' is said to be location_id already." in text
    assert "there is no column 'Nothing'. Type one of them as it stands." in text
    assert written()["sigma"][0]["columns"] == {"location_id": "Well ID", "as_reported": "Result"}
    assert "have a mean of 41.8 mg/kg" in text


def test_columns_below_a_letterhead_are_asked_for(folder):
    """A certificate begins with the laboratory's name."""
    renamed = PILOT.replace("as_reported", "Result").replace("location_id", "Well ID")
    (folder / "pilot.csv").write_text(f"Invented Laboratory Ltd\nReport 12\n\n{renamed}")
    text = said(conversation(*AREA, "pilot.csv", "Well ID", "Result", *LEFT_OPEN))
    assert "It has 'Well ID', 'analyte', 'Result', 'unit'." in text
    assert "have a mean of 41.8 mg/kg" in text


def test_corners_can_be_pasted_in_the_conversation(folder):
    """An empty line ends; a bad line is asked again; 'back' takes one corner back."""
    conversation(
        *PLAN, "corners", "52.1, -1.9", "52.1", "52.1, -1.8", "52.9, -1.8", "back", "52.2, -1.8",
        "", "none", "Lead", "mg/kg", "none", "none", "", "", "20 %", "", "", "",
    )  # fmt: skip
    ring = json.loads((folder / "boundary.geojson").read_text())["features"][0]["geometry"]
    assert ring["coordinates"][0] == [[-1.9, 52.1], [-1.8, 52.1], [-1.8, 52.2], [-1.9, 52.1]]
    assert written()["objective"][0]["relative_half_width"] == 0.2


def test_circle_can_be_asked_for_in_the_conversation(folder):
    """Centre first, then the radius."""
    conversation(
        *PLAN, "around", "52.1, -1.9", "150 m", "none", "Lead", "mg/kg", "none", "none", "", "",
        "budget 900", "", "",
    )  # fmt: skip
    assert written()["frame"][0]["boundary_assumed"] is True
    assert written()["cost"]["currency"] == "FILL IN"


def test_boundary_that_is_there_is_told_at_the_question(folder):
    """At the end all answers would be lost."""
    (folder / "boundary.geojson").write_text("mine")
    text = said(conversation(*PLAN, "corners", "boundary.geojson", *LEFT_OPEN))
    assert "boundary.geojson is there already and is never replaced. Type its name to use" in text
    assert (folder / "boundary.geojson").read_text() == "mine"
    assert written()["frame"][0]["boundary"] == "boundary.geojson"


@pytest.mark.parametrize(("kind", "key"), [("station", "list_file"), ("corner", "boundary")])
def test_table_of_places_may_hold_stations_or_corners(folder, kind, key):
    """The file alone does not tell which."""
    wells(folder, 24)
    result = conversation(*PLAN, "wells.csv", "both", kind, *LEFT_OPEN)
    assert "'station' or 'corner' is accepted (got 'both')." in said(result)
    assert written()["frame"][0][key] == "wells.csv"
    assert ("That is a list of 24." in said(result)) == (kind == "station")


def test_list_is_asked_for_neither_parts_nor_depth(folder):
    """Its own file says the one, and the other has no meaning for wells."""
    wells(folder, 24)
    text = said(conversation(*PLAN, "wells.csv", "station", *LEFT_OPEN))
    assert "parts that differ" not in text
    assert "Which depth" not in text


def test_rows_left_open_leave_the_place_open(folder):
    """Neither is guessed."""
    conversation(*PLAN, "wells.csv", "?", *LEFT_OPEN)
    assert written()["frame"][0]["boundary"] == "FILL IN"


def test_schema_of_somebody_else_stops_the_talk_before_it_begins(folder):
    """Not after the last answer."""
    (folder / "fieldplan.schema.json").write_text("{}")
    with pytest.raises(FieldplanError, match="is no schema of fieldplan"):
        conversation("T")


def cut_short(monkeypatch, *typed: object) -> Result:
    """Answer, then stop as Ctrl-C does, then go on answering."""
    left = iter(typed)

    def prompt(*_: object, **__: object) -> str:
        answer = next(left, click.Abort())
        if isinstance(answer, BaseException):
            raise answer
        return str(answer)

    monkeypatch.setattr(click, "prompt", prompt)
    return command_runner().invoke(command, ["--seed", "5"])


@pytest.mark.parametrize("stop", [click.Abort(), KeyboardInterrupt(), EOFError()])
def test_answers_of_a_talk_cut_short_can_be_kept(folder, monkeypatch, stop):
    """Under a name that says what it is; what was not asked yet is open."""
    result = cut_short(monkeypatch, *PLAN, stop, "")
    assert result.exit_code == 1
    assert not (folder / "campaign.toml").exists()
    kept = written(Path("campaign-unfinished.toml"))
    assert (kept["plan"]["title"], kept["plan"]["site"]) == ("Quarry Field", "Quarry")
    assert kept["frame"][0]["boundary"] == "FILL IN"
    assert "Next: fieldplan check campaign-unfinished.toml" in said(result)
    assert inspect_campaign(folder / "campaign-unfinished.toml").problems == ()


def test_unfinished_file_replaces_none(folder, monkeypatch):
    """An earlier one may have been filled in since."""
    (folder / "campaign-unfinished.toml").write_text("mine")
    cut_short(monkeypatch, *PLAN, click.Abort(), "yes")
    assert (folder / "campaign-unfinished.toml").read_text() == "mine"
    assert written(Path("campaign-unfinished-2.toml"))["plan"]["id"] == "QF"


def test_corners_of_a_talk_cut_short_are_kept_with_it(folder, monkeypatch):
    """They were the most work."""
    corners = ("corners", "52.1, -1.9", "52.1, -1.8", "52.2, -1.8", "")
    cut_short(monkeypatch, *PLAN, *corners, click.Abort(), "")
    assert written(Path("campaign-unfinished.toml"))["frame"][0]["boundary"] == "boundary.geojson"
    assert (folder / "boundary.geojson").exists()


@pytest.mark.parametrize("typed", [("no",), (click.Abort(),)])
def test_talk_cut_short_keeps_nothing_when_told_so(folder, monkeypatch, typed):
    """A second Ctrl-C means it."""
    before = sorted(folder.iterdir())
    assert cut_short(monkeypatch, *PLAN, click.Abort(), *typed).exit_code == 1
    assert sorted(folder.iterdir()) == before


def test_talk_cut_short_before_an_answer_just_ends(folder, monkeypatch):
    """There is nothing to keep."""
    before = sorted(folder.iterdir())
    assert "Keep what" not in said(cut_short(monkeypatch, click.Abort()))
    assert sorted(folder.iterdir()) == before


def test_end_of_input_writes_nothing(folder, monkeypatch):
    """Nobody is there to say what to keep."""
    before = sorted(folder.iterdir())
    monkeypatch.setattr("sys.stdin", io.StringIO("Quarry Field\n\n"))
    with pytest.raises(click.Abort):
        command.main([], standalone_mode=False)
    assert sorted(folder.iterdir()) == before


def test_end_names_what_is_worth_typing_besides(folder):
    """The sheet would print "not typed" there."""
    text = said(conversation(*AREA, "pilot.csv", "20", "0.8", "L. Fenn", *END))
    assert "field dates, method and contact, control samples, losses, costs" in text
    assert "# method = " in (folder / "campaign.toml").read_text()
