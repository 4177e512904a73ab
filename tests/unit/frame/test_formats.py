"""Each format is read as other people's programs write it."""

import sqlite3
import zipfile
from pathlib import Path

import geopandas
import gpxpy.gpx
import pytest
import shapely

from fieldplan.base.errors import FrameError
from tests.unit.frame.sites import (
    OUTLINE,
    frame_of,
    polygon,
    standard_site,
    write_csv,
    write_geojson,
)

WEST, SOUTH = OUTLINE[0]
EAST, NORTH = OUTLINE[2]
MIDDLE = (WEST + EAST) / 2


@pytest.fixture
def expected(tmp_path: Path) -> float:
    """Gross area of the standard site from GeoJSON."""
    standard_site(tmp_path)
    return frame_of(tmp_path).population.gross


def halves() -> geopandas.GeoDataFrame:
    """The standard site as two strata."""
    return geopandas.GeoDataFrame(
        {"stratum": ["west ", "east"], "number": [1.0, 2.0]},
        geometry=[
            shapely.box(WEST, SOUTH, MIDDLE, NORTH),
            shapely.box(MIDDLE, SOUTH, EAST, NORTH),
        ],
        crs="EPSG:4326",
    )


@pytest.mark.parametrize("file", ["site.gpkg", "site.shp", "site.geojson"])
def test_files_written_by_geopandas_have_the_same_area_and_strata(
    tmp_path: Path, expected: float, file: str
) -> None:
    """The same polygons in three formats are one site."""
    halves().to_file(tmp_path / file)
    frame = frame_of(tmp_path, boundary=file, strata=file)
    assert frame.population.gross == pytest.approx(expected, rel=1e-6)
    assert [stratum.name for stratum in frame.strata] == ["east", "west"]
    assert [stratum.weight for stratum in frame.strata] == pytest.approx([0.5, 0.5], abs=1e-5)
    assert sum(stratum.weight for stratum in frame.strata) == pytest.approx(1.0, abs=1e-12)


def test_numbers_as_strata_are_written_without_a_decimal_point(
    tmp_path: Path, expected: float
) -> None:
    """A stratum numbered 1 in the map must not become 1.0 on the sheet."""
    halves().to_file(tmp_path / "site.gpkg")
    frame = frame_of(tmp_path, strata="site.gpkg", stratum_column="number")
    assert [stratum.name for stratum in frame.strata] == ["1", "2"]


def test_a_projected_file_gives_the_same_area_as_degrees(tmp_path: Path, expected: float) -> None:
    """Reprojected by geopandas, read by us: one site of one area."""
    halves().to_crs("EPSG:32630").to_file(tmp_path / "site.gpkg")
    frame = frame_of(tmp_path, boundary="site.gpkg")
    assert frame.population.gross == pytest.approx(expected, rel=1e-6)
    assert frame.sources == (
        "site.gpkg (GeoPackage): EPSG:32630 (WGS 84 / UTM zone 30N), from the file itself; "
        "no datum shift needed",
    )


def test_heights_are_left_out(tmp_path: Path, expected: float) -> None:
    """A third coordinate is no part of a plan."""
    ring = [[*position, 87.5] for position in OUTLINE]
    write_geojson(tmp_path / "boundary.geojson", polygon(ring))
    frame = frame_of(tmp_path)
    assert frame.population.gross == pytest.approx(expected)
    assert not shapely.has_z(frame.boundary)
    high = shapely.force_3d(halves().geometry, 12.0)
    geopandas.GeoSeries(high, crs="EPSG:4326").to_file(tmp_path / "high.gpkg")
    assert frame_of(tmp_path, boundary="high.gpkg").population.gross == pytest.approx(
        expected, rel=1e-6
    )


def two_layers(path: Path) -> None:
    """A GeoPackage with two polygon layers and a point layer."""
    halves().to_file(path, layer="fields")
    halves().iloc[:1].to_file(path, layer="buildings")
    gates = geopandas.GeoDataFrame(
        {"name": ["gate"]}, geometry=[shapely.Point(MIDDLE, SOUTH)], crs="EPSG:4326"
    )
    gates.to_file(path, layer="gates")


def test_of_several_polygon_layers_one_must_be_named(tmp_path: Path, expected: float) -> None:
    """A guess would measure the wrong one."""
    two_layers(tmp_path / "site.gpkg")
    with pytest.raises(FrameError) as caught:
        frame_of(tmp_path, boundary="site.gpkg")
    assert str(caught.value) == (
        "site.gpkg has 2 layers that could be meant (fields, buildings); name one behind the "
        "file, as in site.gpkg#fields."
    )
    frame = frame_of(tmp_path, boundary="site.gpkg#fields")
    assert frame.population.gross == pytest.approx(expected, rel=1e-6)
    with pytest.raises(FrameError, match="no layer 'field'; did you mean 'fields'"):
        frame_of(tmp_path, boundary="site.gpkg#field")


def test_the_only_layer_of_the_wanted_kind_is_taken_and_named(tmp_path: Path) -> None:
    """Points and polygons side by side leave no doubt about which is which."""
    gates = geopandas.GeoDataFrame(
        {"name": ["gate"]}, geometry=[shapely.Point(MIDDLE, SOUTH)], crs="EPSG:4326"
    )
    halves().to_file(tmp_path / "site.gpkg", layer="fields")
    gates.to_file(tmp_path / "site.gpkg", layer="gates")
    frame = frame_of(tmp_path, boundary="site.gpkg", targeted=[("site.gpkg", "spill")])
    assert frame.sources[0].startswith("site.gpkg#fields (GeoPackage)")
    assert frame.sources[1].startswith("site.gpkg#gates (GeoPackage)")
    assert frame.targeted[0].place_id == "gate"


def test_edits_that_still_stand_in_the_log_of_a_geopackage_are_read(
    tmp_path: Path, expected: float
) -> None:
    """A map program that is still open keeps the last edits in a -wal file beside it."""
    path = tmp_path / "site.gpkg"
    halves().to_file(path)
    database = sqlite3.connect(path)
    database.execute("PRAGMA journal_mode=WAL")
    database.execute("PRAGMA wal_autocheckpoint=0")
    database.execute("DELETE FROM site WHERE number = 2")
    database.commit()
    try:
        before = {entry.name: entry.stat().st_size for entry in tmp_path.iterdir()}
        assert before["site.gpkg-wal"] > 0
        frame = frame_of(tmp_path, boundary="site.gpkg")
        after = {entry.name: entry.stat().st_size for entry in tmp_path.iterdir()}
    finally:
        database.close()
    assert frame.population.gross == pytest.approx(expected / 2, rel=1e-4)
    assert after == before


def test_a_shapefile_without_its_index_is_read_from_a_copy(tmp_path: Path, expected: float) -> None:
    """The index can be made again, but not beside the user's file."""
    halves().to_file(tmp_path / "site.shp")
    (tmp_path / "site.shx").unlink()
    frame = frame_of(tmp_path, boundary="site.shp")
    assert frame.population.gross == pytest.approx(expected, rel=1e-6)
    assert any("no .shx" in note for note in frame.notes)
    assert not (tmp_path / "site.shx").exists()


KML = """<?xml version="1.0" encoding="UTF-8"?>
<kml xmlns="http://www.opengis.net/kml/2.2"><Document><name>Quarry Field</name>
<Folder><name>parts</name>
<Placemark><name>west</name><description><![CDATA[<!DOCTYPE html><b>meadow</b>]]></description>
<Polygon><outerBoundaryIs><LinearRing><coordinates>
-1.902,52.099,0 -1.900,52.099,0 -1.900,52.101,0
-1.902,52.101,0 -1.902,52.099,0
</coordinates></LinearRing></outerBoundaryIs></Polygon></Placemark>
<Placemark><name>east</name>
<ExtendedData><SchemaData schemaUrl="#s"><SimpleData name="use">yard</SimpleData></SchemaData>
<Data name="owner"><value>Fenn</value></Data></ExtendedData>
<MultiGeometry><Polygon><outerBoundaryIs><LinearRing><coordinates>
-1.900,52.099 -1.898,52.099 -1.898,52.101 -1.900,52.101 -1.900,52.099
</coordinates></LinearRing></outerBoundaryIs></Polygon></MultiGeometry></Placemark>
<Placemark><name>note</name></Placemark>
</Folder></Document></kml>
"""


def test_kml_written_by_hand_has_its_placemarks_as_strata(tmp_path: Path, expected: float) -> None:
    """Phones and globe programs give a placemark a name and little else."""
    (tmp_path / "site.kml").write_text(KML, encoding="utf-8")
    frame = frame_of(tmp_path, boundary="site.kml", strata="site.kml")
    assert frame.population.gross == pytest.approx(expected, rel=1e-6)
    assert [stratum.name for stratum in frame.strata] == ["east", "west"]
    assert "site.kml: 1 placemark(s) without a geometry were skipped." in frame.notes


def test_kml_in_a_zip_archive_is_read_too(tmp_path: Path, expected: float) -> None:
    """KMZ is the same text, packed."""
    with zipfile.ZipFile(tmp_path / "site.kmz", "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("doc.kml", KML)
    frame = frame_of(tmp_path, boundary="site.kmz")
    assert frame.population.gross == pytest.approx(expected, rel=1e-6)


def test_kml_written_by_another_program_is_read(tmp_path: Path, expected: float) -> None:
    """The KML driver of GDAL as a second author."""
    named = halves().rename(columns={"stratum": "Name"})
    named.to_file(tmp_path / "site.kml", driver="LIBKML")
    frame = frame_of(tmp_path, boundary="site.kml", strata="site.kml")
    assert frame.population.gross == pytest.approx(expected, rel=1e-6)


def walked(folder: Path, corners: list[list[float]], *, segments: int = 1) -> None:
    """Write a track with gpxpy."""
    gpx = gpxpy.gpx.GPX()
    track = gpxpy.gpx.GPXTrack(name="fence")
    gpx.tracks.append(track)
    size = -(-len(corners) // segments)
    for start in range(0, len(corners), size):
        points = [
            gpxpy.gpx.GPXTrackPoint(latitude=y, longitude=x)
            for x, y in corners[start : start + size]
        ]
        track.segments.append(gpxpy.gpx.GPXTrackSegment(points))
    gpx.waypoints.append(gpxpy.gpx.GPXWaypoint(SOUTH, MIDDLE, name="gate"))
    (folder / "walk.gpx").write_text(gpx.to_xml(), encoding="utf-8")


def test_a_walked_track_is_a_boundary(tmp_path: Path, expected: float) -> None:
    """The track was written by gpxpy, in two pieces as after a lost fix."""
    walked(tmp_path, OUTLINE, segments=2)
    frame = frame_of(tmp_path, boundary="walk.gpx")
    assert frame.population.gross == pytest.approx(expected, rel=1e-6)
    assert frame.notes == ()


def test_a_track_that_nearly_closes_is_closed_and_noted(tmp_path: Path) -> None:
    """Nobody stops on the first footprint; 5 m are closed, half a side is not."""
    walked(tmp_path, [*OUTLINE[:-1], [WEST, SOUTH + 0.00005]])
    frame = frame_of(tmp_path, boundary="walk.gpx")
    assert any("walk.gpx track 1 (fence) was closed" in note for note in frame.notes)
    walked(tmp_path, OUTLINE[:3])
    with pytest.raises(FrameError, match="does not go round the site; walk it to the end"):
        frame_of(tmp_path, boundary="walk.gpx")


def test_waypoints_alone_are_no_boundary(tmp_path: Path) -> None:
    """A receiver exports waypoints and tracks apart."""
    gpx = gpxpy.gpx.GPX()
    gpx.waypoints.append(gpxpy.gpx.GPXWaypoint(SOUTH, WEST, name="gate"))
    (tmp_path / "walk.gpx").write_text(gpx.to_xml(), encoding="utf-8")
    with pytest.raises(FrameError, match="holds waypoints and no track"):
        frame_of(tmp_path, boundary="walk.gpx")


def test_a_document_type_in_xml_is_refused(tmp_path: Path) -> None:
    """Entities can be made to fill all memory or to read other files."""
    bomb = '<!DOCTYPE kml [<!ENTITY a "b"><!ENTITY c "&a;&a;">]>'
    (tmp_path / "site.kml").write_text(KML.replace("?>\n", "?>\n" + bomb, 1), encoding="utf-8")
    with pytest.raises(FrameError, match="document type, which is not followed"):
        frame_of(tmp_path, boundary="site.kml")


@pytest.mark.parametrize("separator", [",", ";", "\t"])
@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "cp1252"])
def test_corners_in_a_table_are_a_boundary(
    tmp_path: Path, expected: float, separator: str, encoding: str
) -> None:
    """A surveyor's list as each spreadsheet saves it; the accent shows the encoding."""
    rows = [["Corner", "Latitude", "Longitude"]]
    rows += [[f"Nº {i}", y, x] for i, (x, y) in enumerate(OUTLINE[:-1])]  # type: ignore[list-item]
    write_csv(tmp_path / "corners.csv", rows, separator=separator, encoding=encoding)
    frame = frame_of(tmp_path, boundary="corners.csv")
    assert frame.population.gross == pytest.approx(expected, rel=1e-6)


def test_corners_in_a_national_grid_need_its_name(tmp_path: Path, expected: float) -> None:
    """Easting and northing mean nothing without their grid."""
    grid = halves().to_crs("EPSG:32630").union_all()
    rows = [["northing", "easting"], *([y, x] for x, y in grid.exterior.coords)]
    write_csv(tmp_path / "corners.csv", rows)
    with pytest.raises(FrameError, match="does not say which CRS its coordinates"):
        frame_of(tmp_path, boundary="corners.csv")
    frame = frame_of(tmp_path, boundary="corners.csv", crs="EPSG:32630")
    assert frame.population.gross == pytest.approx(expected, rel=1e-6)


def test_corners_of_several_parts_make_several_polygons(tmp_path: Path, expected: float) -> None:
    """A column 'part' keeps two fields of one table apart, a stratum column names them."""
    rows: list[list[object]] = [["part", "stratum", "longitude", "latitude"]]
    for part, shape in zip("AB", halves().geometry, strict=True):
        rows += [[part, f"field {part}", x, y] for x, y in shape.exterior.coords]
    write_csv(tmp_path / "corners.csv", rows)
    frame = frame_of(tmp_path, boundary="corners.csv", strata="corners.csv")
    assert frame.population.gross == pytest.approx(expected, rel=1e-6)
    assert [stratum.name for stratum in frame.strata] == ["field A", "field B"]


@pytest.mark.parametrize(
    ("cell", "words"),
    [
        ("52,099", "has a decimal comma; write 52.099 with a point"),
        ("52°05'56\"", "is not in decimal degrees; write it like"),
        ("N52.1", "is not in decimal degrees"),
        ("nan", "is not a number"),
        ("x", "is not a number; correct it"),
        ("", "latitude is empty; fill it in, or leave out the row"),
    ],
)
def test_each_way_to_mistype_a_coordinate_has_its_own_remedy(
    tmp_path: Path, cell: str, words: str
) -> None:
    """Row and cell are named as the spreadsheet shows them."""
    rows: list[list[object]] = [["latitude", "longitude"], *([y, x] for x, y in OUTLINE[:-1])]
    rows[2][0] = cell
    write_csv(tmp_path / "corners.csv", rows, separator=";")
    with pytest.raises(FrameError) as caught:
        frame_of(tmp_path, boundary="corners.csv")
    assert str(caught.value).startswith("corners.csv row 3: latitude")
    assert words in str(caught.value)


def test_a_decimal_comma_in_a_comma_table_is_recognised(tmp_path: Path) -> None:
    """52,099 splits into two cells; the message names the cause."""
    (tmp_path / "corners.csv").write_text(
        "latitude,longitude\n52,099,-1,902\n52.1,-1.9\n", encoding="utf-8"
    )
    with pytest.raises(FrameError, match=r"row 2 has 4 cells, the header 2.*decimal comma"):
        frame_of(tmp_path, boundary="corners.csv")


def test_one_combined_column_is_refused(tmp_path: Path) -> None:
    """'52.1, -1.9' in one cell leaves the order to chance."""
    write_csv(tmp_path / "corners.csv", [["position"], ["52.1 -1.9"]])
    with pytest.raises(FrameError, match="each coordinate in a column of its own"):
        frame_of(tmp_path, boundary="corners.csv")


def test_two_corners_are_no_outline(tmp_path: Path) -> None:
    """Three are the least."""
    write_csv(tmp_path / "corners.csv", [["latitude", "longitude"], [52.1, -1.9], [52.2, -1.9]])
    with pytest.raises(FrameError, match="an outline needs 3 corners and has 2"):
        frame_of(tmp_path, boundary="corners.csv")
