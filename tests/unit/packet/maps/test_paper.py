"""Pages and scales."""

import itertools

import pytest

from fieldplan.packet.maps.paper import (
    DENOMINATORS,
    PAPERS,
    Box,
    Extent,
    extent_around,
    fitting_denominator,
    page_layout,
)

PAGES = list(itertools.product(PAPERS, (False, True)))


@pytest.mark.parametrize(("paper", "landscape"), PAGES)
def test_the_boxes_of_a_page_lie_on_it_and_apart(paper, landscape: bool) -> None:
    """Panels over the map would hide ground."""
    layout = page_layout(paper, landscape=landscape)
    boxes = [layout.title, layout.ground, layout.legend, layout.scale, layout.inset]
    boxes += [layout.notes, layout.footer]
    assert sorted((layout.width, layout.height)) == sorted(PAPERS[paper])
    for box in boxes:
        assert box.width > 20
        assert box.height > 4
        assert box.left >= 5
        assert box.right <= layout.width - 5
        assert box.bottom >= 5
        assert box.top <= layout.height - 5
    for one, other in itertools.combinations(boxes, 2):
        assert (
            one.right <= other.left or other.right <= one.left
            or one.top <= other.bottom or other.top <= one.bottom
        )  # fmt: skip


@pytest.mark.parametrize(("width", "height"), [(10, 10), (200, 120), (6000, 16), (50_000, 48_000)])
def test_the_scale_is_round_and_no_finer_round_one_fits(width: float, height: float) -> None:
    """1 : 1 250 reads off a ruler; 1 : 1 187 does not."""
    ground = Box(0, 0, 170, 180)
    chosen = fitting_denominator(Extent(0, 0, width, height), ground, clear_mm=9.0)
    finer = DENOMINATORS[DENOMINATORS.index(chosen) - 1]
    assert max(width / (0.152 * chosen), height / (0.162 * chosen)) <= 1
    assert max(width / (0.152 * finer), height / (0.162 * finer)) > 1


def test_a_millimetre_of_paper_is_a_thousandth_of_the_denominator_in_metres() -> None:
    """By definition of the representative fraction."""
    extent = extent_around((10.0, 20.0), Box(5, 5, 120, 80), denominator=2500)
    assert extent.width == pytest.approx(300.0)
    assert extent.height == pytest.approx(200.0)
    assert extent.centre == pytest.approx((10.0, 20.0))
