"""What a set of counts buys: standard error, half-width, and the chance to meet the target."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

from fieldplan.sizing.question import Question
from fieldplan.stats.assurance import (
    chance_of_half_width,
    chance_of_variance,
    effective_degrees_of_freedom,
)
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.stratified import satterthwaite, variance_factors

FOLLOWING = ("neyman", "cost-optimal", "equal-precision")
"""Allocations whose counts follow the pilot's s."""


@dataclass(frozen=True)
class PilotTerm:
    """What one pilot brings into the predicted variance of the mean.

    Parameters
    ----------
    strata : tuple of str
        Those that take their sigma from it.
    variance : float
        Sum of their terms W² s² (1 − n/N) / n.
    moving : float
        The same over strata whose number of results follows the pilot: neither held at the floor
        nor taken whole. 0 where the allocation is proportional.
    results : int
        n0.
    excess_kurtosis : float
        Of single results, as declared; 0 takes them as near normal.
    """

    strata: tuple[str, ...]
    variance: float
    moving: float
    results: int
    excess_kurtosis: float = 0.0

    @property
    def name(self) -> str:
        """Its strata in one word, for the working."""
        return " + ".join(self.strata)

    @property
    def known(self) -> float:
        """Degrees of freedom: n0 − 1, fewer where heavy tails are declared."""
        return effective_degrees_of_freedom(self.results, self.excess_kurtosis)


@dataclass(frozen=True)
class Precision:
    """The precision of a question's mean for any counts, with sigma times ``factor``."""

    question: Question
    factor: float = 1.0

    def parts(self, counts: Sequence[float]) -> list[float]:
        """Give each stratum's term in the variance of the mean."""
        strata = self.question.strata
        factors = variance_factors(strata.weights, counts, strata.populations)
        return [
            share * (self.factor * sigma) ** 2
            for share, sigma in zip(factors, strata.sigmas, strict=True)
        ]

    def variance(self, counts: Sequence[float]) -> float:
        """Give the variance of the mean."""
        return math.fsum(self.parts(counts))

    def standard_error(self, counts: Sequence[float]) -> float:
        """Give the standard error of the mean."""
        return math.sqrt(self.variance(counts))

    def degrees_of_freedom(self, counts: Sequence[float]) -> float:
        """Give the degrees of freedom that the coming results will have (Satterthwaite)."""
        return satterthwaite(self.parts(counts), [max(count - 1, 1) for count in counts])

    def luck(self, counts: Sequence[float]) -> float:
        """Give the degrees of freedom that the coming variance is worth, heavy tails in."""
        worth = [
            effective_degrees_of_freedom(max(count, 2), part.excess_kurtosis or 0.0)
            for count, part in zip(counts, self.question.parts, strict=True)
        ]
        return satterthwaite(self.parts(counts), worth)

    def half_width(self, counts: Sequence[float]) -> float:
        """Give the expected distance from the mean to the end of its interval."""
        error = self.standard_error(counts)
        if error == 0:
            return 0.0
        if self.question.widened:
            from fieldplan.sizing.widened import expected_half_width

            return expected_half_width(self, counts)
        known = self.degrees_of_freedom(counts)
        question = self.question
        return error * t_quantile(known, confidence=question.confidence, kind=question.interval)

    def pilot_degrees_of_freedom(self, counts: Sequence[float]) -> float | None:
        """Give the degrees of freedom behind the predicted variance; None when unknown.

        Strata that share one pilot are right or wrong together, so their terms are added before
        the effective number is taken.
        """
        if self.question.pilots is None:
            return None
        terms = self.pilot_terms(counts)
        return satterthwaite([term.variance for term in terms], [term.known for term in terms])

    def pilot_terms(self, counts: Sequence[float]) -> tuple[PilotTerm, ...]:
        """Split the predicted variance by the pilots behind it; empty where one is unknown.

        Parameters
        ----------
        counts : sequence of int
            Results per stratum.
        """
        question, strata = self.question, self.question.strata
        parts = self.parts(counts)
        bounds = list(zip(counts, strata.floors, strata.caps, strict=True))
        follows = question.allocation in FOLLOWING
        free = [follows and floor < count < cap for count, floor, cap in bounds]
        return tuple(
            PilotTerm(
                strata=tuple(question.parts[k].name for k in group),
                variance=math.fsum(parts[k] for k in group),
                moving=math.fsum(parts[k] for k in group if free[k]),
                results=question.parts[group[0]].results or 2,
                excess_kurtosis=question.parts[group[0]].excess_kurtosis or 0.0,
            )
            for group in question.pilots or ()
        )

    def luck_of_allocation(self, counts: Sequence[float]) -> float:
        """Give by what factor counts that follow a pilot make the predicted variance too small.

        Parameters
        ----------
        counts : sequence of int
            Results per stratum.

        Returns
        -------
        float
            1 for proportional counts, for one stratum, and for strata of one common pilot.

        Notes
        -----
        Neyman follows the pilot's luck: a stratum whose s came out low gets too few results, and
        the same low s then predicts a small variance. With a = W σ and s = σ u the true variance
        over the predicted is (Σ a/u) / (Σ a u). To first order in 1/df its mean logarithm lies
        Σ p (1 − p/P) / df above that of df/χ², where p is a stratum's share of the predicted
        variance, P the sum of p, and df = n0 − 1. Only strata that follow the pilot have a p: one
        at its floor, or a list taken whole, counts in the variance alone, so that P falls below 1.
        Strata of one pilot have one p. Counts of least cost have the same factor. Those of equal
        precision follow s², so that the true variance over the predicted is Σ p/u² and the excess
        twice as large; there df − 1.5 stands for df, which the simulation asks for. Derived here;
        the tests hold it to simulation.
        """
        terms = self.pilot_terms(counts)
        total = math.fsum(term.variance for term in terms)
        moving = math.fsum(term.moving for term in terms)
        squared = self.question.allocation == "equal-precision"
        excess = [
            term.moving
            / total
            * (1 - term.moving / moving)
            * (2 / max(term.known - 1.5, 0.5) if squared else 1 / term.known)
            for term in terms
            if term.moving > 0
        ]
        return math.exp(math.fsum(excess))

    def chance(self, counts: Sequence[float], *, sigma_known: bool = False) -> float | None:
        """Give the chance that these counts meet the target.

        Parameters
        ----------
        counts : sequence of int
            Results per stratum.
        sigma_known : bool
            Take sigma as exact, so that only the luck of the coming results is left.

        Returns
        -------
        float or None
            None for a budget, and where nobody said how many results stand behind sigma.
        """
        question = self.question
        pilot = math.inf if sigma_known else self.pilot_degrees_of_freedom(counts)
        predicted = self.variance(counts)
        if not sigma_known:
            predicted *= self.luck_of_allocation(counts)
        if pilot is None or question.target == "budget":
            return None
        if predicted == 0:
            return 1.0
        if question.target_half_width is None:
            return chance_of_variance(predicted, question.value**2, pilot)
        if question.widened:
            from fieldplan.sizing.widened import chance_of_reach

            return chance_of_reach(self, counts, question.target_half_width, pilot=pilot)
        return chance_of_half_width(
            predicted,
            question.target_half_width,
            main=self.degrees_of_freedom(counts),
            pilot=pilot,
            confidence=question.confidence,
            kind=question.interval,
            luck=self.luck(counts),
        )
