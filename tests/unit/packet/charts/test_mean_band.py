"""The band of the mean: drawn with its numbers, in both widths."""

import lxml.etree
import pytest

from fieldplan.packet.charts import mean_band
from fieldplan.packet.charts.finding_picture import finding_picture
from fieldplan.packet.drawing import NARROW_MM, WIDE_MM, pens
from fieldplan.sizing import size_asked
from fieldplan.sizing.beside.mean_band import finding
from fieldplan.sizing.model import Picture
from tests.unit.sizing.askings import asked_mean


@pytest.fixture(scope="module")
def picture() -> Picture:
    """25 results of a site with CV 1."""
    asked = asked_mean(sigma=44.0, mean=44.0, results=8, standard_error=8.8)
    found = finding(asked, size_asked(asked))
    assert found is not None
    assert found.picture is not None
    return found.picture


@pytest.mark.parametrize("width", [WIDE_MM, NARROW_MM])
def test_every_column_shows_n_and_its_misses(picture: Picture, width: float) -> None:
    """The numbers under the band are those of the data, the planned n among them."""
    with pens():
        figure = mean_band.mean_band_drawing(picture, width)
    words = [text.get_text() for text in figure.axes[0].texts]
    above, below = (series for series in picture.series if series.style == "points")
    shown = [n for n in above.x if f"{n:.0f}" in words]
    assert len(shown) >= 5
    assert picture.marks[0][1] in shown
    for n in shown:
        place = above.x.index(n)
        for series in (above, below):
            assert mean_band._one(series.y[place]) in words
    assert picture.levels[0][0] in words


@pytest.mark.parametrize("width", [WIDE_MM, NARROW_MM])
def test_no_word_leaves_the_paper_or_covers_another(picture: Picture, width: float) -> None:
    """A clipped number is worse than none; boxes as matplotlib sets them, in pixels."""
    with pens():
        figure = mean_band.mean_band_drawing(picture, width)
        figure.canvas.draw()
        boxes = [text.get_window_extent() for text in figure.axes[0].texts if text.get_text()]
    page = figure.bbox
    for box in boxes:
        assert box.x0 >= page.x0 - 0.5
        assert box.x1 <= page.x1 + 0.5
        assert box.y0 >= page.y0 - 0.5
    for place, box in enumerate(boxes):
        assert not any(box.overlaps(other) for other in boxes[place + 1 :])


def test_the_figure_is_whole_svg_with_words_for_those_who_cannot_see(picture: Picture) -> None:
    """Both widths; the alternative holds every number of the table below the band."""
    figure = finding_picture(picture)
    for svg, width in ((figure.svg, WIDE_MM), (figure.narrow_svg, NARROW_MM)):
        tree = lxml.etree.fromstring(svg.encode())
        assert float(tree.get("width").removesuffix("pt")) == pytest.approx(
            width / 25.4 * 72, abs=0.1
        )
    assert "25 results:" in figure.alternative
    assert "dashes show the band of a normal mean" in figure.caption
