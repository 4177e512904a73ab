"""The offline map in Chromium with no network, at phone and desktop width."""

import math
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from pyproj import Geod, Transformer

from fieldplan.packet.maps.screen import screen_map
from fieldplan.plan.model import Plan
from tests import factories
from tests.browser.chromium import DESKTOP, PHONE, Page, Screen, open_page
from tests.unit.packet import plans

pytestmark = pytest.mark.browser

SWITCH = """(() => { document.querySelectorAll(".leaflet-control-layers-overlays label").forEach(
  (label) => { if (label.textContent.includes(WORDS)) { label.querySelector("input").click(); } });
})()"""

OUTSIDE = """(() => { const frame = document.querySelector(".folium-map").getBoundingClientRect();
  return [...document.querySelectorAll(".mark .symbol")].filter((s) => {
    const box = s.getBoundingClientRect();
    return box.left < frame.left || box.right > frame.right || box.top < frame.top
      || box.bottom > frame.bottom; }).length; })()"""

UNDER_BUTTONS = """((seen) => {
  const boxes = (words) => [...document.querySelectorAll(words)].map((e) =>
    e.getBoundingClientRect());
  const buttons = boxes(".leaflet-control");
  return boxes(seen).filter((a) => buttons.some((b) =>
    a.left < b.right - 1 && b.left < a.right - 1 && a.top < b.bottom - 1
    && b.top < a.bottom - 1)).length; })"""


def save(plan: Plan, folder: Path) -> Path:
    """Write the map of a plan where the browser can open it."""
    path = folder / "map.html"
    path.write_text(screen_map(plan), encoding="utf-8")
    return path


def count(page: Page, selector: str) -> int:
    """Count elements that are in the document."""
    return int(page.evaluate(f"document.querySelectorAll({selector!r}).length"))


@pytest.fixture(params=[PHONE, DESKTOP], ids=["phone", "desktop"])
def page(request: pytest.FixtureRequest, tmp_path: Path) -> Iterator[Page]:
    """Open the map of Quarry Field."""
    with open_page(save(factories.make_plan(), tmp_path), request.param) as opened:
        yield opened


def test_the_map_is_quiet_complete_and_asks_for_nothing(page: Page) -> None:
    """Nine random and one targeted place, two strata, one exclusion, one boundary."""
    assert page.errors == []
    assert page.requests == []
    assert count(page, ".mark.random .symbol") == 9
    assert count(page, ".mark.targeted .symbol") == 1
    assert count(page, ".mark.alternate") == 0
    assert count(page, ".stratum-area") == 2
    assert count(page, ".excluded-area") == 1
    assert count(page, ".boundary-line") == 1
    assert count(page, ".grid-line") >= 4
    assert count(page, ".leaflet-control-scale-line") == 1
    assert count(page, ".north svg") == 1
    page.evaluate(SWITCH.replace("WORDS", "'Alternate'"))
    assert count(page, ".mark.alternate .symbol") == 4
    assert page.errors == []


def test_nothing_is_wider_than_the_window_and_every_place_is_in_view(page: Page) -> None:
    """No sideways scrolling, and no place hidden under the bars when the map opens."""
    assert page.evaluate("document.documentElement.scrollWidth <= innerWidth")
    assert page.evaluate("document.documentElement.scrollHeight <= innerHeight")
    assert page.evaluate(OUTSIDE) == 0


def resize(page: Page, width: int, height: int) -> None:
    """Give the window another size, as turning a phone does."""
    page.call(
        "Emulation.setDeviceMetricsOverride",
        width=width,
        height=height,
        deviceScaleFactor=1,
        mobile=True,
    )
    page.settle(0.6)


def test_a_window_that_changes_its_size_shows_the_whole_site_until_the_map_is_moved(
    tmp_path: Path,
) -> None:
    """A phone is turned, a bar comes up: nothing may be cut off; a view chosen by hand stays."""
    with open_page(save(factories.make_plan(), tmp_path), Screen(844, 390)) as page:
        for size in ((390, 844), (412, 915), (844, 390)):
            resize(page, *size)
            assert page.evaluate(OUTSIDE) == 0, size
        page.evaluate("fieldplanShown.map.zoomIn(2, {animate: false}); 0")
        chosen = page.evaluate("fieldplanShown.map.getZoom()")
        resize(page, 390, 844)
        assert page.evaluate("fieldplanShown.map.getZoom()") == chosen


@pytest.mark.parametrize("size", [(360, 740), (390, 844), (412, 915), (820, 1180), (1280, 900)])
def test_no_button_covers_a_place_or_its_label(size: tuple[int, int], tmp_path: Path) -> None:
    """What lies under the ruler is not read."""
    screen = Screen(*size, touch=size[0] < 700)
    for plan in (factories.make_plan(), plans.crowded_plan(75)):
        with open_page(save(plan, tmp_path), screen) as page:
            assert page.evaluate(f"{UNDER_BUTTONS}('.label:not(.waiting), .symbol')") == 0
            buttons = page.evaluate(
                """[...document.querySelectorAll(".leaflet-top .leaflet-control")].map((e) => {
                const b = e.getBoundingClientRect();
                return [b.left, b.top, b.right, b.bottom]; })"""
            )
            for number, (left, top, right, bottom) in enumerate(buttons):
                assert left >= 0
                assert right <= screen.width
                for other in buttons[number + 1 :]:
                    across = min(right, other[2]) - max(left, other[0])
                    down = min(bottom, other[3]) - max(top, other[1])
                    assert min(across, down) <= 0
            page.evaluate("fieldplanShown.map.zoomIn(2, {animate: false}); 0")
            assert page.evaluate(f"{UNDER_BUTTONS}('.label:not(.waiting)')") == 0


def test_labels_never_cover_each_other_or_a_mark(tmp_path: Path) -> None:
    """300 places: some labels wait for a closer zoom, none overlaps; marks all stay."""
    script = """(() => { const seen = [...document.querySelectorAll(".label:not(.waiting)")]
      .map((label) => label.getBoundingClientRect());
      let bad = 0;
      seen.forEach((a, i) => seen.slice(i + 1).forEach((b) => {
        if (a.left < b.right - 1 && b.left < a.right - 1 && a.top < b.bottom - 1
            && b.top < a.bottom - 1) { bad += 1; } }));
      return [seen.length, bad]; })()"""
    with open_page(save(plans.crowded_plan(300), tmp_path), DESKTOP) as page:
        shown, overlapping = page.evaluate(script)
        assert count(page, ".mark .symbol") == 300
        assert overlapping == 0
        assert 20 < shown < 300
        page.evaluate("fieldplanShown.map.setZoom(fieldplanShown.map.getMaxZoom()); 0")
        page.settle(1.0)
        shown, overlapping = page.evaluate(script)
        assert overlapping == 0


def test_a_popup_tells_what_the_crew_needs(page: Page) -> None:
    """Ids, stratum, degrees, grid, jars; the duplicate is one jar more and no word more."""
    page.evaluate("fieldplanShown.parts.locations[0].getLayers()[1].openPopup(); 0")
    page.settle(0.6)
    told = page.evaluate("document.querySelector('.leaflet-popup-content').innerText")
    for words in ("QFA02", "QF-A-02", "meadow", "52.1008088", "-1.8991244", "QF-204 QF-655",
                  "0 to 0.15 m", "575404.7 E 5772822.2 N"):  # fmt: skip
        assert words in told
    assert "duplicate" not in told.lower()
    inside = page.evaluate(
        """(() => { const b = document.querySelector(".leaflet-popup").getBoundingClientRect();
        const m = document.querySelector(".folium-map").getBoundingClientRect();
        return b.left >= m.left && b.right <= m.right && b.top >= m.top; })()"""
    )
    assert inside


@pytest.mark.parametrize(
    ("latitude", "longitude"), [(52.1, -1.9), (-33.45, -70.67), (60.39, 4.5), (-16.8, -180.0)]
)
def test_grid_coordinates_agree_with_proj(
    latitude: float, longitude: float, tmp_path: Path
) -> None:
    """The page computes UTM itself; PROJ is the second opinion, to 2 mm, there and back."""
    with open_page(save(plans.plan_at(latitude, longitude), tmp_path)) as page:
        zone, south = page.evaluate("[fieldplanShown.facts.zone, fieldplanShown.facts.south]")
        code = (32700 if south else 32600) + zone
        to_grid = Transformer.from_crs("EPSG:4326", f"EPSG:{code}", always_xy=True)
        for north, east in ((0, 0), (0.4, 0.7), (-0.5, -1.2)):
            spot = (latitude + north, longitude + east)
            script = f"fieldplanShown.grid.forward({spot[0]!r}, {spot[1]!r})"
            easting, northing = page.evaluate(script)
            expected = to_grid.transform(spot[1], spot[0])
            assert math.dist((easting, northing), expected) < 0.002
            script = f"""(() => {{ const p = fieldplanShown.grid.place({easting!r}, {northing!r});
                return [p.lat, p.lng]; }})()"""
            back = page.evaluate(script)
            assert abs(back[0] - spot[0]) < 2e-8
            assert abs((back[1] - spot[1] + 180) % 360 - 180) < 4e-8


def test_measured_lengths_and_areas_agree_with_geographiclib(page: Page) -> None:
    """Geodesics through pyproj: a leg of about 5 km within 0.1 m, its area within 0.01 %."""
    spots = [(52.10, -1.90), (52.13, -1.85), (52.14, -1.90)]
    geodesic = Geod(ellps="WGS84")
    azimuth, _, metres = geodesic.inv(-1.90, 52.10, -1.85, 52.13)
    leg: dict[str, Any] = page.evaluate(
        "fieldplanShown.leg(L.latLng(52.10, -1.90), L.latLng(52.13, -1.85))"
    )
    assert abs(leg["metres"] - metres) < 0.1
    assert abs(leg["bearing"] - azimuth % 360) < 0.1
    listed = ", ".join(f"L.latLng({a}, {b})" for a, b in spots)
    area = page.evaluate(f"fieldplanShown.area([{listed}])")
    expected, _ = geodesic.polygon_area_perimeter([s[1] for s in spots], [s[0] for s in spots])
    assert math.isclose(area, abs(expected), rel_tol=1e-3)


def test_measuring_and_reading_coordinates_by_hand(page: Page) -> None:
    """Press the tool, press two points, read the leg; the coordinates follow the pointer."""
    frame = page.evaluate(
        """(() => { const b = document.querySelector(".folium-map").getBoundingClientRect();
        return [b.left + b.width / 2, b.top + b.height * 0.6]; })()"""
    )
    page.press(*frame)
    page.settle(0.2)
    readout = page.evaluate("document.getElementById('readout').textContent")
    assert "52.1" in readout
    assert "° W" in readout
    assert "30N 5754" in readout
    page.evaluate("document.querySelector('.measure-button').click()")
    page.settle(0.2)
    page.press(frame[0] - 60, frame[1])
    page.press(frame[0] + 60, frame[1])
    page.settle(0.3)
    told = page.evaluate("document.querySelector('#measure output').textContent")
    assert told.startswith("Last leg ")
    assert "towards 9" in told or "towards 8" in told
    page.evaluate("document.querySelector('#measure [name=end]').click()")
    assert page.evaluate("document.getElementById('measure').hidden")
    assert page.errors == []


def test_touch_targets_are_large_enough_for_gloves(tmp_path: Path) -> None:
    """WCAG 2.2, 2.5.8 asks for 24 pixels; ours are 30 for marks and 40 for buttons."""
    script = """[...document.querySelectorAll(SELECTOR)].map((e) => {
      const box = e.getBoundingClientRect(); return Math.min(box.width, box.height); })"""
    with open_page(save(factories.make_plan(), tmp_path), PHONE) as page:
        buttons = page.evaluate(script.replace("SELECTOR", "'.leaflet-bar a, .panel-button'"))
        assert len(buttons) == 4
        assert min(buttons) >= 40
        assert min(page.evaluate(script.replace("SELECTOR", "'.mark'"))) >= 30


def test_the_online_layer_asks_only_when_pressed(tmp_path: Path) -> None:
    """Pressed, it asks the tile server and nobody else (and fails here, without a network)."""
    with open_page(save(factories.make_plan(), tmp_path)) as page:
        assert page.requests == []
        page.evaluate(SWITCH.replace("WORDS", "'Online'"))
        page.settle(1.0)
        assert page.requests
        assert all(r.startswith("https://tile.openstreetmap.org/") for r in page.requests)


def test_hostile_text_runs_nothing(tmp_path: Path) -> None:
    """Every layer on, every popup opened: no dialog, no error, no request, markup seen as text."""
    with open_page(save(plans.hostile_plan(), tmp_path)) as page:
        page.evaluate("window.alert = () => { throw new Error('ran'); }")
        page.evaluate(SWITCH.replace("WORDS", "'Alternate'"))
        opened = page.evaluate(
            """(() => { const texts = [];
            fieldplanShown.map.eachLayer((layer) => { if (layer.getPopup && layer.getPopup()) {
              layer.openPopup();
              texts.push(document.querySelector(".leaflet-popup-content").innerText); } });
            return texts; })()"""
        )
        page.settle()
        assert len(opened) >= 14
        assert any("<script>alert(1)</script>" in text for text in opened)
        assert page.errors == []
        assert page.requests == []
        assert "<script>alert(1)</script>" in page.evaluate("document.body.innerText")


@pytest.mark.parametrize("where", [(89.9, 10.0), (-84.9, -150.0), (-16.8, 180.0), (0.0, 9.45)])
@pytest.mark.parametrize("screen", [PHONE, DESKTOP], ids=["phone", "desktop"])
def test_far_places_are_drawn_whole(
    where: tuple[float, float], screen: Screen, tmp_path: Path
) -> None:
    """Poles, date line and equator: all ten marks, a grid, no error."""
    with open_page(save(plans.plan_at(*where), tmp_path), screen) as page:
        assert page.errors == []
        assert count(page, ".mark .symbol") == 10
        assert count(page, ".grid-label") >= 2
        size = page.evaluate(
            """(() => { const b = document.querySelector(".boundary-line").getBoundingClientRect();
            return [b.width, b.height]; })()"""
        )
        assert max(size) > 150


def test_two_thousand_places_are_drawn_and_redrawn_quickly(tmp_path: Path) -> None:
    """One zoom step of 2000 marks, labels arranged, well under a second."""
    with open_page(save(plans.crowded_plan(2000), tmp_path), PHONE) as page:
        assert count(page, ".mark .symbol") == 2000
        spent = page.evaluate(
            """(() => { const start = performance.now();
            fieldplanShown.map.zoomIn(1, {animate: false});
            return performance.now() - start; })()"""
        )
        assert spent < 1000
