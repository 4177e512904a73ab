"""Time the weighing of curves and what is said of positions, beside plain ways to the same."""

import numpy as np

from fieldplan.sizing.beside import space
from fieldplan.sizing.frontier_spread import _field
from fieldplan.stats.series_correlation import correlation_of_visits
from fieldplan.stats.spatial import correlation_at, distances, weigh_field
from tests.benchmarks.patches import Row
from tests.benchmarks.placement import seconds
from tests.unit.sizing.beside.test_space import (
    asked_with,
    entry,
    field_at,
    one_frame,
    random_places,
)


def weighing() -> Row:
    """Weigh 126 curves for a pilot of 50; the peer factors every covariance matrix on its own."""
    places = random_places(50)
    values = np.array(field_at(places))

    field = weigh_field(places, values, extent=300.0)

    def one_by_one() -> None:
        apart, one = distances(places, places), np.ones(50)
        for shape, reach, nugget in zip(field.shapes, field.ranges, field.nuggets, strict=True):
            whole = (1 - nugget) * correlation_at(apart, reach, shape=shape) + nugget * np.eye(50)
            inverse = np.linalg.inv(whole + 1e-9 * np.eye(50))
            float(values @ inverse @ values) - float(one @ inverse @ values) ** 2
            np.linalg.slogdet(whole)

    return Row(
        "curves weighed for a pilot of 50",
        0.5,
        seconds(lambda: weigh_field(places, values, extent=300.0), 9),
        "each matrix inverted",
        seconds(one_by_one, 3),
    )


def positions() -> Row:
    """Say all of a pilot of 50; the peer draws 2,000 means by each of three layouts."""
    places = random_places(50)
    asked, size = asked_with(
        one_frame(), entry(places, field_at(places)), assurance=0.8, pilot_n=50
    )
    random = np.random.default_rng(1)

    def anew() -> None:
        _field.cache_clear()
        space.finding(asked, size)

    def drawn() -> None:
        ground = random.standard_normal((200, 300))
        for _ in range(3 * 2000):
            ground[
                random.integers(0, 200, size.needed), random.integers(0, 300, size.needed)
            ].mean()

    return Row("all that positions say, pilot of 50", 0.5, seconds(anew, 9), "6,000 means drawn",
               seconds(drawn, 3))  # fmt: skip


def visits() -> Row:
    """Estimate a correlation with its interval; the peer resamples the series 1,000 times."""
    random = np.random.default_rng(2)
    values = random.standard_normal(36).tolist()
    days = [30.0 * k for k in range(36)]

    def resampled() -> None:
        for _ in range(1000):
            drawn = random.choice(values, 36)
            float(np.corrcoef(drawn[1:], drawn[:-1])[0, 1])

    return Row(
        "correlation of 36 visits",
        0.005,
        seconds(lambda: correlation_of_visits(days, values), 9),
        "1,000 resampled series",
        seconds(resampled, 3),
    )


def measured() -> list[Row]:
    """Time all three."""
    return [weighing(), positions(), visits()]
