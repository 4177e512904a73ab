"""The cells of compact strata on both maps, and nowhere else."""

from dataclasses import replace

import pytest
import shapely

from fieldplan.packet.maps.cells import cells_of, plan_grounds
from fieldplan.packet.maps.ground import grounds
from fieldplan.packet.maps.screen import screen_map
from fieldplan.packet.sheets.methods import drawn_sentence
from fieldplan.packet.sheets.place_section import cell_rows, location_table
from tests.factories import make_plan
from tests.unit.estimate.test_cells import planned


def test_cells_tile_every_stratum_and_hold_their_locations() -> None:
    """Areas add up to the strata's; each location lies in the cell of its number."""
    plan = planned({"meadow": 9, "yard": 6})
    cells = cells_of(plan)
    assert len(cells) == 15
    first = {"meadow": 0, "yard": 9}
    for stratum in plan.frame.strata:
        own = cells[first[stratum.name] :][: 9 if stratum.name == "meadow" else 6]
        assert sum(cell.area for cell in own) == pytest.approx(stratum.measure)
        for place in plan.locations.of_class("random"):
            if place.stratum == stratum.name:
                spot = shapely.Point(place.easting, place.northing)
                assert own[place.cell - 1].distance(spot) < 1e-6


def test_both_maps_show_the_cells_and_say_what_they_are() -> None:
    """One line in the legend on paper, one layer on the screen."""
    plan = planned({"meadow": 8, "yard": 4}, per_cell=2)
    plan = replace(plan, samples=replace(plan.samples, samples=()))
    lines = plan_grounds(plan)[-2]
    assert lines.words == "cell of nearly equal area, two locations in each"
    page = screen_map(plan)
    assert "Cell of nearly equal area, two locations in each" in page
    assert page.count("cell-line") >= 6


def test_other_layouts_have_no_cells_on_their_maps() -> None:
    """Nothing changes for them."""
    plan = make_plan()
    assert cells_of(plan) == ()
    assert plan_grounds(plan) == grounds(plan.frame)
    assert "cell-line" not in screen_map(plan)
    assert cell_rows(plan.campaign.design[0]) == []
    assert "Cell" not in location_table(plan).columns


def test_the_plan_sheet_says_how_cells_are_drawn_and_estimated() -> None:
    """Rows of the section on locations, the table's column, the paragraph for a report."""
    plan = planned({"meadow": 9, "yard": 6}, variance="covariance")
    plan = replace(plan, samples=replace(plan.samples, samples=()))
    rows = dict(cell_rows(plan.campaign.design[0]))
    assert rows["Locations a cell"] == "1"
    assert "averaged over 126 curves" in rows["Variance, fixed now"]
    table = location_table(plan)
    at = table.columns.index("Cell")
    assert [row[at] for row in table.rows] == [str(p.cell) for p in plan.locations.places]
    assert "one in each compact cell of nearly equal area" in drawn_sentence(plan)
