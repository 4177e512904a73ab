"""``fieldplan estimate``: answers, questions back to the user, and nothing lost on the way."""

import csv
import json
import shlex
from pathlib import Path

import pytest
from click.testing import Result

from fieldplan.base.errors import FieldplanError
from fieldplan.cli.estimate import command
from fieldplan.packet import evidence, results_writer
from fieldplan.plan.record import plan_to_record
from fieldplan.returns import field_return_blank
from tests.command_runner import command_runner
from tests.factories import make_plan
from tests.several_analytes import plan_with_zinc
from tests.unit.returns.returned import CELLS

HEAD = ["sample_id", "analyte", "as_reported", "unit"]


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A folder with the packet's record, laboratory results and the crew's return."""
    office = tmp_path / "QF-r01" / "office"
    office.mkdir(parents=True)
    plan = make_plan()
    (office / "record.json").write_text(json.dumps(plan_to_record(plan)), encoding="utf-8")
    rows = [
        [s.sample_id, "Lead", "69" if s.qc_of else CELLS[s.location_id], "mg/kg"]
        for s in plan.samples.samples
        if s.location_id in CELLS
    ]
    write_lab(tmp_path, rows)
    filled = field_return_blank(plan).replace(",,,,,,,,,", ",yes,,,,,,,,")
    (tmp_path / "field.csv").write_text(filled, encoding="utf-8", newline="")
    monkeypatch.chdir(tmp_path)
    monkeypatch.setattr(evidence, "disagreements", lambda plan: ())  # made by hand, without text
    return tmp_path


@pytest.fixture
def unset(monkeypatch: pytest.MonkeyPatch) -> list[Path]:
    """Replace the setting of sheets by an empty folder, so that only the command is tested."""
    made: list[Path] = []

    def write(_plan: object, _answer: object, parent: Path, **_options: object) -> Path:
        target = parent / f"QF-r01-results-{len(made) + 1:02d}"
        target.mkdir(parents=True)
        made.append(target)
        return target

    monkeypatch.setattr(results_writer, "write_results", write)
    return made


def write_lab(folder: Path, rows: list[list[str]]) -> None:
    """Write labs.csv."""
    with (folder / "labs.csv").open("w", encoding="utf-8", newline="") as stream:
        csv.writer(stream).writerows([HEAD, *rows])


def lab_rows(folder: Path) -> list[list[str]]:
    """Read labs.csv back without its header."""
    with (folder / "labs.csv").open(encoding="utf-8", newline="") as stream:
        return list(csv.reader(stream))[1:]


def run(*arguments: str) -> Result:
    """Run the command on the packet and labs.csv."""
    words = ["QF-r01", "labs.csv", *arguments]
    return command_runner().invoke(command, words, catch_exceptions=False)


def refused(*arguments: str) -> tuple[str, ...]:
    """Run a command that must stop; give its lines."""
    with pytest.raises(FieldplanError) as caught:
        run(*arguments)
    assert caught.value.exit_code == 1
    return caught.value.problems


def names(folder: Path) -> set[str]:
    """Name all files and folders."""
    return {path.relative_to(folder).as_posix() for path in folder.rglob("*")}


def test_the_answer_comes_first_and_the_sheet_last(folder: Path, unset: list[Path]) -> None:
    """Data to stdout: the mean in a sentence, then where to look; talk goes to stderr."""
    outcome = run("--field", "field.csv")
    assert outcome.exit_code == 0
    lines = outcome.stdout.splitlines()
    assert lines[0].startswith("The mean of Lead over Quarry Field is ")
    assert lines[-1].endswith("results_sheet.html")
    assert "11 of 11 laboratory rows matched." in outcome.stderr
    assert unset == [Path("QF-r01-results-01")]


def test_near_matches_are_asked_and_nothing_else_is_written(folder: Path) -> None:
    """A likeness is the user's to confirm; until then there is no mean at all."""
    rows = lab_rows(folder)
    rows[0][0], rows[3][0] = "qf 731", "QF_418"
    write_lab(folder, rows)
    before = names(folder)
    lines = refused("--field", "field.csv")
    assert lines[0] == "9 of 11 laboratory rows matched; 2 need you."
    assert "row 2 'qf 731' may be QF-731" in lines[1]
    assert "--matches matches.csv" in lines[-1]
    assert names(folder) - before == {"matches.csv"}


def test_a_flood_of_proposals_is_counted_on_the_screen_and_whole_in_the_file(folder: Path) -> None:
    """Nine hundred lines hide the first and the last, which says what to do."""
    rows = [row for row in lab_rows(folder) if row[0] != "QF-731"]
    write_lab(
        folder, [*rows, *(["qf-731" + " " * n + "x", "Lead", "7", "mg/kg"] for n in range(900))]
    )
    lines = refused("--field", "field.csv")
    assert len(lines) == 23
    assert lines[0] == "10 of 910 laboratory rows matched; 900 need you."
    assert all(" may be QF-731: " in line for line in lines[1:21])
    assert lines[21] == "… and 880 more."
    with (folder / "matches.csv").open(encoding="utf-8-sig", newline="") as stream:
        assert len(list(csv.DictReader(stream))) == 900


def test_answers_handed_back_let_the_estimate_through(folder: Path, unset: list[Path]) -> None:
    """Yes to both, and the same eleven rows count."""
    rows = lab_rows(folder)
    rows[0][0] = "qf 731"
    write_lab(folder, rows)
    refused()
    path = folder / "matches.csv"
    answered = path.read_text(encoding="utf-8-sig").replace("letters,", "letters,yes")
    answered = answered.replace('letters",', 'letters",yes')
    path.write_text(answered, encoding="utf-8", newline="")
    outcome = run("--matches", "matches.csv")
    assert outcome.exit_code == 0
    assert "11 of 11" in outcome.stderr
    assert len(unset) == 1


def test_answers_of_an_earlier_run_are_never_overwritten(folder: Path) -> None:
    """A filled-in matches.csv that was forgotten on the command line must survive."""
    rows = lab_rows(folder)
    rows[0][0] = "qf 731"
    write_lab(folder, rows)
    (folder / "matches.csv").write_text("mine", encoding="utf-8")
    lines = refused()
    assert "matches-02.csv" in lines[-1]
    assert (folder / "matches.csv").read_text(encoding="utf-8") == "mine"


def test_a_bad_file_is_refused_with_a_list_and_nothing_is_written(folder: Path) -> None:
    """All faults of the laboratory file at once, and the folder stays as it was."""
    rows = lab_rows(folder)
    rows[0][2], rows[1][3] = "0", "ppm"
    write_lab(folder, rows)
    before = names(folder)
    lines = refused()
    assert [line.split(":")[0] for line in lines] == ["labs.csv row 2", "labs.csv row 3"]
    assert names(folder) == before


def test_columns_are_renamed_on_the_command_line(folder: Path, unset: list[Path]) -> None:
    """A laboratory's own headers need no editing of its file."""
    text = (folder / "labs.csv").read_text(encoding="utf-8")
    (folder / "labs.csv").write_text(text.replace("as_reported", "Ergebnis"), encoding="utf-8")
    assert "Ergebnis" in refused()[0]
    assert run("--column", "as_reported=Ergebnis").exit_code == 0
    for wrong in ("as_reported", "=x", "as_reported="):
        outcome = run("--column", wrong)
        assert outcome.exit_code == 2
        assert "OURS=THEIRS" in outcome.stderr
    assert run("--column", "unit=unit", "--column", "unit=unit").exit_code == 2


def test_columns_that_must_be_named_come_with_the_whole_command(
    folder: Path, unset: list[Path]
) -> None:
    """One line to copy, with all that was typed before; it runs as it stands."""
    text = (folder / "labs.csv").read_text(encoding="utf-8")
    text = text.replace("as_reported", "Result").replace("analyte", "Parameter")
    (folder / "my labs.csv").write_text(text, encoding="utf-8")
    with pytest.raises(FieldplanError) as caught:
        command_runner().invoke(
            command,
            ["QF-r01", "my labs.csv", "--field", "field.csv", "--confidence", "0.9", "--quiet"],
            catch_exceptions=False,
        )
    line = caught.value.problems[-1].partition("\n")[2]
    assert line == (
        '  fieldplan estimate QF-r01 "my labs.csv" --field field.csv --confidence 0.9 --quiet '
        '--column "analyte=Parameter" --column "as_reported=Result"'
    )
    outcome = command_runner().invoke(command, shlex.split(line)[2:], catch_exceptions=False)
    assert outcome.exit_code == 0


def test_changed_rules_print_both_answers(folder: Path, unset: list[Path]) -> None:
    """Average gives 66.5 at QF-A-02, first gives 64: the mean moves, and both stand there."""
    recorded = json.loads(run("--json").stdout)
    outcome = run("--duplicates", "first", "--confidence", "0.9", "--json")
    changed = json.loads(outcome.stdout)
    assert changed["mean"] < recorded["mean"]
    assert {c["rule"] for c in changed["changes_after_results"]} == {"duplicates", "confidence"}
    assert changed["changes_after_results"][0]["mean_recorded"] == recorded["mean"]
    assert "CHANGED AFTER RESULTS" in changed["sentences"][1]
    assert outcome.stderr == ""


def test_the_rule_for_non_detects_may_be_changed_with_both_answers(
    folder: Path, unset: list[Path]
) -> None:
    """One of nine is below its limit: half by choice is the same mean, and no longer a bound."""
    rows = lab_rows(folder)
    write_lab(folder, [[*rows[0][:2], "<60", "mg/kg"], *rows[1:]])
    recorded = json.loads(run("--json").stdout)
    changed = json.loads(run("--non-detects", "substitute-half", "--json").stdout)
    (change,) = changed["changes_after_results"]
    assert (change["recorded"], change["used"]) == ("bounds", "substitute-half")
    assert change["mean_recorded"] == recorded["mean"] == changed["mean"]
    assert (recorded["non_detects_as_bounds"], changed["non_detects_as_bounds"]) == (True, False)
    assert changed["bracket"]["mean_high"] > changed["mean"]


def test_a_method_without_evidence_for_the_design_is_refused_with_the_way_out(
    folder: Path, unset: list[Path]
) -> None:
    """Strata of 4 and 5 results by a method: the sentence names what is missing, exit code 1."""
    rows = lab_rows(folder)
    below = [[*row[:2], "<60" if k < 3 else row[2], "mg/kg"] for k, row in enumerate(rows)]
    write_lab(folder, below)
    said = " ".join(refused("--non-detects", "lognormal-likelihood"))
    assert "needs 3" in said
    assert "--non-detects bounds" in said
    assert not unset


def test_the_json_names_the_sheet_and_the_numbers(folder: Path, unset: list[Path]) -> None:
    """A script reads one object from stdout."""
    content = json.loads(run("--field", "field.csv", "--json").stdout)
    assert content["n"] == 9
    assert content["sheet"].endswith("QF-r01-results-01/results_sheet.html")


def test_explain_shows_the_working(folder: Path, unset: list[Path]) -> None:
    """Steps, planned against achieved, and the coverage of the interval."""
    said = " ".join(run("--explain").stdout.split())
    for part in ("SE = √(Σ W²·s²/n)", "Planned: a standard error of", "This t interval claims"):
        assert part in said


def test_quiet_prints_the_answer_alone(folder: Path, unset: list[Path]) -> None:
    """Nothing on stderr."""
    assert run("--quiet").stderr == ""


def test_results_are_written_beside_the_packet_or_where_asked(
    folder: Path, unset: list[Path]
) -> None:
    """The packet itself never changes."""
    run()
    run("--out", "elsewhere")
    assert unset == [Path("QF-r01-results-01"), Path("elsewhere/QF-r01-results-02")]


def test_a_folder_that_is_no_packet_is_named(folder: Path) -> None:
    """The remedy names what a packet looks like."""
    with pytest.raises(FieldplanError, match="is not a packet"):
        command_runner().invoke(command, ["nowhere", "labs.csv"], catch_exceptions=False)


@pytest.fixture
def both(folder: Path) -> Path:
    """The same packet for lead and zinc, with zinc's rows below those of lead."""
    plan = plan_with_zinc()
    record = json.dumps(plan_to_record(plan))
    (folder / "QF-r01" / "office" / "record.json").write_text(record, encoding="utf-8")
    lead = lab_rows(folder)
    zinc = [
        [name, "Zinc", cell if "<" in cell else f"{cell}.5", "ug/g"] for name, _, cell, _ in lead
    ]
    write_lab(folder, [*lead, *zinc])
    return folder


def test_the_deciding_analyte_comes_in_full_and_each_other_in_a_sentence(
    both: Path, unset: list[Path]
) -> None:
    """One file, one command, nothing left out."""
    outcome = run("--field", "field.csv")
    said = outcome.stdout
    assert said.startswith("The mean of Lead over Quarry Field is ")
    assert said.count("The mean of Zinc over Quarry Field is ") == 1
    assert said.index("Zinc") > said.index("the action level of 150")
    assert "Lead: 11 of 11 laboratory rows matched." in outcome.stderr
    assert "Zinc: 11 of 11 laboratory rows matched." in outcome.stderr
    content = json.loads(run("--field", "field.csv", "--json").stdout)
    assert [content["analyte"], *(o["analyte"] for o in content["others"])] == ["lead", "zinc"]


def test_one_analyte_can_be_asked_for_by_id_or_name(both: Path, unset: list[Path]) -> None:
    """The answer is the one that stands beside the deciding analyte's, in full."""
    beside = json.loads(run("--json").stdout)["others"][0]
    for word in ("zinc", "ZINC", "Zinc"):
        alone = json.loads(run("--analyte", word, "--json").stdout)
        assert {key: alone[key] for key in beside} == beside
        assert alone["others"] == []
    assert "Lead" not in run("--analyte", "zinc", "--quiet").stdout


@pytest.mark.parametrize(
    ("word", "hint"), [("zink", "Did you mean zinc?"), ("led", "Did you mean lead?"), ("x", "")]
)
def test_an_unknown_analyte_is_answered_with_what_is_near(
    both: Path, unset: list[Path], word: str, hint: str
) -> None:
    """Exit code 2, and nothing is written."""
    outcome = run("--analyte", word)
    assert outcome.exit_code == 2
    said = " ".join(outcome.stderr.split())
    assert f"'{word}' is no analyte of QF-r01; it has lead, zinc." in said
    assert hint in said
    assert ("Did you mean" in said) == bool(hint)
    assert unset == []


def test_a_missing_analyte_is_said_and_a_faulty_one_stops_everything(
    both: Path, unset: list[Path]
) -> None:
    """Missing is a fact about the laboratory; a fault is one about the file."""
    rows = lab_rows(both)
    write_lab(both, rows[:11])
    said = " ".join(run("--quiet").stdout.split())
    assert "No mean of Zinc is given: labs.csv has no result of it that counts." in said
    rows[12][3] = "ppm"
    write_lab(both, rows)
    lines = refused()
    assert [line.split(":")[0] for line in lines] == ["labs.csv row 14"]
    assert len(unset) == 1


def test_a_retyped_jar_is_asked_once_and_its_answer_serves_both(
    both: Path, unset: list[Path]
) -> None:
    """One label, two rows, one question."""
    rows = lab_rows(both)
    rows[0][0] = rows[11][0] = "qf 731"
    write_lab(both, rows)
    lines = refused()
    assert lines[:2] == (
        "Lead: 10 of 11 laboratory rows matched; 1 needs you.",
        "Zinc: 10 of 11 laboratory rows matched; 1 needs you.",
    )
    assert len([line for line in lines if line.startswith("  row ")]) == 1
    path = both / "matches.csv"
    answered = path.read_text(encoding="utf-8-sig").replace('letters",', 'letters",yes')
    path.write_text(answered, encoding="utf-8", newline="")
    outcome = run("--matches", "matches.csv")
    assert "Zinc: 11 of 11 laboratory rows matched." in outcome.stderr


def test_a_changed_rule_for_duplicates_reaches_every_analyte(both: Path, unset: list[Path]) -> None:
    """QF-A-02 has two results of each; first and average differ for both."""
    recorded, changed = (
        json.loads(run(*words, "--json").stdout) for words in ((), ("--duplicates", "first"))
    )
    assert changed["others"][0]["mean"] < recorded["others"][0]["mean"]
    assert changed["others"][0]["changes_after_results"]
    assert "CHANGED AFTER RESULTS, Zinc: " in changed["other_sentences"][1]
