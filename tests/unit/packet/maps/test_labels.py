"""Names beside markers: apart from each other, inside the frame."""

import numpy as np
import pytest
import shapely

from fieldplan.packet.maps.labels import Placed, place_labels

FRAME = (170.0, 180.0)


def place(anchors: np.ndarray, *, taken: np.ndarray | None = None) -> list[Placed | None]:
    """Place names of 11 by 2.6 mm beside markers of 2.6 mm."""
    count = len(anchors)
    return place_labels(
        anchors,
        np.tile([11.0, 2.6], (count, 1)),
        frame=FRAME,
        radii=np.full(count, 1.3),
        taken=np.empty((0, 4)) if taken is None else taken,
    )


def box(label: Placed) -> shapely.Polygon:
    """The rectangle of a name."""
    return shapely.box(
        label.left, label.bottom, label.left + label.width, label.bottom + label.height
    )


def scattered(count: int, seed: int) -> np.ndarray:
    """Markers all over the frame."""
    return np.random.default_rng(seed).uniform((3, 3), (167, 177), (count, 2))


def heaped(count: int, seed: int) -> np.ndarray:
    """Markers in a heap that is tighter than their names."""
    return np.random.default_rng(seed).normal((85, 90), 14.0, (count, 2))


@pytest.mark.parametrize("seed", range(5))
def test_sixty_scattered_names_all_find_a_place(seed: int) -> None:
    """A page holds sixty locations at most, so sixty must be readable on it."""
    assert None not in place(scattered(60, seed))


@pytest.mark.parametrize("seed", range(5))
@pytest.mark.parametrize("layout", [scattered, heaped])
def test_names_do_not_overlap(layout, seed: int) -> None:
    """Names that cover each other send a crew to the wrong hole; shapely checks the rectangles."""
    boxes = [box(label) for label in place(layout(60, seed)) if label is not None]
    assert len(boxes) > 45
    first, second = shapely.STRtree(boxes).query(boxes, predicate="intersects")
    assert (first == second).all()


@pytest.mark.parametrize("seed", range(5))
def test_no_name_leaves_the_frame(seed: int) -> None:
    """Paper ends at the frame, also for markers close to it."""
    anchors = scattered(60, seed)
    anchors[:4] = [(0.5, 0.5), (169.5, 0.5), (0.5, 179.5), (169.5, 179.5)]
    whole = shapely.box(0, 0, *FRAME)
    assert all(whole.contains(box(label)) for label in place(anchors) if label is not None)


@pytest.mark.parametrize("seed", range(3))
def test_no_name_covers_a_marker(seed: int) -> None:
    """A hidden marker is a location that nobody visits."""
    anchors = heaped(60, seed)
    markers = shapely.MultiPoint(anchors).buffer(1.3)
    assert not any(box(label).intersects(markers) for label in place(anchors) if label)


@pytest.mark.parametrize("seed", range(3))
def test_no_leading_line_runs_through_another_name(seed: int) -> None:
    """A line through a name would seem to point at it."""
    anchors = heaped(60, seed)
    labels = place(anchors)
    boxes = [box(label) if label else shapely.Point() for label in labels]
    assert any(label.leads for label in labels if label)
    for index, label in enumerate(labels):
        if label is not None and label.leads:
            line = shapely.shortest_line(shapely.Point(anchors[index]), boxes[index])
            others = [other for at, other in enumerate(boxes) if at != index]
            assert not any(line.intersects(other) for other in others)


def test_a_lone_name_touches_its_marker_at_the_upper_right() -> None:
    """Where nothing is in the way, no line is needed."""
    (label,) = place(np.array([[50.0, 50.0]]))
    assert not label.leads
    assert (label.left > 51.3) & (label.left < 52.0)
    assert label.bottom == pytest.approx(50.0)


def test_taken_ground_stays_free() -> None:
    """Stamps and notes of neighbouring pages must be readable."""
    taken = np.array([[51.0, 40.0, 80.0, 60.0]])
    (label,) = place(np.array([[50.0, 50.0]]), taken=taken)
    assert not box(label).intersects(shapely.box(*taken[0]))


def test_markers_on_one_spot_each_get_a_name_with_a_line() -> None:
    """Two wells of a nest stand on one dot of the map."""
    labels = place(np.tile([85.0, 90.0], (5, 1)))
    assert None not in labels
    assert sum(label.leads for label in labels) >= 1


def test_a_name_without_a_place_is_reported_and_not_drawn_over_others() -> None:
    """A frame as small as one name holds no second one."""
    labels = place_labels(
        np.array([[4.0, 4.0], [4.5, 4.0]]),
        np.tile([11.0, 2.6], (2, 1)),
        frame=(18.0, 6.0),
        radii=np.full(2, 1.3),
        taken=np.empty((0, 4)),
    )
    assert labels.count(None) == 1


def test_marks_without_a_name_get_none() -> None:
    """Units of a list that were not drawn show as bare dots."""
    labels = place_labels(
        np.array([[20.0, 20.0]]),
        np.zeros((1, 2)),
        frame=FRAME,
        radii=np.ones(1),
        taken=np.empty((0, 4)),
    )
    assert labels == [None]


def test_no_marks_is_no_error() -> None:
    """A page of an atlas may show only ground."""
    assert place(np.empty((0, 2))) == []
