"""What is asked of sizing, free of files: parts, target, prices. Bare numbers make one as well."""

from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Literal

from fieldplan.base.errors import DesignError
from fieldplan.sizing.bounds import ceilings_of, check_bounds, strata_of
from fieldplan.sizing.model import NumberFrom
from fieldplan.sizing.money import Prices
from fieldplan.stats.allocation import Allocation
from fieldplan.stats.assurance import check_assurance
from fieldplan.stats.intervals import IntervalKind
from fieldplan.stats.skew_interval import PopulationClass
from fieldplan.stats.strata import Strata

TargetKind = Literal["standard_error", "half_width", "relative_half_width", "budget"]
EqualIn = Literal["standard-error", "relative-standard-error"]


@dataclass(frozen=True)
class Part:
    """One stratum, or the whole where there is only one.

    Parameters
    ----------
    name : str
    weight : float
        Share of the population.
    sigma : float
        Standard deviation of single results.
    results : int or None
        How many results stand behind sigma; None when nobody said.
    population : int or None
        N of a list; None for an area.
    loss : float
        Share of locations expected to yield no result.
    pilot : str
        Parts with the same word share one pilot, whose error is then common to them.
    source : str
        Where sigma comes from.
    assumed : bool
        Sigma was ASSUMED.
    skewness : float or None
        Of the pilot's results, or typed.
    excess_kurtosis : float or None
        Of single results, as declared; None takes them as near normal.
    least : int
        Fewest results here, where more than the design's floor.
    most : int or None
        Most locations that can be visited here.
    extra_cost : float
        Money that a location here costs beyond the common prices, or less than them.
    mean : float or None
        To expect, for a relative target.
    mean_from : str
        Where it comes from, and what was done about non-detects.
    zeros : float
        Share of zeros and non-detects in the pilot.
    """

    name: str
    weight: float
    sigma: float
    results: int | None = None
    population: int | None = None
    loss: float = 0.0
    pilot: str = ""
    source: str = ""
    assumed: bool = False
    skewness: float | None = None
    mean: float | None = None
    mean_from: str = ""
    excess_kurtosis: float | None = None
    least: int = 0
    most: int | None = None
    extra_cost: float = 0.0
    zeros: float = 0.0


@dataclass(frozen=True)
class ControlRate:
    """Control samples of one kind: a share of the samples, or a count."""

    kind: str
    share: float | None
    count: int | None
    source: str


@dataclass(frozen=True)
class Question:
    """All that the number of locations depends on.

    Parameters
    ----------
    parts : tuple of Part
        Weights sum to 1.
    target : str
        ``standard_error``, ``half_width``, ``relative_half_width`` or ``budget``.
    value : float
        The target's number: the analyte's unit, a share of the mean, or money.
    mean : float or None
        Expected mean; needed for a relative half-width.
    assurance : float or None
        Chance that n shall be enough; None takes sigma at face value.
    locations : int or None
        Typed number of locations; it then fixes n, and the target only compares.
    census : bool
        Every unit of the list is visited.
    grid : bool
        A systematic layout, which is sized without credit.
    cells : bool
        A layout in compact cells or a balanced list, sized without credit but given it in the
        estimate.
    starts : int
        Random starts of even spacing along lines; 0 for any other layout.
    equal_in : str
        What equal precision levels out between strata: the standard error of their means, or the
        same as a share of the mean.
    also : tuple of Question
        What is asked of other analytes in the same samples; all targets are kept.
    targeted : int
        Places chosen by judgement: visited and analysed, so they cost, but they count as no n.
    increments : int
        In each result; above 1 every result is a composite, sigma is that of one composite, and n
        counts composites.
    one_place : bool
        The increments of a composite lie round one location; else each has its own.
    mean_interval : str
        ``student-t`` or ``skew-widened``: how the ends of the interval are set.
    promised_class : str or None
        What skew-widened is promised for.
    """

    parts: tuple[Part, ...]
    target: TargetKind
    value: float
    mean: float | None = None
    assurance: float | None = None
    assurance_chosen_by: str = ""
    confidence: float = 0.95
    interval: IntervalKind = "two-sided"
    allocation: Allocation = "proportional"
    floor: int = 2
    alternates: int = 0
    locations: int | None = None
    census: bool = False
    grid: bool = False
    cells: bool = False
    starts: int = 0
    equal_in: EqualIn = "standard-error"
    also: "tuple[Question, ...]" = ()
    targeted: int = 0
    prices: Prices | None = None
    controls: tuple[ControlRate, ...] = ()
    design: str = "main"
    analyte: str = ""
    unit: str = ""
    notes: tuple[str, ...] = field(default=())
    increments: int = 1
    one_place: bool = False
    mean_interval: str = "student-t"
    promised_class: PopulationClass | None = None

    def __post_init__(self) -> None:
        """Refuse what no arithmetic can answer."""
        if self.assurance is not None:
            check_assurance(self.assurance)
        if not 0.5 < self.confidence < 1:
            message = f"confidence is {self.confidence!r}; it must be above 0.5 and below 1."
            raise DesignError(message)
        if self.target == "relative_half_width" and self.mean is None:
            message = (
                "a relative half-width needs an expected mean to be a share of; "
                "write expected_mean in the [[sigma]] table, or name a pilot file there."
            )
            raise DesignError(message)
        if self.target == "budget" and self.prices is None:
            message = (
                f"a budget of {self.value:g} needs prices; add a [cost] table with currency, "
                "mobilisation, per_location and per_analysis."
            )
            raise DesignError(message)
        check_bounds(self)

    @cached_property
    def strata(self) -> Strata:
        """The parts as results are shared between them, with the sigmas of this analyte."""
        return strata_of(self)

    @cached_property
    def sharing(self) -> Strata:
        """The same with the spread that decides the shares: of all analytes where several do."""
        if not self.also:
            return self.strata
        from fieldplan.sizing.together import joint_strata

        return joint_strata(self)

    @property
    def sharing_of_visits(self) -> Strata:
        """The same for locations: more may be visited than losses leave as results."""
        return replace(self.sharing, ceilings=ceilings_of([part.most for part in self.parts]))

    @property
    def taken(self) -> str:
        """What is planned, in a word: locations, or composites that have no one location."""
        return "composite" if self.increments > 1 and not self.one_place else "location"

    @property
    def widened(self) -> bool:
        """Whether the rules fix the interval that is widened for skewed results."""
        return self.mean_interval == "skew-widened"

    @property
    def target_standard_error(self) -> float | None:
        """The target, where it is a standard error."""
        return self.value if self.target == "standard_error" else None

    @property
    def target_half_width(self) -> float | None:
        """The target, where it is a half-width; a relative one times the expected mean."""
        if self.target == "relative_half_width" and self.mean is not None:
            return self.value * self.mean
        return self.value if self.target == "half_width" else None

    @property
    def number_from(self) -> NumberFrom:
        """What decides the number."""
        if self.census:
            return "census"
        if self.locations is not None:
            return "locations"
        return "budget" if self.target == "budget" else "target"

    @property
    def heavy_tails(self) -> float:
        """The largest excess kurtosis declared; 0 where results are taken as near normal."""
        return max((part.excess_kurtosis or 0.0 for part in self.parts), default=0.0)

    @property
    def total_population(self) -> int | None:
        """N of the whole list; None when a part is an area."""
        sizes = [part.population for part in self.parts if part.population is not None]
        return sum(sizes) if len(sizes) == len(self.parts) else None

    def takes_all(self, needed: Sequence[int]) -> bool:
        """Tell whether so many results take every unit of the list, so that no place is chosen."""
        return self.census or sum(needed) == self.total_population

    @property
    def pilots(self) -> tuple[tuple[int, ...], ...] | None:
        """Positions of the parts by the pilot they share; None when one has no known results."""
        if any(part.results is None for part in self.parts):
            return None
        groups: dict[str, list[int]] = {}
        for position, part in enumerate(self.parts):
            groups.setdefault(part.pilot or f"part {position}", []).append(position)
        return tuple(tuple(group) for group in groups.values())
