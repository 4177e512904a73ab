"""Lists of wells, outfalls and plots: ids as given, N known, places checked."""

from pathlib import Path
from typing import Any

import pytest
import shapely

from fieldplan.base.errors import FrameError
from fieldplan.frame.model import Frame
from tests.unit.frame.sites import (
    frame_of,
    point,
    polygon,
    standard_site,
    write_csv,
    write_geojson,
)

WELLS = [("007", 52.1001, -1.9001), ("MW-2", 52.1004, -1.8995), ("1e5", 52.0998, -1.8990)]


def write_list(folder: Path, rows: list[list[Any]], **options: Any) -> None:
    """Write ``wells.csv``."""
    write_csv(folder / "wells.csv", rows, **options)


def plain(rows: list[tuple[str, float, float]]) -> list[list[Any]]:
    """A header and rows."""
    return [["location_id", "latitude", "longitude"], *(list(row) for row in rows)]


def list_frame(folder: Path, **table: Any) -> Frame:
    """Read ``wells.csv`` as a list frame."""
    return frame_of(folder, kind="list", list_file="wells.csv", **table)


def refusal(folder: Path, **table: Any) -> str:
    """The message with which a list is refused."""
    with pytest.raises(FrameError) as caught:
        list_frame(folder, **table)
    return str(caught.value)


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "cp1252"])
@pytest.mark.parametrize("separator", [",", ";", "\t"])
def test_ids_are_kept_as_given(tmp_path: Path, encoding: str, separator: str) -> None:
    """'007' is not 7 and '1e5' is not 100000; an accent survives each encoding."""
    rows = [*WELLS, ("Brønd 3", 52.1, -1.9)]
    write_list(tmp_path, plain(rows), encoding=encoding, separator=separator)
    frame = list_frame(tmp_path)
    units = frame.strata[0].units
    assert [unit.unit_id for unit in units] == ["007", "MW-2", "1e5", "Brønd 3"]
    assert [unit.latitude for unit in units] == pytest.approx([row[1] for row in rows])
    assert [unit.longitude for unit in units] == pytest.approx([row[2] for row in rows])
    assert frame.strata[0].count == 4
    assert frame.population.unit == "units"
    assert frame.population.net == frame.population.gross == 4


def test_the_statement_of_a_list_counts_its_units(tmp_path: Path) -> None:
    """Between wells nothing is known."""
    write_list(tmp_path, plain(WELLS))
    assert list_frame(tmp_path).population.sentences == (
        "The mean speaks for 100 % of the list: all 3 units, and for nothing between them.",
        "One n is: one location.",
    )


def test_a_census_says_which_errors_remain(tmp_path: Path) -> None:
    """With every unit visited the choice of places adds no error; time and laboratory do."""
    write_list(tmp_path, plain(WELLS))
    sentence = list_frame(tmp_path, layout="census").population.sentences[1]
    assert "the choice of places adds no error" in sentence
    assert "time, in sampling and in the laboratory remain" in sentence


def test_strata_of_a_list_weigh_by_their_number(tmp_path: Path) -> None:
    """Two of three units are two thirds of the population, names sorted, file order kept inside."""
    rows = [["location_id", "latitude", "longitude", "stratum"]]
    for row, stratum in zip(WELLS, ("deep", "shallow", "deep "), strict=True):
        rows.append([*map(str, row), stratum])
    write_list(tmp_path, rows)
    frame = list_frame(tmp_path)
    assert [(s.name, s.count) for s in frame.strata] == [("deep", 2), ("shallow", 1)]
    assert [s.weight for s in frame.strata] == pytest.approx([2 / 3, 1 / 3])
    assert [unit.unit_id for unit in frame.strata[0].units] == ["007", "1e5"]
    assert frame.strata[0].geometry is None


def test_a_list_in_strata_is_refused_where_the_layout_draws_from_one_population(
    tmp_path: Path,
) -> None:
    """Found while reading, it stops every command before a number is said that cannot be drawn."""
    rows = [["location_id", "latitude", "longitude", "zone"]]
    rows += [[*map(str, row), zone] for row, zone in zip(WELLS, ("b", "a", "b"), strict=True)]
    write_list(tmp_path, rows)
    message = refusal(tmp_path, layout="simple-random", stratum_column="zone")
    assert message == (
        'wells.csv puts its members into strata (a, b), and layout = "simple-random" draws from '
        "one population. Write layout = \"stratified\"; or rename its column 'zone', if that is "
        "not meant to divide the list."
    )
    assert len(list_frame(tmp_path, layout="simple-random").strata) == 1
    assert len(list_frame(tmp_path, layout="stratified", stratum_column="zone").strata) == 2


def test_a_unit_without_a_stratum_among_others_is_refused(tmp_path: Path) -> None:
    """It would have no weight."""
    rows = [["location_id", "latitude", "longitude", "stratum"], ["a", 52.1, -1.9, "deep"]]
    rows.append(["b", 52.1, -1.9, ""])
    write_list(tmp_path, rows)
    assert "wells.csv row 3: the stratum of 'b' is empty" in refusal(tmp_path)


@pytest.mark.parametrize("second", ["MW-2", "mw-2"])
def test_ids_that_are_alike_ignoring_case_are_refused(tmp_path: Path, second: str) -> None:
    """A receiver shows both as MW-2 and overwrites one."""
    write_list(tmp_path, plain([*WELLS, (second, 52.1, -1.9)]))
    message = refusal(tmp_path)
    assert message.startswith(f"wells.csv row 5: id {second!r} stands there twice as in row 3")


def test_an_empty_id_is_refused_by_row(tmp_path: Path) -> None:
    """A place without an id cannot be recorded."""
    write_list(tmp_path, plain([*WELLS, ("", 52.1, -1.9)]))
    assert "wells.csv row 5: its location_id is empty" in refusal(tmp_path)


def test_a_list_without_an_id_column_is_refused(tmp_path: Path) -> None:
    """Row numbers are no names."""
    write_list(tmp_path, [["latitude", "longitude"], [52.1, -1.9]])
    assert "wells.csv has no column 'location_id'" in refusal(tmp_path)


def test_blank_rows_are_skipped_and_noted(tmp_path: Path) -> None:
    """Spreadsheets leave them; row numbers in messages still count them."""
    rows = plain(WELLS)
    rows.insert(2, ["", "", ""])
    write_list(tmp_path, rows)
    frame = list_frame(tmp_path)
    assert len(frame.strata[0].units) == 3
    assert "wells.csv: 1 blank row(s) were skipped." in frame.notes
    rows[4][1] = "x"
    write_list(tmp_path, rows)
    assert "wells.csv row 5: latitude 'x' is not a number" in refusal(tmp_path)


def test_a_header_without_rows_is_refused(tmp_path: Path) -> None:
    """N = 0 is no population."""
    write_list(tmp_path, plain([]))
    assert "has a header and no rows below it" in refusal(tmp_path)


def test_a_list_in_a_national_grid_is_placed(tmp_path: Path) -> None:
    """Eastings and northings with the CRS typed in the campaign."""
    rows = [["location_id", "easting", "northing"], ["a", 575_000, 5_772_000]]
    rows.append(["b", 575_100, 5_772_000])
    write_list(tmp_path, rows)
    assert "does not say which CRS" in refusal(tmp_path)
    a, b = list_frame(tmp_path, crs="EPSG:32630").strata[0].units
    assert shapely.distance(
        shapely.Point(a.easting, a.northing), shapely.Point(b.easting, b.northing)
    ) == pytest.approx(100, rel=5e-4)


def test_a_list_whose_axes_are_swapped_is_told_so_by_its_boundary(tmp_path: Path) -> None:
    """Both orders are places on Earth; only the site tells which is meant."""
    standard_site(tmp_path)
    write_list(tmp_path, plain([(name, x, y) for name, y, x in WELLS]))
    message = refusal(tmp_path, boundary="boundary.geojson")
    assert "the other way round: if swapped they fall inside your site" in message


def test_one_swapped_row_is_told_so_by_the_others(tmp_path: Path) -> None:
    """A single slip in a long list lands in another ocean."""
    write_list(tmp_path, plain([*WELLS, ("MW-9", -1.9, 52.1)]))
    message = refusal(tmp_path)
    assert message.startswith("wells.csv row 5: 'MW-9' lies ")
    assert message.endswith(
        "its axes are the other way round: if swapped they fall inside your site."
    )


def test_one_swapped_place_among_good_ones_is_told_so_with_its_row(tmp_path: Path) -> None:
    """The others being right must not hide it, with a boundary or as targeted places."""
    standard_site(tmp_path)
    write_list(tmp_path, plain([*WELLS, ("MW-9", -1.9, 52.1)]))
    assert "wells.csv row 5: 'MW-9' lies 7,3" in refusal(tmp_path, boundary="boundary.geojson")
    with pytest.raises(FrameError, match=r"row 5: 'MW-9'.*if swapped they fall inside your site"):
        frame_of(tmp_path, targeted=[("wells.csv", "old wells")])


def test_latitudes_that_are_none_are_refused(tmp_path: Path) -> None:
    """151 is a longitude."""
    write_list(tmp_path, plain([("a", 151.0, -33.9), ("b", 151.1, -33.8)]))
    assert "latitude and longitude are the other way round" in refusal(tmp_path)


def test_a_unit_outside_a_given_boundary_is_noted(tmp_path: Path) -> None:
    """A background well upstream belongs to the list all the same."""
    standard_site(tmp_path)
    write_list(tmp_path, plain([*WELLS, ("UP", 52.1020, -1.9)]))
    frame = list_frame(tmp_path, boundary="boundary.geojson")
    assert any("outside the boundary: UP (111 m)" in note for note in frame.notes)
    assert frame.population.net == 4


@pytest.mark.parametrize(
    "rows",
    [
        WELLS[:1],
        WELLS[:2],
        [(f"w{i}", 52.1, -1.9 + 0.001 * i) for i in range(6)],
        [("a", 52.1, -1.9), ("b", 52.1, -1.9)],
    ],
)
def test_one_two_and_collinear_wells_have_an_outline_for_the_map(
    tmp_path: Path, rows: list[tuple[str, float, float]]
) -> None:
    """A map needs an extent even where a hull has no area."""
    write_list(tmp_path, plain(rows))
    frame = list_frame(tmp_path)
    assert frame.boundary.geom_type == "Polygon"
    for unit in frame.strata[0].units:
        spot = shapely.Point(unit.easting, unit.northing)
        assert shapely.contains(frame.boundary, spot)
        assert shapely.distance(frame.boundary.exterior, spot) > 19.9


@pytest.mark.parametrize(
    "table",
    [{"inset_m": 3.0}, {"strata": "s.geojson"}, {"exclusions": [("x.geojson", 1.0, "barn")]}],
)
def test_what_has_no_meaning_for_a_list_is_refused_by_name(
    tmp_path: Path, table: dict[str, Any]
) -> None:
    """An option that is ignored misleads whoever typed it."""
    write_list(tmp_path, plain(WELLS))
    key = next(iter(table)).removesuffix("s") if "exclusions" in table else next(iter(table))
    assert f"frame.{key} has no meaning for a list" in refusal(tmp_path, **table)


def test_a_list_can_come_from_a_map_layer_too(tmp_path: Path) -> None:
    """Points with an id are a list in any format."""
    write_geojson(tmp_path / "wells.geojson", *(point(x, y, id=name) for name, y, x in WELLS))
    frame = frame_of(tmp_path, kind="list", list_file="wells.geojson")
    assert [unit.unit_id for unit in frame.strata[0].units] == ["007", "MW-2", "1e5"]


def test_targeted_places_keep_their_ids_and_reason(tmp_path: Path) -> None:
    """They are a class of their own and may lie outside, which is said."""
    standard_site(tmp_path)
    write_geojson(
        tmp_path / "spots.geojson", point(-1.9, 52.1, name="TANK"), point(-1.9, 52.102, name="GATE")
    )
    frame = frame_of(tmp_path, targeted=[("spots.geojson", "old tank")])
    assert [(p.place_id, p.reason) for p in frame.targeted] == [
        ("TANK", "old tank"),
        ("GATE", "old tank"),
    ]
    assert "spots.geojson: targeted outside the site: GATE (111 m)." in frame.notes
    assert frame.population.share == 1


def test_targeted_places_that_are_swapped_or_far_away_are_refused(tmp_path: Path) -> None:
    """A crew would drive there."""
    standard_site(tmp_path)
    write_geojson(tmp_path / "spots.geojson", point(52.1, -1.9, name="TANK"))
    with pytest.raises(FrameError, match="if swapped they fall inside your site"):
        frame_of(tmp_path, targeted=[("spots.geojson", "old tank")])
    write_geojson(tmp_path / "spots.geojson", point(-1.9, 53.1, name="TANK"))
    with pytest.raises(FrameError, match="111 km from the boundary"):
        frame_of(tmp_path, targeted=[("spots.geojson", "old tank")])


def test_targeted_polygons_are_refused(tmp_path: Path) -> None:
    """A targeted place is a point; an area is a stratum."""
    standard_site(tmp_path)
    write_geojson(
        tmp_path / "spots.geojson",
        polygon([[-1.9, 52.1], [-1.899, 52.1], [-1.9, 52.101], [-1.9, 52.1]], name="TANK"),
    )
    with pytest.raises(FrameError, match="feature 1 is a polygon, not one point"):
        frame_of(tmp_path, targeted=[("spots.geojson", "old tank")])


def test_targeted_ids_are_unique_over_all_files(tmp_path: Path) -> None:
    """Two files, one name: the crew would look for one place."""
    standard_site(tmp_path)
    write_geojson(tmp_path / "a.geojson", point(-1.9, 52.1, name="TANK"))
    write_geojson(tmp_path / "b.geojson", point(-1.9, 52.1, name="tank"))
    with pytest.raises(FrameError, match="id 'tank' stands there twice"):
        frame_of(tmp_path, targeted=[("a.geojson", "old tank"), ("b.geojson", "new tank")])
