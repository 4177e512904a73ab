"""The pilot as visits to one place: days, values, and how far neighbours resemble each other."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from fieldplan.base.errors import DesignError
from fieldplan.stats.time_series import effective_number_at

if TYPE_CHECKING:
    from fieldplan.lab.model import StratumSpread
    from fieldplan.stats.series_correlation import SeriesCorrelation

FEWEST = 8
_ONE_PLACE = 1e-4
"""Degrees, about 10 m: positions of one station that were taken anew on every visit."""


@dataclass(frozen=True)
class VisitSeries:
    """Visits to one place, in order of time.

    Parameters
    ----------
    days : tuple of float
        Counted from any day.
    values : tuple of float
        In the laboratory's unit.
    strata : tuple of str
        Season or flow class of each visit; one name where there are no classes.
    means : tuple of float
        Mean of the class that each visit belongs to.
    """

    days: tuple[float, ...]
    values: tuple[float, ...]
    strata: tuple[str, ...]
    means: tuple[float, ...]

    def correlation(self) -> "SeriesCorrelation | None":
        """Estimate the correlation of neighbouring visits, classes taken out; None if it cannot."""
        from fieldplan.stats.series_correlation import correlation_of_visits

        left = [value - mean for value, mean in zip(self.values, self.means, strict=True)]
        try:
            return correlation_of_visits(self.days, left)
        except DesignError:
            return None

    def days_in(self, stratum: str) -> list[float]:
        """List the days of one class."""
        return [day for day, name in zip(self.days, self.strata, strict=True) if name == stratum]

    def worth(self, stratum: str, rho: float, *, spacing_days: float) -> float:
        """Give the independent visits that those of one class are worth."""
        days = self.days_in(stratum)
        return effective_number_at(days, max(rho, 0.0), spacing_days=spacing_days)


def series_of(entries: "Sequence[StratumSpread]") -> VisitSeries | None:
    """Take the pilot as visits to one place.

    Parameters
    ----------
    entries : sequence of StratumSpread
        By stratum.

    Returns
    -------
    VisitSeries or None
        None where there are fewer than 8 results, days are missing or stand twice, or positions
        are those of several places.
    """
    visits = sorted(_visits(entries))
    days = [day for day, _, _, _ in visits]
    whole = sum(len(entry.values) for entry in entries)
    if len(visits) < FEWEST or len(visits) < whole or len(set(days)) < len(days):
        return None
    places = [place for entry in entries for place in entry.positions if place is not None]
    for axis in (0, 1):
        along = [place[axis] for place in places]
        if along and max(along) - min(along) > _ONE_PLACE:
            return None
    return VisitSeries(
        days=tuple(days),
        values=tuple(value for _, value, _, _ in visits),
        strata=tuple(name for _, _, name, _ in visits),
        means=tuple(mean for _, _, _, mean in visits),
    )


def _visits(entries: "Sequence[StratumSpread]") -> Iterator[tuple[float, float, str, float]]:
    for entry in entries:
        mean = sum(entry.values) / len(entry.values) if entry.values else 0.0
        for day, value in zip(entry.days, entry.values, strict=False):
            if day is not None:
                yield float(day.toordinal()), value, entry.stratum, mean
