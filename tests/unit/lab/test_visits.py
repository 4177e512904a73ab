"""Days of collection: read, told apart, and kept with the values of a pilot."""

from collections.abc import Callable
from datetime import date, datetime
from pathlib import Path

import openpyxl
import pytest

from fieldplan.base.errors import LabError
from fieldplan.campaign.model import Sigma
from fieldplan.lab import read_lab
from fieldplan.lab.model import LabTable, StratumSpread, VisitCorrelation
from fieldplan.lab.pilot import measured_spread, pilot_locations
from fieldplan.lab.visits import declared_visits
from tests.factories import make_campaign

HEADER = "location_id,analyte,as_reported,unit,collected_on,role\n"
Reader = Callable[..., LabTable]


@pytest.fixture
def read(lab_file: Callable[[str], Path]) -> Reader:
    """Write a file and read it as a pilot; lead has no basis."""
    lead = make_campaign().analyte[0].model_copy(update={"basis": ""})
    campaign = make_campaign(analyte=(lead,))
    return lambda content: read_lab(lab_file(content), campaign, of_pilot=True)


def test_the_day_is_read_and_a_time_behind_it_passed_over(read: Reader) -> None:
    """Year, month, day; a blank is no day."""
    table = read(
        HEADER + "A,lead,8,mg/kg,2026-05-04,\nB,lead,9,mg/kg,2026-05-05T08:30,\nC,lead,7,mg/kg,,\n"
    )
    assert [row.collected_on for row in table.rows] == [date(2026, 5, 4), date(2026, 5, 5), None]


@pytest.mark.parametrize("written", ["04/05/2026", "5 May 2026", "2026-02-30", "20260504", "46143"])
def test_a_day_in_another_order_is_refused_with_its_row(read: Reader, written: str) -> None:
    """4 May and 5 April look alike; nobody may guess."""
    with pytest.raises(LabError) as caught:
        read(HEADER + f"A,lead,8,mg/kg,{written},\n")
    assert list(caught.value.problems) == [
        f"labs.csv row 2: collected_on '{written}' must be year, month and day with hyphens, such "
        "as 2026-05-04."
    ]


def test_a_date_cell_of_a_workbook_is_a_day_here_and_a_fault_elsewhere(tmp_path: Path) -> None:
    """A spreadsheet keeps days as dates; an id that became a date has lost what it was."""
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    sheet.append(["location_id", "analyte", "as_reported", "unit", "collected_on"])
    sheet.append(["A", "lead", 8, "mg/kg", datetime(2026, 5, 4)])
    book.save(tmp_path / "labs.xlsx")
    lead = make_campaign().analyte[0].model_copy(update={"basis": ""})
    campaign = make_campaign(analyte=(lead,))
    assert read_lab(tmp_path / "labs.xlsx", campaign, of_pilot=True).rows[0].collected_on == date(
        2026, 5, 4
    )
    sheet["A2"] = datetime(2026, 5, 4)
    book.save(tmp_path / "labs.xlsx")
    with pytest.raises(LabError, match="location_id: cell A2 is a date"):
        read_lab(tmp_path / "labs.xlsx", campaign, of_pilot=True)


def test_visits_to_one_place_count_one_by_one(read: Reader) -> None:
    """Three days at one weir are three results, and a duplicate of one day adds none."""
    table = read(
        HEADER + "weir,lead,8,mg/kg,2026-05-04,\nweir,lead,10,mg/kg,2026-06-02,\n"
        "weir,lead,9,mg/kg,2026-07-01,\nweir,lead,11,mg/kg,2026-07-01,field duplicate\n"
    )
    places, _ = pilot_locations(table, "lead", duplicates="average")
    assert [place.location_id for place in places] == [
        "weir 2026-05-04",
        "weir 2026-06-02",
        "weir 2026-07-01",
    ]
    assert [place.half for place in places] == [8.0, 10.0, 10.0]
    entry = measured_spread(places, "lead", "site")
    assert entry.days == (date(2026, 5, 4), date(2026, 6, 2), date(2026, 7, 1))
    assert entry.positions == (None, None, None)


@pytest.mark.parametrize(
    "rows",
    [
        "A,lead,8,mg/kg,2026-05-04,\nA,lead,10,mg/kg,2026-06-02,\nB,lead,9,mg/kg,2026-05-04,\n",
        "A,lead,8,mg/kg,2026-05-04,\nA,lead,10,mg/kg,2026-05-04,\n",
        "A,lead,8,mg/kg,2026-05-04,\nA,lead,10,mg/kg,,\n",
    ],
)
def test_two_results_of_one_of_several_places_stay_a_question(read: Reader, rows: str) -> None:
    """A mean over places takes one result a place; nor can one day tell two results apart."""
    with pytest.raises(LabError, match="has a second result"):
        pilot_locations(read(HEADER + rows), "lead", duplicates="average")


def test_positions_stay_beside_their_values(read: Reader) -> None:
    """Latitude before longitude, in the order of the values."""
    table = read(
        "location_id,analyte,as_reported,unit,latitude,longitude\n"
        "A,lead,8,mg/kg,52.1,-1.9\nB,lead,12,mg/kg,,\n"
    )
    places, _ = pilot_locations(table, "lead", duplicates="average")
    entry = measured_spread(places, "lead", "site")
    assert entry.values == (8.0, 12.0)
    assert entry.positions == ((52.1, -1.9), None)


def test_a_stratum_takes_its_own_correlation_before_that_of_the_site() -> None:
    """As for every other key of [[sigma]]; another analyte's is none of it."""
    typed = {"value": 6.0, "source": "x", "analyte": "lead"}
    campaign = make_campaign(
        sigma=(
            Sigma(**typed, stratum="yard", correlation_between_visits=0.2),
            Sigma(**typed, correlation_between_visits=0.5, correlation_days=30.0,
                  visit_spacing_days=60.0),
            Sigma(value=6.0, source="x", analyte="zinc", correlation_between_visits=0.9),
        )
    )  # fmt: skip
    entries = [StratumSpread("lead", name, 6.0, None, None, "x") for name in ("meadow", "yard")]
    found = [declared_visits(entry, campaign, "lead") for entry in entries]
    assert found == [VisitCorrelation(0.5, 30.0, 60.0), VisitCorrelation(0.2)]
    assert found[0] is not None
    assert found[0].planned_rho == pytest.approx(0.25)
    assert declared_visits(entries[0], make_campaign(), "lead") is None


def test_results_are_read_whatever_their_day_looks_like(lab_file: Callable[[str], Path]) -> None:
    """An estimate needs no day of collection, so none can stop it."""
    lead = make_campaign().analyte[0].model_copy(update={"basis": ""})
    table = read_lab(
        lab_file(HEADER + "A,lead,8,mg/kg,04/05/2026,\n"), make_campaign(analyte=(lead,))
    )
    assert [(row.result, row.collected_on) for row in table.rows] == [(8.0, None)]
