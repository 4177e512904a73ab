"""The offline map as text: nothing from outside, nothing run, nothing left to chance."""

import re
from dataclasses import replace
from html.parser import HTMLParser

import pytest

from fieldplan.packet.maps.screen import screen_map
from tests import factories
from tests.unit.packet import plans

ALLOWED_ADDRESSES = {
    "http://www.w3.org/2000/svg",  # name of a language, never fetched
    "https://leafletjs.com",  # in the library's own credits, replaced by ours at start
    "https://bugs.chromium.org/p/chromium/issues/detail?id=600120",  # comments in its styles
    "https://bugzilla.mozilla.org/show_bug.cgi?id=888319",
    "https://tile.openstreetmap.org",  # online layer: off until pressed
    "https://tile.openstreetmap.org/{z}/{x}/{y}.png",
    "https://www.openstreetmap.org/copyright",
}


def addresses(html: str) -> set[str]:
    """List every web address in a page."""
    return set(re.findall(r"https?://[^\s\"'<>()\\]+", html))


class Tags(HTMLParser):
    """Collect tags with what they would load."""

    def __init__(self) -> None:
        super().__init__()
        self.tags: list[str] = []
        self.loads: list[str] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append(tag)
        for name, value in attrs:
            if name in ("src", "href", "data", "action", "srcset"):
                self.loads.append(f"{tag} {name}={value}")


def read_tags(html: str) -> Tags:
    """Parse a page as Python's own HTML parser sees it."""
    tags = Tags()
    tags.feed(html)
    return tags


def test_every_address_in_the_map_is_on_the_list() -> None:
    """A new remote script, style, font or image would show up here."""
    assert addresses(screen_map(factories.make_plan())) <= ALLOWED_ADDRESSES


def test_an_ordinary_folium_map_fails_the_same_check() -> None:
    """The check can fail: folium's own page asks ten files of four hosts."""
    import folium

    html = folium.Map(location=[0, 0]).get_root().render()
    assert len(addresses(html) - ALLOWED_ADDRESSES) >= 8


def test_no_tag_loads_anything() -> None:
    """Not even a relative file: the map is one file that can be mailed."""
    tags = read_tags(screen_map(factories.make_plan()))
    assert tags.loads == []
    assert "link" not in tags.tags


def test_the_page_forbids_requests_by_its_own_policy() -> None:
    """W3C Content Security Policy: nothing but the page itself and, if asked, base map tiles."""
    html = screen_map(factories.make_plan())
    policy = re.search(r'Content-Security-Policy" content="([^"]*)"', html)
    assert policy is not None
    assert "default-src 'none'" in policy[1]
    assert html.index("Content-Security-Policy") < html.index("<script")


def test_the_same_plan_gives_the_same_page() -> None:
    """Folium names its elements at random; a packet drawn again must compare equal."""
    assert screen_map(factories.make_plan()) == screen_map(factories.make_plan())


def test_status_revision_and_assumed_boundary_are_stamped() -> None:
    """A draft on a phone must look like a draft."""
    plan = factories.make_plan()
    html = screen_map(plan)
    assert '<span class="status"><bdi>DRAFT</bdi></span>' in html
    assert "<bdi>QF-r01</bdi>" in html
    assert "ASSUMED" not in html
    assumed = replace(plan, frame=replace(plan.frame, boundary_assumed=True))
    assert '<span class="assumed">Boundary ASSUMED</span>' in screen_map(assumed)
    issued = replace(plan, issued_by="L. Fenn", issued_on=plan.made_on)
    assert "ISSUED by L. Fenn on 2026-11-03" in screen_map(issued)


def test_alternates_and_the_online_map_start_switched_off() -> None:
    """Folium adds a layer to the map with addTo; those two must have none."""
    html = screen_map(factories.make_plan())
    keys = dict(re.findall(r'"([^"\n]+)" : (\w+),', html))
    off = [key for key, name in keys.items() if f"{name}.addTo(" not in html]
    assert len(keys) == 8
    assert len(off) == 2
    assert any("Alternate (4)" in key for key in off)
    assert any("Online map" in key for key in off)


def test_hostile_text_stays_text() -> None:
    """Titles, strata, reasons, ids, sources: no tag and no script beyond our own."""
    plain, hostile = screen_map(factories.make_plan()), screen_map(plans.hostile_plan())
    assert read_tags(hostile).tags.count("script") == read_tags(plain).tags.count("script")
    assert "<script>alert" not in hostile
    assert "\u202e" not in hostile


def test_braces_in_typed_text_are_never_run_as_a_template() -> None:
    """What folium has rendered it reads as a template again: typed braces must come through."""
    typed = "{{ 7*7 }}{% raw %}{# note #} \ue000"
    plan = factories.make_plan()
    first, *others = plan.locations.places
    frame = replace(
        plan.frame,
        strata=tuple(replace(stratum, name=typed) for stratum in plan.frame.strata),
        excluded=tuple(replace(one, reason=typed) for one in plan.frame.excluded),
    )
    places = (replace(first, location_id=typed, stratum=typed), *others)
    html = screen_map(replace(plan, frame=frame, locations=replace(plan.locations, places=places)))
    assert html.count(r"\u007b\u007b 7*7 }}\u007b% raw %}\u007b# note #} \ufffd") >= 6


def test_nothing_on_the_crews_map_tells_a_duplicate_from_its_parent() -> None:
    """Jars are listed by number only."""
    html = screen_map(factories.make_plan())
    assert "QF-204 QF-655" in html
    assert "duplicate" not in html.split("fieldplanMap(map_")[-1]
    assert "qc_of" not in html


@pytest.mark.parametrize(("latitude", "crs"), [(52.1, "EPSG3857"), (89.9, "FieldplanLocal")])
def test_poles_get_a_projection_that_reaches_them(latitude: float, crs: str) -> None:
    """The web's usual projection ends at 85.06 degrees, and so do online tiles."""
    html = screen_map(plans.plan_at(latitude, 10.0))
    assert f"crs: L.CRS.{crs}" in html
    assert ("/{z}/{x}/{y}.png" in html) == (crs == "EPSG3857")


def test_longitudes_run_on_across_180_degrees() -> None:
    """A site in two halves at both ends of the world could not be shown in one window."""
    html = screen_map(plans.plan_at(-16.8, -180.0))
    found = [float(x) for x in re.findall(r'"coordinates": \[(-?[\d.]+), -16', html)]
    assert len(found) == 14
    assert max(found) - min(found) < 0.01


def test_a_list_has_a_map_without_strata() -> None:
    """The hull of wells is drawn for orientation and says so."""
    html = screen_map(plans.list_plan())
    assert "Extent of the list, for the map only" in html
    assert "Sampled area" not in html
    assert '"label": "QW1 (MAR-01)"' in html


def test_two_thousand_places_stay_a_small_file() -> None:
    """A file that can still be mailed to a phone: under 2 MB."""
    assert len(screen_map(plans.crowded_plan(2000))) < 2_000_000
