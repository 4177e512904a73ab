"""What a set of counts buys: standard error, half-width, and the chance to meet the target."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

from fieldplan.sizing.question import Question
from fieldplan.stats.assurance import chance_of_half_width, chance_of_variance
from fieldplan.stats.intervals import t_quantile
from fieldplan.stats.stratified import satterthwaite, variance_factors


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

    def half_width(self, counts: Sequence[float]) -> float:
        """Give the expected distance from the mean to the end of its interval."""
        error = self.standard_error(counts)
        if error == 0:
            return 0.0
        known = self.degrees_of_freedom(counts)
        question = self.question
        return error * t_quantile(known, confidence=question.confidence, kind=question.interval)

    def pilot_degrees_of_freedom(self, counts: Sequence[float]) -> float | None:
        """Give the degrees of freedom behind the predicted variance; None when unknown.

        Strata that share one pilot are right or wrong together, so their terms are added before
        the effective number is taken.
        """
        pilots = self.question.pilots
        if pilots is None:
            return None
        parts = self.parts(counts)
        sums = [math.fsum(parts[position] for position in group) for group in pilots]
        known = [(self.question.parts[group[0]].results or 2) - 1 for group in pilots]
        return satterthwaite(sums, known)

    def luck_of_allocation(self, counts: Sequence[float]) -> float:
        """Give by what factor Neyman counts make the predicted variance look too small.

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
        Σ p (1 − p) / df above that of df/χ², where p is a stratum's share of the predicted
        variance and df = n0 − 1. Strata at their floor or list do not follow the pilot and count
        only in the whole. Derived here; the tests hold it to simulation.
        """
        question = self.question
        if question.allocation != "neyman" or question.pilots is None:
            return 1.0
        parts, strata = self.parts(counts), question.strata
        bounds = list(zip(counts, strata.floors, strata.caps, strict=True))
        free = [floor < count < cap for count, floor, cap in bounds]
        total = math.fsum(parts)
        moving = math.fsum(part for part, moves in zip(parts, free, strict=True) if moves)
        excess = 0.0
        for group in question.pilots:
            share = math.fsum(parts[k] for k in group if free[k])
            if share > 0:
                known = (question.parts[group[0]].results or 2) - 1
                excess += share / total * (1 - share / moving) / known
        return math.exp(excess)

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
        return chance_of_half_width(
            predicted,
            question.target_half_width,
            main=self.degrees_of_freedom(counts),
            pilot=pilot,
            confidence=question.confidence,
            kind=question.interval,
        )
