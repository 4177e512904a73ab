"""Field readings as sizing sees them: how closely they follow the laboratory, and their price."""

import math
from dataclasses import dataclass, replace
from functools import cached_property
from typing import TYPE_CHECKING

from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.counting import control_counts
from fieldplan.sizing.money import Prices
from fieldplan.sizing.question import Question
from fieldplan.stats.allocation import unrounded_shares
from fieldplan.stats.calibration import calibration, correlation_interval
from fieldplan.stats.precision import whole
from fieldplan.stats.two_phase import Screened
from fieldplan.stats.two_phase_split import Split

if TYPE_CHECKING:
    from fieldplan.campaign.field_reading import FieldReading


@dataclass(frozen=True)
class Reading:
    """One kind of field reading beside the deciding analyte.

    Parameters
    ----------
    name : str
    question : Question
        The campaign's, with prices.
    population : Screened
        Sigma of the results as the campaign shares them, and the correlation.
    per_reading : float
        Money for a reading, the visit apart.
    low, high : float or None
        Where the true correlation lies with 95 % confidence, as sizes; None without pairs.
    pairs : int or None
        Behind the correlation.
    source : str
        A file, the typed source, or ``ASSUMED``.
    notes : tuple of str
        What was left out of a file, or set to half a limit.
    """

    name: str
    question: Question
    population: Screened
    per_reading: float
    low: float | None = None
    high: float | None = None
    pairs: int | None = None
    source: str = ""
    notes: tuple[str, ...] = ()

    @property
    def prices(self) -> Prices:
        """The campaign's prices; none cost nothing."""
        return self.question.prices or Prices("")

    @property
    def correlation(self) -> float:
        """Its size; the sign does not matter."""
        return abs(self.population.correlation)

    @property
    def assumed(self) -> bool:
        """Nobody measured it."""
        return self.source.strip().casefold() == "assumed"

    def with_correlation(self, correlation: float) -> "Reading":
        """Give the same reading, following the laboratory otherwise."""
        return replace(self, population=replace(self.population, correlation=correlation))

    def visits(self, split: Split) -> int:
        """Count locations to visit for so many readings, losses in."""
        return whole(split.readings * self._allowance)

    @cached_property
    def _allowance(self) -> float:
        """Give visits for each reading that remains: Σ share / (1 − loss)."""
        question = self.question
        shares = unrounded_shares(question.strata, 1.0, allocation=question.allocation)
        return math.fsum(
            share / (1 - part.loss) for share, part in zip(shares, question.parts, strict=True)
        )

    @cached_property
    def _extra(self) -> float:
        """Give what a visit costs on top where strata are dear to reach, on average."""
        question = self.question
        shares = unrounded_shares(question.strata, 1.0, allocation=question.allocation)
        return (
            math.fsum(
                share / (1 - part.loss) * part.extra_cost
                for share, part in zip(shares, question.parts, strict=True)
            )
            / self._allowance
        )

    def price(self, readings: int, results: int) -> float:
        """Add up a round of readings and results: losses, controls and targeted places in it."""
        question, allowance = self.question, self._allowance
        visits, jars = whole(readings * allowance), whole(results * allowance)
        controls = sum(entry.count for entry in control_counts(question, (jars,)))
        bill = self.prices.bill(
            visits=visits + question.targeted, jars=jars + question.targeted + controls
        )
        return bill + visits * (self.per_reading + self._extra)

    @property
    def of_a_reading(self) -> float:
        """What one more place with a reading adds, on average."""
        return self._allowance * (self.prices.of_a_visit + self.per_reading + self._extra)

    @property
    def of_a_result(self) -> float:
        """What a result at a place with a reading adds, on average, its controls in."""
        controls = math.fsum(rate.share or 0.0 for rate in self.question.controls)
        return self._allowance * self.prices.of_a_result * (1 + controls)

    @property
    def of_a_single_result(self) -> float:
        """What a result costs where nothing is read: its visit, its jar, its analysis."""
        return self._allowance * (self.prices.of_a_visit + self._extra) + self.of_a_result


def readings_of(asked: Asked) -> list[Reading]:
    """List the field readings that follow the deciding analyte.

    Parameters
    ----------
    asked : Asked
        With known sigmas.

    Returns
    -------
    list of Reading
        In the order of the campaign file.

    Raises
    ------
    DesignError
        A calibration file holds pairs that teach nothing.
    """
    return [
        _reading(asked, told)
        for told in asked.campaign.field_reading
        if (told.analyte or asked.analyte.id) == asked.analyte.id
    ]


def _reading(asked: Asked, told: "FieldReading") -> Reading:
    question, pairs = asked.question, told.from_pairs
    correlation, source = told.correlation or 0.0, told.source.strip()
    notes: tuple[str, ...] = ()
    low = high = None
    if told.pilot is not None:
        known = next(p for p in asked.spread.pairs if p.name == told.name) if asked.spread else None
        if known is not None:
            learnt = calibration(known.readings, known.results)
            correlation, pairs, source = learnt.correlation, learnt.pairs, known.source
            notes = _notes(known.non_detects, known.unpaired)
    if pairs is not None:
        ends = correlation_interval(correlation, pairs)
        # what matters is the size: an interval that holds 0 holds no correlation at all
        low = 0.0 if ends[0] <= 0 <= ends[1] else min(abs(end) for end in ends)
        high = max(abs(end) for end in ends)
    return Reading(
        name=told.name,
        question=question,
        population=screened(question, correlation),
        per_reading=told.per_reading,
        low=low,
        high=high,
        pairs=pairs,
        source=source,
        notes=notes,
    )


def _notes(non_detects: int, unpaired: int) -> tuple[str, ...]:
    lines = []
    if non_detects:
        lines.append(
            f"Non-detects among the results of the pairs ({non_detects}) stand at half their "
            "limit; the correlation depends on it."
        )
    if unpaired:
        lines.append(f"Rows without both a reading and a result were left out ({unpaired}).")
    return tuple(lines)


def screened(question: Question, correlation: float) -> Screened:
    """Give the campaign's population with a reading that follows its results.

    Parameters
    ----------
    question : Question
    correlation : float
        Inside the strata.

    Notes
    -----
    Both phases are shared as the campaign shares its results, in proportion to weights a_h:
    Σ W² σ² / n_h = (Σ W² σ² / a_h) / n.
    """
    strata = question.strata
    shares = unrounded_shares(strata, 1.0, allocation=question.allocation)
    variance = math.fsum(
        (w * s) ** 2 / a for w, s, a in zip(strata.weights, strata.sigmas, shares, strict=True)
    )
    finite = math.fsum(
        (w * s) ** 2 / size
        for w, s, size in zip(strata.weights, strata.sigmas, strata.populations, strict=True)
        if size is not None
    )
    return Screened(
        math.sqrt(variance), correlation, strata=len(question.parts), finite=finite,
        most=strata.most, least=sum(strata.floors),
    )  # fmt: skip
