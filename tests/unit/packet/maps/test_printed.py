"""The printed map: true to scale, every name on it, the same bytes again."""

import re
from dataclasses import replace
from datetime import date

import matplotlib as mpl
import numpy as np
import pytest
import shapely

from fieldplan.campaign.model import Paper, PlanTable
from fieldplan.packet.drawing import pens
from fieldplan.packet.maps.content import label_of, plan_content
from fieldplan.packet.maps.panels import bar_length
from fieldplan.packet.maps.printed import draw_pages, printed_map
from tests.factories import make_campaign, make_plan
from tests.unit.packet.maps.sites import make_area_plan, make_list_plan, make_outline

MM = 25.4


def drawn(plan):
    """Draw all pages of a plan."""
    with pens():
        return draw_pages(plan, plan_content(plan))


def texts(figure) -> list[str]:
    """All words on a page."""
    return [text.get_text() for axes in figure.axes for text in axes.texts]


def names(figure) -> list:
    """The names beside marks."""
    return [text for axes in figure.axes for text in axes.texts if text.get_gid() == "name"]


def test_a_long_title_stands_whole_on_the_map() -> None:
    """A map whose title ends in dots is filed under the wrong site."""
    title = "Arsenic in the topsoil of the former Upper Bramley sheep wash, dipping yard, orchard, "
    title += "allotments and railway embankment, first round after the purchase by the parish"
    plan = make_plan()
    table = plan.campaign.plan.model_copy(update={"title": title})
    plan = replace(plan, campaign=plan.campaign.model_copy(update={"plan": table}))
    (figure, *_), _ = drawn(plan)
    assert title in " ".join(texts(figure))


def test_the_map_says_what_to_take_at_each_location() -> None:
    """Who carries the map alone must know the depth."""
    (figure, *_), _ = drawn(make_plan())
    said = " ".join(texts(figure))
    assert "Take at each location: as the method says, 0 m to 0.15 m below ground surface" in said
    assert "for Lead in soil (dry weight)." in said


def ground(figure):
    """The axes that the map is drawn on."""
    return next(axes for axes in figure.axes if axes.get_label() == "ground")


@pytest.fixture(scope="module")
def quarry():
    """Figures and pages of Quarry Field."""
    return drawn(make_plan())


@pytest.fixture(scope="module")
def printed():
    """Quarry Field as files."""
    return printed_map(make_plan())


@pytest.fixture(scope="module")
def atlas():
    """A site of 150 locations."""
    return drawn(make_area_plan(make_outline(900.0), 150, strata=3))


def test_one_page_names_every_location(quarry) -> None:
    """A crew that cannot find a name on the map cannot go there."""
    (figure,), _ = quarry
    wanted = {place.short_name for place in make_plan().locations.places}
    assert {text.get_text() for text in names(figure)} == wanted


@pytest.mark.parametrize("paper", ["A4", "Letter"])
def test_distances_on_paper_are_true_to_the_printed_fraction(paper: str) -> None:
    """Somebody will put a ruler on it: 1 mm is 1/1000 of the denominator in metres."""
    plan = make_plan(campaign=make_campaign(paper=Paper(size=paper)))
    (figure,), (spec,) = drawn(plan)
    places = np.array([(p.easting, p.northing) for p in plan.locations.places])
    on_paper = ground(figure).transData.transform(places) / figure.dpi * MM
    apart = np.hypot(*(places[0] - places[1:]).T)
    measured = np.hypot(*(on_paper[0] - on_paper[1:]).T)
    assert measured * spec.denominator / 1000 == pytest.approx(apart, rel=1e-6)
    fraction = f"1 : {spec.denominator:,}".replace(",", "\u00a0")
    assert fraction in texts(figure)


def test_the_scale_bar_is_as_long_as_it_says(quarry) -> None:
    """Measured on the drawn rectangles, not on the function that made them."""
    (figure,), (spec,) = quarry
    bars = [p for axes in figure.axes for p in axes.patches if p.get_gid() == "scale-bar"]
    edges = [bar.get_window_extent() for bar in bars]
    millimetres = (max(e.x1 for e in edges) - min(e.x0 for e in edges)) / figure.dpi * MM
    metres = bar_length(spec.denominator)
    assert millimetres * spec.denominator / 1000 == pytest.approx(metres, rel=1e-6)
    assert f"{metres} m" in texts(figure)


@pytest.mark.parametrize(
    "plan",
    [
        make_area_plan(make_outline(400.0), 60, strata=2),
        make_area_plan(make_outline(400.0), 40, spread_m=60.0, paper="Letter"),
        make_area_plan(shapely.box(-3000, -8, 3000, 8), 24),
    ],
    ids=["60-scattered", "40-heaped", "thin"],
)
def test_drawn_names_do_not_overlap_nor_leave_the_frame(plan) -> None:
    """As measured by matplotlib's own renderer on the finished page."""
    figures, _ = drawn(plan)
    for figure in figures:
        renderer = figure.canvas.get_renderer()
        boxes = [shapely.box(*t.get_window_extent(renderer).extents) for t in names(figure)]
        frame = shapely.box(*ground(figure).get_window_extent(renderer).extents)
        assert all(frame.contains(box) for box in boxes)
        assert [t for t in texts(figure) if t.startswith("Too close")] == []
        if boxes:
            first, second = shapely.STRtree(boxes).query(boxes, predicate="intersects")
            assert (first == second).all()


def test_a_page_says_status_revision_scale_grid_and_north(quarry) -> None:
    """What a map needs before anybody may trust it."""
    (figure,), _ = quarry
    words = " ".join(texts(figure))
    for phrase in (
        "Quarry Field, lead in topsoil", "DRAFT", "QF-r01", "page 1 of 1", "2026-11-03",
        "Lambert azimuthal equal-area", "EPSG:32630", "EPSG:4326", "grid north of the site plane",
        "Magnetic north is not shown", "OPEN: underground utilities (hold point)",
        "boundary.geojson", "stratum: meadow", "left out: open water", "site boundary",
    ):  # fmt: skip
        assert phrase in words, phrase
    assert texts(figure).count("DRAFT") == 2


def test_an_issued_map_names_who_issued_it_and_is_no_draft() -> None:
    """The status is the plan's, on every page."""
    plan = make_plan(issued_by="L. Fenn", issued_on=date(2026, 11, 5))
    (figure,), _ = drawn(plan)
    words = texts(figure)
    assert words.count("ISSUED by L. Fenn on 2026-11-05") == 2
    assert "DRAFT" not in words


def test_a_crowd_of_locations_becomes_a_key_and_an_atlas(atlas) -> None:
    """Every location is named on at least one page, and every page says which it is."""
    figures, specs = atlas
    named = {t.get_text() for figure in figures[1:] for t in names(figure)}
    assert named == {f"HLA{order:03d}" for order in range(1, 151)}
    assert names(figures[0]) == []
    for number, figure in enumerate(figures, start=1):
        words = texts(figure)
        assert f"QF-r01 · page {number} of {len(figures)}" in words
        assert words.count("DRAFT") == 2
    assert len({spec.denominator for spec in specs[1:]}) == 1
    assert specs[1].denominator < specs[0].denominator


def test_pages_of_an_atlas_overlap_and_name_their_neighbours(atlas) -> None:
    """So that one can walk from page to page."""
    figures, specs = atlas
    book = specs[1].atlas
    for figure, spec in zip(figures[1:], specs[1:], strict=True):
        for row, column in ((1, 0), (-1, 0), (0, 1), (0, -1)):
            number = book.beside(spec.tile, row, column=column)
            if number is None:
                continue
            assert f"page {number}" in texts(figure)
            other = specs[number - 1].extent
            assert shapely.box(*vars(spec.extent).values()).intersection(
                shapely.box(*vars(other).values())
            ).area > 0  # fmt: skip


def test_a_heap_on_one_spot_of_a_large_site_gets_a_page_of_its_own() -> None:
    """Twelve wells within 100 m on a site of 50 km would be one dot."""
    plan = make_area_plan(make_outline(25_000.0), 12, spread_m=20.0)
    figures, specs = drawn(plan)
    assert len(figures) == 2
    assert specs[1].denominator <= specs[0].denominator / 50
    assert len(names(figures[1])) == 12


@pytest.mark.parametrize(
    ("plan", "most_pages"),
    [
        (make_area_plan(shapely.box(0, 0, 10, 10), 6, paper="Letter"), 1),
        (make_area_plan(make_outline(25_000.0), 30, strata=12, centre=(-33.9, 18.4)), 1),
        (make_area_plan(shapely.box(-8, -3000, 8, 3000), 24), 1),
        (make_area_plan(make_outline(500.0), 20, centre=(86.0, 20.0)), 1),
        (make_area_plan(make_outline(2000.0), 20, centre=(-17.0, 180.0)), 1),
        (make_list_plan(), 1),
    ],
    ids=["10 m", "50 km", "thin", "near the pole", "on 180 degrees", "list"],
)
def test_any_site_is_drawn_with_all_its_names(plan, most_pages: int) -> None:
    """From a garden bed to a catchment, anywhere on Earth."""
    figures, _ = drawn(plan)
    assert len(figures) <= most_pages
    wanted = {label_of(plan, place) for place in plan.locations.places}
    assert {t.get_text() for figure in figures for t in names(figure)} == wanted


def test_a_map_shows_the_owners_id_alone_where_the_receivers_name_says_the_same() -> None:
    """MW-20 stands on the casing and MW20 on the receiver; 07B needs both of its names."""
    plan = make_list_plan()
    first, *others = plan.locations.places
    named = {"MW-20": "MW20", "07B": "QFA01", "a very long well": "QFA02"}
    places = [replace(first, location_id=own, short_name=name) for own, name in named.items()]
    plan = replace(plan, locations=replace(plan.locations, places=(*places, *others)))
    assert [label_of(plan, place) for place in places] == ["MW-20", "QFA01 (07B)", "QFA02"]
    content = plan_content(plan)
    assert {"MW-20", "QFA01 (07B)"} <= {mark.name for mark in content.marks}
    area = make_area_plan(shapely.box(0, 0, 100, 100), 6)
    drawn_place = area.locations.places[0]
    assert label_of(area, drawn_place) == drawn_place.short_name


def test_a_list_shows_the_units_that_were_not_drawn_and_says_its_outline_is_none() -> None:
    """Seven of fourteen wells are drawn; the others are dots without a name."""
    plan = make_list_plan()
    content = plan_content(plan)
    assert sum(not mark.name for mark in content.marks) == 7
    (figure,), _ = drawn(plan)
    assert "outline of the list, for orientation only" in texts(figure)


def test_an_assumed_boundary_is_stamped_on_every_page() -> None:
    """Nobody may take a sketch for a survey."""
    figures, _ = drawn(make_area_plan(make_outline(900.0), 80, assumed=True))
    assert len(figures) > 1
    assert all(any("ASSUMED BOUNDARY" in words for words in texts(f)) for f in figures)


def test_holes_and_exclusions_are_cut_out_of_the_drawn_ground(quarry) -> None:
    """The drawn yard, asked point by point, is open where the pond is."""
    from fieldplan.packet.maps.ground import compound_path

    yard = make_plan().frame.stratum("yard").geometry
    path = compound_path(yard)
    rings = path.to_polygons()
    # signed areas of shell and hole have opposite signs, so both fill rules leave the hole open
    areas = [shapely.Polygon(ring).exterior.is_ccw for ring in rings]
    assert len(areas) == 2
    assert areas[0] != areas[1]


def test_the_picture_has_the_size_of_the_paper(printed) -> None:
    """A4 lying at 150 dots to the inch: 297 mm are 1754 dots (PNG header, bytes 16 to 24)."""
    width, height = (int.from_bytes(printed.png[at : at + 4]) for at in (16, 20))
    assert (width, height) == pytest.approx((297 / MM * 150, 210 / MM * 150), abs=1.0)


def test_typed_markup_and_mathematics_are_printed_as_typed() -> None:
    """A dollar sign in a title is money, not a formula."""
    title = r"Lead at $5 and $x^2$ \frac{ <b>&"
    plan = make_plan(campaign=make_campaign(plan=PlanTable(id="QF", title=title)))
    (figure,), _ = drawn(plan)
    shown = next(t for axes in figure.axes for t in axes.texts if t.get_text() == title)
    assert not shown.get_parse_math()
    figure.canvas.draw()


def test_a_title_and_a_status_of_any_length_stay_on_the_page() -> None:
    """Cut with an ellipsis rather than run over each other."""
    campaign = make_campaign(plan=PlanTable(id="QF", title="word " * 100))
    plan = make_plan(campaign=campaign, issued_by="N" * 80, issued_on=date(2026, 11, 5))
    (figure,), _ = drawn(plan)
    renderer = figure.canvas.get_renderer()
    page = shapely.box(0, 0, *figure.canvas.get_width_height())
    for axes in figure.axes:
        for text in axes.texts:
            if text.get_text():
                box = shapely.box(*text.get_window_extent(renderer).extents)
                assert page.covers(box), text.get_text()


def test_the_same_plan_prints_the_same_bytes_whatever_the_users_settings(printed) -> None:
    """A redraw is compared byte by byte; a dark style at home must not print a black map."""
    with mpl.rc_context({"figure.facecolor": "black", "font.size": 20, "savefig.bbox": "tight"}):
        assert printed_map(make_plan()) == printed
        assert mpl.rcParams["font.size"] == 20


def test_a_pdf_is_one_file_of_as_many_pages_as_told() -> None:
    """Counted in the file itself."""
    book = printed_map(make_area_plan(make_outline(900.0), 62))
    assert len(re.findall(rb"/Type /Page\b", book.pdf)) == book.pages > 1


def test_letters_that_the_face_lacks_raise_no_alarm() -> None:
    """A title in a script without a glyph prints boxes; it must not stop the packet."""
    campaign = make_campaign(plan=PlanTable(id="QF", title="土壤 調査"))
    plan = make_plan(campaign=campaign)
    with pens():
        (figure,), _ = draw_pages(plan, plan_content(plan))
        figure.canvas.draw()
    assert any("土壤" in words for words in texts(figure))


def test_many_strata_stay_apart_in_grey() -> None:
    """Twelve strata: neighbours differ in hatch, not in colour alone."""
    from fieldplan.packet.maps.ground import grounds

    plan = make_area_plan(make_outline(400.0), 12, strata=12)
    hatches = [layer.style.get("hatch") for layer in grounds(plan.frame)[:12]]
    assert len(set(hatches)) >= 11


def test_exclusions_are_drawn_only_where_they_take_ground() -> None:
    """A pipe that runs on beyond the fence takes nothing there."""
    from fieldplan.packet.maps.ground import grounds

    outline = shapely.box(0, 0, 100, 100)
    plan = make_area_plan(outline, 5, excluded=(shapely.box(-50, 40, 150, 60),))
    left_out = next(g for g in grounds(plan.frame) if g.words == "left out: reason 1")
    assert left_out.geometry.area == pytest.approx(2000.0)


def test_locations_outside_the_boundary_widen_the_page() -> None:
    """A targeted place at the neighbour's must still be on the map."""
    plan = make_plan()
    far = replace(plan.locations.places[-1], easting=420.0, northing=300.0)
    moved = replace(plan.locations, places=(*plan.locations.places[:-1], far))
    (figure,), (spec,) = drawn(make_plan(locations=moved))
    assert spec.extent.holds(420.0, 300.0)
    assert far.short_name in {t.get_text() for t in names(figure)}
