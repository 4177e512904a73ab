"""Places on lines: a distance along reaches laid end to end, and the centimetre where it ends."""

from collections.abc import Sequence
from dataclasses import dataclass, field
from itertools import accumulate

import numpy as np
import shapely
from numpy.typing import NDArray

from fieldplan.base.draws import Stream
from fieldplan.base.errors import DesignError
from fieldplan.base.units import length_in_words
from fieldplan.design.area import PATIENCE
from fieldplan.design.model import DrawnPlace, LocationClass
from fieldplan.frame.model import Reach, Stratum

Whole = NDArray[np.int64]


@dataclass(frozen=True)
class LinePlace:
    """A place on a branch: how far along it, and its coordinates, all in whole centimetres."""

    branch: str
    along_cm: int
    east_cm: int
    north_cm: int


class _Path:
    """The edges of one reach, measured once."""

    def __init__(self, reach: Reach) -> None:
        self.corners = np.rint(shapely.get_coordinates(reach.geometry) * 1000.0)
        self.steps = np.diff(self.corners, axis=0)
        east, north = self.steps[:, 0], self.steps[:, 1]
        self.lengths = np.sqrt(east * east + north * north)
        self.before = np.concatenate([[0.0], np.cumsum(self.lengths)[:-1]])

    def at(self, offset: int) -> tuple[float, float]:
        """Give the coordinates, in millimetres, so many millimetres along."""
        edge = int(np.searchsorted(self.before, offset, side="right")) - 1
        share = min((offset - self.before[edge]) / self.lengths[edge], 1.0)
        east, north = self.corners[edge] + share * self.steps[edge]
        return float(east), float(north)


@dataclass(frozen=True)
class Course:
    """The reaches of a stratum laid end to end, in whole millimetres.

    Parameters
    ----------
    name : str
        The stratum, for messages.
    reaches : tuple of Reach
        By branch and distance; gaps between them take no room.

    Notes
    -----
    Distances are whole millimetres, corners too; an edge has the length √(dx² + dy²) in double
    precision, which IEEE 754 rounds alike everywhere, and edges are summed from the first one on.
    """

    name: str
    reaches: tuple[Reach, ...]
    starts: tuple[int, ...] = field(init=False)
    total: int = field(init=False)
    _paths: tuple["_Path", ...] = field(init=False, repr=False)

    def __post_init__(self) -> None:
        ends = list(accumulate(_millimetres(reach.length_m) for reach in self.reaches))
        if not ends or ends[-1] < 1:
            message = f"stratum '{self.name}' has no length to draw from; check its lines."
            raise DesignError(message)
        object.__setattr__(self, "starts", (0, *ends[:-1]))
        object.__setattr__(self, "total", ends[-1])
        object.__setattr__(self, "_paths", tuple(_Path(reach) for reach in self.reaches))

    def place(self, millimetre: int) -> LinePlace:
        """Give the place so many millimetres from the start of the first reach.

        Examples
        --------
        >>> line = shapely.LineString([(0, 0), (30, 40), (30, 90)])
        >>> bank = Course("bank", (Reach("brook", 7.0, 107.0, line),))
        >>> bank.place(60_000)
        LinePlace(branch='brook', along_cm=6700, east_cm=3000, north_cm=5000)
        """
        number = int(np.searchsorted(self.starts, millimetre, side="right")) - 1
        reach, offset = self.reaches[number], millimetre - self.starts[number]
        east, north = self._paths[number].at(offset)
        return LinePlace(
            reach.branch,
            round((_millimetres(reach.from_m) + offset) / 10),
            round(east / 10),
            round(north / 10),
        )

    def fit(self, spacing_m: float) -> int:
        """Count the places that fit at most so far apart: one a reach, and one each spacing."""
        return sum(int(reach.length_m / spacing_m + 1e-9) + 1 for reach in self.reaches)


def course_of(stratum: Stratum, layout: str) -> Course:
    """Return the reaches of a stratum, ready to draw from.

    Raises
    ------
    DesignError
        The stratum is an area or a list.
    """
    if not stratum.reaches:
        what = "an area" if stratum.units == () else f"a list of {stratum.count} units"
        message = (
            f"layout '{layout}' runs along lines, and stratum '{stratum.name}' is {what}; write "
            'kind = "line" with a line_file, or take another layout.'
        )
        raise DesignError(message)
    return Course(stratum.name, stratum.reaches)


def draw_along(
    course: Course,
    count: int,
    stream: Stream,
    *,
    spacing_m: float = 0.0,
    taken: Sequence[LinePlace] = (),
) -> tuple[LinePlace, ...]:
    """Draw places uniformly by length, in the order in which they were kept.

    Parameters
    ----------
    course : Course
    count : int
        How many; the first k are the same for every count ≥ k.
    stream : Stream
        Read one uniform a candidate.
    spacing_m : float
        Least straight distance between any two; a candidate that stands closer is passed over.
    taken : sequence of LinePlace
        Places that stand there already.

    Raises
    ------
    DesignError
        The places cannot fit at this spacing.

    Examples
    --------
    >>> line = shapely.LineString([(0, 0), (100, 0)])
    >>> course = Course("bank", (Reach("brook", 0.0, 100.0, line),))
    >>> [place.along_cm for place in draw_along(course, 3, Stream(1, "main", "bank", "places"))]
    [3190, 2379, 2483]
    """
    wanted = len(taken) + count
    if spacing_m and wanted > course.fit(spacing_m):
        raise DesignError(_no_room(course, wanted, 0, spacing_m))
    nearest = max(round(100 * spacing_m), 1) ** 2
    standing = np.zeros((wanted, 2), dtype=np.int64)
    standing[: len(taken)] = np.array(
        [(place.east_cm, place.north_cm) for place in taken], dtype=np.int64
    ).reshape(-1, 2)
    kept: list[LinePlace] = []
    refused = 0
    while len(kept) < count:
        if refused >= PATIENCE:
            raise DesignError(_no_room(course, wanted, len(taken) + len(kept), spacing_m))
        place = course.place(int(stream.uniforms(1)[0] * course.total))
        there = len(taken) + len(kept)
        away = standing[:there] - (place.east_cm, place.north_cm)
        if ((away * away).sum(axis=1) < nearest).any():
            refused += 1
            continue
        refused = 0
        standing[there] = (place.east_cm, place.north_cm)
        kept.append(place)
    return tuple(kept)


def line_places(
    stratum: str,
    places: Sequence[LinePlace],
    *,
    location_class: LocationClass,
    first: int = 1,
    starts: Sequence[int] = (),
) -> tuple[DrawnPlace, ...]:
    """Turn places on lines into drawn places numbered from ``first``."""
    return tuple(
        DrawnPlace(
            stratum,
            first + at,
            location_class,
            place.east_cm / 100,
            place.north_cm / 100,
            branch=place.branch,
            along_m=place.along_cm / 100,
            start=starts[at] if starts else 0,
        )
        for at, place in enumerate(places)
    )


def _millimetres(metres: float) -> int:
    return round(1000 * metres)


def _no_room(course: Course, count: int, found: int, spacing_m: float) -> str:
    length = course.total / 1000
    most = course.fit(spacing_m) if spacing_m else course.total // 10
    placed = f"; {found} were placed" if found else ""
    return (
        f"stratum '{course.name}' ({length_in_words(length)}) has room for {most} places at most, "
        f"end to end, at a spacing of {spacing_m:g} m, and {count} are asked for, alternates among "
        f"them{placed}. Lower minimum_spacing_m (about {0.5 * length / count:.2g} m should fit), "
        "or ask for fewer locations or alternates."
    )
