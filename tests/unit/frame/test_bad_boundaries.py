"""Each boundary that cannot serve is refused in one clear line with the remedy."""

import json
import os
from pathlib import Path
from typing import Any

import geopandas
import pytest
import shapely

from fieldplan.base.errors import FrameError
from tests.unit.frame.sites import (
    OUTLINE,
    box,
    frame_of,
    line,
    point,
    polygon,
    standard_site,
    write_csv,
    write_geojson,
)

UTM_SITE = shapely.box(575_000, 5_772_000, 575_300, 5_772_200)
"""Metres in UTM zone 30 (52.1° N, 1.9° W)."""


def refusal(folder: Path, **table: Any) -> str:
    """The message with which a frame is refused; nothing may be written while it is read."""
    before = sorted(path.name for path in folder.iterdir())
    with pytest.raises(FrameError) as caught:
        frame_of(folder, **table)
    assert sorted(path.name for path in folder.iterdir()) == before
    assert caught.value.exit_code == 1
    return str(caught.value)


def test_a_missing_boundary_is_named_with_a_near_miss(tmp_path: Path) -> None:
    """A typing error in a path is the commonest fault of all."""
    standard_site(tmp_path)
    message = refusal(tmp_path, boundary="boundry.geojson")
    assert message == "boundry.geojson is not there; did you mean boundary.geojson?"


def test_an_area_without_a_boundary_is_refused(tmp_path: Path) -> None:
    """Nothing can be drawn in an area that is not given."""
    assert refusal(tmp_path, boundary=None).startswith("[[frame]] has no boundary")


def test_a_folder_is_no_boundary(tmp_path: Path) -> None:
    """Some map formats are folders, none of those read here."""
    (tmp_path / "site").mkdir()
    assert refusal(tmp_path, boundary="site") == "site is a folder; name the file in it."


def test_a_device_is_no_boundary_and_is_not_read(tmp_path: Path) -> None:
    """A pipe would keep the reader waiting for ever, and a device may never end."""
    assert refusal(tmp_path, boundary=os.devnull) == (
        f"{os.devnull} is no ordinary file (a pipe or a device); save it as a file and name that."
    )


@pytest.mark.parametrize("content", [b"", b" \n"])
def test_an_empty_file_is_said_to_be_empty(tmp_path: Path, content: bytes) -> None:
    """A broken download has no bytes."""
    (tmp_path / "boundary.geojson").write_bytes(content)
    assert refusal(tmp_path) == "boundary.geojson is empty; export it again."


def test_a_layer_without_features_is_said_to_hold_no_geometry(tmp_path: Path) -> None:
    """An export with a filter that matches nothing."""
    write_geojson(tmp_path / "boundary.geojson")
    assert "boundary.geojson holds no geometry" in refusal(tmp_path)


def test_features_without_a_geometry_are_skipped_and_noted(tmp_path: Path) -> None:
    """A null geometry is allowed by RFC 7946 and says nothing."""
    null = {"type": "Feature", "properties": {}, "geometry": None}
    write_geojson(tmp_path / "boundary.geojson", null, polygon(OUTLINE))
    frame = frame_of(tmp_path)
    assert "boundary.geojson: 1 feature(s) without a geometry were skipped." in frame.notes


@pytest.mark.parametrize(
    ("feature", "kind"),
    [(line(*OUTLINE), "lines"), (point(-1.9, 52.1), "points")],
)
def test_lines_and_points_are_no_boundary(
    tmp_path: Path, feature: dict[str, Any], kind: str
) -> None:
    """A closed line is not an area; whether it should be is for its author to say."""
    write_geojson(tmp_path / "boundary.geojson", feature)
    message = refusal(tmp_path)
    assert message == (
        f"boundary.geojson holds {kind} and no polygon; draw the outline as a polygon and export "
        "it again."
    )


def test_points_beside_a_polygon_are_left_out_and_noted(tmp_path: Path) -> None:
    """A placemark for the gate does not spoil the outline."""
    write_geojson(tmp_path / "boundary.geojson", polygon(OUTLINE), point(-1.9, 52.1))
    assert any("1 feature(s) that are no polygons" in note for note in frame_of(tmp_path).notes)


def test_a_polygon_without_area_is_refused(tmp_path: Path) -> None:
    """Three corners on a line enclose nothing."""
    flat = [[-1.9, 52.1], [-1.9, 52.101], [-1.9, 52.102], [-1.9, 52.1]]
    write_geojson(tmp_path / "boundary.geojson", polygon(flat))
    message = refusal(tmp_path)
    assert message.startswith("boundary.geojson feature 1")
    assert "area" in message


def test_a_site_smaller_than_a_square_metre_is_refused(tmp_path: Path) -> None:
    """No site is so small; a unit went wrong."""
    write_geojson(tmp_path / "boundary.geojson", polygon(box(-1.9, 52.1, -1.899999, 52.100001)))
    assert "a site needs at least 1 m²" in refusal(tmp_path)


def test_a_bow_tie_is_refused_with_the_place_where_it_crosses(tmp_path: Path) -> None:
    """Its signed area is nil and its repaired one is not: nobody knows what was meant."""
    tie = [[-1.902, 52.099], [-1.898, 52.101], [-1.898, 52.099], [-1.902, 52.101], [-1.902, 52.099]]
    write_geojson(tmp_path / "boundary.geojson", polygon(tie))
    message = refusal(tmp_path)
    assert (
        "boundary.geojson feature 1 crosses or touches itself near latitude, longitude 52.1000"
        in message
    )
    assert "limit 0.01 %" in message
    assert message.endswith("Correct it in the file.")


def test_a_crossing_of_next_to_no_area_is_repaired_and_said(tmp_path: Path) -> None:
    """A slip of a few centimetres in one corner changes the area by less than 0.01 %."""
    curl = [
        [-1.902, 52.099],
        [-1.898, 52.099],
        [-1.898, 52.101],
        [-1.9000001, 52.101],
        [-1.8999999, 52.1009999],
        [-1.9, 52.1010001],
        [-1.902, 52.101],
        [-1.902, 52.099],
    ]
    assert not shapely.is_valid(shapely.Polygon(curl))
    write_geojson(tmp_path / "boundary.geojson", polygon(curl))
    frame = frame_of(tmp_path)
    assert shapely.is_valid(frame.boundary)
    assert any(
        "crosses or touches itself" in note and "it was repaired" in note for note in frame.notes
    )
    write_geojson(tmp_path / "boundary.geojson", polygon(OUTLINE))
    assert frame_of(tmp_path).population.gross == pytest.approx(frame.population.gross, rel=1e-4)


def test_a_hole_that_touches_the_outline_stays_a_hole(tmp_path: Path) -> None:
    """The usual repair fills it (57,000 m² becomes 60,000 m²); it must not."""
    hole = box(-1.8985, 52.0995, -1.898, 52.1005)
    write_geojson(tmp_path / "boundary.geojson", polygon(OUTLINE, hole))
    frame = frame_of(tmp_path)
    whole = (-1.898 + 1.902) * 0.002
    cut = 0.0005 * 0.001
    write_geojson(tmp_path / "boundary.geojson", polygon(OUTLINE))
    full = frame_of(tmp_path).population.gross
    assert frame.population.gross == pytest.approx(full * (1 - cut / whole), rel=1e-4)
    assert any("repaired" in note for note in frame.notes)


def test_rings_in_the_wrong_order_and_left_open_are_read_as_meant(tmp_path: Path) -> None:
    """RFC 7946 wants counter-clockwise and closed; the area is the same either way."""
    write_geojson(tmp_path / "boundary.geojson", polygon(OUTLINE))
    expected = frame_of(tmp_path).population.gross
    for ring in (OUTLINE[::-1], OUTLINE[:-1]):
        write_geojson(tmp_path / "boundary.geojson", polygon(ring))
        assert frame_of(tmp_path).population.gross == pytest.approx(expected, rel=1e-9)


def test_holes_and_several_parts_are_measured_as_drawn(tmp_path: Path) -> None:
    """A quarter taken out and a half added: area in the same degrees, so shares are exact."""
    hole = box(-1.901, 52.0995, -1.899, 52.1005)
    second = box(-1.897, 52.099, -1.895, 52.101)
    write_geojson(tmp_path / "boundary.geojson", polygon(OUTLINE))
    one = frame_of(tmp_path).population.gross
    write_geojson(tmp_path / "boundary.geojson", polygon(OUTLINE, hole), polygon(second))
    frame = frame_of(tmp_path)
    assert frame.population.gross == pytest.approx(1.25 * one, rel=1e-5)
    assert frame.boundary.geom_type == "MultiPolygon"


def test_parts_that_overlap_are_counted_once_and_noted(tmp_path: Path) -> None:
    """Two parcels drawn over each other must not be sampled twice."""
    write_geojson(tmp_path / "boundary.geojson", polygon(OUTLINE))
    one = frame_of(tmp_path).population.gross
    write_geojson(tmp_path / "boundary.geojson", polygon(OUTLINE), polygon(OUTLINE))
    frame = frame_of(tmp_path)
    assert frame.population.gross == pytest.approx(one, rel=1e-9)
    assert any("overlap on" in note and "counted once" in note for note in frame.notes)


def test_degrees_under_a_projected_crs_are_recognised(tmp_path: Path) -> None:
    """The CRS was set instead of the coordinates converted."""
    site = geopandas.GeoSeries([shapely.Polygon(OUTLINE)], crs="EPSG:32630")
    site.to_file(tmp_path / "boundary.gpkg")
    message = refusal(tmp_path, boundary="boundary.gpkg")
    assert message == (
        "boundary.gpkg says metres, EPSG:32630 (WGS 84 / UTM zone 30N), but its coordinates look "
        "like degrees (-1.902, 52.099); set its CRS to EPSG:4326 or export it again."
    )


def test_metres_under_a_geographic_crs_are_recognised(tmp_path: Path) -> None:
    """The other way round: a grid exported as if it were degrees."""
    geopandas.GeoSeries([UTM_SITE], crs="EPSG:4326").to_file(tmp_path / "boundary.gpkg")
    message = refusal(tmp_path, boundary="boundary.gpkg")
    assert "boundary.gpkg says degrees, EPSG:4326 (WGS 84)" in message
    assert "look like metres or feet of a map grid" in message
    assert 'crs = "EPSG:…"' in message


def test_metres_in_geojson_are_refused_unless_the_campaign_names_the_grid(tmp_path: Path) -> None:
    """GeoJSON is degrees by its standard; a file that is not can be used once somebody says so."""
    ring = [list(position) for position in UTM_SITE.exterior.coords]
    write_geojson(tmp_path / "boundary.geojson", polygon(ring))
    assert "look like metres" in refusal(tmp_path)
    frame = frame_of(tmp_path, crs="EPSG:32630")
    assert "EPSG:32630 (WGS 84 / UTM zone 30N), from crs in the campaign file" in frame.sources[0]
    assert frame.population.gross == pytest.approx(UTM_SITE.area, rel=1e-3)


def test_a_boundary_with_swapped_axes_is_recognised_by_its_latitudes(tmp_path: Path) -> None:
    """151° is no latitude; swapped it is a fine longitude."""
    ring = [[y, x] for x, y in box(151.0, -33.9, 151.01, -33.89)]
    write_geojson(tmp_path / "boundary.geojson", polygon(ring))
    message = refusal(tmp_path)
    assert "latitude and longitude are the other way round" in message
    assert message.endswith("Export it again with the axes swapped.")


def test_northing_before_easting_is_recognised_by_where_it_lands(tmp_path: Path) -> None:
    """A national grid is used in one country; swapped coordinates land in another."""
    ring = [[y, x] for x, y in UTM_SITE.exterior.coords]
    geopandas.GeoSeries([shapely.Polygon(ring)], crs="EPSG:32630").to_file(
        tmp_path / "boundary.gpkg"
    )
    message = refusal(tmp_path, boundary="boundary.gpkg")
    assert "easting and northing are the other way round" in message


def test_coordinates_far_from_where_their_grid_is_used_are_refused(tmp_path: Path) -> None:
    """British coordinates under a German grid."""
    geopandas.GeoSeries([UTM_SITE], crs="EPSG:31467").to_file(tmp_path / "boundary.gpkg")
    message = refusal(tmp_path, boundary="boundary.gpkg")
    assert "far from where that grid is used" in message
    assert message.endswith("correct the CRS.")


def test_a_shapefile_without_prj_asks_for_its_crs(tmp_path: Path) -> None:
    """The classic fault of the format: the .prj was not sent along."""
    geopandas.GeoSeries([UTM_SITE], crs="EPSG:32630").to_file(tmp_path / "site.shp")
    (tmp_path / "site.prj").unlink()
    message = refusal(tmp_path, boundary="site.shp")
    assert message.startswith("site.shp does not say which CRS its coordinates (575")
    assert 'crs = "EPSG:…" in [[frame]]' in message
    frame = frame_of(tmp_path, boundary="site.shp", crs="EPSG:32630")
    assert frame.population.gross == pytest.approx(UTM_SITE.area, rel=1e-3)


def test_a_crs_that_nobody_knows_is_quoted(tmp_path: Path) -> None:
    """A typing error in a code must not fall back to anything."""
    write_csv(tmp_path / "corners.csv", [["easting", "northing"], [1, 2], [3, 9], [600, 5]])
    message = refusal(tmp_path, boundary="corners.csv", crs="EPSG:99999")
    assert message == (
        "frame.crs is 'EPSG:99999', which is no known CRS; write a code such as 'EPSG:25833'."
    )


@pytest.mark.parametrize("crs", ["EPSG:4978", "EPSG:5703"])
def test_a_crs_without_a_map_plane_is_refused(tmp_path: Path, crs: str) -> None:
    """Geocentric and height-only systems have no easting and northing."""
    write_csv(tmp_path / "corners.csv", [["easting", "northing"], [1, 2], [3, 9], [600, 5]])
    assert "is neither degrees nor a map grid" in refusal(tmp_path, boundary="corners.csv", crs=crs)


def test_a_crs_link_in_geojson_is_never_followed(tmp_path: Path) -> None:
    """A link would ask a stranger's server while a boundary is read."""
    link = {"type": "link", "properties": {"href": "http://127.0.0.1:9/crs", "type": "proj4"}}
    write_geojson(tmp_path / "boundary.geojson", polygon(OUTLINE), crs=link)
    message = refusal(tmp_path)
    assert "its 'crs' is a link or has no name, and links are not followed" in message


def test_the_older_crs_member_is_understood_by_name(tmp_path: Path) -> None:
    """Many programs still write it; the axis order stays longitude, latitude."""
    name = {"type": "name", "properties": {"name": "urn:ogc:def:crs:OGC:1.3:CRS84"}}
    write_geojson(tmp_path / "boundary.geojson", polygon(OUTLINE), crs=name)
    assert "no datum shift needed" in frame_of(tmp_path).sources[0]


def test_stray_coordinates_make_a_site_too_large(tmp_path: Path) -> None:
    """A corner at 0, 0 is a missing value, not a place."""
    ring = [OUTLINE[0], [0.0, 0.0], *OUTLINE[1:]]
    write_geojson(tmp_path / "boundary.geojson", polygon(box(-1.9, -30.0, 60.0, 52.0)))
    assert "take out stray coordinates" in refusal(tmp_path)
    write_geojson(tmp_path / "boundary.geojson", polygon(ring))
    assert any("distances" in note for note in frame_of(tmp_path).notes)


def test_a_file_of_another_kind_is_refused_whatever_its_name(tmp_path: Path) -> None:
    """A virtual layer named .geojson would have been followed to another file."""
    vrt = (
        '<OGRVRTDataSource><OGRVRTLayer name="a"><SrcDataSource>secret.csv</SrcDataSource>'
        "</OGRVRTLayer></OGRVRTDataSource>"
    )
    (tmp_path / "boundary.geojson").write_text(vrt, encoding="utf-8")
    message = refusal(tmp_path)
    assert "is XML of another kind (<ogrvrtdatasource>)" in message
    assert "GeoJSON, GeoPackage, Shapefile, KML, GPX or CSV" in message


def test_gml_named_kml_is_refused_and_leaves_nothing_beside_it(tmp_path: Path) -> None:
    """The library's reader for it writes a side file next to the input."""
    gml = '<?xml version="1.0"?><gml:FeatureCollection xmlns:gml="http://www.opengis.net/gml"/>'
    (tmp_path / "site.kml").write_text(gml, encoding="utf-8")
    assert "<featurecollection>" in refusal(tmp_path, boundary="site.kml")
    assert [path.name for path in tmp_path.iterdir()] == ["site.kml"]


def test_a_picture_is_no_boundary(tmp_path: Path) -> None:
    """Somebody names the scan of the map."""
    (tmp_path / "site.png").write_bytes(b"\x89PNG\r\n\x1a\n" + bytes(range(256)))
    assert "is not a map file that can be read" in refusal(tmp_path, boundary="site.png")


def test_all_misshapen_features_are_listed_at_once(tmp_path: Path) -> None:
    """One round of corrections, not one per fault."""
    bad = [
        {"type": "Feature", "properties": {}, "geometry": {"type": "Polygon", "coordinates": rings}}
        for rings in ([[[1, 2], ["a", 3], [4, 5]]], [[[1, 2], [3, 4]]], [[[1, 2], [1], [4, 5]]], 7)
    ]
    (tmp_path / "boundary.geojson").write_text(
        json.dumps({"type": "FeatureCollection", "features": bad}), encoding="utf-8"
    )
    with pytest.raises(FrameError) as caught:
        frame_of(tmp_path)
    assert len(caught.value.problems) == 4
    assert "feature 1: \"['a', 3]\" is not a position of two numbers" in caught.value.problems[0]
    assert "feature 2: a ring has 2 positions and needs 3" in caught.value.problems[1]
