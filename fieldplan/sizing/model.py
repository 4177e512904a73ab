"""How many, per stratum, with its working and with how sure that number is."""

from dataclasses import dataclass
from typing import Literal

from fieldplan.base.working import Step

NumberFrom = Literal["target", "locations", "budget", "census", "question"]
"""What decided the number: a precision, typed locations, money, the whole list, or a question that
is not about the precision of a mean."""


@dataclass(frozen=True)
class Amount:
    """One number of a finding.

    Parameters
    ----------
    name : str
        For JSON, lower case with underscores, e.g. ``chance_of_hit``.
    meaning : str
        In words, as a label.
    value : float, int or None
        Unrounded; None where it cannot be had.
    unit : str
    """

    name: str
    meaning: str
    value: float | int | None
    unit: str = ""


@dataclass(frozen=True)
class Series:
    """One line or set of points of a picture; ``label`` is written beside it."""

    label: str
    x: tuple[float, ...]
    y: tuple[float, ...]
    style: Literal["line", "dashes", "points", "hollow", "band-low", "band-high"] = "line"


@dataclass(frozen=True)
class Picture:
    """What a finding looks like: data only, drawn by the packet.

    Parameters
    ----------
    kind : str
        Names the drawing; ``lines`` is the general one.
    caption, alternative : str
        Below the figure, and for those who cannot see it.
    x_label, y_label : str
    series : tuple of Series
    marks : tuple of (str, float)
        Vertical lines with their words, such as the chosen n.
    levels : tuple of (str, float)
        Horizontal lines with their words, such as a target.
    """

    kind: str
    caption: str
    alternative: str
    x_label: str
    y_label: str
    series: tuple[Series, ...]
    marks: tuple[tuple[str, float], ...] = ()
    levels: tuple[tuple[str, float], ...] = ()


@dataclass(frozen=True)
class Finding:
    """One answer with all that must be said beside it: a sentence first, the rest on request.

    Parameters
    ----------
    topic : str
        Short name, lower case with hyphens; ``--more`` and JSON use it.
    title : str
        Heading on the sheet.
    answer : str
        One or two sentences that say it all.
    amounts : tuple of Amount
        The numbers in it and beside it.
    columns : tuple of str
    rows : tuple of tuple of str
        A table, shown on request.
    steps : tuple of Step
        The working.
    assumptions, warnings, sources : tuple of str
        Sentences; sources as author, year, section.
    picture : Picture or None
    """

    topic: str
    title: str
    answer: str
    amounts: tuple[Amount, ...] = ()
    columns: tuple[str, ...] = ()
    rows: tuple[tuple[str, ...], ...] = ()
    steps: tuple[Step, ...] = ()
    assumptions: tuple[str, ...] = ()
    warnings: tuple[str, ...] = ()
    sources: tuple[str, ...] = ()
    picture: Picture | None = None


@dataclass(frozen=True)
class StratumSize:
    """The number of locations in one stratum.

    Parameters
    ----------
    stratum : str
    weight : float
        Share of the population.
    sigma : float or None
        Standard deviation used, in the laboratory's unit; None where none is known.
    needed : int
        Results that the target needs.
    planned : int
        Locations to visit: ``needed`` with the loss allowance, never above N of a list.
    alternates : int
        Ranked substitutes drawn at the same time.
    population : int or None
        N of a list; None for an area.
    floor_applied : bool
        The floor, not the allocation, decided ``needed``.
    """

    stratum: str
    weight: float
    sigma: float | None
    needed: int
    planned: int
    alternates: int
    population: int | None = None
    floor_applied: bool = False


@dataclass(frozen=True)
class CurvePoint:
    """Precision and cost at one total n; the band is sigma −25 % and +25 %.

    ``chance`` is the chance that this n meets the target given the pilot; None where sigma was
    typed without a number of results or there is no precision target.
    """

    n: int
    standard_error: float
    standard_error_low: float
    standard_error_high: float
    half_width: float
    cost: float | None
    chance: float | None


@dataclass(frozen=True)
class AssuredSize:
    """The smallest total n that meets the target with at least the stated chance.

    ``chance`` is what this n has: whole results cannot hit the stated one exactly.
    """

    assurance: float
    n: int
    chance: float | None = None


@dataclass(frozen=True)
class QualityControlCount:
    """Control samples of one kind, counted apart from n, with the source of the rate."""

    kind: str
    count: int
    source: str


@dataclass(frozen=True)
class OtherPrecision:
    """What the chosen n buys for an objective, or an analyte, that does not decide it.

    Parameters
    ----------
    analyte, unit : str
    target : str
        Its own target in words; empty where the campaign sets no precision for it.
    target_standard_error, target_half_width : float or None
    standard_error, half_width : float or None
        Expected at ``Size.needed``; None where its strata do not all have a sigma.
    assumed : bool
        A sigma behind them was ASSUMED.
    meets : bool or None
        The expected precision keeps the target; None without one of the two.
    chance : float or None
        Chance that the chosen n keeps the target; None where none can be given.
    assurance : float or None
        Asked for by its own objective.
    enough_n : int or None
        Where the chosen n falls short: the total, shared out as the plan does, that would not.
    sentence : str
    question : str
    """

    analyte: str
    unit: str
    target: str = ""
    target_standard_error: float | None = None
    target_half_width: float | None = None
    standard_error: float | None = None
    half_width: float | None = None
    assumed: bool = False
    meets: bool | None = None
    chance: float | None = None
    assurance: float | None = None
    enough_n: int | None = None
    sentence: str = ""
    question: str = "mean"

    @property
    def falls_short(self) -> bool:
        """Whether it misses its own target, or keeps it with less than the chance asked for."""
        unsure = None not in (self.chance, self.assurance)
        return self.meets is False or (unsure and (self.chance or 0) < (self.assurance or 0) - 1e-9)


@dataclass(frozen=True)
class Size:
    """The answer to "how many", with all that must be said beside it.

    Parameters
    ----------
    design, analyte, unit : str
    target : str
        The target in words, e.g. ``standard error of the mean ≤ 9 mg/kg``.
    target_standard_error : float or None
        The target as a standard error (None for a budget).
    target_half_width : float or None
    strata : tuple of StratumSize
    plain_n : int
        Results needed with sigma taken at face value.
    needed : int
        Results needed at the chosen assurance, or expected from typed or paid locations after
        losses; equals the sum over strata.
    planned : int
        Locations to visit, loss allowance in; composites to take where ``increments`` is above 1.
    standard_error, half_width : float or None
        Expected at ``needed`` with the sigma used; None where no sigma is known.
    confidence : float
    interval : str
        ``two-sided``, ``upper-limit`` or ``lower-limit``.
    assurance : float or None
        None when the user chose ``"plain"``.
    assurance_chosen_by : str
    chance_plain, chance_needed : float or None
        Chance that ``plain_n`` and ``needed`` meet the target, given n0 pilot results.
    assured : tuple of AssuredSize
        n at 0.67, 0.80 and 0.90 (and the chosen assurance).
    steps : tuple of Step
        Numbered working.
    curve : tuple of CurvePoint
        From half the plain n to twice the needed n.
    qc : tuple of QualityControlCount
    cost, currency
        Total for ``planned`` locations with QC; None without a cost table.
    sentences : tuple of str
        The answer in words, most important first.
    conditions : tuple of str
        Under what the interval may be trusted (normality, skewness).
    unrounded : float or None
        The plain total before rounding, floors and Student's t; None without a target.
    others : tuple of OtherPrecision
        What the same n buys for objectives and analytes that do not decide it.
    number_from : str
        What decided the number.
    question : str
        What was asked, as the campaign names it.
    increments : int
        In each result; 1 where every result is a sample of its own.
    replicates : int
        Composites that are results, which is ``needed`` where ``increments`` is above 1; else 1.
    findings : tuple of Finding
        The working of a question that is not about the precision of a mean, then what stands
        beside the number.
    """

    design: str
    analyte: str
    unit: str
    target: str
    target_standard_error: float | None
    target_half_width: float | None
    strata: tuple[StratumSize, ...]
    plain_n: int
    needed: int
    planned: int
    standard_error: float | None
    half_width: float | None
    confidence: float
    interval: str
    assurance: float | None
    assurance_chosen_by: str
    chance_plain: float | None
    chance_needed: float | None
    assured: tuple[AssuredSize, ...]
    steps: tuple[Step, ...]
    curve: tuple[CurvePoint, ...]
    qc: tuple[QualityControlCount, ...]
    cost: float | None
    currency: str
    sentences: tuple[str, ...]
    conditions: tuple[str, ...]
    unrounded: float | None = None
    others: tuple[OtherPrecision, ...] = ()
    number_from: NumberFrom = "target"
    question: str = "mean"
    findings: tuple[Finding, ...] = ()
    increments: int = 1
    replicates: int = 1
