"""The findings about the interval of a mean beside plain simulation with a reference library."""

import time
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy import stats

from fieldplan.sizing import size_asked
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.beside import mean_band, near_normal
from fieldplan.stats.mean_limits import largest_cv, n_within_a_point
from fieldplan.stats.mean_simulation import simulate_coverage
from tests.unit.sizing.askings import asked_mean
from tests.unit.sizing.beside.test_near_normal import with_pilot


@dataclass(frozen=True)
class Timed:
    """Shortest seconds of one piece of work, and of the peer's in the same run."""

    name: str
    aim_s: float
    seconds: float
    peer_s: float

    @property
    def ratio(self) -> float:
        """How many times the peer's work it takes."""
        return self.seconds / self.peer_s


def shortest(work: Callable[[], object], *, runs: int = 3) -> float:
    """Time some work with nothing remembered from before."""
    taken = []
    for _ in range(runs):
        for remembered in (simulate_coverage, largest_cv, n_within_a_point):
            remembered.cache_clear()
        began = time.perf_counter()
        work()
        taken.append(time.perf_counter() - began)
    return min(taken)


def peer() -> None:
    """Draw 40,000 campaigns of 38 and test each mean with scipy: the coverage of one shape."""
    values = np.random.default_rng(1).standard_exponential((40_000, 38))
    stats.ttest_1samp(values, 1.0, axis=1)


def with_zeros(standard_error: float) -> Asked:
    """A pilot of twelve results, three of them below the limit."""
    asked = asked_mean(sigma=10.0, mean=10.0, results=12, standard_error=standard_error)
    values = [2.5, 2.5, 2.5, 6.0, 8.0, 9.0, 12.0, 14.0, 15.0, 22.0, 31.0, 60.0]
    return with_pilot(asked, values, [False] * 3 + [True] * 9)


def timed_findings() -> list[Timed]:
    """Time both findings for a plain site, for one with non-detects, and for many results."""
    plain = asked_mean(sigma=45.0, mean=44.0, results=12, standard_error=7.3)
    works = (
        ("coverage over shapes, n = 38", 0.005, plain, (near_normal,)),
        ("the same with band and longer tail", 2.0, plain, (near_normal, mean_band)),
        (
            "the same, a quarter of the pilot non-detects",
            2.0,
            with_zeros(3.0),
            (near_normal, mean_band),
        ),
        ("the same, n about 1000", 2.0, with_zeros(0.53), (near_normal, mean_band)),
    )
    base = shortest(peer)
    found = []
    for name, aim, asked, topics in works:
        size = size_asked(asked, beside=())
        took = shortest(lambda: [topic.finding(asked, size) for topic in topics])  # noqa: B023
        found.append(Timed(name, aim, took, base))
    return found
