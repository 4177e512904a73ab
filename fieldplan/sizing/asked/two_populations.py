"""The chance that site and background are told apart: t by Welch or pooled, or the rank sum."""

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import cached_property

from fieldplan.base.errors import DesignError
from fieldplan.campaign.questions.mean_and_background import MeanAndBackground
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.precision import Precision
from fieldplan.stats.assurance import chance_of_variance
from fieldplan.stats.distributions import chi_square_quantile, normal_quantile
from fieldplan.stats.power import smallest_shift
from fieldplan.stats.precision import MOST, smallest, whole
from fieldplan.stats.rank_tests import rank_sum_planned_n, rank_sum_power, rank_sum_share
from fieldplan.stats.risks import check_risks
from fieldplan.stats.two_sample_power import pooled_power, welch_power

OVERAGE = 0.2
"""The rule's own addition for lost and unusable results: NUREG-1575 (2000), section 5.5.2."""


@dataclass(frozen=True)
class TwoPopulations:
    """Site and background as the test sees them.

    Parameters
    ----------
    asked : Asked
    table : MeanAndBackground
    factor : float
        By which the site's sigma differs from the one given; a background without a sigma of its
        own follows.
    """

    asked: Asked
    table: MeanAndBackground
    factor: float = 1.0

    def __post_init__(self) -> None:
        """Refuse chances that no number of results can keep."""
        check_risks(self.table.alpha, self.table.beta)
        if not self.asked.sigma_known:
            message = "site and background cannot be compared without a sigma; give the site's."
            raise DesignError(message)
        if len(self.asked.question.parts) > 1 and self._one_population:
            message = (
                "ranks and a pooled spread are for one population, and the site has "
                f'{len(self.asked.question.parts)} strata; take test = "means" and variances = '
                '"may-differ".'
            )
            raise DesignError(message)

    @property
    def _one_population(self) -> bool:
        return self.table.test == "ranks" or self.table.variances == "alike"

    @property
    def sides(self) -> int:
        """2 where a difference either way counts."""
        return 2 if self.table.assume == "no-difference" else 1

    @property
    def site_sigma(self) -> float:
        """Standard deviation of site results; of strata the one that proportional counts have."""
        parts = self.asked.question.parts
        return self.factor * math.sqrt(math.fsum(part.weight * part.sigma**2 for part in parts))

    @property
    def background_sigma(self) -> float:
        """Typed, or the site's."""
        return self.table.background_sigma or self.site_sigma

    @property
    def ratio(self) -> float:
        """Background results for each of the site: typed, 1 for alike spreads, else the best."""
        if self.table.background_per_site is not None:
            return self.table.background_per_site
        if self._one_population:
            return 1.0
        given = self.table.background_sigma
        return 1.0 if given is None else given * self.factor / self.site_sigma

    def background(self, counts: tuple[int, ...]) -> int:
        """Give the background results that go with counts on the site."""
        fixed = self.table.background_results
        return fixed if fixed is not None else max(2, whole(self.ratio * sum(counts)))

    def power(self, counts: tuple[int, ...], difference: float | None = None) -> float:
        """Give the chance to tell the populations apart.

        Parameters
        ----------
        counts : tuple of int
            Results by stratum of the site.
        difference : float, optional
            True difference; that of the table unless given.
        """
        apart = self.table.difference if difference is None else difference
        total, background = sum(counts), self.background(counts)
        alpha = self.table.alpha
        if self.table.test == "ranks":
            spread = math.sqrt((self.site_sigma**2 + self.background_sigma**2) / 2)
            return rank_sum_power(apart, spread, first=total, second=background, alpha=alpha)
        if self.table.variances == "alike":
            return pooled_power(
                apart,
                self.site_sigma,
                first=total,
                second=background,
                alpha=alpha,
                sides=self.sides,
            )
        first, sigma = self._as_one_sample(counts)
        return welch_power(
            apart,
            (sigma, self.background_sigma),
            first=first,
            second=background,
            alpha=alpha,
            sides=self.sides,
        )

    @property
    def from_above(self) -> bool:
        """Whether the site is taken to lie above until results show otherwise."""
        return self.table.assume == "above-background"

    def shown(self, counts: tuple[int, ...], true: float) -> float:
        """Give the chance that results leave the assumption, at a true difference.

        Parameters
        ----------
        counts : tuple of int
            Results by stratum of the site.
        true : float
            Site mean less background mean. Where the site is taken to lie above, the test starts
            from the stated difference, so the distance from it counts, downwards.
        """
        return self.power(counts, self.table.difference - true if self.from_above else true)

    def _as_one_sample(self, counts: tuple[int, ...]) -> tuple[int, float]:
        """Give the simple sample that has the standard error and degrees of freedom of these."""
        precision = Precision(self.asked.question, factor=self.factor)
        known = precision.degrees_of_freedom(counts)
        first = int(min(known, MOST) + 1e-9) + 1
        return first, precision.standard_error(counts) * math.sqrt(first)

    @cached_property
    def needed(self) -> tuple[int, ...]:
        """Site results by stratum: the fewest whose power is enough."""
        if self.table.test == "ranks" and self.table.background_results is None:
            return self.asked.shared(self._by_the_rule())
        self._check_reach()
        shared: Callable[[int], tuple[int, ...]] = self.asked.shared
        wanted = 1 - self.table.beta

        def enough(total: int) -> bool:
            return self.power(shared(total)) >= wanted

        low = max(2, sum(self.asked.question.strata.floors))
        most = self.asked.population or MOST
        near = min(max(low, math.floor(0.8 * self._near)), most)
        total = smallest(enough, near if near > low and not enough(near) else low, most)
        if not enough(total):
            most_words = (
                f"more than {most} results"
                if self.asked.population is None
                else (f"more than all {most} units of the site")
            )
            message = (
                f"a difference of {self.table.difference:g} asks for {most_words}; take more "
                "background results, or a larger difference."
            )
            raise DesignError(message)
        return shared(total)

    def _by_the_rule(self) -> int:
        spread = math.sqrt((self.site_sigma**2 + self.background_sigma**2) / 2)
        share = rank_sum_share(self.table.difference, spread)
        overage = OVERAGE if self.table.overage is None else self.table.overage
        return rank_sum_planned_n(
            share, alpha=self.table.alpha, beta=self.table.beta, overage=overage
        )

    @property
    def _near(self) -> float:
        """Give the normal formula's number for the site, unrounded."""
        z = normal_quantile(1 - self.table.alpha / self.sides) + normal_quantile(
            1 - self.table.beta
        )
        fixed = self.table.background_results
        room = (self.table.difference / z) ** 2
        if fixed is None:
            return (self.site_sigma**2 + self.background_sigma**2 / self.ratio) / room
        return self.site_sigma**2 / max(room - self.background_sigma**2 / fixed, room * 1e-3)

    def _check_reach(self) -> None:
        """Refuse where the background results there are alone leave too much error."""
        fixed = self.table.background_results
        if fixed is None:
            return
        error = self.background_sigma / math.sqrt(fixed)
        # With the site mean known the test is a t test of the background results alone.
        alpha, beta = self.table.alpha, self.table.beta
        least = error * smallest_shift(fixed - 1, alpha=alpha, beta=beta, sides=self.sides)
        if self.table.difference <= least:
            message = (
                f"{fixed} background results with a standard deviation of "
                f"{self.background_sigma:g} cannot tell a difference below {least:.3g}, however "
                "many results the site has; take more background results, or a larger difference."
            )
            raise DesignError(message)

    def smallest_difference(self, counts: tuple[int, ...]) -> float:
        """Give the difference that the counts tell with the chance wanted."""
        wanted = 1 - self.table.beta
        low, high = 0.0, self.table.difference
        while self.power(counts, high) < wanted:
            low, high = high, 2 * high
        for _ in range(20):  # six digits
            middle = (low + high) / 2
            low, high = (low, middle) if self.power(counts, middle) >= wanted else (middle, high)
        return high

    def chance_enough(self, counts: tuple[int, ...]) -> float | None:
        """Give the chance that counts keep the power, the pilot's sigma being uncertain.

        Parameters
        ----------
        counts : tuple of int
            Results by stratum of the site.

        Returns
        -------
        float or None
            None where nobody said how many results stand behind sigma. A background sigma that is
            typed is taken as known.
        """
        precision = Precision(self.asked.question)
        pilot = precision.pilot_degrees_of_freedom(counts)
        if pilot is None:
            return None
        wanted = 1 - self.table.beta

        def keeps(factor: float) -> bool:
            return replace(self, factor=factor).power(counts) >= wanted

        low, high = 0.0, 1.0
        if not keeps(1e-6):
            return 0.0
        while keeps(high) and high < 1e6:
            low, high = high, 2 * high
        for _ in range(24):
            middle = (low + high) / 2
            low, high = (middle, high) if keeps(middle) else (low, middle)
        predicted = precision.luck_of_allocation(counts) / max(low, 1e-6) ** 2
        return chance_of_variance(predicted, 1.0, pilot)

    def assured(self, assurance: float) -> tuple[int, ...]:
        """Count the site results whose power is kept with a stated chance, given the pilot.

        Parameters
        ----------
        assurance : float
            From 0.5 up to, but not, 1; without results behind sigma the plain number is given.
        """
        counts = self.needed
        precision = Precision(self.asked.question)
        pilot = precision.pilot_degrees_of_freedom(counts)
        if pilot is None:
            return counts
        luck = precision.luck_of_allocation(counts)
        factor = math.sqrt(pilot * luck / chi_square_quantile(1 - assurance, pilot))
        counts = replace(self, factor=factor).needed
        # Degrees of freedom and luck move a little with the counts; the last step is exact.
        while (self.chance_enough(counts) or 0.0) < assurance - 1e-6:
            following = self.asked.shared(sum(counts) + 1)
            if following == counts:
                break
            counts = following
        return counts
