"""What a wrong decision would cost on average, beside what sampling costs."""

import math
from dataclasses import dataclass
from functools import cached_property

from fieldplan.base.working import Quantity, Step
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.counting import planned_counts, total_cost
from fieldplan.sizing.model import Amount, Finding, Picture, Series, Size
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.words import figure, percent, typed_percent, with_unit
from fieldplan.stats.intervals import IntervalKind, t_quantile
from fieldplan.stats.wrong_decision import (
    Belief,
    Wrong,
    belief_between,
    cheapest_number,
    wrong_decisions,
    wrong_without_results,
)

TITLE = "What a wrong decision would cost"
SOURCE = (
    "expected loss of two actions: Raiffa & Schlaifer 1961, Applied Statistical Decision Theory "
    "(from memory); chances by the noncentral t distribution"
)
CHANCE = 0.9
"""Of the true mean to lie between mean_from and mean_to."""


@dataclass(frozen=True)
class _Stakes:
    """What the campaign says of being wrong."""

    asked: Asked
    level: float
    wrongly_acted: float
    wrongly_left: float
    belief: Belief
    believed: str

    @cached_property
    def _shares(self) -> dict[int, tuple[int, ...]]:
        """Counts by stratum that were shared out already."""
        return {}

    def shared(self, total: int) -> tuple[int, ...]:
        """Share a total as the campaign does, once."""
        if total not in self._shares:
            self._shares[total] = self.asked.shared(total)
        return self._shares[total]

    def wrong(self, counts: tuple[int, ...]) -> Wrong:
        """Give the chances of both wrong decisions with so many results."""
        precision = Precision(self.asked.question)
        known = precision.degrees_of_freedom(counts)
        return wrong_decisions(
            self.belief,
            self.level,
            standard_error=precision.standard_error(counts),
            degrees_of_freedom=known,
            multiplier=self.multiplier(known),
        )

    def multiplier(self, degrees_of_freedom: float) -> float:
        """Give how many standard errors are added before the mean is compared."""
        kind, confidence = self.compared
        if kind == "two-sided" or math.isinf(degrees_of_freedom):
            return 0.0
        t = t_quantile(degrees_of_freedom, confidence=confidence, kind=kind)
        return t if kind == "upper-limit" else -t

    @property
    def compared(self) -> tuple[IntervalKind, float]:
        """What is held against the level: a limit of so much confidence, or the mean itself.

        A test against the level decides as its limit does; without one the campaign's rules say
        which limit.
        """
        tested = self.asked.objective.mean_and_level
        if tested is None:
            return self.asked.question.interval, self.asked.question.confidence
        above = tested.assume == "above-level"
        return "upper-limit" if above else "lower-limit", 1 - tested.alpha

    def loss(self, wrong: Wrong) -> float:
        """Give the expected loss."""
        return wrong.loss(wrongly_acted=self.wrongly_acted, wrongly_left=self.wrongly_left)

    def loss_at(self, total: int) -> float:
        """Give the expected loss with so many results, shared as the campaign shares them."""
        return self.loss(self.wrong(self.shared(total)))

    def cost_at(self, total: int) -> float:
        """Give what so many results cost."""
        question = self.asked.question
        return total_cost(question, planned_counts(question, self.shared(total))) or 0.0

    def without(self) -> tuple[bool, float]:
        """Say whether to act where nobody samples, and what that would lose on average."""
        losses = {
            act: self.loss(wrong_without_results(self.belief, self.level, act=act))
            for act in (False, True)
        }
        act = losses[True] < losses[False]
        return act, losses[act]

    def money(self, amount: float) -> str:
        """Write an amount of money."""
        prices = self.asked.question.prices
        return with_unit(f"{amount:.0f}", prices.currency if prices else "")


def finding(asked: Asked, size: Size) -> Finding | None:
    """Set the expected loss of a wrong decision beside the cost of sampling.

    Parameters
    ----------
    asked : Asked
    size : Size

    Returns
    -------
    Finding or None
        None where the campaign does not say what being wrong costs, has no level or no sigma, or
        where a result costs nothing, so that there is nothing to set beside it.
    """
    cost, level = asked.campaign.cost, asked.level
    if cost is None or cost.wrongly_acted is None or cost.wrongly_left is None:
        return None
    if level is None or not asked.sigma_known or asked.question.census:
        return None
    prices = asked.question.prices
    if prices is None or prices.of_a_visit + prices.of_a_result <= 0:
        return None
    belief, believed = _belief(asked)
    if belief is None:
        return Finding(
            topic="being-wrong",
            title=TITLE,
            answer=(
                "What a wrong decision would cost on average cannot be said: nobody said where "
                "the true mean may lie. Write mean_from and mean_to below [[objective]]."
            ),
        )
    stakes = _Stakes(asked, level, cost.wrongly_acted, cost.wrongly_left, belief, believed)
    return _weighed(stakes, size)


def _belief(asked: Asked) -> tuple[Belief | None, str]:
    """Take what is believed of the true mean: as typed, from the pilot, or one expected mean."""
    unit, objective = asked.question.unit, asked.objective
    if objective.mean_from is not None and objective.mean_to is not None:
        low, high = objective.mean_from, objective.mean_to
        words = (
            f"between {figure(low)} and {with_unit(figure(high), unit)} with a chance of 9 in 10"
        )
        return belief_between(low, high, chance=CHANCE), words
    mean = asked.question.mean
    if mean is None:
        return None, ""
    spread = _error_of_pilot(asked)
    if not spread:
        # A mean that is taken as certain leaves nothing to decide, and no sample would pay.
        return None, ""
    words = f"about {with_unit(figure(mean), unit)}, give or take {figure(spread)} (the pilot)"
    return Belief(mean, spread), words


def _error_of_pilot(asked: Asked) -> float | None:
    """Give the standard error of the pilot's mean; None where a stratum has no pilot results.

    Strata that share one pilot share its mean.
    """
    question = asked.question
    if question.pilots is None or not all(entry.values for entry in asked.entries):
        return None
    variance = 0.0
    for group in question.pilots:
        first = question.parts[group[0]]
        weight = math.fsum(question.parts[k].weight for k in group)
        variance += (weight * first.sigma) ** 2 / (first.results or 1)
    return math.sqrt(variance)


def _weighed(stakes: _Stakes, size: Size) -> Finding:
    """Weigh the plan's n, the n at which all together costs least, and no samples at all."""
    question = stakes.asked.question
    counts = tuple(entry.needed for entry in size.strata)
    wrong = stakes.wrong(counts)
    loss, paid = stakes.loss(wrong), size.cost or 0.0
    floors = sum(question.strata.floors)
    best = cheapest_number(stakes.cost_at, stakes.loss_at, least=floors, most=question.strata.most)
    totals = _totals(floors, size.needed, best, most=question.strata.most)
    bills = {n: (stakes.cost_at(n), stakes.loss_at(n)) for n in totals}
    bills[size.needed] = (paid, loss)
    return Finding(
        topic="being-wrong",
        title=TITLE,
        answer=_answer(stakes, size, best, bills),
        amounts=_amounts(stakes, wrong, best, bills=bills, needed=size.needed),
        columns=("Results", "Sampling", "Loss on average", "Together"),
        rows=_rows(stakes, bills),
        steps=_steps(stakes, wrong, size.needed),
        assumptions=_assumptions(stakes),
        sources=(SOURCE,),
        picture=_picture(stakes, bills, best=best, needed=size.needed),
    )


def _totals(least: int, needed: int, best: int, *, most: int) -> list[int]:
    """Choose about twenty numbers of results round the plan's and the cheapest."""
    low, high = max(least, min(needed, best) // 2), min(most, 2 * max(needed, best))
    steps = 20
    ratio = (high / low) ** (1 / steps) if low else 1.0
    between = {round(low * ratio**k) for k in range(steps + 1)}
    return sorted({n for n in {*between, needed, best} if least <= n <= most})


def _answer(stakes: _Stakes, size: Size, best: int, bills: dict[int, tuple[float, float]]) -> str:
    paid, loss = bills[size.needed]
    line = (
        f"With the {size.needed} results of this plan a wrong decision would lose "
        f"{stakes.money(loss)} on average, beside {stakes.money(paid)} for sampling"
    )
    together = sum(bills[best])
    if best == size.needed:
        line += "; no other number costs less in all."
    else:
        line += (
            f"; the two together would be least at {best} results ({stakes.money(together)}), "
            "which the plan does not follow."
        )
    act, bare = stakes.without()
    decided = "acting" if act else "leaving the site alone"
    return f"{line} Without any sample, {decided} would lose {stakes.money(bare)} on average."


def _amounts(
    stakes: _Stakes,
    wrong: Wrong,
    best: int,
    *,
    bills: dict[int, tuple[float, float]],
    needed: int,
) -> tuple[Amount, ...]:
    prices, unit = stakes.asked.question.prices, stakes.asked.question.unit
    money = prices.currency if prices else ""
    found = [
        Amount("level", "Action level", stakes.level, unit),
        Amount("wrongly_acted", "Lost by acting wrongly", stakes.wrongly_acted, money),
        Amount("wrongly_left", "Lost by leaving wrongly", stakes.wrongly_left, money),
        Amount("chance_above", "Chance that the true mean is above the level",
               stakes.belief.above(stakes.level)),
        Amount("chance_wrongly_acted", "Chance to act wrongly", wrong.acted),
        Amount("chance_wrongly_left", "Chance to leave wrongly", wrong.left),
        Amount("expected_loss", "Loss on average with the plan's results", bills[needed][1], money),
        Amount("sampling_cost", "Cost of sampling", bills[needed][0], money),
        Amount("cheapest_n", "Results at which both together cost least", best, "results"),
        Amount("cheapest_total", "Both together there", sum(bills[best]), money),
    ]  # fmt: skip
    bare = stakes.without()[1]
    found.append(Amount("loss_without", "Loss on average without samples", bare, money))
    return tuple(found)


def _rows(stakes: _Stakes, bills: dict[int, tuple[float, float]]) -> tuple[tuple[str, ...], ...]:
    bare = stakes.without()[1]
    rows = [("0", "0", f"{bare:.0f}", f"{bare:.0f}")]
    for n, (paid, loss) in sorted(bills.items()):
        rows.append((str(n), f"{paid:.0f}", f"{loss:.0f}", f"{paid + loss:.0f}"))
    return tuple(rows)


def _steps(stakes: _Stakes, wrong: Wrong, needed: int) -> tuple[Step, ...]:
    question = stakes.asked.question
    money = question.prices.currency if question.prices else ""
    loss = stakes.loss(wrong)
    return (
        Step(
            symbol="E(loss)",
            meaning=f"Loss on average from a wrong decision with {needed} results",
            formula="E(loss) = P(act wrongly) · A + P(leave wrongly) · B",
            inputs=(
                Quantity("P(act wrongly)", "true mean not above the level, and acted on",
                         wrong.acted),
                Quantity("A", "lost by acting wrongly", stakes.wrongly_acted, money),
                Quantity("P(leave wrongly)", "true mean above the level, and left alone",
                         wrong.left),
                Quantity("B", "lost by leaving wrongly", stakes.wrongly_left, money),
            ),
            unrounded=loss,
            rounded=loss,
            unit=money,
            source=SOURCE,
        ),
    )  # fmt: skip


def _assumptions(stakes: _Stakes) -> tuple[str, ...]:
    question = stakes.asked.question
    kind, confidence = stakes.compared
    compared = "the mean itself"
    if kind != "two-sided":
        compared = f"the {typed_percent(confidence)} {kind.replace('-', ' ')} of the mean"
    return (
        f"The true mean was taken to lie {stakes.believed}; the chance that it is above the level "
        f"is then {_chance_words(stakes.belief.above(stakes.level))}.",
        f"The site is acted on where {compared} comes out above the level of "
        f"{with_unit(figure(stakes.level), question.unit)}; results are near normal.",
        "A wrong decision loses the same however far the true mean lies from the level. Harm to "
        "people is no sum of money; whoever decides must weigh it apart.",
    )


def _chance_words(share: float) -> str:
    """Write a chance; one too small for a decimal is said to be so."""
    return "below 0.1 %" if 0 < share < 0.0005 else percent(share)


def _picture(
    stakes: _Stakes, bills: dict[int, tuple[float, float]], *, best: int, needed: int
) -> Picture:
    numbers = sorted(bills)
    paid = tuple(bills[n][0] for n in numbers)
    lost = tuple(bills[n][1] for n in numbers)
    both = tuple(a + b for a, b in zip(paid, lost, strict=True))
    prices = stakes.asked.question.prices
    x = tuple(float(n) for n in numbers)
    marks = [(f"{needed} in this plan", float(needed))]
    if best != needed:
        marks.append((f"least at {best}", float(best)))
    return Picture(
        kind="lines",
        caption=(
            "Cost of sampling and average loss from a wrong decision against the number of "
            "results, and the two together."
        ),
        alternative=(
            f"Together {stakes.money(both[0])} at {numbers[0]} results, "
            f"{stakes.money(sum(bills[best]))} at {best}, {stakes.money(both[-1])} at "
            f"{numbers[-1]}."
        ),
        x_label="number of results, n",
        y_label=f"money ({prices.currency})" if prices and prices.currency else "money",
        series=(
            Series("together", x, both),
            Series("sampling", x, paid, "dashes"),
            Series("loss", x, lost, "dashes"),
        ),
        marks=tuple(marks),
    )
