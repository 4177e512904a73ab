"""Strata tile the site: overlaps and gaps measured, settled by rule or refused."""

import math
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
import shapely
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from fieldplan.base.errors import FrameError
from fieldplan.frame import cutting
from tests.unit.frame.sites import box, frame_of, polygon, standard_site, write_geojson

W, E, S, N = -1.9020, -1.8980, 52.0990, 52.1010
M = -1.9
METRE = (E - W) / 273.9
"""A metre of longitude here."""


@pytest.fixture
def site(tmp_path: Path) -> Path:
    """Folder with the standard boundary."""
    return standard_site(tmp_path)


def strata(folder: Path, west_end: float, east_start: float, **names: str) -> None:
    """Write two strata with a border that may gape or overlap."""
    write_geojson(
        folder / "strata.geojson",
        polygon(box(W, S, west_end, N), stratum=names.get("west", "west")),
        polygon(box(east_start, S, E, N), stratum=names.get("east", "east")),
    )


def refusal(folder: Path, **table: object) -> str:
    """The message with which a frame is refused."""
    with pytest.raises(FrameError) as caught:
        frame_of(folder, strata="strata.geojson", **table)
    return str(caught.value)


def test_two_halves_weigh_a_half_each_and_sum_to_the_site(site: Path) -> None:
    """Weights are shares of net area and sum to one."""
    strata(site, M, M)
    frame = frame_of(site, strata="strata.geojson")
    assert [s.name for s in frame.strata] == ["east", "west"]
    assert [s.weight for s in frame.strata] == pytest.approx([0.5, 0.5], abs=1e-6)
    assert sum(s.measure for s in frame.strata) == pytest.approx(frame.population.net, abs=1e-6)
    assert frame.notes == ()


def test_an_overlap_above_the_limit_is_refused_with_both_names_and_its_area(site: Path) -> None:
    """10 m of 274 m counted twice: 3.7 % of the site (width over width)."""
    strata(site, M + 10 * METRE, M)
    message = refusal(site)
    assert "strata 'east' and 'west' overlap on 2,22" in message or "0.22" in message
    assert "3.7 % of the site" in message
    assert "Draw one border between them." in message


def test_a_sliver_of_overlap_goes_to_the_first_stratum_by_name_and_is_said(site: Path) -> None:
    """1 cm of 274 m is 0.004 %, below the 0.01 % that drawing noise may have."""
    strata(site, M + 0.01 * METRE, M)
    frame = frame_of(site, strata="strata.geojson")
    assert any("overlap" in note and "first stratum by name" in note for note in frame.notes)
    total = sum(s.measure for s in frame.strata)
    assert total == pytest.approx(frame.boundary.area, rel=1e-6)
    east, west = (s.geometry for s in frame.strata)
    assert shapely.intersection(east, west).area < 1e-6
    assert east.bounds[0] == pytest.approx(0.0, abs=0.004)


def test_a_wide_gap_is_refused_with_its_area(site: Path) -> None:
    """10 m of 274 m without a stratum: 3.7 % of the site."""
    strata(site, M - 10 * METRE, M)
    message = refusal(site)
    assert "(3.7 %) of the site uncovered, limit 0.5 %" in message
    assert "make the gap an exclusion with a reason" in message


def test_a_narrow_gap_leaves_the_population_and_is_said(site: Path) -> None:
    """1 m of 274 m (0.37 %): too much to give away, so the mean does not speak for it."""
    strata(site, M - METRE, M)
    frame = frame_of(site, strata="strata.geojson")
    assert [area.reason for area in frame.excluded] == ["gaps between strata"]
    assert frame.excluded[0].area_m2 == pytest.approx(222.6, abs=1.0)
    assert frame.population.share == pytest.approx(1 - 1 / 273.9, abs=1e-4)
    assert any("were taken out of the population" in note for note in frame.notes)
    assert "speaks for 99.6 % of the site" in frame.population.sentences[0]


def test_a_sliver_without_a_stratum_goes_to_its_neighbour_and_is_said(site: Path) -> None:
    """1 cm of 274 m is drawing noise; nothing of the site may be lost by it."""
    strata(site, M - 0.01 * METRE, M)
    frame = frame_of(site, strata="strata.geojson")
    assert frame.excluded == ()
    assert frame.population.share == pytest.approx(1.0)
    assert sum(s.measure for s in frame.strata) == pytest.approx(frame.boundary.area, rel=1e-6)
    assert any("went to the nearest stratum" in note for note in frame.notes)


def test_strata_are_cut_at_the_boundary_and_the_loss_is_said(site: Path) -> None:
    """A soil map runs on beyond the fence."""
    write_geojson(
        site / "strata.geojson",
        polygon(box(W - 0.01, S - 0.01, M, N + 0.01), stratum="west"),
        polygon(box(M, S - 0.01, E + 0.01, N + 0.01), stratum="east"),
    )
    frame = frame_of(site, strata="strata.geojson")
    assert frame.population.net == pytest.approx(frame.boundary.area, rel=1e-6)
    assert sum("outside the boundary and were cut off" in note for note in frame.notes) == 2


def test_parts_of_one_stratum_are_joined_and_names_trimmed(site: Path) -> None:
    """'west', ' west ' and two polygons are one stratum."""
    write_geojson(
        site / "strata.geojson",
        polygon(box(W, S, M, 52.1), stratum="west"),
        polygon(box(W, 52.1, M, N), stratum="  west "),
        polygon(box(M, S, E, N), stratum="east"),
    )
    frame = frame_of(site, strata="strata.geojson")
    assert [s.name for s in frame.strata] == ["east", "west"]
    assert frame.strata[1].weight == pytest.approx(0.5, abs=1e-6)


def test_a_missing_column_lists_those_that_are_there(site: Path) -> None:
    """The names of strata stand in some column; which one, its author knows."""
    half = polygon(box(W, S, E, N), soil="clay", id=1)
    write_geojson(site / "strata.geojson", half)
    assert refusal(site) == (
        "strata.geojson has no column 'stratum' (its columns: soil, id); name the one with the "
        'strata as stratum_column = "…" in [[frame]].'
    )
    frame = frame_of(site, strata="strata.geojson", stratum_column="soil")
    assert frame.strata[0].name == "clay"


def test_strata_without_a_name_are_listed(site: Path) -> None:
    """A nameless part cannot have a sigma."""
    write_geojson(
        site / "strata.geojson",
        polygon(box(W, S, M, N), stratum=None),
        polygon(box(M, S, E, N), stratum=" "),
    )
    message = refusal(site)
    assert "feature 1: its stratum (column 'stratum') is empty; name it." in message
    assert "feature 2" in message


def test_names_that_differ_in_capitals_only_are_refused(site: Path) -> None:
    """'Yard' and 'yard' are one place to a reader and two to a computer."""
    strata(site, M, M, west="Yard", east="yard")
    assert "'Yard' and 'yard' differ in capital letters only" in refusal(site)


def test_a_stratum_outside_the_boundary_is_an_error_by_name(site: Path) -> None:
    """Its weight would be nil and its sigma asked for all the same."""
    write_geojson(
        site / "strata.geojson",
        polygon(box(W, S, E, N), stratum="field"),
        polygon(box(E + 0.01, S, E + 0.02, N), stratum="wood"),
    )
    assert "stratum 'wood' lies outside the boundary" in refusal(site)


def test_strata_kilometres_away_are_refused_with_the_distance(site: Path) -> None:
    """One degree of latitude is 111 km; the wrong file was named."""
    write_geojson(site / "strata.geojson", polygon(box(W, S + 1, E, N + 1), stratum="a"))
    message = refusal(site)
    assert message == (
        "strata.geojson lies 111 km from the boundary and does not touch it; correct its CRS or "
        "coordinates, or name the right file."
    )


def test_strata_with_swapped_axes_are_told_so(site: Path) -> None:
    """Latitude before longitude is the commonest slip; both orders are places on Earth here."""
    write_geojson(
        site / "strata.geojson", polygon([[y, x] for x, y in box(W, S, E, N)], stratum="a")
    )
    message = refusal(site)
    assert "the other way round: if swapped they fall inside your site" in message


def test_a_stratum_that_the_inset_eats_is_an_error_by_name(site: Path) -> None:
    """A strip of 3 m beside the fence has nothing left after an inset of 5 m."""
    strata(site, W + 3 * METRE, W + 3 * METRE, west="verge", east="field")
    message = refusal(site, inset_m=5.0)
    assert message.startswith("Nothing is left of stratum 'verge': of 668")
    assert "the inset of 5 m and the exclusions leave 0.00 m²" in message
    assert "'field'" not in message


def test_many_small_strata_with_crooked_borders_tile(site: Path) -> None:
    """Voronoi cells of 60 points share every border; the parts are the whole."""
    generator = np.random.default_rng(3)
    points = shapely.MultiPoint(
        np.column_stack([generator.uniform(W, E, 60), generator.uniform(S, N, 60)])
    )
    cells = shapely.get_parts(shapely.voronoi_polygons(points))
    features = [
        polygon([list(c) for c in cell.exterior.coords], stratum=f"cell {i:02d}")
        for i, cell in enumerate(cells)
    ]
    write_geojson(site / "strata.geojson", *features)
    frame = frame_of(site, strata="strata.geojson")
    assert len(frame.strata) == 60
    assert sum(s.measure for s in frame.strata) == pytest.approx(frame.boundary.area, rel=1e-6)


WEST_EDGES = (16.78944280673979, 16.78996227291646, 16.790481739093128, 16.791001205269794)
EAST_EDGES = (16.78996227291646, 16.790481739093128, 16.791001205269797, 16.791520671446463)
SOUTH_EDGES = (48.16857196215763, 48.16932266349748, 48.17007336483734)
NORTH_EDGES = (48.16932266349748, 48.170073364837336, 48.1708240661772)
"""Twelve cells, each edge computed as start + column * width: the last bits differ."""


def test_corners_that_differ_in_the_last_bit_cost_no_cell(tmp_path: Path) -> None:
    """A join in full floating-point numbers lost one of these twelve cells: 8.3 % of the site."""
    write_geojson(
        tmp_path / "boundary.geojson",
        polygon(box(WEST_EDGES[0], SOUTH_EDGES[0], EAST_EDGES[-1], NORTH_EDGES[-1])),
    )
    cells = [
        polygon(box(west, south, east, north), stratum=f"s{(4 * row + column) * 7 % 5}")
        for row, (south, north) in enumerate(zip(SOUTH_EDGES, NORTH_EDGES, strict=True))
        for column, (west, east) in enumerate(zip(WEST_EDGES, EAST_EDGES, strict=True))
    ]
    write_geojson(tmp_path / "strata.geojson", *cells)
    frame = frame_of(tmp_path, strata="strata.geojson")
    assert frame.excluded == ()
    assert frame.population.share == 1.0
    # Cells have one size in degrees; s0 and s2 have three of the twelve, the others two.
    assert [s.weight for s in frame.strata] == pytest.approx(
        [share / 12 for share in (3, 2, 3, 2, 2)], abs=1e-5
    )


def last_bits(value: float, steps: int) -> float:
    """Move a number by so many of the smallest steps that a float can take."""
    for _ in range(abs(steps)):
        value = math.nextafter(value, math.copysign(math.inf, steps))
    return value


@given(
    columns=st.integers(1, 7),
    rows=st.integers(1, 6),
    west=st.floats(-179, 178),
    south=st.floats(-70, 70),
    width=st.floats(1e-4, 1e-3),
    height=st.floats(1e-4, 1e-3),
    seed=st.integers(0, 2**32 - 1),
)
@settings(
    max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
def test_grids_with_jitter_in_the_last_bits_tile_the_site(
    tmp_path: Path,
    columns: int,
    rows: int,
    west: float,
    south: float,
    width: float,
    height: float,
    seed: int,
) -> None:
    """Cells of one size share every border; whatever the last bits, the parts are the whole."""
    generator = np.random.default_rng(seed)

    def corner(column: int, row: int) -> list[float]:
        jitter = generator.integers(-2, 3, 2).tolist()
        return [
            last_bits(west + column * width, jitter[0]),
            last_bits(south + row * height, jitter[1]),
        ]

    def ring(left: int, bottom: int, right: int, top: int) -> list[list[float]]:
        corners = [corner(x, y) for x, y in ((left, bottom), (right, bottom), (right, top))]
        return [*corners, corner(left, top), corners[0]]

    write_geojson(tmp_path / "boundary.geojson", polygon(ring(0, 0, columns, rows)))
    cells = [
        polygon(ring(i, j, i + 1, j + 1), stratum=f"s{generator.integers(5)}")
        for i in range(columns)
        for j in range(rows)
    ]
    write_geojson(tmp_path / "strata.geojson", *cells)
    frame = frame_of(tmp_path, strata="strata.geojson")
    assert frame.excluded == ()
    assert frame.notes == ()
    area = frame.boundary.area
    assert sum(s.measure for s in frame.strata) == pytest.approx(area, rel=1e-4)
    # In a plane of equal areas the cells of one row are equal; rows differ by cos(latitude).
    counts = np.array(
        [sum(c["properties"]["stratum"] == s.name for c in cells) for s in frame.strata]
    )
    assert [s.weight for s in frame.strata] == pytest.approx(counts / len(cells), rel=2e-3)


def lossy(join: Callable[..., shapely.Geometry]) -> Callable[..., shapely.Geometry]:
    """A join that loses the first of its parts."""
    return lambda shapes, grid_size=None: join(shapes[1:], grid_size=grid_size)


def test_a_join_that_loses_a_part_is_refused_with_the_discrepancy(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """3 m² of 6 are gone, and 1 mm along 8 + 8 m of outline explains 0.016 m²."""
    cells = [shapely.box(0, 0, 3, 1), shapely.box(3, 0, 6, 1)]
    assert cutting.joined(cells, "cells").area == pytest.approx(6.0)
    monkeypatch.setattr(shapely, "union_all", lossy(shapely.union_all))
    with pytest.raises(FrameError) as caught:
        cutting.joined(cells, "cells")
    assert str(caught.value).startswith(
        "cells: the parts do not make the whole: they sum to 6.000 m², the whole has 3.000 m²; "
        "3.000 m² differ, and rounding to the millimetre explains 0.01600 m² at most. Export"
    )


def test_parts_that_overlap_are_counted_once_and_refused_only_for_what_is_lost(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """Squares of 4 m² that share 2 m² make 6 m²; one that shares nothing adds all of its own."""
    squares = [shapely.box(10, 0, 12, 2), shapely.box(0, 0, 2, 2), shapely.box(1, 0, 3, 2)]
    assert cutting.joined(squares, "squares").area == pytest.approx(10.0)
    monkeypatch.setattr(shapely, "union_all", lossy(shapely.union_all))
    with pytest.raises(FrameError, match=r"they sum to 10\.00 m², the whole has 6\.000 m²"):
        cutting.joined(squares, "squares")


def test_a_cut_that_loses_ground_is_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    """What lies inside and what lies outside are the whole; here the outside is forgotten."""
    monkeypatch.setattr(shapely, "difference", lambda *_, grid_size: shapely.Polygon())
    with pytest.raises(FrameError, match=r"^yard: .* 3\.000 m² differ"):
        cutting.parted(shapely.box(0, 0, 4, 1), shapely.box(3, 0, 9, 9), "yard")


def test_strata_that_do_not_sum_to_the_site_are_refused(
    site: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """An error in any single step shows in the sum of all: gross is net plus what was left out."""
    strata(site, M, M)
    monkeypatch.setattr("fieldplan.frame.area.merged", lambda piece: shapely.buffer(piece, -1.0))
    with pytest.raises(FrameError, match=r"^strata, exclusions and inset of the site: the parts"):
        frame_of(site, strata="strata.geojson")
