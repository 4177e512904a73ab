"""Samples: jars, bottles and cores. A jar is not a place."""

from dataclasses import dataclass
from functools import cached_property


@dataclass(frozen=True)
class Sample:
    """One container set to be filled at one location (or none, for a blank).

    Parameters
    ----------
    sample_id : str
        Ordinary-looking and unique; a duplicate's id does not give it away.
    location_id : str
        Empty for blanks.
    role : str
        ``field sample``, ``field duplicate``, ``equipment blank`` …
    qc_of : str
        For a duplicate the sample_id it repeats; else empty.
    analytes : tuple of str
    depth_top_m, depth_bottom_m : float or None
    """

    sample_id: str
    location_id: str
    role: str
    qc_of: str
    analytes: tuple[str, ...]
    depth_top_m: float | None = None
    depth_bottom_m: float | None = None


@dataclass(frozen=True)
class Samples:
    """All samples in the order of the crew's list; alternates have samples ready too."""

    samples: tuple[Sample, ...]
    notes: tuple[str, ...] = ()

    def at(self, location_id: str) -> tuple[Sample, ...]:
        """Return the samples to be taken at one location, duplicates among them."""
        return self._by_location.get(location_id, ())

    @cached_property
    def _by_location(self) -> dict[str, tuple[Sample, ...]]:
        """Samples by where they are taken, so that a list of locations is gone through once."""
        found: dict[str, list[Sample]] = {}
        for sample in self.samples:
            found.setdefault(sample.location_id, []).append(sample)
        return {location_id: tuple(samples) for location_id, samples in found.items()}
