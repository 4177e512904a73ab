"""Laboratory files read whole: columns, analytes, units, basis, roles, and every fault at once."""

import csv
import io
import json
import random
import shlex
import tomllib
from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from fieldplan.base.errors import FieldplanError, LabError
from fieldplan.campaign.model import Analyte, Sigma
from fieldplan.lab import read_lab
from fieldplan.lab.model import LabTable
from fieldplan.stats.summary import sample_mean, sample_sd
from tests.factories import make_campaign

HEAD = "location_id,analyte,as_reported,unit"
Reader = Callable[..., LabTable]
REFERENCE = Path(__file__).parents[2] / "reference" / "values.csv"


def problems_of(read: Reader, content: str | bytes, **options: object) -> tuple[str, ...]:
    """Read a file that must be refused; give the lines."""
    with pytest.raises(LabError) as caught:
        read(content, **options)
    return caught.value.problems


def test_results_are_converted_and_the_cell_is_kept(read: Reader) -> None:
    """12000 µg/kg is 12 mg/kg; the laboratory's own text stays beside it, and it is said."""
    table = read(f"{HEAD}\nA,Lead,12000,µg/kg\nB,lead,<5000,ug/kg\n")
    first, second = table.rows
    assert (first.result, first.unit, first.as_reported) == (12.0, "mg/kg", "12000")
    assert (second.result, second.reporting_limit, second.detected) == (None, 5.0, False)
    assert table.notes == ("labs.csv: converted from ug/kg to mg/kg and µg/kg to mg/kg.",)


def test_ids_that_look_like_numbers_or_nothing_stay_text(read: Reader) -> None:
    """1e5, 007, NA and 3-5 are names of wells; a reader of tables turns them into something."""
    ids = ["1e5", "007", "NA", "3-5", "None", "73928e03", "TRUE", "1_000"]
    table = read(HEAD + "\n" + "".join(f"{name},lead,1,mg/kg\n" for name in ids))
    assert [row.location_id for row in table.rows] == ids
    assert table.notes == ()


def test_ids_that_a_spreadsheet_may_have_changed_are_named(read: Reader) -> None:
    """The wells 2-5 and MAY-02 both come out as 2-May; the labels on the jars still tell them."""
    ids = ["1.00E+05", "2-May", "02-Mai-26", "Mar-01", "01/05/2026", "01.05.2026", "2026-05-01"]
    for name in ids:
        (note,) = read(f"{HEAD}\nA,lead,1,mg/kg\n{name},lead,1,mg/kg\n").notes
        assert f"turned ids into dates or numbers: '{name}' (row 3)." in note


def test_a_limit_comes_from_its_column_in_its_own_unit(read: Reader) -> None:
    """A limit in µg/kg beside a result in mg/kg is one of the usual traps."""
    table = read(
        f"{HEAD},reporting_limit,reporting_limit_unit\nA,lead,ND,mg/kg,500,ug/kg\n"
        "B,lead,ND,mg/kg,0.5,\n"
    )
    assert [row.reporting_limit for row in table.rows] == [0.5, 0.5]


def test_a_limit_in_the_cell_wins_and_is_said(read: Reader) -> None:
    """A dilution raises the limit of one sample; the cell is what the laboratory says of it."""
    table = read(f"{HEAD},reporting_limit\nA,lead,<5,mg/kg,0.5\n")
    assert table.rows[0].reporting_limit == 5.0
    assert "row 2" in table.notes[0]


def test_a_qualifier_column_makes_non_detects_and_drops_rejected_rows(read: Reader) -> None:
    """U: not detected at the number stated. R: not usable, whatever the cell holds."""
    table = read(
        f"{HEAD},qualifier_lab\nA,lead,0.5,mg/kg,U\nB,lead,7,mg/kg,J\nC,lead,,mg/kg,R\n"
        "D,lead,9 R,mg/kg,\n"
    )
    assert [(r.location_id, r.result, r.reporting_limit) for r in table.rows] == [
        ("A", None, 0.5),
        ("B", 7.0, None),
    ]
    assert "Lead left out, rejected by the laboratory, qualifier R: " in table.notes[0]
    assert "'C' with '' (row 4) and 'D' with '9 R' (row 5)." in table.notes[0]
    assert [(row.location_id, row.result) for row in table.rejected] == [("D", 9.0)]
    assert [(row.row, row.as_reported) for row in table.left_out] == [(4, ""), (5, "9 R")]


def test_rows_of_analytes_that_nobody_asked_for_are_kept_with_their_values(read: Reader) -> None:
    """A jar of the plan may stand there under another analyte's name; the reader must see it."""
    table = read(f"{HEAD}\nA,lead,1,mg/kg\nA,Lead leachable,640,mg/kg\n")
    assert [row.as_reported for row in table.rows] == ["1"]
    (left,) = table.left_out
    assert (left.row, left.written_id, left.analyte) == (3, "A", "Lead leachable")
    assert left.as_reported == "640"


def test_every_fault_is_said_at_once_with_row_value_and_remedy(read: Reader) -> None:
    """One run must be enough to mend a file."""
    lines = problems_of(
        read,
        f"{HEAD},role,latitude\nA,lead,0,mg/kg,feild sample,95\n,lead,12,,,\nC,,7,mg/kg,,\n",
    )
    assert lines == (
        "labs.csv row 2: as_reported '0' is zero, which no laboratory can measure. Type ND with "
        "a reporting_limit if nothing was detected.",
        "labs.csv row 2: role 'feild sample' is not known; did you mean 'field sample'?",
        "labs.csv row 2: latitude '95' must be decimal degrees from -90 to 90, such as 52.1.",
        "labs.csv row 3: location_id '' and sample_id are blank. Fill in one of them.",
        "labs.csv row 3: unit '' is blank. Type the unit; mg/kg is planned.",
        "labs.csv row 4: analyte '' is blank. Fill it in, or delete the row if it is a footer.",
    )


@pytest.mark.parametrize(
    ("cells", "says"),
    [
        ("A,lead,12,mg/L", "cannot be turned into the campaign's mg/kg"),
        ("A,lead,12,ppm", "can mean several things"),
        ("A,lead,12,%", "can mean several things"),
        ("A,lead,12,�g/kg", "lost a character"),
        ("A,lead,12,æg/kg", "lost a character"),
        ("A,lead,ND,mg/kg", "is a non-detect with no number"),
        ("A,lead,<,mg/kg", "is a non-detect with no number"),
        ("A,lead,1e29,g/kg", "outside 1e-30 to 1e30"),
    ],
)
def test_a_unit_or_limit_that_needs_a_guess_is_refused(read: Reader, cells: str, says: str) -> None:
    """A factor of 1000, or the water in the soil, is not guessed."""
    (line,) = problems_of(read, f"{HEAD}\n{cells}\n")
    assert line.startswith("labs.csv row 2: ")
    assert says in line


def test_another_fraction_or_a_mixture_of_bases_is_refused(
    lab_file: Callable[[str], Path],
) -> None:
    """Dissolved is not total; and wet beside dry cannot be averaged."""
    analyte = Analyte(id="zinc", unit="ug/L", fraction="dissolved")
    campaign = make_campaign(analyte=(analyte, make_campaign().analyte[0]))
    path = lab_file(f"{HEAD},fraction\nA,zinc,3,ug/L,Total\n")
    with pytest.raises(LabError, match="means total, the campaign dissolved"):
        read_lab(path, campaign)
    path = lab_file(f"{HEAD}\nA,lead,12,mg/kg ww\n")
    with pytest.raises(LabError, match="means wet weight, the campaign dry weight"):
        read_lab(path, make_campaign())
    open_basis = make_campaign(analyte=(Analyte(id="lead", unit="mg/kg"),))
    path = lab_file(f"{HEAD},basis\nA,lead,3,mg/kg,dry\nB,lead,3,mg/kg,W\n")
    with pytest.raises(LabError, match="mixes dry weight and wet weight"):
        read_lab(path, open_basis)


def test_a_basis_that_is_not_said_is_taken_as_planned_and_noted(lab_file) -> None:
    """mg/kg where dry weight is planned: results as received are lower, and nobody would know."""
    campaign = make_campaign()
    zinc = campaign.analyte[0].model_copy(update={"id": "zinc", "name": "Zinc"})
    campaign = campaign.model_copy(update={"analyte": (*campaign.analyte, zinc)})
    said = lab_file(f"{HEAD},basis\nA,lead,1,mg/kg dw,\nB,lead,2,mg/kg,dry\n")
    assert read_lab(said, campaign).notes == ()
    some = lab_file(f"{HEAD}\nA,lead,1,mg/kg dw\nB,lead,2,mg/kg\nB,zinc,3,mg/kg\n")
    assert read_lab(some, campaign).notes == (
        "labs.csv: 2 rows (3 and 4) of Lead and Zinc name no basis; dry weight was taken, as "
        "planned. Ask the laboratory where its report does not say so elsewhere.",
    )
    many = lab_file(f"{HEAD}\n" + "".join(f"A{k},lead,{k},mg/kg\n" for k in range(1, 9)))
    assert read_lab(many, campaign).notes[0].startswith("labs.csv: 8 rows of Lead name no basis; ")
    open_basis = make_campaign(analyte=(Analyte(id="lead", unit="mg/kg"),))
    assert read_lab(many, open_basis).notes == ()


def test_all_missing_columns_are_named_with_one_line_that_maps_them(read: Reader) -> None:
    """Five options typed one by one after five refusals is not how a day should go."""
    lines = problems_of(read, "Station,Parameter,Result,UOM,LOR,Flag\nA,lead,1,mg/kg,5,\n")
    assert lines[1] == "labs.csv has no column 'as_reported'; is it 'Result'?"
    assert len(lines) == 5
    line = lines[-1]
    assert line.startswith('If so, add to the command: --column "analyte=Parameter" --column ')
    typed = dict(pair.split("=") for pair in shlex.split(line.partition(": ")[2])[1::2])
    assert typed["reporting_limit"] == "LOR"
    assert len(
        read("Station,Parameter,Result,UOM,LOR,Flag\nA,lead,1,mg/kg,5,\n", columns=typed).rows
    )


def test_a_title_that_cannot_be_guessed_is_left_to_be_looked_up(read: Reader) -> None:
    """A column is never guessed from what stands in it."""
    lines = problems_of(read, "Station,Stoff,Result,UOM\nA,lead,1,mg/kg\n")
    assert "has no column 'analyte'; its columns are 'Station', 'Stoff', " in lines[0]
    assert lines[-1].startswith("Add what is missing; where it has another name, add to the ")
    assert '"analyte=…" --column "as_reported=Result"' in lines[-1]


def test_the_columns_of_a_pilot_are_named_in_the_campaign_file(lab_file) -> None:
    """No option of check, size or pack could say it."""
    path = lab_file("Well,Parameter,Result,unit\nA,lead,1,mg/kg\n")
    with pytest.raises(LabError) as caught:
        read_lab(path, make_campaign(), columns={"location_id": "Well"}, of_pilot=True)
    line = caught.value.problems[-1]
    assert "--column" not in str(caught.value)
    assert "into the [[sigma]] table of this pilot: columns = { " in line
    table = tomllib.loads(line[line.index("columns = ") :])
    wanted = {"location_id": "Well", "analyte": "Parameter", "as_reported": "Result"}
    assert table == {"columns": wanted}
    assert len(read_lab(path, make_campaign(), columns=wanted, of_pilot=True).rows) == 1


def test_columns_named_for_the_pilot_hold_for_results_that_have_them(lab_file) -> None:
    """The same laboratory writes the same titles; it is said, and what is told now wins."""
    told = {"location_id": "Well", "analyte": "Parameter", "as_reported": "Result"}
    pilot = Sigma(analyte="lead", pilot="pilot.csv", columns=told)
    campaign = make_campaign(sigma=(pilot,))
    path = lab_file("Well,Parameter,Result,Result 2,unit\nA,lead,1,2,mg/kg dw\n")
    table = read_lab(path, campaign)
    assert table.rows[0].result == 1.0
    assert table.notes == (
        "labs.csv: columns were read as the campaign file says of the pilot: 'Well' as "
        "location_id, 'Parameter' as analyte and 'Result' as as_reported.",
    )
    again = read_lab(path, campaign, columns={"as_reported": "Result 2"})
    assert again.rows[0].result == 2.0
    assert "'Result' as as_reported" not in again.notes[0]
    other = lab_file(f"{HEAD}\nA,lead,3,mg/kg dw\n")
    assert read_lab(other, campaign).notes == ()
    two = make_campaign(sigma=(pilot, pilot.model_copy(update={"columns": {"analyte": "Stoff"}})))
    both = lab_file("Well,Parameter,Stoff,Result,unit\nA,lead,zinc,1,mg/kg\n")
    with pytest.raises(LabError, match="no column 'analyte'"):
        read_lab(both, two)


def test_a_column_map_renames_and_is_itself_checked(read: Reader) -> None:
    """A wrong name in the map is found, with the nearest one offered."""
    content = "Station,analyte,Result,unit\nA,lead,1,mg/kg\n"
    table = read(content, columns={"location_id": "Station", "as_reported": "result"})
    assert (table.rows[0].location_id, table.rows[0].result) == ("A", 1.0)
    lines = problems_of(read, content, columns={"as_reportd": "Result", "location_id": "Statoin"})
    assert "did you mean 'as_reported'?" in lines[0]
    assert "did you mean 'Station'?" in lines[1]


def test_a_doubled_column_is_pointed_out(read: Reader) -> None:
    """Two units columns cannot both be right."""
    assert "2 columns 'unit'" in problems_of(read, f"{HEAD},unit\nA,lead,1,mg/kg,ug/kg\n")[0]


def test_rows_of_other_analytes_are_counted_and_a_near_name_is_offered(read: Reader) -> None:
    """A report holds forty metals; one planned analyte must be found by its own name."""
    table = read(f"{HEAD}\nA,lead,1,mg/kg\nA,zinc,2,mg/kg\nB,zinc,2,mg/kg\n")
    assert len(table.rows) == 1
    assert table.notes == ("labs.csv: 2 rows of other analytes not read (zinc).",)
    (line,) = problems_of(read, f"{HEAD}\nA,lead (total),1,mg/kg\n")
    assert "Add 'lead (total)' to laboratory_names" in line


def test_decimal_commas_are_read_in_semicolon_files_and_said(read: Reader) -> None:
    """Where semicolons part cells and no number has a point, commas are decimal."""
    table = read(
        f"{HEAD};reporting_limit".replace(",", ";") + "\nA;lead;8,6;mg/kg;\nB;lead;ND;mg/kg;0,5\n"
    )
    assert [row.result or row.reporting_limit for row in table.rows] == [8.6, 0.5]
    assert table.notes == ("labs.csv: commas were read as decimal commas.",)
    mixed = HEAD.replace(",", ";") + "\nA;lead;8,6;mg/kg\nB;lead;7.1;mg/kg\n"
    (line,) = problems_of(read, mixed)
    assert "row 2: as_reported '8,6' has a comma" in line


def test_a_file_without_rows_or_with_all_rejected_is_refused(read: Reader) -> None:
    """An empty answer is no answer."""
    assert "has a header but no rows" in problems_of(read, f"{HEAD}\n")[0]
    content = f"{HEAD},qualifier_lab\nA,lead,1,mg/kg,R\n"
    assert "every result of lead is rejected" in problems_of(read, content)[0]


def reference_rows() -> dict[str, dict[str, str]]:
    """Read the published values by their id."""
    with REFERENCE.open(encoding="utf-8", newline="") as stream:
        return {row["id"]: row for row in csv.DictReader(stream)}


@pytest.mark.parametrize(
    ("kind", "mean_row", "sd_row"),
    [(1, "A13-020", "A13-021"), (2, "A13-022", "A13-023"), (3, "A13-024", "A13-025")],
)
def test_mean_and_sd_reach_the_certified_digits(
    read: Reader, kind: int, mean_row: str, sd_row: str
) -> None:
    """NIST StRD NumAcc1 to 3, generated by definition and read through a file of text.

    NumAcc1: 10000001, 10000003, 10000002. NumAcc2 and 3: one middle value, then 500 pairs of
    middle − 0.1 and middle + 0.1, with 1.2 and 1000000.2 in the middle. Certified values as in
    tests/reference/values.csv.
    """
    values = {
        1: ["10000001", "10000003", "10000002"],
        2: ["1.2", *["1.1", "1.3"] * 500],
        3: ["1000000.2", *["1000000.1", "1000000.3"] * 500],
    }[kind]
    lines = (f"P{number},lead,{value},mg/kg\n" for number, value in enumerate(values))
    table = read(f"{HEAD}\n" + "".join(lines))
    results = [row.result for row in table.rows if row.result is not None]
    rows = reference_rows()
    assert sample_mean(results) == pytest.approx(float(rows[mean_row]["published_num"]), rel=1e-14)
    certified = float(rows[sd_row]["published_num"])
    assert sample_sd(results) == pytest.approx(certified, rel=1e-9)


def test_the_hardest_certified_set_keeps_eight_digits(read: Reader) -> None:
    """NIST StRD NumAcc4 (from memory): 10000000.2 in the middle, certified SD 0.1.

    The values themselves are rounded to 1.9e-9 when stored, hence 8 digits and not more.
    """
    values = ["10000000.2", *["10000000.1", "10000000.3"] * 500]
    lines = (f"P{number},lead,{value},mg/kg\n" for number, value in enumerate(values))
    results = [row.result for row in read(f"{HEAD}\n" + "".join(lines)).rows if row.result]
    assert sample_sd(results) == pytest.approx(0.1, rel=5e-8)
    assert sample_mean(results) == pytest.approx(10000000.2, rel=1e-15)


def test_a_published_data_set_keeps_its_mean(read: Reader) -> None:
    """Copper in flour, 24 results, mean 4.28: Analytical Methods Committee 1989 (A13-031)."""
    row = reference_rows()["A13-031"]
    values = json.loads(row["inputs"])["x"]
    lines = "".join(f"P{i},lead,{value},mg/kg\n" for i, value in enumerate(values))
    results = [r.result for r in read(f"{HEAD}\n{lines}").rows if r.result is not None]
    assert sample_mean(results) == pytest.approx(float(row["exact"]), rel=1e-14)


@settings(
    max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(st.lists(st.lists(st.text(max_size=8), min_size=1, max_size=6), max_size=6))
def test_any_table_is_read_or_refused_in_words(
    lab_file: Callable[[bytes], Path], rows: list[list[str]]
) -> None:
    """A file from anywhere gives results or a FieldplanError, never a traceback."""
    text = io.StringIO(newline="")
    csv.writer(text).writerows([HEAD.split(","), *rows])
    path = lab_file(text.getvalue().encode("utf-8", "replace"))
    try:
        table = read_lab(path, make_campaign())
    except FieldplanError as fault:
        assert fault.problems  # noqa: PT017 - both outcomes are right, a third is not
    else:
        assert table.rows


@pytest.mark.parametrize("seed", range(40))
def test_a_damaged_file_is_read_or_refused_in_words(
    lab_file: Callable[..., Path], seed: int
) -> None:
    """Bytes flipped, cut and repeated in CSV and workbook alike."""
    from openpyxl import Workbook

    dice = random.Random(seed)
    workbook, packed = Workbook(), io.BytesIO()
    sheet = workbook.active
    assert sheet is not None
    for row in (HEAD.split(","), ["A", "lead", 12, "mg/kg"], ["B", "lead", "<5", "mg/kg"]):
        sheet.append(row)
    workbook.save(packed)
    text = f"{HEAD}\nA,lead,12,mg/kg\nB,lead,<5,µg/kg\n".encode()
    for content in (bytearray(packed.getvalue()), bytearray(text)):
        for _ in range(dice.randint(1, 8)):
            content[dice.randrange(len(content))] = dice.randrange(256)
        path = lab_file(bytes(content[: dice.randint(1, len(content))]))
        try:
            read_lab(path, make_campaign())
        except FieldplanError as fault:
            assert all(line.strip() for line in fault.problems)  # noqa: PT017
