"""A plan along lines in every file of its packet."""

import csv
import io
import json
import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pyogrio
import pytest
import shapely

from fieldplan.packet.charts.site import site_figure
from fieldplan.packet.exchange.geojson import write_geojson
from fieldplan.packet.exchange.geopackage import write_geopackage
from fieldplan.packet.exchange.gpx import write_gpx
from fieldplan.packet.exchange.kml import write_kml
from fieldplan.packet.exchange.outlines import outlines, within_180
from fieldplan.packet.exchange.points_csv import write_points_csv
from fieldplan.packet.maps.distance_marks import distance_marks, round_step
from fieldplan.packet.maps.ground import compound_path, grounds
from fieldplan.packet.maps.screen import screen_map
from fieldplan.packet.sheets.field_form import sample_row
from fieldplan.packet.sheets.methods import drawn_sentence, patch_line, widest_stretch
from fieldplan.packet.sheets.place_section import location_table, start_words
from fieldplan.packet.sheets.question_section import measure_table
from fieldplan.plan.agreement import disagreements
from fieldplan.plan.record import plan_from_record, plan_to_record
from fieldplan.plan.redraw import redraw
from fieldplan.sizing.question import Part, Question
from fieldplan.sizing.start_words import width_between_starts
from tests.unit.design.line_sites import ARM
from tests.unit.packet.line_plans import line_plan


def test_record_draws_the_same_places_again_and_agrees_with_itself():
    """The record alone must give every place to the centimetre."""
    again = plan_from_record(json.loads(json.dumps(plan_to_record(line_plan()))))
    assert again.locations == line_plan().locations
    assert redraw(again).agrees
    # The factory's campaign text is that of another campaign; frame and weights must agree.
    assert [told for told in disagreements(again) if "campaign" not in told] == []


def test_a_reach_whose_length_was_changed_is_found_out():
    """Weights follow from lengths, and lengths from corners."""
    plan = line_plan()
    lower, upper = plan.frame.strata
    reach = replace(lower.reaches[0], to_m=lower.reaches[0].to_m + 3.0)
    bent = replace(lower, reaches=(reach, *lower.reaches[1:]))
    changed = replace(plan, frame=replace(plan.frame, strata=(bent, upper)))
    bad = [told for told in disagreements(changed) if "measure" in told]
    assert bad == []  # the corners still make the recorded measure
    short = replace(lower, measure=lower.measure - 3.0)
    changed = replace(plan, frame=replace(plan.frame, strata=(short, upper)))
    assert any("'lower' is recorded with a measure" in told for told in disagreements(changed))


def test_point_files_tell_branch_and_distance():
    """Crew and office find a place by walking along as well."""
    rows = list(csv.DictReader(io.StringIO(write_points_csv(line_plan()).decode("utf-8-sig"))))
    place = line_plan().locations.places[0]
    assert rows[0]["branch"] == place.branch
    assert rows[0]["along_m"] == f"{place.along_m:.2f}"
    feature = json.loads(write_geojson(line_plan()))["features"][0]
    assert feature["properties"]["along_m"] == place.along_m
    assert (
        f"{place.branch}, {place.along_m:.2f} m from its start" in write_gpx(line_plan()).decode()
    )


def test_geopackage_and_kml_hold_lines_that_gdal_reads(tmp_path: Path):
    """Lengths of what a second reader finds, measured as geodesics."""
    path = tmp_path / "plan.gpkg"
    path.write_bytes(write_geopackage(line_plan()))
    found = pyogrio.read_dataframe(path, layer="strata")
    assert list(found["name"]) == ["lower", "upper"]
    assert list(found["length_m"]) == [1200.0, 450.0]
    assert set(found.geometry.geom_type) == {"MultiLineString"}
    metres = found.to_crs(found.estimate_utm_crs()).geometry.length
    # UTM scales lengths by 0.9996 to 1.0010.
    assert list(metres) == pytest.approx([1200.0, 450.0], rel=1.1e-3)
    styles = pyogrio.read_dataframe(path, layer="layer_styles", read_geometry=False)
    assert all("SimpleLine" in text for text in styles["styleQML"][1:])
    drawn = tmp_path / "plan.kml"
    drawn.write_bytes(write_kml(line_plan()))
    strata = pyogrio.read_dataframe(drawn, layer="Strata")
    assert all(shapely.get_dimensions(geometry) == 1 for geometry in strata.geometry)


def test_lines_across_the_date_line_are_cut_there():
    """RFC 7946 wants no edge across 180°."""
    cut = within_180(shapely.LineString([(179.5, 0.0), (180.5, 0.0)]))
    assert cut.geom_type == "MultiLineString"
    assert sorted(cut.bounds) == [-180.0, 0.0, 0.0, 180.0]
    assert cut.length == pytest.approx(1.0)


def test_outlines_are_lines_with_lengths():
    """All lines, then strata, then what was left out."""
    shapes = outlines(line_plan())
    told = [(s.title, round(s.length_m, 3), s.area_m2) for s in shapes]
    assert told == [
        ("All lines", 1700.0, 0.0),
        ("Stratum: lower", 1200.0, 0.0),
        ("Stratum: upper", 450.0, 0.0),
        ("Excluded: weir", 50.0, 0.0),
    ]


def test_paths_of_lines_stay_open():
    """A river is no pond: nothing is drawn from its mouth back to its source."""
    path = compound_path(shapely.MultiLineString([ARM, [(0, 0), (1, 1), (2, 0)]]))
    assert path.CLOSEPOLY not in path.codes
    assert list(path.codes).count(path.MOVETO) == 2
    layers = grounds(line_plan().frame)
    assert [layer.brief for layer in layers] == ["lower", "upper", "out: weir", "as drawn"]
    assert all(layer.style["facecolor"] == "none" for layer in layers)
    assert len({repr(layer.style["linestyle"]) for layer in layers[:2]}) == 2


def test_distance_marks_stand_where_the_distance_is():
    """The arm runs due west from 900 to 300: its mark at 200 m stands at 700."""
    marks = distance_marks(line_plan().frame, 150.0)
    assert round_step(150.0) == 200
    arm = [mark for mark in marks if mark.northing == 1000.0 and mark.easting > 300.0]
    assert [(m.words, m.easting) for m in arm[:3]] == [
        ("arm", 900.0), ("200 m", 700.0), ("400 m", 500.0),
    ]  # fmt: skip
    assert arm[1].across == pytest.approx((0.0, -1.0))
    long = replace(line_plan().frame.branches[0], name="the long name\nof a branch of a river")
    frame = replace(line_plan().frame, branches=(long,))
    assert distance_marks(frame, 150.0)[0].words == "the long name of a bran…"


def test_screen_map_draws_lines_without_fill():
    """A filled river would cover the land inside its bends."""
    page = screen_map(line_plan())
    assert "stratum-line" in page
    assert "excluded-line" in page
    assert "stratum-area" not in page.split("</style>")[-1]
    assert "Lines as drawn" in page
    assert "1.20 km" in page


def test_the_sheet_speaks_of_lengths_and_stretches():
    """No hectares where there is no area."""
    plan = line_plan()
    assert "evenly spaced along the lines, from 3 random starts in each stratum," in drawn_sentence(
        plan
    )
    assert "1.65 km of line" in drawn_sentence(plan)
    assert "along a branch have no location" in patch_line(plan)
    assert measure_table(plan).columns == ("Stratum", "Length", "Weight")
    assert "Along, m" in location_table(plan).columns
    assert "2 degrees of freedom" in start_words(plan.campaign.design[0])
    assert "cannot be had from a single start" in start_words(
        plan.campaign.design[0].model_copy(update={"starts": 1})
    )
    assert site_figure(plan).narrow_svg
    place = plan.locations.places[0]
    row = sample_row(plan, place, plan.samples.at(place.location_id)[0])
    assert f"{place.branch}, {place.along_m:.0f} m from its start" in row[2]


def test_widest_stretch_is_the_largest_gap_of_any_reach():
    """By brute force: steps of a metre along every reach."""
    plan = line_plan()
    longest = 0.0
    for stratum in plan.frame.strata:
        for reach in stratum.reaches:
            here = [
                p.along_m
                for p in plan.locations.of_class("random")
                if p.branch == reach.branch and reach.from_m <= p.along_m <= reach.to_m
            ]
            edges = np.array(sorted([reach.from_m, reach.to_m, *here]))
            steps = np.arange(reach.from_m, reach.to_m, 0.5)
            after = edges[np.minimum(np.searchsorted(edges, steps), len(edges) - 1)]
            longest = max(longest, float((after - steps).max()))
    assert widest_stretch(plan) == pytest.approx(longest, abs=0.51)


def test_interval_between_starts_is_wider_by_the_quantiles():
    """One stratum, 20 results, 4 starts: t(3) over t(19) at 97.5 %: 3.182 / 2.093 (tables)."""
    question = Question(parts=(Part("site", 1.0, 5.0),), target="half_width", value=1.0, starts=4)
    assert width_between_starts(question, (20,)) == pytest.approx(3.182 / 2.093, abs=5e-4)
    assert math.isinf(width_between_starts(question, (1,)))
