"""Each format as its standard wants it."""

import csv
import io
import json
import math
import sqlite3
from contextlib import closing
from pathlib import Path
from xml.etree import ElementTree as ET

import shapely
from pyproj import Geod

from fieldplan.frame.model import SiteProjection
from fieldplan.packet.exchange.geojson import write_geojson
from fieldplan.packet.exchange.geopackage import write_geopackage
from fieldplan.packet.exchange.gpx import write_gpx
from fieldplan.packet.exchange.kml import write_kml
from fieldplan.packet.exchange.outlines import in_degrees, outlines, within_180
from fieldplan.packet.exchange.points_csv import write_points_csv, write_samples_key
from fieldplan.packet.exchange.rows import CREW_COLUMNS, OFFICE_COLUMNS, point_rows
from fieldplan.packet.exchange.workbook import read_sheet, write_workbook
from tests import factories
from tests.unit.packet import plans

GPX = "{http://www.topografix.com/GPX/1/1}"
KML = "{http://www.opengis.net/kml/2.2}"

# Order of elements in the GPX 1.1 schema, from memory.
GPX_ORDER = {
    "gpx": ["metadata", "wpt", "rte", "trk", "extensions"],
    "metadata": ["name", "desc", "author", "copyright", "link", "time", "keywords", "bounds"],
    "wpt": ["ele", "time", "magvar", "geoidheight", "name", "cmt", "desc", "src", "link", "sym",
            "type", "fix", "sat", "hdop", "vdop", "pdop", "ageofdgpsdata", "dgpsid", "extensions"],
    "trk": ["name", "cmt", "desc", "src", "link", "number", "type", "extensions", "trkseg"],
    "trkseg": ["trkpt", "extensions"],
    "trkpt": ["ele", "time"],
}  # fmt: skip


def test_gpx_elements_stand_in_the_order_of_the_schema() -> None:
    """Strict receivers refuse a waypoint whose name follows its type."""
    for element in ET.fromstring(write_gpx(factories.make_plan())).iter():
        tag = element.tag.removeprefix(GPX)
        if len(element):
            places = [GPX_ORDER[tag].index(child.tag.removeprefix(GPX)) for child in element]
            assert places == sorted(places), tag


def test_gpx_waypoints_carry_short_name_class_id_and_jars() -> None:
    """What reaches a receiver's small screen is the name and the comment."""
    root = ET.fromstring(write_gpx(factories.make_plan()))
    second = root.findall(f"{GPX}wpt")[1]
    told = {child.tag.removeprefix(GPX): child.text for child in second}
    assert told["name"] == "QFA02"
    assert told["type"] == "random"
    assert told["cmt"] == "QF-A-02. Samples: QF-204 QF-655"
    assert "stratum meadow" in str(told["desc"])
    assert "time" not in told


def test_gpx_tracks_close_the_outlines() -> None:
    """GPX has no polygons: boundary, strata with their hole, and the exclusion are tracks."""
    root = ET.fromstring(write_gpx(factories.make_plan()))
    tracks = {}
    for track in root.findall(f"{GPX}trk"):
        points = [(p.get("lat"), p.get("lon")) for p in track.iter(f"{GPX}trkpt")]
        assert points[0] == points[-1]
        assert len(points) >= 5
        tracks[track.findtext(f"{GPX}name")] = points
    assert list(tracks) == [
        "Boundary", "Stratum: meadow", "Stratum: yard (1)", "Stratum: yard (2)",
        "Excluded: open water",
    ]  # fmt: skip


def test_kml_has_a_folder_per_class_and_longitude_first() -> None:
    """OGC 07-147r2: coordinates are longitude, latitude."""
    root = ET.fromstring(write_kml(factories.make_plan()))
    folders = {f.findtext(f"{KML}name"): f for f in root.iter(f"{KML}Folder")}
    assert list(folders) == [
        "Random locations", "Alternates", "Targeted places, not in the mean", "Boundary",
        "Strata", "Excluded areas",
    ]  # fmt: skip
    assert len(folders["Random locations"].findall(f"{KML}Placemark")) == 9
    longitude, latitude = folders["Alternates"].findtext(f".//{KML}coordinates", "").split(",")
    assert math.isclose(float(longitude), -1.8985, abs_tol=0.01)
    assert math.isclose(float(latitude), 52.1, abs_tol=0.01)


def test_kml_refers_to_styles_that_exist_and_to_nothing_outside() -> None:
    """A phone without signal must show the same picture."""
    root = ET.fromstring(write_kml(factories.make_plan()))
    styles = {f"#{style.get('id')}" for style in root.iter(f"{KML}Style")}
    assert {url.text for url in root.iter(f"{KML}styleUrl")} <= styles
    assert not list(root.iter(f"{KML}href"))


def test_geojson_follows_rfc_7946() -> None:
    """Section 3 and 4: longitude first, no crs member; 11.2: 7 decimals are plenty."""
    collection = json.loads(write_geojson(factories.make_plan()))
    assert set(collection) == {"type", "features"}
    for feature in collection["features"]:
        longitude, latitude = feature["geometry"]["coordinates"]
        assert longitude == round(longitude, 7) == feature["properties"]["longitude"]
        assert latitude == round(latitude, 7) == feature["properties"]["latitude"]
        assert list(feature["properties"]) == list(OFFICE_COLUMNS)


def test_csv_is_utf8_with_mark_crlf_and_one_header() -> None:
    """RFC 4180 for line ends; the mark makes spreadsheets read accents rightly."""
    content = write_points_csv(factories.make_plan())
    assert content.startswith(b"\xef\xbb\xbflocation_id,short_name,class,")
    assert content.count(b"\r\n") == 15
    assert content.count(b"\n") == 15
    rows = list(csv.DictReader(io.StringIO(content.decode("utf-8-sig"))))
    assert list(rows[0]) == list(CREW_COLUMNS)
    assert "weight" not in rows[0]
    assert rows[1]["sample_ids"] == "QF-204 QF-655"


def test_csv_gives_the_three_coordinate_forms_to_their_decimals() -> None:
    """The worked place: 52°06′00.647″ N is 52 + 6/60 + 0.647/3600 = 52.1001797."""
    row = next(
        csv.DictReader(io.StringIO(write_points_csv(factories.make_plan()).decode("utf-8-sig")))
    )
    assert row["latitude"] == "52.1001797"
    assert row["latitude_dms"] == "52°06′00.647″ N"
    assert row["utm_zone"] == "30N"
    assert row["easting"].partition(".")[2] in set("0123456789")
    assert row["datum"] == "WGS 84"


def test_ids_of_a_list_survive_a_spreadsheet() -> None:
    """MAR-01, 007, 1E5 and 2-3 would become a date, 7, 100000 and another date."""
    content = write_points_csv(plans.list_plan()).decode("utf-8-sig")
    ids = [row["location_id"] for row in csv.DictReader(io.StringIO(content))]
    assert ids == ["'MAR-01", "'007", "'1E5", "'2-3"]


def test_key_to_samples_pairs_the_duplicate() -> None:
    """One field duplicate at QF-A-02, as the plan has it."""
    content = write_samples_key(factories.make_plan()).decode("utf-8-sig")
    rows = list(csv.DictReader(io.StringIO(content)))
    pairs = [(r["sample_id"], r["qc_of"]) for r in rows if r["role"] == "field duplicate"]
    assert pairs == [("QF-655", "QF-204")]
    assert len(rows) == 15


def test_workbook_has_its_three_sheets(tmp_path: Path) -> None:
    """Locations with weights, the key, and what a reader must know of datum and grid."""
    path = tmp_path / "b.xlsx"
    path.write_bytes(write_workbook(factories.make_plan()))
    locations = read_sheet(path, "locations")
    weights = [float(row["weight"]) for row in locations]
    assert math.isclose(sum(weights), 1.0)
    assert len(read_sheet(path, "samples")) == 15
    notes = {row["about"]: row["what to know"] for row in read_sheet(path, "notes")}
    assert "WGS 84 (EPSG:4326)" in notes["latitude, longitude"]
    assert "UTM zone 30N" in notes["easting, northing"]
    assert notes["status"] == "DRAFT"


def test_workbook_opens_in_its_own_library_with_numbers_as_numbers(tmp_path: Path) -> None:
    """A longitude stored as text could not be mapped."""
    from openpyxl import load_workbook

    path = tmp_path / "b.xlsx"
    path.write_bytes(write_workbook(factories.make_plan()))
    sheet = load_workbook(path)["locations"]
    header = [cell.value for cell in sheet[1]]
    second = dict(zip(header, sheet[2], strict=True))
    assert second["longitude"].data_type == "n"
    assert second["location_id"].number_format == "@"


def test_geopackage_has_the_layers_and_a_default_style_for_each(tmp_path: Path) -> None:
    """Read with sqlite3: contents of OGC 12-128 table gpkg_contents, and layer_styles."""
    path = tmp_path / "g.gpkg"
    path.write_bytes(write_geopackage(factories.make_plan()))
    with closing(sqlite3.connect(path)) as connection:
        layers = dict(connection.execute("SELECT table_name, data_type FROM gpkg_contents"))
        styles = dict(connection.execute("SELECT f_table_name, useAsDefault FROM layer_styles"))
        stamps = {row[0] for row in connection.execute("SELECT last_change FROM gpkg_contents")}
    expected = ["locations", "boundary", "strata", "exclusions"]
    assert [name for name, kind in layers.items() if kind == "features"] == expected
    assert styles == dict.fromkeys(expected, 1)
    assert stamps == {"2026-11-03T00:00:00.000Z"}


def test_outlines_measure_the_same_on_the_ellipsoid() -> None:
    """Geodesic areas by GeographicLib (through pyproj): the hole is out, rings turn rightly."""
    plan = factories.make_plan()
    geodesic = Geod(ellps="WGS84")
    for outline in outlines(plan):
        area, _ = geodesic.geometry_area_perimeter(outline.geometry)
        assert math.isclose(area, outline.area_m2, rel_tol=1e-3)


def test_a_long_edge_bends_with_the_earth() -> None:
    """Mid-points of a 100 km edge stay within 0.1 m of the straight line in the site's plane."""
    projection = factories.PROJECTION
    square = shapely.box(-50_000, -50_000, 50_000, 50_000)
    there = in_degrees(projection, square)
    from fieldplan.frame.projection import to_site

    corners = shapely.get_coordinates(there)
    middle = (corners[1:] + corners[:-1]) / 2
    easting, northing = to_site(projection, middle[:, 1], middle[:, 0])
    assert shapely.distance(shapely.points(easting, northing), square.exterior).max() < 0.1


def test_polygons_across_180_degrees_are_cut() -> None:
    """RFC 7946 section 3.1.9: no part may cross the antimeridian; the area stays."""
    across = in_degrees(SiteProjection(-16.8, 180.0), shapely.box(-100, 0, 100, 120))
    cut = within_180(across)
    assert [round(float(edge), 3) for part in cut.geoms for edge in part.bounds[::2]] in (
        [-180.0, -179.999, 179.999, 180.0],
        [179.999, 180.0, -180.0, -179.999],
    )
    assert math.isclose(cut.area, across.area, rel_tol=1e-9)


def test_targeted_places_say_why_and_have_no_weight() -> None:
    """They never enter the mean."""
    row = point_rows(factories.make_plan())[-1]
    assert row.reason == "old tank"
    assert row.cells()["weight"] == 0.0
