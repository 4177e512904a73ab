"""Locations, and what a layout must be able to do."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal, Protocol

import numpy as np
from numpy.typing import NDArray

from fieldplan.frame.model import Frame

LocationClass = Literal["random", "alternate", "targeted"]


@dataclass(frozen=True)
class Location:
    """One place, as issued.

    Parameters
    ----------
    location_id : str
        ``HL-A-01`` style for drawn places; the user's own id for list units and targeted places.
    short_name : str
        At most 6 characters that every receiver keeps; unique ignoring case.
    location_class : str
        ``random``, ``alternate`` or ``targeted``.
    stratum : str
    easting, northing : float
        Site metres, rounded to the centimetre.
    latitude, longitude : float
        Degrees, WGS 84, rounded to 7 decimals.
    list_order : int
        Position in the stratum's drawn list, from 1; 0 for targeted places.
    inclusion_probability : float
        n/N for a list; n/area per square metre for an area, or for the cell where the layout cut
        one; n/length per metre for lines; 0 for targeted places.
    weight : float
        Stratum weight / number of planned random locations in it, or the cell's part of the weight
        / those in the cell; 0 for other classes.
    alternate_for : str
        For an alternate: ``any in STRATUM``; else empty.
    cell : int
        Number of the compact cell that it lies in, from 1; 0 where the layout cut none.
    cell_share : float
        Area of the cell over that of the stratum; 0 without a cell.
    cell_centre : (float, float) or None
        Easting and northing of the cell's centre, site metres.
    branch : str
        Of a place on a line: the branch; else empty.
    along_m : float or None
        Metres along the branch from its start, to the centimetre; None off lines.
    start : int
        The random start that it follows from, from 1; 0 where the layout has none.
    """

    location_id: str
    short_name: str
    location_class: LocationClass
    stratum: str
    easting: float
    northing: float
    latitude: float
    longitude: float
    list_order: int
    inclusion_probability: float
    weight: float
    alternate_for: str = ""
    cell: int = 0
    cell_share: float = 0.0
    cell_centre: tuple[float, float] | None = None
    branch: str = ""
    along_m: float | None = None
    start: int = 0


@dataclass(frozen=True)
class Locations:
    """All places of one design, in print order: random by stratum, alternates, targeted.

    ``asked`` and ``realised`` differ only for a grid that was not redrawn to an exact count.
    ``notes`` say what bent equal probability or the count.
    """

    layout: str
    seed: int
    version: int
    places: tuple[Location, ...]
    asked: int
    realised: int
    notes: tuple[str, ...] = ()

    def of_class(self, location_class: LocationClass) -> tuple[Location, ...]:
        """Return the places of one class, order kept."""
        return tuple(p for p in self.places if p.location_class == location_class)


@dataclass(frozen=True)
class StratumCount:
    """How many locations to draw in one stratum: ``planned`` random ones, then alternates."""

    stratum: str
    planned: int
    alternates: int


@dataclass(frozen=True)
class PlannedCell:
    """A cell that a stratum was cut into: its number, share of the stratum and centre."""

    number: int
    share: float
    easting: float
    northing: float


@dataclass(frozen=True)
class StratumValues:
    """Results of one stratum as the estimator sees them.

    ``values`` has shape (n,), one per location; ``population`` is N of a list, None for an area.
    ``coordinates`` holds the planned place of each value in site metres, shape (n, 2), and
    ``measure`` the measure of the stratum, square metres for an area. Where a layout cut cells,
    ``cells`` holds the cell number of each value, shape (n,), and ``cut`` all cells that were
    planned. Where a layout has random starts,
    ``starts`` holds the start of each value, shape (n,).
    """

    stratum: str
    weight: float
    values: NDArray[np.float64]
    population: int | None = None
    coordinates: NDArray[np.float64] | None = None
    cells: NDArray[np.int64] | None = None
    cut: tuple[PlannedCell, ...] = ()
    measure: float = 0.0
    starts: NDArray[np.int64] | None = None


@dataclass(frozen=True)
class StratumEstimate:
    """n, mean, s and weight of one stratum; ``variance_borrowed`` when s came from the others."""

    stratum: str
    n: int
    mean: float
    sd: float
    weight: float
    variance_of_mean: float
    variance_borrowed: bool = False


@dataclass(frozen=True)
class CellVariance:
    """How the variance of one stratum's mean came from its cells.

    Parameters
    ----------
    stratum : str
    rule : str
        ``pairs`` or ``covariance``.
    parts : tuple of (str, float, float)
        Cells by their numbers, variance of the stratum's mean, degrees of freedom.
    sum_of_squares : float
        Σ a²/n over the cells, a the share of a cell and n its results.
    joined : tuple of (int, int)
        Cells without a result, each with the one it was joined to.
    practical_range_m, nugget, sigma, inside : float
        Averaged over the curves; 0 for pairs.
    """

    stratum: str
    rule: Literal["pairs", "covariance"]
    parts: tuple[tuple[str, float, float], ...]
    sum_of_squares: float
    joined: tuple[tuple[int, int], ...] = ()
    practical_range_m: float = 0.0
    nugget: float = 0.0
    sigma: float = 0.0
    inside: float = 0.0


@dataclass(frozen=True)
class StartVariance:
    """How the variance of one stratum's mean came from its random starts.

    ``counts`` and ``means`` hold results and mean of each start, in their order.
    """

    stratum: str
    counts: tuple[int, ...]
    means: tuple[float, ...]
    variance: float
    degrees_of_freedom: int


@dataclass(frozen=True)
class SpreadVariance:
    """How the variance of one stratum's mean came from places that were spread over it.

    Parameters
    ----------
    stratum : str
    rule : str
        ``neighbours``, ``covariance``, or ``census`` where all units were visited.
    variance : float
        Of the stratum's mean.
    degrees_of_freedom : float
    local : float
        Standard deviation of single results among their neighbours, or in the square that one
        location stands for.
    practical_range_m, nugget, sigma, inside : float
        Averaged over the curves; 0 for neighbours.
    """

    stratum: str
    rule: Literal["neighbours", "covariance", "census"]
    variance: float
    degrees_of_freedom: float
    local: float
    practical_range_m: float = 0.0
    nugget: float = 0.0
    sigma: float = 0.0
    inside: float = 0.0


@dataclass(frozen=True)
class MeanEstimate:
    """The mean of the population by the recorded design.

    ``degrees_of_freedom`` is n − 1, or Satterthwaite's for strata; infinite for a census.
    ``method`` and ``caution`` are sentences for the sheet. ``cell_variances``, one a stratum, are
    there where the layout cut cells and its variance takes credit for them; ``start_variances``
    where it has several random starts, ``spread_variances`` where it spread the places.
    """

    n: int
    mean: float
    standard_error: float
    degrees_of_freedom: float
    strata: tuple[StratumEstimate, ...]
    method: str
    caution: str = ""
    cell_variances: tuple[CellVariance, ...] = ()
    start_variances: tuple[StartVariance, ...] = ()
    spread_variances: tuple[SpreadVariance, ...] = ()


class Layout(Protocol):
    """One way to lay out locations; drawing, predicting and estimating live side by side."""

    @property
    def name(self) -> str:
        """What a campaign file calls it."""
        ...

    def predict_variance(
        self,
        *,
        weights: NDArray[np.float64],
        sigmas: NDArray[np.float64],
        counts: NDArray[np.int64],
        populations: Sequence[int | None],
    ) -> float:
        """Variance of the estimated mean before any result."""
        ...

    def draw(
        self,
        frame: Frame,
        counts: Sequence[StratumCount],
        *,
        seed: int,
        design: str,
        minimum_spacing_m: float = 0.0,
        exact_count: bool = True,
    ) -> "DrawnPlaces":
        """Draw places for every stratum."""
        ...

    def estimate(
        self, strata: Sequence[StratumValues], *, single_result: str = "refuse"
    ) -> MeanEstimate:
        """Estimate the mean and its standard error from results drawn by this layout."""
        ...


@dataclass(frozen=True)
class DrawnPlace:
    """A drawn place before it is named; ``unit_id`` is the list unit, if it is one.

    What stands behind it is as in ``Location``.
    """

    stratum: str
    list_order: int
    location_class: LocationClass
    easting: float
    northing: float
    unit_id: str = ""
    cell: int = 0
    cell_share: float = 0.0
    cell_centre: tuple[float, float] | None = None
    branch: str = ""
    along_m: float | None = None
    start: int = 0


@dataclass(frozen=True)
class DrawnPlaces:
    """What ``Layout.draw`` yields, with notes in sentences."""

    places: tuple[DrawnPlace, ...]
    realised: int
    notes: tuple[str, ...] = ()
