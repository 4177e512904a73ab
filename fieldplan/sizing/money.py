"""What a design costs: the campaign as such, visits, jars, analyses, whole days of a crew."""

from dataclasses import dataclass

from fieldplan.stats.precision import whole


@dataclass(frozen=True)
class Prices:
    """Money per campaign and per piece of work, in ``currency``.

    Parameters
    ----------
    currency : str
    mobilisation, per_location, per_analysis : float
        Once, for each location visited, for each sample analysed.
    per_sample : float
        For each jar filled, those of control samples too.
    per_crew_day : float
        For a crew's day in the field; a day that has begun counts whole.
    locations_per_day : float or None
        Locations that one crew visits in a day; needed where a crew-day has a price.
    """

    currency: str
    mobilisation: float = 0.0
    per_location: float = 0.0
    per_analysis: float = 0.0
    per_sample: float = 0.0
    per_crew_day: float = 0.0
    locations_per_day: float | None = None

    def crew_days(self, visits: int) -> int:
        """Count whole days of one crew for so many visits; 0 where nobody said how many a day has.

        Examples
        --------
        >>> Prices("EUR", per_crew_day=900, locations_per_day=12).crew_days(25)
        3
        """
        return whole(visits / self.locations_per_day) if self.locations_per_day else 0

    @property
    def of_a_visit(self) -> float:
        """What one more location adds before anything is taken there, days at their average."""
        day = self.per_crew_day / self.locations_per_day if self.locations_per_day else 0.0
        return self.per_location + day

    @property
    def of_a_result(self) -> float:
        """What a jar and its analysis add at a location that is visited anyhow."""
        return self.per_sample + self.per_analysis

    def bill(self, *, visits: int, jars: int, analyses: int | None = None) -> float:
        """Add up a round of field work.

        Parameters
        ----------
        visits : int
            Locations visited.
        jars : int
            Samples filled, control samples among them.
        analyses : int, optional
            Samples analysed; all jars unless given.

        Examples
        --------
        >>> dear = Prices("EUR", 400.0, 30.0, 45.0, per_crew_day=900.0, locations_per_day=12)
        >>> dear.bill(visits=25, jars=28)
        5110.0
        """
        return (
            self.mobilisation
            + visits * self.per_location
            + jars * self.per_sample
            + (jars if analyses is None else analyses) * self.per_analysis
            + self.crew_days(visits) * self.per_crew_day
        )
