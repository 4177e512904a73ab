"""Every bad campaign file gets one clear line for each thing that is wrong with it."""

import os
from datetime import date
from pathlib import Path

import pytest

from fieldplan.base.errors import CampaignError
from fieldplan.campaign import read_campaign
from tests.unit.campaign.files import PLAIN, bent, inspected, told


def read(folder: Path, text: str) -> str:
    """Write and read a campaign file; return the message of its error."""
    path = folder / "campaign.toml"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(CampaignError) as raised:
        read_campaign(path)
    assert raised.value.exit_code == 2
    return str(raised.value).replace(str(path), "campaign.toml")


def test_plain_campaign_needs_no_ids_and_gets_its_references(tmp_path):
    """Where there is one of a thing, leaving out its id must not leave a reference empty."""
    path = tmp_path / "campaign.toml"
    path.write_text(PLAIN, encoding="utf-8")
    campaign = read_campaign(path).campaign
    assert campaign.analyte[0].id == "lead"
    assert campaign.design[0].frame == campaign.frame[0].id == "site"
    assert campaign.objective[0].design == campaign.design[0].id == "main"
    assert campaign.objective[0].analyte == campaign.sigma[0].analyte == "lead"
    assert campaign.draw.seed == 12
    assert len([line for line in PLAIN.splitlines() if line]) < 30


@pytest.mark.parametrize("encoding", ["utf-8-sig", "utf-16", "utf-16-le", "utf-16-be", "utf-32"])
def test_byte_order_marks_and_utf_16_are_read(tmp_path, encoding):
    """Windows editors save text so; the reader of TOML alone refuses all of them."""
    path = tmp_path / "campaign.toml"
    path.write_bytes(bent(("Lead", "Blei µg")).encode(encoding))
    whole = read_campaign(path)
    assert whole.campaign.analyte[0].name == "Blei µg"
    assert whole.text.startswith("format")


def test_windows_line_ends_are_read(tmp_path):
    """A file from Windows has them on every line, and messages still count lines."""
    path = tmp_path / "campaign.toml"
    path.write_bytes(bent(("= 6.0", "= -6")).replace("\n", "\r\n").encode())
    assert ":20: objective.standard_error:" in inspected_bytes(path)


def inspected_bytes(path: Path) -> str:
    """Return the first problem of a file as it stands."""
    with pytest.raises(CampaignError) as raised:
        read_campaign(path)
    return raised.value.problems[0]


def test_dates_stand_without_quotes(tmp_path):
    """TOML has dates of its own."""
    text = bent(('id = "QF"', 'id = "QF"\nprepared_on = 2026-11-02'))
    campaign = inspected(tmp_path, text).campaign
    assert campaign is not None
    assert campaign.campaign.plan.prepared_on == date(2026, 11, 2)


def test_whole_numbers_serve_as_numbers(tmp_path):
    """Nobody types 6.0 where 6 is meant."""
    campaign = inspected(tmp_path, bent(("6.0", "6"))).campaign
    assert campaign is not None
    assert campaign.campaign.objective[0].standard_error == 6.0


SYNTAX = [
    (
        ('"boundary.geojson"', r'"C:\data\boundary.geojson"'),
        "campaign.toml:13: boundary = \"C:\\data\\boundary.geojson\": unescaped '\\' in a string. "
        'Write / between folders, or put the text in single quotes: a \\ in " is special.',
    ),
    (
        ('"boundary.geojson"', r'"C:\Users\b.geojson"'),
        'campaign.toml:13: boundary = "C:\\Users\\b.geojson": invalid hex value. '
        'Write / between folders, or put the text in single quotes: a \\ in " is special.',
    ),
    (
        ('"Lead"', "“Lead”"),
        "campaign.toml:8: name = “Lead”: invalid value. "
        "The quotes are curly: type straight ones, \" or '.",
    ),
    (
        ("6.0", "6,5"),
        "campaign.toml:20: standard_error = 6,5: expected newline or end of document after a "
        "statement. Numbers take a point, not a comma: write 6.5.",
    ),
    (
        ('"Lead"', "Lead"),
        "campaign.toml:8: name = Lead: invalid value. Put text between straight double quotes.",
    ),
    (
        ("6.0", "6 mg/kg"),
        "campaign.toml:20: standard_error = 6 mg/kg: expected newline or end of document after a "
        "statement. Write the number alone; the unit is in the key or belongs to the laboratory.",
    ),
    (
        ("0.80", "80 %"),
        "campaign.toml:21: assurance = 80 %: expected newline or end of document after a "
        "statement. Write a share as a number between 0 and 1: 0.10 for 10 %.",
    ),
    (
        ('id = "QF"', 'id = "QF"\nprepared_on = 02.11.2026'),
        "campaign.toml:5: prepared_on = 02.11.2026: expected newline or end of document after a "
        "statement. Write dates as year-month-day, such as 2026-11-02.",
    ),
    (
        ("6.0", "12 000"),
        "campaign.toml:20: standard_error = 12 000: expected newline or end of document after a "
        "statement. Write the number without spaces between its digits.",
    ),
    (
        ('kind = "area"', 'kind = "area"\nboundary_assumed = True'),
        "campaign.toml:13: boundary_assumed = True: invalid value. "
        "Write true or false, in small letters.",
    ),
    (
        ("seed = 12", "seed ="),
        "campaign.toml:28: seed =: invalid value. "
        'Write a value after the sign, or "FILL IN" where it is not known yet.',
    ),
    (
        ("seed = 12", "seed = 12\nseed = 13"),
        "campaign.toml:29: seed = 13: cannot overwrite a value. "
        "The key stands twice: keep one of the two.",
    ),
]


@pytest.mark.parametrize(("change", "message"), SYNTAX, ids=[case[0][1] for case in SYNTAX])
def test_text_that_is_no_toml_gets_its_own_remedy(tmp_path, change, message):
    """The parser's own words name a place but seldom what to do."""
    assert read(tmp_path, bent(change)) == message


def test_several_faulty_lines_are_told_at_once(tmp_path):
    """Nobody should have to run the command once for each of them."""
    text = bent(("6.0", "6,5"), ('"Lead"', "Lead"), ("seed = 12", "seed = 1O"))
    assert [line.split(": ")[0] for line in read(tmp_path, text).splitlines()] == [
        "campaign.toml:8",
        "campaign.toml:20",
        "campaign.toml:28",
    ]


def test_same_single_table_twice_is_explained(tmp_path):
    """Two [analyte] tables are how a newcomer writes a list."""
    text = PLAIN.replace("[[analyte]]", "[analyte]") + '\n[analyte]\nname = "Zinc"\n'
    assert read(tmp_path, text) == (
        "campaign.toml:30: [analyte]: cannot declare ('analyte',) twice. Write [[analyte]] in "
        "double brackets at every table of that name, or join them."
    )


UNREADABLE = [
    (b"", "the file is empty. Run 'fieldplan new' to write a campaign file."),
    (b" \n\n", "the file is empty. Run 'fieldplan new' to write a campaign file."),
    (
        "format = 1\nunit = 'µg'".encode("cp1252"),
        "2: the file is not UTF-8 text (byte 0xB5). Save it again as UTF-8 in a text editor.",
    ),
    (
        b"a = " + b"[" * 5000 + b"]" * 5000,
        "1: lists or tables are nested too deep to be read. Write them flat.",
    ),
    (b"a = " + b"9" * 5000, "1: a number has thousands of digits. Write it shorter."),
    (b".".join([b"a"] * 3000) + b" = 1", "1: tables are nested more than 8 deep. Write them flat."),
    (b".".join([b"a"] * 30) + b" = 1", "1: tables are nested more than 8 deep. Write them flat."),
    (b"#" * 600_000, "the file is larger than 500,000 bytes, so it is no campaign file. "
     "Name the TOML file that describes the campaign."),
]  # fmt: skip


@pytest.mark.parametrize(("content", "message"), UNREADABLE, ids=range(len(UNREADABLE)))
def test_files_that_cannot_be_read_say_why(tmp_path, content, message):
    """The TOML reader lets RecursionError, ValueError and UnicodeDecodeError through."""
    path = tmp_path / "campaign.toml"
    path.write_bytes(content)
    assert inspected_bytes(path).split(str(path))[1].lstrip(":").strip() == message


def test_missing_file_names_what_comes_near(tmp_path):
    """Most missing files are typing slips."""
    (tmp_path / "campaign.toml").write_text(PLAIN)
    with pytest.raises(CampaignError, match=r"no such file\. Did you mean campaign\.toml\?$"):
        read_campaign(tmp_path / "Campagn.toml")
    with pytest.raises(CampaignError, match=r"no such file\. Run 'fieldplan new' to write one\.$"):
        read_campaign(tmp_path / "nowhere" / "plan.toml")


def test_folder_in_place_of_the_file_lists_what_it_holds(tmp_path):
    """A folder may be dragged onto the terminal."""
    (tmp_path / "campaign.toml").write_text(PLAIN)
    with pytest.raises(
        CampaignError,
        match=r"this is a folder, not a campaign file\. It holds campaign\.toml; name the file",
    ):
        read_campaign(tmp_path)


def test_device_in_place_of_the_file_is_refused_unread():
    """A pipe would keep the reader waiting for ever, and a device may never end."""
    with pytest.raises(CampaignError) as caught:
        read_campaign(Path(os.devnull))
    assert str(caught.value) == (
        f"{os.devnull}: this is no ordinary file (a pipe or a device). Save it as a file and "
        "name that."
    )


VALUES = [
    (
        ('"boundary.geojson"', r'"C:\new\boundary.geojson"'),
        r"13: frame.boundary: file with the outline of the site; the path has control characters, "
        r'as \n and \t become in double quotes (got "C:\new\boundary.geojson"). '
        "Write / between folders, or put it in single quotes.",
    ),
    (
        ('"boundary.geojson"', r"'C:\data\boundary.geojson'"),
        r"13: frame.boundary: file with the outline of the site; the path has backslashes "
        r"(got 'C:\data\boundary.geojson'). Write / between folders on every system: "
        '"C:/data/boundary.geojson".',
    ),
    (
        ('"boundary.geojson"', '" "'),
        "13: frame.boundary: file with the outline of the site; an empty name. "
        'Give the file, such as "boundary.geojson", or "FILL IN".',
    ),
    (
        ("6.0", '"27.5"'),
        "20: objective.standard_error: the largest standard error of the mean, in the analyte's "
        'unit; takes a number above 0 (got "27.5"). Take the quotes off: 27.5.',
    ),
    (
        ("6.0", '"27,5"'),
        "20: objective.standard_error: the largest standard error of the mean, in the analyte's "
        'unit; takes a number above 0 (got "27,5"). Take the quotes off: 27.5.',
    ),
    (
        ("6.0", '"about six"'),
        "20: objective.standard_error: the largest standard error of the mean, in the analyte's "
        'unit; takes a number above 0 (got "about six"). '
        'Write a number without quotes, or "FILL IN".',
    ),
    (
        ("6.0", "-6"),
        "20: objective.standard_error: the largest standard error of the mean, in the analyte's "
        "unit; takes a number above 0 (got -6).",
    ),
    (
        ("6.0", "inf"),
        "20: objective.standard_error: not a finite number (got inf). Write a number.",
    ),
    (
        ("Quarry Field, lead in topsoil", "T" * 100_000),
        "5: plan.title: title printed on every page; takes text in double quotes of at most 2,000 "
        f'letters (got 100,000 letters, "{"T" * 56}...). Shorten it.',
    ),
    (
        ("6.0", "1e200"),
        "20: objective.standard_error: the largest standard error of the mean, in the analyte's "
        "unit; beyond what can be reckoned with, 1e-12 to 1e12 (got 1e+200). Check it and its "
        "unit.",
    ),
    (
        ("6.0", "1e-201"),
        "20: objective.standard_error: the largest standard error of the mean, in the analyte's "
        "unit; beyond what can be reckoned with, 1e-12 to 1e12 (got 1e-201). Check it and its "
        "unit.",
    ),
    (
        ("0.80", "0.9999999999999999"),
        "21: objective.assurance: how sure it shall be that n is enough, though sigma is an "
        "estimate; nearer to 1 than can be reckoned with, 0.999999 (got 0.9999999999999999). "
        "Take a smaller share.",
    ),
    (
        ("[draw]", "[loss]\nby_stratum = {west = 0.99999999999}\n[draw]"),
        "28: loss.by_stratum.west: west; nearer to 1 than can be reckoned with, 0.999999 (got "
        "0.99999999999). Take a smaller share.",
    ),
    (
        ("seed = 12", f"seed = {2**63}"),
        "28: draw.seed: a whole number of 2^63 or more. Write a smaller one.",
    ),
    (
        ("seed = 12", "seed = 0x" + "f" * 9000),
        "28: draw.seed: a whole number of 2^63 or more. Write a smaller one.",
    ),
    (
        ("seed = 12", "seed = 12.5"),
        "28: draw.seed: a whole number; takes a whole number of at least 0 and below 2^63 "
        "(got 12.5).",
    ),
    (
        ("0.80", "80"),
        "21: objective.assurance: how sure it shall be that n is enough, though sigma is an "
        'estimate; takes a number of at least 0.5 and below 1 or "plain" (got 80).',
    ),
    (
        ("assurance = 0.80\n", ""),
        "18: objective.assurance: missing; how sure it shall be that n is enough, though sigma is "
        'an estimate. Takes a number of at least 0.5 and below 1 or "plain"; "FILL IN" while it '
        "is not known.",
    ),
    (
        ('id = "QF"', 'id = "QF"\nprepared_on = "2026-11-02"'),
        "5: plan.prepared_on: the day on which the plan was prepared; a date in quotes "
        '(got "2026-11-02"). Take the quotes off: 2026-11-02.',
    ),
    (
        ('id = "QF"', 'id = "QF"\nprepared_on = 2026-11-02T08:00:00'),
        "5: plan.prepared_on: a time of day (got 2026-11-02 08:00:00). "
        "Write the date alone, such as 2026-11-02.",
    ),
    (
        ('"Lead"', "2026-11-02"),
        "8: analyte.name: a date where none is expected (got 2026-11-02). "
        "Put it in quotes to make it text.",
    ),
    (
        ('"Lead"', r'"Lead\u0007"'),
        r'8: analyte.name: name of the analyte as printed; has control characters (got "Lead\u0007"'
        "). Type it anew.",
    ),
    (
        ("[[analyte]]", "[analyte]"),
        "7: analyte: one table in single brackets; several are possible. Write [[analyte]].",
    ),
    (
        ("[draw]", "[[draw]]"),
        "27: draw: a table in double brackets, which stands once. Write [draw].",
    ),
    (
        ("format = 1", 'format = 1\nqc = "none"'),
        '2: qc: no table (got "none"). Write [[qc]] on a line of its own.',
    ),
    (
        ("[draw]\nseed = 12\n", ""),
        "1: draw: this table is missing. Write [draw] with its keys.",
    ),
    (
        ("title = ", "titel = "),
        '5: plan.titel: unknown key in [plan]. Did you mean "title"?',
    ),
    (
        ("seed = 12", 'seed = 12\nboundary = "b.geojson"'),
        "29: draw.boundary: this key does not belong in [draw]. Write it below [[frame]].",
    ),
    (
        ("format = 1", 'format = 1\nreason = "x"'),
        "2: reason: this key does not belong in the file. Write it below [[frame.exclusion]] or "
        "[[targeted]] or [loss].",
    ),
    (
        ("[[sigma]]", "[[sigmas]]"),
        '24: sigmas: unknown key in the file. Did you mean "sigma"?',
    ),
    (
        ("seed = 12", "seed = 12\nxyzzy = 1"),
        "29: draw.xyzzy: unknown key in [draw]. It takes seed, version.",
    ),
    (
        ('"simple-random"', '"simple-randon"'),
        '16: design.layout: how locations are drawn; takes one of "simple-random", "stratified", '
        '"square-grid", "triangular-grid", "compact-strata", "balanced-list", "even-spacing", '
        '"census" (got "simple-randon"). '
        'Did you mean "simple-random"?',
    ),
    (
        ('id = "QF"', 'id = "Q F"'),
        "4: plan.id: short identifier of the plan; takes up to 35 letters A-Z, digits, points, "
        'hyphens and underscores, a letter or digit first (got "Q F").',
    ),
    (
        ('kind = "area"', 'kind = "area"\nboundary_assumed = "true"'),
        "13: frame.boundary_assumed: whether the outline is a circle or a sketch; takes true or "
        'false (got "true"). Take the quotes off.',
    ),
    (("format = 1", "format = 2"), "1: format: the version of this file format; takes 1 (got 2)."),
]  # fmt: skip


@pytest.mark.parametrize(("change", "message"), VALUES, ids=[str(case[0][1]) for case in VALUES])
def test_value_of_the_wrong_kind_is_told_with_line_key_value_and_remedy(tmp_path, change, message):
    """File, line, key, what it is, what is accepted, what was typed, what to do."""
    problems = told(tmp_path, bent(change))
    assert message in problems


LATER = [
    (('"area"', '"volume"'), '12: frame.kind: "volume" (frames of volumes such as stockpiles'),
    (('"area"', '"time"'), '12: frame.kind: "time" (frames of time such as days of discharge)'),
    (
        ('"simple-random"', '"ranked-set"'),
        '16: design.layout: "ranked-set" (ranked set sampling) is not done yet.',
    ),
    (('"simple-random"', '"ranked-set"'), '16: design.layout: "ranked-set" (ranked set sampling'),
    (('"simple-random"', '"Transect"'), '16: design.layout: "Transect" (transects) is not done'),
    (
        ("[draw]", "[composite]\nof = 4\n[draw]"),
        "27: composite: not done yet in this version (composite samples). Take it out.",
    ),
    (
        ("[draw]", '[[design]]\nid = "b"\nlayout = "square-grid"\n[draw]'),
        "27: design[2]: this version takes one [[design]]; several designs in one campaign are "
        "not done yet. Keep one.",
    ),
    (
        ("[draw]", '[[frame]]\nid = "b"\nkind = "area"\nboundary = "b.geojson"\n[draw]'),
        "27: frame[2]: this version takes one [[frame]]; several frames in one campaign are not",
    ),
    (
        ("[draw]", '[[event]]\nid = "a"\n[[event]]\nid = "b"\n[draw]'),
        "29: event[2]: this version takes one [[event]]; several rounds of field work in one",
    ),
]


@pytest.mark.parametrize(("change", "start"), LATER, ids=[case[0][1] for case in LATER])
def test_what_this_version_cannot_do_is_refused_by_name(tmp_path, change, start):
    """An unknown key would send the reader looking for a typing slip."""
    problems = told(tmp_path, bent(change))
    assert [problem for problem in problems if problem.startswith(start)]


def test_all_problems_are_told_at_once_in_the_order_of_the_file(tmp_path):
    """One run, one list."""
    text = bent(
        ('id = "QF"', 'id = "Q F"'),
        ("title =", "titel ="),
        ("6.0", '"6"'),
        ("seed = 12", "seed = -1"),
        ('"area"', '"volume"'),
    )
    assert [problem.split(": ")[:2] for problem in told(tmp_path, text)] == [
        ["3", "plan.title"],
        ["4", "plan.id"],
        ["5", "plan.titel"],
        ["12", "frame.kind"],
        ["20", "objective.standard_error"],
        ["28", "draw.seed"],
    ]


def test_lines_count_through_lists_of_tables_and_long_texts(tmp_path):
    """The second of several tables must not be blamed on the first."""
    text = bent(
        (
            "[[frame]]",
            '[[analyte]]\nid = "zinc"\nname = """\nZinc,\nas Zn"""\n'
            'laboratory_names = [\n  "Zn",\n  "Zinc",\n]\nunit = 3\n\n[[frame]]',
        ),
        ('name = "Lead"', 'id = "lead"'),
        ("pilot =", 'analyte = "zync"\npilot ='),
        ("standard_error", 'analyte = "zinc"\nstandard_error'),
    )
    problems = told(tmp_path, text)
    assert problems[0].startswith("20: analyte[2].unit: the laboratory's unit, such as mg/kg; ")
    assert problems[1] == (
        '37: sigma.analyte: no [[analyte]] has the id "zync"; there is lead, zinc. '
        'Did you mean "zinc"?'
    )


def test_fill_in_is_listed_by_line_and_key_and_nothing_else_is_told(tmp_path):
    """Not to know is always an answer, for a number as for a text, in any letters."""
    text = bent(
        ("6.0", '"FILL IN"'),
        ("12\n", '"fill in"\n'),
        ('"pilot.csv"', '"Fill  In"'),
        ('"QF"', '"FILL-IN"'),
    )
    found = inspected(tmp_path, text)
    assert found.problems == ()
    assert found.campaign is None
    assert [(entry.line, entry.key) for entry in found.fill_in] == [
        (4, "plan.id"),
        (20, "objective.standard_error"),
        (25, "sigma.pilot"),
        (28, "draw.seed"),
    ]
    assert read(tmp_path, text).splitlines()[1] == (
        "campaign.toml:20: objective.standard_error: still to fill in: the largest standard error "
        "of the mean, in the analyte's unit."
    )


def test_problems_and_what_is_to_fill_in_are_told_together(tmp_path):
    """What is open must not hide what is wrong."""
    found = inspected(tmp_path, bent(("6.0", '"FILL IN"'), ("seed = 12", "seed = -1")))
    assert len(found.problems) == len(found.fill_in) == 1
