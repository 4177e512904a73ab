"""Branches out of the lines of a file: joined, checked for loops and repeats, measured."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from fieldplan.base.units import length_in_words
from fieldplan.frame.intervals import Interval
from fieldplan.frame.layer import Feature, raise_all
from fieldplan.frame.model import SiteProjection
from fieldplan.frame.plane import GRID_M
from fieldplan.frame.projection import to_degrees

MEET_M = 1.0
"""Ends of branches this near to another branch meet it (house rule)."""

NEAR_MISS_M = 50.0
"""An end that stops short of another branch by less than this is worth a note (house rule)."""

SHOWN_GAPS = 8

TWICE_M = 0.5
LONGEST_TOGETHER_M = 10.0
"""Lines that keep within the first distance for more than the second are one reach drawn twice."""

_EXACT_M = 0.01


@dataclass(frozen=True)
class Piece:
    """One line of the file, in site metres, with the branch and the stratum that it names."""

    label: str
    branch: str
    stratum: str
    line: shapely.LineString


@dataclass(frozen=True)
class Course:
    """A branch with where its pieces lie on it.

    Parameters
    ----------
    name : str
        Unique; as in the file, with a number behind it where the parts of one name do not meet.
    line : LineString
        In site metres; distances start at its first corner.
    pieces : tuple of (Piece, (int, int))
        Each with from and to along the branch, in whole millimetres.
    free : (bool, bool)
        Whether its first and its last corner meet no other branch.
    """

    name: str
    line: shapely.LineString
    pieces: tuple[tuple[Piece, Interval], ...]
    free: tuple[bool, bool] = (True, True)

    @property
    def millimetres(self) -> int:
        """Its length in whole millimetres."""
        return round(1000 * self.line.length)


def simple_lines(
    features: Sequence[tuple[Feature, shapely.LineString]],
    projection: SiteProjection,
    *,
    file: str,
) -> list[tuple[Feature, shapely.LineString]]:
    """Bring lines to the millimetre grid, and refuse those whose length means nothing.

    Parameters
    ----------
    features : sequence of (Feature, LineString)
        Each line in site metres with the feature that it comes from.
    projection : SiteProjection
        To say in degrees where a line meets itself.
    file : str
        For messages.

    Raises
    ------
    FrameError
        A line has no length, closes on itself, or crosses or retraces itself.
    """
    kept, faults = [], []
    for feature, line in features:
        corners = np.round(shapely.get_coordinates(line) / GRID_M) * GRID_M
        corners = np.round(corners, 3)
        moves = np.any(np.diff(corners, axis=0) != 0, axis=1)
        corners = corners[np.concatenate([[True], moves])]
        fault = _fault(corners, projection)
        if fault:
            faults.append(f"{file} {feature.label} {fault}")
        else:
            kept.append((feature, shapely.LineString(corners)))
    raise_all(faults)
    return kept


def _fault(corners: np.ndarray, projection: SiteProjection) -> str:
    """Say why a line cannot be measured along; nothing when it can."""
    if len(corners) < 2:
        return "has no length; draw it again, or take it out."
    line = shapely.LineString(corners)
    if line.is_closed and line.is_simple:
        return (
            "is a loop: it ends where it begins, and distances along it have no start. Cut it "
            "into two lines where they shall begin and end."
        )
    if line.is_simple:
        return ""
    crossing = _crossing(line)
    latitude, longitude = to_degrees(projection, crossing.x, crossing.y)
    return (
        f"crosses or retraces itself near latitude, longitude {latitude:.6f}, {longitude:.6f}, so "
        "that a place has two distances; cut it there, or take the loop out."
    )


def _crossing(line: shapely.LineString) -> shapely.Point:
    """Find a place where a line meets itself."""
    corners = shapely.get_coordinates(line)
    pairs = np.stack([corners[:-1], corners[1:]], axis=1)
    edges = np.asarray(shapely.linestrings(pairs), dtype=object)
    first, second = shapely.STRtree(edges).query(edges, predicate="intersects")
    for a, b in sorted(zip(first.tolist(), second.tolist(), strict=True)):
        if b <= a:
            continue
        both = shapely.intersection(edges[a], edges[b])
        if b > a + 1 or both.length > 0:
            return shapely.Point(shapely.get_coordinates(both)[0])
    return shapely.Point(corners[0])


def refuse_repeats(pieces: Sequence[Piece], *, file: str) -> None:
    """Refuse a reach that was drawn twice, which would count twice.

    Raises
    ------
    FrameError
        Two lines lie on each other, or keep within half a metre for more than 10 m.
    """
    lines = [piece.line for piece in pieces]
    first, second = shapely.STRtree(lines).query(lines, predicate="dwithin", distance=TWICE_M)
    faults = []
    for a, b in sorted(zip(first.tolist(), second.tolist(), strict=True)):
        if b <= a:
            continue
        same = float(shapely.intersection(lines[a], lines[b]).length)
        if same <= _EXACT_M:
            band = shapely.buffer(lines[b], TWICE_M)
            together = float(shapely.intersection(lines[a], band).length)
            same = together if together > LONGEST_TOGETHER_M else 0.0
        if same:
            faults.append(
                f"{file}: {pieces[a].label} and {pieces[b].label} run along the same "
                f"{length_in_words(same)}, which would count twice; take one of them out."
            )
    raise_all(faults)


def courses(pieces: Sequence[Piece]) -> tuple[tuple[Course, ...], list[str]]:
    """Join the pieces of each branch, and say where branches do not meet.

    Parameters
    ----------
    pieces : sequence of Piece
        In file order.

    Returns
    -------
    courses : tuple of Course
        In the order in which their first pieces stand in the file.
    notes : list of str
    """
    found: list[Course] = []
    notes = []
    for name in dict.fromkeys(piece.branch for piece in pieces):
        own = [piece for piece in pieces if piece.branch == name]
        parts = _joined(own)
        for number, (line, members) in enumerate(parts, 1):
            label = name if number == 1 else f"{name} ({number})"
            found.append(Course(label, line, tuple((p, _span(line, p.line)) for p in members)))
        if len(parts) > 1:
            notes.append(
                f"Branch {name!r} comes in {len(parts)} parts that do not follow one on another; "
                "each is a branch with distances of its own."
            )
    with_ends = _with_ends(found)
    return with_ends, [*notes, *_gaps(with_ends)]


def _joined(pieces: list[Piece]) -> list[tuple[shapely.LineString, list[Piece]]]:
    """Join pieces end to end; each part runs the way of its first piece in the file."""
    whole = shapely.line_merge(shapely.MultiLineString([piece.line for piece in pieces]))
    parts = list(shapely.get_parts(whole))
    if len(pieces) == 1 or any(part.is_closed for part in parts):
        return [(piece.line, [piece]) for piece in pieces]
    tree = shapely.STRtree(parts)
    members: dict[int, list[Piece]] = {}
    for piece in pieces:
        middle = shapely.line_interpolate_point(piece.line, 0.5, normalized=True)
        members.setdefault(int(tree.nearest(middle)), []).append(piece)
    return [(_turned(parts[at], own[0].line), own) for at, own in members.items()]


def _turned(line: BaseGeometry, first: shapely.LineString) -> shapely.LineString:
    """Turn a line round where it runs against its first piece."""
    start, end = _along(line, first)
    corners = shapely.get_coordinates(line)
    return shapely.LineString(corners if start < end else corners[::-1])


def _span(line: shapely.LineString, piece: BaseGeometry) -> Interval:
    """Say from where to where a piece of a line lies on it, in millimetres."""
    low, high = sorted(round(1000 * at) for at in _along(line, piece))
    return low, high


def _ends(line: BaseGeometry) -> list[shapely.Point]:
    """Give the first and the last corner of a line."""
    corners = shapely.get_coordinates(line)
    return [shapely.Point(corners[0]), shapely.Point(corners[-1])]


def _along(line: BaseGeometry, piece: BaseGeometry) -> list[float]:
    """Say how far along a line the two ends of a piece of it lie, in metres."""
    return [float(line.project(end)) for end in _ends(piece)]


def spans_within(course: Course, ground: BaseGeometry) -> list[Interval]:
    """List the stretches of a branch that lie in polygons.

    Parameters
    ----------
    course : Course
    ground : BaseGeometry
        Polygons in site metres.
    """
    inside = shapely.intersection(course.line, ground)
    parts = shapely.get_parts(shapely.line_merge(inside) if inside.length > 0 else inside)
    return [
        _span(course.line, part)
        for part in parts
        if shapely.get_dimensions(part) == 1 and part.length >= GRID_M
    ]


def _with_ends(found: Sequence[Course]) -> tuple[Course, ...]:
    """Say of every branch which of its ends are free."""
    tree = shapely.STRtree([course.line for course in found])
    return tuple(
        replace(course, free=(_is_free(tree, at, ends[0]), _is_free(tree, at, ends[1])))
        for at, course in enumerate(found)
        for ends in [_ends(course.line)]
    )


def _is_free(tree: shapely.STRtree, own: int, end: shapely.Point) -> bool:
    near = tree.query(end, predicate="dwithin", distance=MEET_M)
    return all(int(other) == own for other in near)


def _gaps(found: Sequence[Course]) -> list[str]:
    """Say where ends stop short of another branch, and into how many networks the lines fall."""
    lines = [course.line for course in found]
    tree = shapely.STRtree(lines)
    notes = []
    for at, course in enumerate(found):
        for end, free, which in zip(
            _ends(course.line), course.free, ("begins", "ends"), strict=True
        ):
            if not free:
                continue
            near = tree.query(end, predicate="dwithin", distance=NEAR_MISS_M).tolist()
            away = [(float(shapely.distance(lines[k], end)), k) for k in near if k != at]
            if away:
                metres, other = min(away)
                notes.append(
                    f"Branch {course.name!r} {which} {metres:.1f} m from branch "
                    f"{found[other].name!r}: more than {MEET_M:g} m, so they do not meet."
                )
    if len(notes) > SHOWN_GAPS:
        notes = [*notes[:SHOWN_GAPS], f"… and {len(notes) - SHOWN_GAPS} more ends that stop short."]
    count = _networks(lines, tree)
    if count > 1:
        notes.append(
            f"The lines form {count} networks that do not meet; together they are one population."
        )
    return notes


def _networks(lines: Sequence[shapely.LineString], tree: shapely.STRtree) -> int:
    """Count the groups of branches that hang together: that meet, or cross."""
    group = list(range(len(lines)))

    def root(at: int) -> int:
        while group[at] != at:
            group[at] = group[group[at]]
            at = group[at]
        return at

    first, second = tree.query(list(lines), predicate="dwithin", distance=MEET_M)
    for a, b in zip(first.tolist(), second.tolist(), strict=True):
        group[root(a)] = root(b)
    return len({root(at) for at in range(len(lines))})
