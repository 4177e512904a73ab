"""Gross, each exclusion, inset, net: the sums and the sentences that say them."""

import math
from pathlib import Path

import pyproj
import pytest
import shapely
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from fieldplan.base.errors import FrameError
from fieldplan.base.units import acres, area_in_words, hectares
from fieldplan.frame.model import Frame
from tests.unit.frame.sites import (
    box,
    frame_of,
    line,
    point,
    polygon,
    standard_site,
    write_csv,
    write_geojson,
)

W, E, S, N = -1.9020, -1.8980, 52.0990, 52.1010
WIDTH = pyproj.Geod(ellps="WGS84").inv(W, 52.1, E, 52.1)[2]
HEIGHT = pyproj.Geod(ellps="WGS84").inv(W, S, W, N)[2]
"""Sides of the standard site by Karney's geodesics, in metres."""


@pytest.fixture
def site(tmp_path: Path) -> Path:
    """Folder with the standard boundary."""
    return standard_site(tmp_path)


def books_balance(frame: Frame) -> bool:
    """Gross less all losses is net, and the strata sum to it."""
    population = frame.population
    out = sum(area.area_m2 for area in frame.excluded)
    net = sum(stratum.measure for stratum in frame.strata)
    return (
        abs(population.gross - out - population.inset_loss - population.net) < 1e-6
        and abs(net - population.net) < 1e-6
        and abs(population.share - population.net / population.gross) < 1e-12
        and population.inset_loss >= 0
    )


def test_a_site_with_nothing_taken_out_speaks_for_all_of_it(site: Path) -> None:
    """The plainest statement has two sentences."""
    frame = frame_of(site)
    assert frame.population.sentences == (
        "The mean speaks for 100 % of the site: all of 6.100 ha (15.07 acres).",
        "One n is: one location.",
    )
    assert frame.population.inset_loss == 0
    assert frame.population.share == 1
    assert frame.strata[0].name == "site"
    assert books_balance(frame)


def test_an_exclusion_is_stated_with_area_share_buffer_and_reason(site: Path) -> None:
    """A box of a tenth of the site, by degrees."""
    out = box(W, S, W + 0.0004, N)
    write_geojson(site / "pond.geojson", polygon(out))
    frame = frame_of(site, exclusions=[("pond.geojson", 0.0, "open water")])
    assert frame.excluded[0].area_m2 == pytest.approx(frame.population.gross / 10, abs=0.3)
    assert frame.population.sentences == (
        "The mean speaks for 90.0 % of the site: 5.490 of 6.100 ha (13.57 of 15.07 acres).",
        "Left out: open water: 0.6100 ha (1.507 acres), 10.0 % of the site.",
        "Nothing is said about what was left out.",
        "One n is: one location.",
    )
    assert books_balance(frame)


def test_ground_under_two_exclusions_is_counted_once(site: Path) -> None:
    """The second takes only what the first has left."""
    write_geojson(site / "a.geojson", polygon(box(W, S, W + 0.0004, N)))
    write_geojson(site / "b.geojson", polygon(box(W, S, W + 0.0008, N)))
    frame = frame_of(site, exclusions=[("a.geojson", 0.0, "first"), ("b.geojson", 0.0, "second")])
    first, second = (area.area_m2 for area in frame.excluded)
    assert first == pytest.approx(second, abs=0.3)
    assert frame.population.share == pytest.approx(0.8, rel=1e-5)
    assert books_balance(frame)


def test_a_buffer_round_a_point_takes_a_circle(site: Path) -> None:
    """A well head with 10 m around it: π·10² = 314.16 m², a 128-sided polygon 0.04 % less."""
    write_geojson(site / "well.geojson", point(-1.9, 52.1, name="W1"))
    frame = frame_of(site, exclusions=[("well.geojson", 10.0, "well head")])
    assert frame.excluded[0].area_m2 == pytest.approx(314.16 * 0.9996, rel=1e-4)
    assert "Left out: well head, with 10 m around it: 314.0 m²" in frame.population.sentences[1]


def test_a_buffer_round_a_line_takes_a_strip(site: Path) -> None:
    """A gas main right across: 2 × 5 m × the height of the site."""
    write_geojson(site / "main.geojson", line([-1.9, S - 0.01], [-1.9, N + 0.01]))
    frame = frame_of(site, exclusions=[("main.geojson", 5.0, "gas main")])
    assert frame.excluded[0].area_m2 == pytest.approx(10 * HEIGHT, rel=1e-4)
    assert frame.excluded[0].buffer_m == 5.0
    assert shapely.within(frame.excluded[0].geometry, frame.boundary.buffer(0.002))


@pytest.mark.parametrize("feature", [point(-1.9, 52.1), line([-1.9, S], [-1.9, N])])
def test_lines_and_points_without_a_buffer_take_nothing_and_are_refused(
    site: Path, feature: dict[str, object]
) -> None:
    """An exclusion without area is an option that does nothing."""
    write_geojson(site / "x.geojson", feature)
    with pytest.raises(FrameError, match=r"and no polygon.*buffer_m"):
        frame_of(site, exclusions=[("x.geojson", 0.0, "main")])


def test_a_table_of_wells_with_a_buffer_takes_a_circle_round_each(site: Path) -> None:
    """Rows with ids and a buffer are places; without either they are corners."""
    rows = [["location_id", "latitude", "longitude"], ["a", 52.1, -1.9], ["b", 52.1003, -1.9005]]
    rows.append(["c", 52.0997, -1.9005])
    write_csv(site / "wells.csv", rows)
    frame = frame_of(site, exclusions=[("wells.csv", 5.0, "wells")])
    assert frame.excluded[0].area_m2 == pytest.approx(3 * math.pi * 25 * 0.9996, rel=1e-4)
    triangle = frame_of(site, exclusions=[("wells.csv", 0.0, "between wells")])
    assert triangle.excluded[0].area_m2 == pytest.approx(
        0.5 * (WIDTH * 0.0005 / (E - W)) * (HEIGHT * 0.0006 / (N - S)), rel=1e-3
    )


def test_a_walked_outline_with_a_buffer_takes_its_inside_too(site: Path) -> None:
    """A pond walked round: its square of 0.0004° and 5 m outside, not the shore alone."""
    ring = box(-1.9002, 52.0998, -1.8998, 52.1002)
    points = "".join(f'<trkpt lat="{y}" lon="{x}"/>' for x, y in ring)
    (site / "pond.gpx").write_text(f"<gpx><trk><trkseg>{points}</trkseg></trk></gpx>")
    a, b = WIDTH / 10, HEIGHT / 5
    frame = frame_of(site, exclusions=[("pond.gpx", 5.0, "pond")])
    expected = a * b + 2 * (a + b) * 5 + math.pi * 25
    assert frame.excluded[0].area_m2 == pytest.approx(expected, rel=1e-4)


def test_an_inset_narrower_than_the_receiver_is_noted(site: Path) -> None:
    """Keep locations at least the position error inside the line, or say so."""
    frame = frame_of(site, inset_m=2.0, position_accuracy_m=5.0)
    assert frame.notes == (
        "The receiver is good to 5 m and the inset is 2 m: near the boundary a sample may be "
        "taken outside the site.",
    )
    assert frame_of(site, inset_m=5.0, position_accuracy_m=5.0).notes == ()


def test_an_exclusion_that_just_misses_the_site_is_noted(site: Path) -> None:
    """A pond across the road takes nothing, and the reader should know."""
    write_geojson(site / "pond.geojson", polygon(box(E + 0.001, S, E + 0.002, N)))
    frame = frame_of(site, exclusions=[("pond.geojson", 0.0, "pond")])
    assert frame.excluded == ()
    assert "pond.geojson (pond) lies 68.5 m outside the site and takes nothing from it." in (
        frame.notes
    )


def test_an_exclusion_kilometres_away_is_refused(site: Path) -> None:
    """It was meant to take something; its coordinates are wrong."""
    write_geojson(site / "pond.geojson", polygon(box(W, S + 1, E, N + 1)))
    with pytest.raises(FrameError, match=r"pond\.geojson lies 111 km from the boundary"):
        frame_of(site, exclusions=[("pond.geojson", 0.0, "pond")])


def test_an_inset_takes_a_strip_along_the_boundary(site: Path) -> None:
    """A rectangle of a × b loses 2(a + b)d − 4d² (elementary geometry)."""
    a, b, d = WIDTH, HEIGHT, 3.0
    frame = frame_of(site, inset_m=d)
    assert frame.population.inset_loss == pytest.approx(2 * (a + b) * d - 4 * d * d, rel=1e-4)
    assert frame.population.gross == pytest.approx(a * b, rel=1e-4)
    assert frame.population.sentences[1].startswith(
        "Left out: a strip of 3 m along the boundary and its holes: 0.2944 ha"
    )
    assert books_balance(frame)


def test_the_inset_runs_round_holes_but_not_along_strata(site: Path) -> None:
    """A hole is an edge of the site that a location can fall over; a stratum border is not."""
    hole = box(-1.9005, 52.0998, -1.8995, 52.1002)
    write_geojson(site / "boundary.geojson", polygon(box(W, S, E, N), hole))
    write_geojson(
        site / "strata.geojson",
        polygon(box(W, S, -1.9, N), stratum="west"),
        polygon(box(-1.9, S, E, N), stratum="east"),
    )
    frame = frame_of(site, strata="strata.geojson", inset_m=3.0)
    net = shapely.union_all([stratum.geometry for stratum in frame.strata])
    edge = frame.boundary.boundary
    assert shapely.distance(net, edge) == pytest.approx(3.0, abs=0.003)
    west, east = (frame.stratum(name).geometry for name in ("west", "east"))
    assert shapely.distance(west, east) < 0.002
    assert books_balance(frame)


def test_an_inset_that_eats_the_whole_site_is_refused(site: Path) -> None:
    """Nothing can be drawn in nothing."""
    with pytest.raises(FrameError, match="Nothing is left of the site"):
        frame_of(site, inset_m=150.0)


def test_an_assumed_boundary_is_stamped(site: Path) -> None:
    """A circle round a coordinate is no survey."""
    frame = frame_of(site, boundary_assumed=True)
    assert frame.boundary_assumed
    assert "The boundary is ASSUMED; so is every area here." in frame.population.sentences
    assert "The boundary is ASSUMED." in frame.notes


def test_what_one_n_is_can_be_said_in_the_campaign(site: Path) -> None:
    """A location may stand for an auger hole or a net haul."""
    frame = frame_of(site, unit_is="a hand-auger hole to 15 cm.")
    assert frame.population.sentences[-1] == (
        "One n is: one location (a hand-auger hole to 15 cm)."
    )


@pytest.mark.parametrize(
    ("share", "words"), [(0.0002, "99.98 %"), (0.00002, "99.998 %"), (0.25, "75.0 %")]
)
def test_next_to_all_is_never_rounded_to_all(site: Path, share: float, words: str) -> None:
    """100 % printed where something was left out would be untrue."""
    write_geojson(site / "x.geojson", polygon(box(W, S, W + 0.004 * share, N)))
    frame = frame_of(site, exclusions=[("x.geojson", 0.0, "strip")])
    assert f"speaks for {words} of the site" in frame.population.sentences[0]


@settings(
    max_examples=30, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(
    inset=st.floats(0, 20),
    buffer=st.floats(0, 20),
    start=st.floats(W, E - 0.001),
    border=st.floats(W + 0.0008, E - 0.0008),
)
def test_the_books_balance_for_any_inset_buffer_and_strata(
    site: Path, inset: float, buffer: float, start: float, border: float
) -> None:
    """What is printed as gross, left out and net must add up, always."""
    write_geojson(site / "x.geojson", polygon(box(start, 52.0995, start + 0.0005, 52.1)))
    write_geojson(
        site / "strata.geojson",
        polygon(box(W, S, border, N), stratum="west"),
        polygon(box(border, S, E, N), stratum="east"),
    )
    frame = frame_of(
        site,
        strata="strata.geojson",
        inset_m=inset,
        exclusions=[("x.geojson", buffer, "barn")],
    )
    assert books_balance(frame)
    assert frame.population.gross == pytest.approx(frame.boundary.area, abs=1.0)
    assert sum(stratum.weight for stratum in frame.strata) == pytest.approx(1.0, abs=1e-12)
    for stratum in frame.strata:
        assert shapely.is_valid(stratum.geometry)
        for area in frame.excluded:
            assert shapely.intersection(stratum.geometry, area.geometry).area < 0.5


def test_hectares_and_acres_are_those_of_their_definitions() -> None:
    """4840 square yards of 0.9144 m (international yard and pound agreement, 1959)."""
    assert hectares(100.0 * 100.0) == 1.0
    assert acres(4840 * 0.9144**2) == pytest.approx(1.0, rel=1e-12)
    assert area_in_words(999.9) == "999.9 m²"
    assert area_in_words(0.0) == "0 m²"
