"""Two rounds at the same places: what counts of pairs show of the change, and how surely."""

from dataclasses import dataclass, replace
from functools import cached_property

from fieldplan.base.errors import DesignError
from fieldplan.campaign.questions.change import Change
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.counting import assured_counts, plain_counts
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Question
from fieldplan.sizing.widened import by_student
from fieldplan.stats.allocation import first_that, share_total
from fieldplan.stats.assurance import chance_of_variance
from fieldplan.stats.distributions import normal_quantile
from fieldplan.stats.power import one_sample_n, power_at, sigma_of_change, smallest_shift
from fieldplan.stats.precision import smallest
from fieldplan.stats.risks import check_risks


@dataclass(frozen=True)
class PairedRounds:
    """The question with differences, place by place, in place of results.

    Parameters
    ----------
    asked : Asked
    table : Change
    correlation : float or None
        In place of the one typed, to see what hangs on it.
    """

    asked: Asked
    table: Change
    correlation: float | None = None

    def __post_init__(self) -> None:
        """Refuse a correlation that has no spread to work on."""
        if self.table.sigma_of_differences is None and not self.asked.sigma_known:
            message = (
                "a correlation between rounds is of no use without the sigma of one of them; give "
                "it, or sigma_of_differences."
            )
            raise DesignError(message)

    @cached_property
    def question(self) -> Question:
        """The question with the spread of differences in every part."""
        # Nobody says how many differences stand behind a spread of them that is typed.
        known = self.table.sigma_of_differences is None
        parts = tuple(
            replace(
                part,
                sigma=self.spread(part.sigma),
                results=part.results if known else None,
            )
            for part in self.asked.question.parts
        )
        if self.table.half_width is None:
            return replace(by_student(self.asked.question), parts=parts)
        return replace(
            by_student(self.asked.question),
            parts=parts,
            target="half_width",
            value=self.table.half_width,
        )

    def spread(self, sigma: float) -> float:
        """Give the standard deviation of differences where results have this one."""
        if self.correlation is None and self.table.sigma_of_differences is not None:
            return self.table.sigma_of_differences
        rho = self.table.correlation if self.correlation is None else self.correlation
        return sigma_of_change(sigma, self.table.next_sigma or sigma, correlation=rho or 0.0)

    @property
    def precision(self) -> Precision:
        """What counts of pairs give for the mean change."""
        return Precision(self.question)

    @property
    def sides(self) -> int:
        """2 where a change either way counts."""
        return 2 if self.table.direction == "either-way" else 1

    @property
    def risks(self) -> tuple[float, float]:
        """Alpha and beta; 0 where a half-width is asked for."""
        return self.table.alpha or 0.0, self.table.beta or 0.0

    @property
    def difference(self) -> float:
        """The change that must not be missed; 0 where a half-width is asked for."""
        return self.table.difference or 0.0

    @cached_property
    def needed(self) -> tuple[int, ...]:
        """Places visited twice, by stratum, with sigma at face value."""
        if self.table.half_width is not None:
            return tuple(plain_counts(self.question))
        alpha, beta = self.risks
        check_risks(alpha, beta)
        strata = self.question.strata
        if len(self.question.parts) == 1:
            n = one_sample_n(
                self.difference,
                strata.sigmas[0],
                alpha=alpha,
                beta=beta,
                sides=self.sides,
                population=strata.populations[0],
            )
            return (max(n, *strata.floors),)
        z = normal_quantile(1 - alpha / self.sides) + normal_quantile(1 - beta)
        # Known spreads need least: no counts of a larger variance can do.
        return tuple(
            first_that(
                strata,
                lambda counts: self.power(tuple(counts)) >= 1 - beta,
                never_above=(self.difference / z) ** 2,
                allocation=self.question.allocation,
            )
        )

    def power(self, counts: tuple[int, ...], difference: float | None = None) -> float:
        """Give the chance that the change is shown.

        Parameters
        ----------
        counts : tuple of int
            Places visited twice, by stratum.
        difference : float, optional
            True change; that of the table unless given.
        """
        change = self.difference if difference is None else difference
        error = self.precision.standard_error(counts)
        if error == 0:
            return 1.0 if change else self.risks[0]
        return power_at(change / error, self.known(counts), alpha=self.risks[0], sides=self.sides)

    def known(self, counts: tuple[int, ...]) -> float:
        """Give the degrees of freedom that the pairs will have, 1 at least."""
        return max(self.precision.degrees_of_freedom(counts), 1.0)

    def smallest_change(self, counts: tuple[int, ...]) -> float:
        """Give the change that the counts show with chance 1 − β."""
        alpha, beta = self.risks
        shift = smallest_shift(self.known(counts), alpha=alpha, beta=beta, sides=self.sides)
        return self.precision.standard_error(counts) * shift

    def chance_enough(self, counts: tuple[int, ...]) -> float | None:
        """Give the chance that counts keep the target, the pilot's sigma being uncertain.

        Parameters
        ----------
        counts : tuple of int
            Places visited twice, by stratum.

        Returns
        -------
        float or None
            None where nobody said how many results stand behind the spread.
        """
        precision = self.precision
        if self.table.half_width is not None:
            return precision.chance(counts)
        pilot = precision.pilot_degrees_of_freedom(counts)
        if pilot is None:
            return None
        predicted = (self.smallest_change(counts) / self.difference) ** 2
        if predicted == 0:
            return 1.0
        return chance_of_variance(predicted * precision.luck_of_allocation(counts), 1.0, pilot)

    def assured(self, assurance: float) -> tuple[int, ...]:
        """Count the places that keep the target with a stated chance, given the pilot.

        Parameters
        ----------
        assurance : float
            From 0.5 up to, but not, 1; without results behind sigma the plain number is given.
        """
        question, plain = self.question, self.needed
        if question.pilots is None:
            return plain
        if self.table.half_width is not None:
            return tuple(assured_counts(question, assurance) or plain)

        def shared(total: int) -> tuple[int, ...]:
            return tuple(share_total(question.strata, total, allocation=question.allocation))

        def sure(total: int) -> bool:
            return (self.chance_enough(shared(total)) or 0.0) >= assurance

        return shared(smallest(sure, sum(plain), question.strata.most))
