"""The chance of hitting a patch, and what must be able to give it."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Protocol


@dataclass(frozen=True)
class PatchChance:
    """A chance averaged over the layout's random starts.

    Parameters
    ----------
    chance : float
    standard_error : float
        From the number of starts; 0 where a closed form was averaged over patch centres.
    starts : int
        0 for a closed form.
    exact_count : bool
        False where a grid should have a fixed number of nodes inside, and no start had.
    """

    chance: float
    standard_error: float = 0.0
    starts: int = 0
    exact_count: bool = True


class PatchChances(Protocol):
    """What a layout makes of patches of one shape on one population."""

    def chance(self, counts: Sequence[int], *, scale: float = 1.0) -> PatchChance:
        """Give the chance for so many locations a stratum and a patch ``scale`` times as long."""
        ...

    def smallest_scale(self, counts: Sequence[int], chance: float) -> float:
        """Give the smallest scale at which the patch is hit with this chance."""
        ...

    def by_scale(self, counts: Sequence[int], scales: Sequence[float]) -> list[float]:
        """Give the chance for each of several scales, for a picture."""
        ...
