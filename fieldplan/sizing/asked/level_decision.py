"""One mean against one level: the chance of each decision for given counts, and its inverses."""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

from fieldplan.base.errors import CampaignError, DesignError
from fieldplan.campaign.questions.mean_and_level import MeanAndLevel
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.precision import Precision
from fieldplan.stats.allocation import unrounded_total
from fieldplan.stats.assurance import chance_of_variance
from fieldplan.stats.distributions import chi_square_quantile, normal_quantile, normal_share
from fieldplan.stats.many_decisions import risks_for_each
from fieldplan.stats.power import one_sample_n, power_at, shift_for_chance
from fieldplan.stats.precision import smallest, whole
from fieldplan.stats.rank_tests import sign_test_n, sign_test_power, sign_test_ratio
from fieldplan.stats.signed_rank import (
    signed_rank_planned_n,
    signed_rank_power,
    signed_rank_ratio,
)


@dataclass(frozen=True)
class LevelDecision:
    """What is decided, and what counts do for it.

    A distance is counted from the level into the side that the results must show.

    Parameters
    ----------
    asked : Asked
    table : MeanAndLevel
    level : float
    """

    asked: Asked
    table: MeanAndLevel
    level: float

    @property
    def side(self) -> str:
        """The side of the level that the results must show."""
        return "below" if self.table.assume == "above-level" else "above"

    @property
    def width(self) -> float:
        """Width of the gray region."""
        return abs(self.level - self.table.gray_edge)

    @cached_property
    def risks(self) -> tuple[float, float]:
        """Alpha and beta of each decision."""
        return risks_for_each(
            self.table.alpha,
            self.table.beta,
            decisions=self.table.decisions,
            together=self.table.together or "each-alone",
        )

    @property
    def sigma(self) -> float:
        """Standard deviation, where there is one population."""
        return self.asked.question.parts[0].sigma

    def mean_at(self, distance: float) -> float:
        """Give the true mean at a distance from the level."""
        return self.level - distance if self.side == "below" else self.level + distance

    def power(self, counts: Sequence[int], distance: float) -> float:
        """Give the chance that these counts show the side, at a true distance.

        Parameters
        ----------
        counts : sequence of int
            Results by stratum.
        distance : float
            Negative on the other side of the level.
        """
        alpha, _ = self.risks
        if self.table.test != "t":
            n, ratio = sum(counts), distance / self.sigma
            if self.table.test == "sign":
                return sign_test_power(normal_share(ratio), n, alpha=alpha)
            return signed_rank_power(ratio, n=n, alpha=alpha)
        precision = Precision(self.asked.question)
        error = precision.standard_error(counts)
        if error == 0:
            return float(distance > 0)
        return power_at(distance / error, precision.degrees_of_freedom(counts), alpha=alpha)

    def reach(self, counts: Sequence[int], chance: float) -> float | None:
        """Give the distance at which these counts show the side with this chance.

        Parameters
        ----------
        counts : sequence of int
            Results by stratum.
        chance : float
            Inside (0, 1); below alpha the distance is negative.

        Returns
        -------
        float or None
            None where so few results show nothing, however far the mean lies.
        """
        alpha, _ = self.risks
        if self.table.test == "t":
            precision = Precision(self.asked.question)
            error = precision.standard_error(counts)
            if error == 0:
                return 0.0
            known = precision.degrees_of_freedom(counts)
            return error * shift_for_chance(chance, known, alpha=alpha)
        return self._reach_by_ranks(sum(counts), chance)

    def _reach_by_ranks(self, n: int, chance: float) -> float | None:
        alpha, _ = self.risks
        if self.table.test == "signed-rank":
            ratio = signed_rank_ratio(chance, n=n, alpha=alpha)
        else:
            ratio = sign_test_ratio(chance, n=n, alpha=alpha)
        return None if ratio is None else ratio * self.sigma

    def chance_enough(self, counts: Sequence[int]) -> float | None:
        """Give the chance that these counts keep both chances, the pilot's sigma being uncertain.

        Returns
        -------
        float or None
            None where nobody said how many results stand behind sigma.
        """
        precision = Precision(self.asked.question)
        pilot = precision.pilot_degrees_of_freedom(counts)
        if pilot is None:
            return None
        reach = self.enough_reach(counts)
        if reach is None:
            return 0.0
        if reach == 0:
            return 1.0
        predicted = (reach / self.width) ** 2 * precision.luck_of_allocation(counts)
        return chance_of_variance(predicted, 1.0, pilot)

    def enough_reach(self, counts: Sequence[int]) -> float | None:
        """Give the distance shown with 1 − beta; None where so few results show nothing."""
        return self.reach(counts, 1 - self.risks[1])

    @cached_property
    def plain(self) -> tuple[int, ...]:
        """Results that keep both chances with sigma at face value."""
        return self.needed()

    def needed(self, assurance: float | None = None) -> tuple[int, ...]:
        """Count the results that keep both chances.

        Parameters
        ----------
        assurance : float, optional
            With this chance, given the pilot; otherwise sigma is taken at face value.

        Raises
        ------
        DesignError
            A list is too short, or the number is out of reach.
        """
        if self.table.test == "t":
            return self._needed_by_t(assurance)
        if len(self.asked.question.parts) > 1:
            message = (
                f'test = "{self.table.test}" gives every result the same say, which strata of '
                'different weight do not allow; write test = "t".'
            )
            raise DesignError(message)
        factor = 1.0
        if assurance is not None:
            known = (self.asked.question.parts[0].results or 2) - 1
            factor = math.sqrt(known / chi_square_quantile(1 - assurance, known))
        total = self._needed_by_ranks(factor)
        size = self.asked.population
        if size is not None and total > size:
            message = (
                f'test = "{self.table.test}" needs {total} results and the list has {size} units; '
                'write test = "t", which counts what a list leaves unknown, or widen the gray '
                "region."
            )
            raise DesignError(message)
        return self.asked.shared(total)

    def _needed_by_ranks(self, factor: float) -> int:
        alpha, beta = self.risks
        ratio = self.width / (self.sigma * factor)
        if self.table.test == "sign":
            return sign_test_n(normal_share(ratio), alpha=alpha, beta=beta)
        n = signed_rank_planned_n(one_sample_n(ratio, 1.0, alpha=alpha, beta=beta))
        # The factor holds for many results; few may not reach alpha at all.
        while signed_rank_power(ratio, n=n, alpha=alpha) < 1 - beta:
            n += 1
        return n

    def _needed_by_t(self, assurance: float | None) -> tuple[int, ...]:
        alpha, beta = self.risks
        strata, question = self.asked.question.strata, self.asked.question
        z = normal_quantile(1 - alpha) + normal_quantile(1 - beta)
        # The normal formula never asks for more than t: out of its reach is out of reach.
        whole(unrounded_total(strata, (self.width / z) ** 2, allocation=question.allocation))

        def fits(total: int) -> bool:
            counts = self.asked.shared(total)
            if assurance is None:
                return self.power(counts, self.width) >= 1 - beta
            return (self.chance_enough(counts) or 0.0) >= assurance

        low = sum(strata.floors if assurance is None else self.plain)
        total = smallest(fits, low, strata.most, back=2 * len(question.parts) + 1)
        whole(total)
        if total == strata.most and not fits(total):
            message = (
                f"even {strata.most} results do not tell a mean of {self.table.gray_edge:g} from "
                f"{self.level:g} with the chances asked for; widen the gray region or allow larger "
                "chances."
            )
            raise DesignError(message)
        return self.asked.shared(total)


def decision_of(asked: Asked) -> LevelDecision:
    """Gather what the objective's table decides.

    Parameters
    ----------
    asked : Asked

    Raises
    ------
    CampaignError
        The table, or the analyte's level, is missing.
    """
    table = asked.objective.mean_and_level
    if table is None:
        message = (
            "[objective.mean_and_level] is missing; write assume, gray_edge, alpha and beta below "
            "[[objective]]."
        )
        raise CampaignError(message)
    if asked.level is None:
        message = (
            f"there is no level to compare the mean of {asked.analyte.label} with; give "
            "action_level and action_level_source in its [[analyte]]."
        )
        raise CampaignError(message)
    found = LevelDecision(asked, table, asked.level)
    beyond = asked.level - table.gray_edge
    if (beyond if found.side == "below" else -beyond) <= 0:
        message = (
            f"gray_edge is {table.gray_edge:g}; with assume = {table.assume!r} it must lie "
            f"{found.side} the level of {asked.level:g}."
        )
        raise CampaignError(message)
    return found
