"""Time balanced selection, beside a search of all open units for every nearest neighbour."""

from collections.abc import Callable
from dataclasses import dataclass
from time import process_time

import numpy as np
from numpy.typing import NDArray

from fieldplan.base.draws import Stream
from fieldplan.design.area import Ground
from fieldplan.design.balanced_list import balanced_places
from fieldplan.design.local_pivotal import balanced_sample
from tests.benchmarks.placement import blob

CHOSEN = 200
AIMS_S = {10_000: 0.3, 100_000: 3.0}


@dataclass(frozen=True)
class Row:
    """Shortest seconds of processor time for one piece of work; 0 where there is no aim or peer."""

    name: str
    aim_s: float
    seconds: float
    peer_s: float = 0.0


def processor_seconds(work: Callable[[], object], repeats: int) -> float:
    """Return the least processor time of several runs."""
    found = []
    for _ in range(repeats):
        start = process_time()
        work()
        found.append(process_time() - start)
    return min(found)


def scattered(units: int) -> NDArray[np.int64]:
    """Return units scattered over a square kilometre, in centimetres."""
    return np.random.default_rng(units).integers(0, 100_000, size=(units, 2))


def selected(units: int) -> float:
    """Time the selection of 200 units."""
    places = [(east, north) for east, north in scattered(units).tolist()]
    shares = [CHOSEN] * units
    key = (20261102, "main", "site", "pivots")
    return processor_seconds(lambda: balanced_sample(places, shares, units, Stream(*key)), 2)


def searched(units: int) -> float:
    """Time the same method with numpy looking at every open unit for each nearest neighbour."""
    places = scattered(units).astype(np.float64)
    random = np.random.default_rng(1)

    def work() -> None:
        share = np.full(units, CHOSEN)
        still = np.arange(units)
        while len(still) > 1:
            at = int(random.integers(len(still)))
            off = places[still] - places[still[at]]
            far = (off**2).sum(axis=1)
            far[at] = np.inf
            near = int(far.argmin())
            both = share[still[at]] + share[still[near]]
            first = random.random() < 0.5
            kept, left = (at, near) if first else (near, at)
            share[still[kept]] = both if both < units else both - units
            share[still[left]] = 0 if both <= units else units
            gone = [left, kept] if both == units else [left]
            still = np.delete(still, gone)

    return processor_seconds(work, 1)


def whole_list(planned: int) -> float:
    """Time a whole list on a site of 1,000 corners: raster, selection and order."""
    ground = Ground("site", blob(1_000))
    key = (20261102, "main", "site")
    return processor_seconds(lambda: balanced_places(ground, planned, key), 2)


def measured() -> tuple[Row, ...]:
    """Time every row of the table."""
    return (
        Row("200 of 10,000 units", AIMS_S[10_000], selected(10_000), searched(10_000)),
        Row("200 of 100,000 units", AIMS_S[100_000], selected(100_000)),
        Row("a list for 50 locations", 0.0, whole_list(50)),
        Row("a list for 200 locations", 0.0, whole_list(200)),
        Row("a list for 2,000 locations", 0.0, whole_list(2_000)),
    )
