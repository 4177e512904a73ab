"""Frames along lines: measured, cut, and refused in one line where they cannot serve."""

import math

import geopandas
import pytest
import shapely
from pyproj import Geod

from fieldplan.base.errors import FrameError
from fieldplan.campaign.model import FrameTable
from fieldplan.frame.model import Branch, ExcludedArea
from fieldplan.frame.population import line_population
from fieldplan.plan.frame_record import frame_from_record, frame_to_record
from tests.unit.frame.sites import box, frame_of, line, point, polygon, write_geojson

GEOD = Geod(ellps="WGS84")
"""Geodesics on the ellipsoid by GeographicLib: a second opinion on every length."""

FORK = (-1.890, 52.105)
MAIN = [[-1.900, 52.100], [-1.895, 52.105], list(FORK)]
ON = [list(FORK), [-1.880, 52.110]]
ARM = [[-1.890, 52.100], list(FORK)]


def geodesic(*corners):
    """Length in metres of lines given in degrees."""
    return sum(
        float(GEOD.line_length([x for x, _ in part], [y for _, y in part])) for part in corners
    )


def river(folder, *features, name="river.geojson"):
    """Write lines and return how a frame names them."""
    write_geojson(folder / name, *features)
    return {"kind": "line", "line_file": name}


def three(folder, **second):
    """The main branch in two pieces and an arm, with strata."""
    return river(
        folder,
        line(*MAIN, branch="main", stratum="upper"),
        line(*ON, branch="main", stratum="lower", **second),
        line(*ARM, branch="arm", stratum="lower"),
    )


def told(folder, **table):
    """Lines of the error that a frame raises."""
    with pytest.raises(FrameError) as refused:
        frame_of(folder, layout=table.pop("layout", "stratified"), **table)
    return str(refused.value).splitlines()


def test_branches_are_measured_like_geodesics(tmp_path):
    """In a plane of a few kilometres lengths are those on the ellipsoid to 0.0001 %."""
    frame = frame_of(tmp_path, layout="stratified", **three(tmp_path))
    assert [branch.name for branch in frame.branches] == ["main", "arm"]
    for branch, corners in zip(frame.branches, ([MAIN, ON], [ARM]), strict=True):
        # A corner rounded to the millimetre moves an edge by √2·0.5 mm at most at each end.
        assert branch.length_m == pytest.approx(geodesic(*corners), abs=0.006)
    assert frame.population.gross == pytest.approx(geodesic(MAIN, ON, ARM), abs=0.01)
    assert frame.population.unit == "m"
    assert any("differs by less than 0.0001 %" in note for note in frame.notes)


def test_strata_by_column_hold_their_lines(tmp_path):
    """The pieces of a branch keep their stratum once they are joined."""
    frame = frame_of(tmp_path, layout="stratified", **three(tmp_path))
    lower, upper = frame.strata
    assert (lower.name, upper.name) == ("lower", "upper")
    assert upper.measure == pytest.approx(geodesic(MAIN), abs=0.006)
    assert lower.measure == pytest.approx(geodesic(ON, ARM), abs=0.006)
    assert lower.weight + upper.weight == pytest.approx(1.0, abs=1e-12)
    assert [(reach.branch, reach.from_m) for reach in lower.reaches] == [
        ("main", upper.reaches[0].to_m),
        ("arm", 0.0),
    ]
    assert lower.count is None


def test_exclusions_and_ends_cut_and_sum(tmp_path):
    """Gross less exclusions less ends is net; joints are no ends; nothing counts twice."""
    write_geojson(tmp_path / "weir.geojson", point(-1.885, 52.1075))
    write_geojson(tmp_path / "head.geojson", point(-1.900, 52.100))
    frame = frame_of(
        tmp_path,
        layout="stratified",
        inset_m=20.0,
        exclusions=[("weir.geojson", 50.0, "weir"), ("head.geojson", 30.0, "spring")],
        **three(tmp_path),
    )
    weir, head = frame.excluded
    # A disc round a point of the line takes twice its radius; arcs are short by 0.03 % at most.
    assert weir.length_m == pytest.approx(100.0, abs=0.05)
    assert head.length_m == pytest.approx(30.0, abs=0.02)
    # The head's end lies in its exclusion already: two free ends are left of three.
    assert frame.population.inset_loss == pytest.approx(40.0, abs=1e-9)
    whole = frame.population.net + 40.0 + weir.length_m + head.length_m
    assert frame.population.gross == pytest.approx(whole, abs=1e-9)
    assert sum(s.measure for s in frame.strata) == pytest.approx(frame.population.net, abs=1e-6)
    assert "The mean speaks for" in frame.population.sentences[0]
    assert "20 m at each end where no other branch joins: 40.00 m" in " ".join(
        frame.population.sentences
    )


def test_polygons_cut_lines_into_strata(tmp_path):
    """A border at longitude −1.89 parts the river at its fork."""
    write_geojson(
        tmp_path / "strata.geojson",
        polygon(box(-1.91, 52.09, -1.89, 52.12), stratum="west"),
        polygon(box(-1.89, 52.09, -1.87, 52.12), stratum="east"),
    )
    names = river(tmp_path, line(*MAIN, branch="main"), line(*ON, branch="main"))
    frame = frame_of(tmp_path, layout="stratified", strata="strata.geojson", **names)
    east, west = frame.strata
    assert east.measure == pytest.approx(geodesic(ON), abs=0.05)
    assert west.measure == pytest.approx(geodesic(MAIN), abs=0.05)
    assert east.measure + west.measure == pytest.approx(frame.population.gross, abs=1e-6)


def test_overlapping_or_short_strata_are_refused(tmp_path):
    """A place in two strata, or a tenth of the river in none."""
    names = river(tmp_path, line(*MAIN, branch="main"))
    write_geojson(
        tmp_path / "double.geojson",
        polygon(box(-1.91, 52.09, -1.892, 52.12), stratum="west"),
        polygon(box(-1.894, 52.09, -1.87, 52.12), stratum="east"),
    )
    assert (
        "strata 'east' and 'west' overlap on" in told(tmp_path, strata="double.geojson", **names)[0]
    )
    write_geojson(
        tmp_path / "short.geojson", polygon(box(-1.91, 52.09, -1.892, 52.12), stratum="west")
    )
    assert "uncovered, limit 0.5 %" in told(tmp_path, strata="short.geojson", **names)[0]
    write_geojson(
        tmp_path / "beside.geojson",
        polygon(box(-1.91, 52.09, -1.87, 52.12), stratum="all"),
        polygon(box(-1.87, 52.09, -1.86, 52.12), stratum="none"),
    )
    assert (
        "no line runs through stratum 'none'" in told(tmp_path, strata="beside.geojson", **names)[0]
    )


LOOP = [[-1.90, 52.10], [-1.89, 52.10], [-1.89, 52.11], [-1.90, 52.10]]
EIGHT = [[-1.90, 52.10], [-1.88, 52.11], [-1.88, 52.10], [-1.90, 52.11]]
BACK = [[-1.90, 52.10], [-1.89, 52.10], [-1.895, 52.10]]
BESIDE = [[-1.900001, 52.100001], [-1.895001, 52.105001], [-1.890, 52.105001]]


@pytest.mark.parametrize(
    ("features", "words"),
    [
        ([line(*LOOP)], "river.geojson feature 1 is a loop: it ends where it begins"),
        ([line(*EIGHT)], "feature 1 crosses or retraces itself near latitude, longitude 52.10"),
        ([line(*BACK)], "feature 1 crosses or retraces itself"),
        ([line([-1.9, 52.1], [-1.9, 52.1])], "feature 1 has no length"),
        ([line(*MAIN), line(*MAIN)], "feature 1 and feature 2 run along the same"),
        ([line(*MAIN), line(*reversed(MAIN))], "run along the same"),
        ([line(*MAIN), line(*BESIDE)], "which would count twice; take one of them out"),
        ([point(-1.9, 52.1)], "river.geojson holds no line; draw the river"),
        ([polygon(box(-1.9, 52.1, -1.89, 52.11))], "the outline of a water body as a line"),
        (
            [line(*MAIN, stratum="a"), line(*ARM, stratum="")],
            "feature 2: its stratum (column 'stratum') is empty; name it",
        ),
        (
            [line(*MAIN, stratum="Up"), line(*ARM, stratum="up")],
            "strata 'Up' and 'up' differ in capital letters only",
        ),
    ],
    ids=[
        "loop", "eight", "back", "point twice", "twice", "reversed", "beside", "points",
        "outline", "no stratum", "spelling",
    ],
)  # fmt: skip
def test_lines_that_cannot_be_measured_along_are_refused_in_one_line(tmp_path, features, words):
    """Which file, which feature, what is wrong, what to do."""
    lines = told(tmp_path, **river(tmp_path, *features))
    assert len(lines) == 1
    assert words in lines[0]


def test_columns_and_files_that_are_not_there_are_told(tmp_path):
    """A typed column must be there; a table of places is no line."""
    names = river(tmp_path, line(*MAIN, river="R"))
    assert "has no column 'arm'" in told(tmp_path, branch_column="arm", **names)[0]
    assert "has no values in a column 'reach'" in told(tmp_path, stratum_column="reach", **names)[0]
    assert "name the file that they are in as line_file" in told(tmp_path, kind="line")[0]
    (tmp_path / "r.csv").write_text("latitude,longitude\n52.1,-1.9\n52.2,-1.9\n52.2,-1.8\n")
    assert "is a table of places" in told(tmp_path, kind="line", line_file="r.csv")[0]
    two = river(tmp_path, line(*MAIN, stratum="a"), line(*ON, stratum="b"))
    assert (
        'layout = "simple-random" draws from one population'
        in told(tmp_path, layout="simple-random", **two)[0]
    )


def test_stratum_of_which_nothing_is_left_is_named(tmp_path):
    """An inset longer than a branch takes it all."""
    lines = told(tmp_path, inset_m=3000.0, **three(tmp_path))
    assert "Nothing is left of stratum 'upper'" in " ".join(lines)


def test_ends_that_do_not_meet_are_noted_and_free(tmp_path):
    """The arm stops 7 m short: two networks, four free ends."""
    short = [ARM[0], [FORK[0], FORK[1] - 7.0 / 111_250]]
    names = river(tmp_path, line(*MAIN, branch="main"), line(*short, branch="arm"))
    frame = frame_of(tmp_path, layout="stratified", inset_m=5.0, **names)
    notes = " ".join(frame.notes)
    assert "Branch 'arm' ends 7.0 m from branch 'main': more than 1 m" in notes
    assert "The lines form 2 networks" in notes
    assert frame.population.inset_loss == pytest.approx(20.0, abs=1e-9)


def test_parts_of_a_branch_that_do_not_follow_are_branches_of_their_own(tmp_path):
    """Distances must not run on over a gap."""
    names = river(
        tmp_path,
        line(*MAIN, branch="main"),
        line([-1.87, 52.11], [-1.86, 52.11], branch="main"),
    )
    frame = frame_of(tmp_path, layout="simple-random", **names)
    assert [branch.name for branch in frame.branches] == ["main", "main (2)"]
    assert "comes in 2 parts" in " ".join(frame.notes)


def test_distances_run_the_way_of_the_first_piece(tmp_path):
    """A later piece drawn against the stream does not turn the branch round."""
    names = river(tmp_path, line(*MAIN, branch="main"), line(*reversed(ON), branch="main"))
    frame = frame_of(tmp_path, layout="simple-random", **names)
    start = shapely.get_coordinates(frame.branches[0].geometry)[0]
    ahead = shapely.get_coordinates(frame.branches[0].geometry)[-1]
    assert math.hypot(*start) > 0
    assert start[0] < ahead[0]
    turned = river(tmp_path, line(*reversed(MAIN), branch="main"), line(*ON, branch="main"))
    other = frame_of(tmp_path, layout="simple-random", **turned)
    assert shapely.get_coordinates(other.branches[0].geometry)[0] == pytest.approx(ahead)


def test_ring_cut_in_two_is_a_shore_with_two_branches(tmp_path):
    """The remedy that the refusal of a loop names must work."""
    names = river(tmp_path, line(*LOOP[:3], branch="shore"), line(*LOOP[2:], branch="shore"))
    frame = frame_of(tmp_path, layout="simple-random", inset_m=5.0, **names)
    assert len(frame.branches) == 2
    assert frame.population.inset_loss == 0.0
    assert frame.population.net == pytest.approx(geodesic(LOOP), abs=0.01)


def test_names_stand_in_for_branches_and_are_said(tmp_path):
    """Without a column 'branch' the name of a line; without that a number."""
    named = frame_of(tmp_path, layout="stratified", **river(tmp_path, line(*MAIN, name="Brook")))
    assert named.branches[0].name == "Brook"
    assert "column 'name' was taken for the branch" in " ".join(named.notes)
    bare = frame_of(tmp_path, layout="stratified", **river(tmp_path, line(*MAIN)))
    assert bare.branches[0].name == "line 1"


def test_other_formats_give_the_same_lines(tmp_path):
    """GeoPackage with a layer of points beside, Shapefile in UTM, KML, and a walked GPX track."""
    expected = geodesic(MAIN)
    table = geopandas.GeoDataFrame({"branch": ["b"]}, geometry=[shapely.LineString(MAIN)], crs=4326)
    spot = geopandas.GeoDataFrame({"a": [1]}, geometry=[shapely.Point(-1.9, 52.1)], crs=4326)
    spot.to_file(tmp_path / "r.gpkg", layer="spots")
    table.to_file(tmp_path / "r.gpkg", layer="lines")
    table.to_crs(32630).to_file(tmp_path / "r.shp")
    corners = " ".join(f"{x},{y}" for x, y in MAIN)
    (tmp_path / "r.kml").write_text(
        '<kml xmlns="http://www.opengis.net/kml/2.2"><Placemark><name>b</name><LineString>'
        f"<coordinates>{corners}</coordinates></LineString></Placemark></kml>"
    )
    points = "".join(f'<trkpt lat="{y}" lon="{x}"/>' for x, y in MAIN)
    (tmp_path / "r.gpx").write_text(
        '<gpx version="1.1" creator="t" xmlns="http://www.topografix.com/GPX/1/1">'
        f"<trk><name>b</name><trkseg>{points}</trkseg></trk></gpx>"
    )
    for name in ("r.gpkg", "r.shp", "r.kml", "r.gpx"):
        frame = frame_of(tmp_path, layout="simple-random", kind="line", line_file=name)
        assert frame.branches[0].name == "b"
        # UTM edges are straight in UTM: over 700 m they part from geodesics by millimetres.
        assert frame.population.net == pytest.approx(expected, abs=0.02)


def test_record_gives_back_branches_reaches_and_lengths(tmp_path):
    """A plan drawn again from its record needs every millimetre."""
    write_geojson(tmp_path / "weir.geojson", point(-1.885, 52.1075))
    frame = frame_of(
        tmp_path, layout="stratified", exclusions=[("weir.geojson", 50.0, "weir")],
        **three(tmp_path),
    )  # fmt: skip
    again = frame_from_record(frame_to_record(frame))
    assert again == frame


def test_population_is_said_in_the_words_of_the_bank():
    """3.42 of 3.60 km are 95 %; miles by the international mile of 1609.344 m."""
    shape = shapely.LineString([(0, 0), (3600, 0)])
    population = line_population(
        FrameTable(kind="line", line_file="bank.kml", unit_is="one bank sample"),
        (Branch("bank", 3600.0, shape),),
        excluded=(ExcludedArea("quay", "q.kml", 0.0, 0.0, shape, 180.0),),
        inset_loss=0.0,
        net=3420.0,
    )
    assert population.sentences == (
        "The mean speaks for 95.0 % of the lines: 3.42 of 3.60 km (2.13 of 2.24 miles).",
        "Left out: quay: 180.0 m, 5.0 % of the lines.",
        "Nothing is said about what was left out.",
        "One n is: one place on the line (one bank sample).",
    )
