"""Whatever a file holds, the answer is a frame or a FrameError, and nothing is left beside it."""

import json
import random
import struct
import zipfile
from collections.abc import Callable
from pathlib import Path

import geopandas
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

Damage = Callable[[bytes, random.Random], bytes]


def cut(content: bytes, generator: random.Random) -> bytes:
    """End early."""
    return content[: generator.randrange(len(content))]


def flip(content: bytes, generator: random.Random) -> bytes:
    """Change some bytes anywhere."""
    changed = bytearray(content)
    for _ in range(generator.randint(1, 30)):
        changed[generator.randrange(len(changed))] = generator.randrange(256)
    return bytes(changed)


def flip_head(content: bytes, generator: random.Random) -> bytes:
    """Change bytes where counts, sizes and versions stand, but not the first four."""
    changed = bytearray(content)
    for _ in range(generator.randint(1, 8)):
        changed[generator.randrange(4, min(200, len(changed)))] = generator.choice([0, 127, 255])
    return bytes(changed)


def repeat(content: bytes, generator: random.Random) -> bytes:
    """Write a piece of itself into the middle."""
    start = generator.randrange(len(content))
    piece = content[start : start + generator.randint(1, 60)]
    at = generator.randrange(len(content))
    return content[:at] + piece * generator.randint(1, 5) + content[at:]


def sample_files(folder: Path) -> list[str]:
    """One sound file of each format."""
    site = geopandas.GeoDataFrame(
        {"name": ["field"], "stratum": ["a"]}, geometry=[shapely.Polygon(OUTLINE)], crs="EPSG:4326"
    )
    site.to_file(folder / "site.gpkg")
    site.to_file(folder / "site.shp")
    site.to_file(folder / "site.kml", driver="LIBKML")
    write_geojson(folder / "site.geojson", polygon(OUTLINE, stratum="a"))
    write_csv(folder / "site.csv", [["latitude", "longitude"], *([y, x] for x, y in OUTLINE)])
    with zipfile.ZipFile(folder / "site.kmz", "w", zipfile.ZIP_DEFLATED) as archive:
        archive.write(folder / "site.kml", "doc.kml")
    points = "".join(f'<trkpt lat="{y}" lon="{x}"/>' for x, y in OUTLINE)
    (folder / "site.gpx").write_text(
        f'<gpx xmlns="http://www.topografix.com/GPX/1/1"><trk><trkseg>{points}</trkseg></trk></gpx>'
    )
    return ["site.gpkg", "site.shp", "site.kml", "site.geojson", "site.csv", "site.kmz", "site.gpx"]


def is_refused(folder: Path, name: str) -> bool:
    """Tell whether a file is refused in words; any other exception goes on up."""
    try:
        frame_of(folder, boundary=name, strata=name)
    except FrameError as error:
        return bool(error.problems) and all(problem.strip() for problem in error.problems)
    return False


@pytest.mark.parametrize("damage", [cut, flip, flip_head, repeat])
def test_damaged_files_of_every_format_give_a_frame_or_a_frame_error(
    tmp_path: Path, damage: Damage
) -> None:
    """Any other exception is a stack trace on somebody's screen."""
    generator = random.Random(20261102)
    refused = 0
    names = sample_files(tmp_path)
    for name in names:
        frame_of(tmp_path, boundary=name)
        sound = (tmp_path / name).read_bytes()
        for _ in range(10):
            (tmp_path / name).write_bytes(damage(sound, generator))
            before = {path.name for path in tmp_path.iterdir()}
            refused += is_refused(tmp_path, name)
            assert {path.name for path in tmp_path.iterdir()} == before
        (tmp_path / name).write_bytes(sound)
    assert refused > 10 * len(names) / 3


def geometry(text: str) -> str:
    """A GeoJSON text with one geometry."""
    return '{"type":"Feature","properties":{},"geometry":' + text + "}"


POLYGON = '{"type":"Polygon","coordinates":'
HOSTILE = {
    "not-a-number": geometry(POLYGON + "[[[NaN,1],[2,3],[4,5],[NaN,1]]]}"),
    "infinite": geometry(POLYGON + "[[[1e999,1],[2,3],[4,5],[1e999,1]]]}"),
    "huge-integer": geometry(POLYGON + "[[[1" + "0" * 400 + ",1],[2,3],[4,5],[1,1]]]}"),
    "too-many-digits": geometry(POLYGON + "[[[1" + "0" * 5000 + ",1],[2,3],[4,5],[1,1]]]}"),
    "text-numbers": geometry(POLYGON + '[[["1","2"],["3","4"],["5","6"]]]}'),
    "null-position": geometry(POLYGON + "[[null,[2,3],[4,5]]]}"),
    "true-position": geometry(POLYGON + "[[[true,false],[2,3],[4,5]]]}"),
    "objects": geometry(POLYGON + '{"a":1}}'),
    "empty-ring": geometry(POLYGON + "[[]]}"),
    "no-rings": geometry(POLYGON + "[]}"),
    "no-coordinates": geometry('{"type":"Polygon"}'),
    "unknown-type": geometry('{"type":"Circle","coordinates":[1,2]}'),
    "type-is-list": geometry('{"type":["Polygon"],"coordinates":[1,2]}'),
    "multi-is-object": geometry('{"type":"MultiPolygon","coordinates":{}}'),
    "geometry-is-text": geometry('"POLYGON((0 0,1 0,1 1,0 0))"'),
    "deep-arrays": "[" * 100_000,
    "deep-objects": '{"type":"Feature","geometry":' * 20_000,
    "deep-collections": geometry('{"type":"GeometryCollection","geometries":[' * 300 + "]}" * 300),
    "features-is-object": '{"type":"FeatureCollection","features":{"0":1}}',
    "features-of-numbers": '{"type":"FeatureCollection","features":[1,2]}',
    "no-features": '{"type":"FeatureCollection"}',
    "properties-is-list": '{"type":"Feature","properties":[1],"geometry":null}',
    "list": "[1,2,3]",
    "half": '{"type":"FeatureCollection","features":[',
    "crs-is-number": '{"type":"FeatureCollection","crs":7,"features":[]}',
    "crs-without-name": '{"type":"FeatureCollection","crs":{"type":"name"},"features":[]}',
    "crs-is-a-pipeline": json.dumps(
        {
            "type": "FeatureCollection",
            "crs": {"type": "name", "properties": {"name": "+proj=pipeline +step +proj=axisswap"}},
            "features": [polygon(OUTLINE)],
        }
    ),
    "far-away-latitudes": geometry(POLYGON + "[[[1e300,1e300],[2,3],[4,5],[1e300,1e300]]]}"),
    "surrogates": geometry('{"type":"\\ud800","coordinates":[1,2]}'),
}


@pytest.mark.parametrize("text", list(HOSTILE.values()), ids=list(HOSTILE))
def test_hostile_geojson_is_refused_in_words(tmp_path: Path, text: str) -> None:
    """Each of these makes some reader raise, hang or guess."""
    (tmp_path / "boundary.geojson").write_text(text, encoding="utf-8")
    with pytest.raises(FrameError) as caught:
        frame_of(tmp_path)
    assert "boundary.geojson" in str(caught.value)


@pytest.mark.parametrize(
    "content",
    [
        b"<kml",
        b"<kml></kml>",
        b"<kml><Placemark><Polygon/></Placemark></kml>",
        b"<kml><Placemark><Polygon><outerBoundaryIs><LinearRing><coordinates/></LinearRing>"
        b"</outerBoundaryIs></Polygon></Placemark></kml>",
        b"<kml><Placemark><Point><coordinates>nan,inf</coordinates></Point></Placemark></kml>",
        b"<kml><Placemark>" + b"<MultiGeometry>" * 5000 + b"</MultiGeometry>" * 5000
        + b"</Placemark></kml>",
        b"<kml>" + b"<Folder>" * 20_000,
        b"<gpx><trk><trkseg><trkpt lat='x' lon='y'/></trkseg></trk></gpx>",
        b"<gpx><wpt/></gpx>",
        b"<gpx><trk><trkseg><trkpt lat='1e400' lon='1'/><trkpt lat='1' lon='2'/></trkseg></trk>"
        b"</gpx>",
        b"PK\x03\x04 not a zip",
        b"\xff\xfe<\x00k\x00m\x00l\x00",
        b"SQLite format 3\x00",
        b"SQLite format 3\x00" + bytes(5000),
        b"\x00\x00\x27\x0a",
        b"\x00\x00\x27\x0a" + bytes(96),
        b"latitude,longitude\n\x00\n",
        b'latitude,longitude\n"52.1',
        b"latitude,longitude\n" + b"1" * 200_000 + b",2\n",
        b"latitude,latitude,longitude\n1,2,3\n",
        bytes(range(256)) * 10,
    ],
)  # fmt: skip
def test_hostile_bytes_are_refused_in_words(tmp_path: Path, content: bytes) -> None:
    """Under a name that lets every reader try."""
    for name in ("site.csv", "site.kml", "site.shp"):
        (tmp_path / name).write_bytes(content)
        with pytest.raises(FrameError) as caught:
            frame_of(tmp_path, boundary=name)
        assert name in str(caught.value)


def test_a_shapefile_that_claims_a_thousand_million_vertices_is_refused(tmp_path: Path) -> None:
    """The count stands in the record; a reader that trusts it asks for 16 GB."""
    sample_files(tmp_path)
    content = bytearray((tmp_path / "site.shp").read_bytes())
    # Record header 8, shape type 4, box 32, number of parts 4, then number of points.
    content[100 + 8 + 40 : 100 + 8 + 44] = struct.pack("<i", 1_000_000_000)
    (tmp_path / "site.shp").write_bytes(bytes(content))
    with pytest.raises(FrameError, match=r"site\.shp"):
        frame_of(tmp_path, boundary="site.shp")


def test_a_geopackage_that_claims_a_thousand_million_vertices_is_refused(tmp_path: Path) -> None:
    """The same in the well-known binary of a GeoPackage."""
    sample_files(tmp_path)
    content = (tmp_path / "site.gpkg").read_bytes()
    honest = struct.pack("<III", 3, 1, 5)
    assert content.count(honest) == 1
    (tmp_path / "site.gpkg").write_bytes(
        content.replace(honest, struct.pack("<III", 3, 1, 1_000_000_000))
    )
    with pytest.raises(FrameError, match=r"site\.gpkg"):
        frame_of(tmp_path, boundary="site.gpkg")


def test_an_archive_that_unpacks_without_end_is_refused(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Blanks pack a thousand to one; the limit is lowered here so that the test is quick."""
    monkeypatch.setattr("fieldplan.frame.markup._LARGEST_KML", 1_000_000)
    with zipfile.ZipFile(tmp_path / "site.kmz", "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("doc.kml", b" " * 1_000_001)
    with pytest.raises(FrameError, match="unpacks to more than 1 MB"):
        frame_of(tmp_path, boundary="site.kmz")


@pytest.mark.parametrize("name", ["a\x00b.geojson", "x" * 5000, "no/such/folder/site.gpkg"])
def test_paths_that_cannot_be_are_refused(tmp_path: Path, name: str) -> None:
    """An operating system has its own words for them; a person needs one line."""
    standard_site(tmp_path)
    with pytest.raises(FrameError):
        frame_of(tmp_path, boundary=name)
