"""Time what is said about money, beside sizing each design alone and beside simulated campaigns."""

from dataclasses import replace

import numpy as np

from fieldplan.sizing import answer, size_asked
from fieldplan.sizing.beside import being_wrong, frontier, two_phase
from tests.benchmarks.patches import Row
from tests.benchmarks.placement import seconds
from tests.unit.sizing.askings import asked_mean

PRICES = ("cost.currency=EUR", "cost.mobilisation=300", "cost.per_location=12",
          "cost.per_analysis=80", "cost.per_increment=3")  # fmt: skip
METER = ("field_reading.name=meter", "field_reading.correlation=0.9",
         "field_reading.source=trial", "field_reading.per_reading=3")  # fmt: skip
STAKES = ("cost.wrongly_acted=40000", "cost.wrongly_left=250000",
          "objective.mean_from=90", "objective.mean_to=160")  # fmt: skip


def many_designs() -> tuple[Row, int]:
    """Price all designs of a population; the peer sizes as many one by one."""
    parts = ("sigma.sampling=6", "sigma.analysis=4")
    asked = asked_mean(sigma=20.0, standard_error=2.0, keys=(*PRICES, *METER, *parts))
    size = size_asked(asked)
    found = frontier.finding(asked, size)
    assert found is not None
    designs = next(int(a.value or 0) for a in found.amounts if a.name == "designs")
    goals = [2.0 * 1.8 ** (1 - 2 * k / designs) for k in range(designs)]

    def one_by_one() -> None:
        for goal in goals:
            answer(replace(asked.question, value=goal))

    row = Row(
        f"frontier of {designs} designs",
        1.0,
        seconds(lambda: frontier.finding(asked, size), 5),
        "as many sizings",
        seconds(one_by_one, 1),
    )
    return row, designs


def readings() -> Row:
    """Split readings and results; the peer prices every pair of whole numbers up to 200."""
    asked = asked_mean(sigma=20.0, standard_error=2.0, keys=(*PRICES, *METER))
    size = size_asked(asked)
    n, m = np.meshgrid(np.arange(4, 201), np.arange(4, 201))

    def every_pair() -> float:
        variance = 400 * 0.19 * (1 / n + (1 / n - 1 / m) / (n - 3)) + 400 * 0.81 / m
        money = np.where((m >= n) & (variance <= 4), 15 * m + 80 * n, np.inf)
        return float(money.min())

    return Row(
        "readings beside results",
        0.005,
        seconds(lambda: two_phase.finding(asked, size), 9),
        "every pair up to 200, one border less",
        seconds(every_pair, 9),
    )


def being_wrong_row() -> Row:
    """Weigh all numbers of results; the peer simulates 100,000 campaigns of each of 60 numbers."""
    asked = asked_mean(sigma=20.0, standard_error=4.0, level=150.0, keys=(*PRICES[:4], *STAKES))
    size = size_asked(asked)
    rng = np.random.default_rng(20261201)

    def simulated() -> float:
        lost = []
        for n in range(2, 62):
            truth = rng.normal(125, 21.3, 100_000)
            seen = truth + rng.normal(0, 20 / n**0.5, 100_000)
            acted, left = (seen > 150) & (truth <= 150), (seen <= 150) & (truth > 150)
            lost.append(4e4 * acted.mean() + 2.5e5 * left.mean())
        return min(lost)

    return Row(
        "loss on average, and the cheapest n",
        0.1,
        seconds(lambda: being_wrong.finding(asked, size), 5),
        "100,000 campaigns of each n",
        seconds(simulated, 2),
    )


def measured() -> list[Row]:
    """Time all."""
    return [many_designs()[0], readings(), being_wrong_row()]
