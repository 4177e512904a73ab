"""A patch that must not be missed, and the ground it may lie on: the true one, or an endless."""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

from fieldplan.base.errors import CampaignError, DesignError
from fieldplan.design.patch_chance import PatchChance
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.counting import fixed_counts, planned_counts
from fieldplan.stats.patches import (
    SQUARE,
    TRIANGULAR,
    Lattice,
    Patch,
    chance_at_random,
    chance_on_grid,
    count_at_random,
    spacing_for_chance,
)

if TYPE_CHECKING:
    from fieldplan.campaign.model import DesignTable
    from fieldplan.campaign.questions.smallest_patch import SmallestPatch
    from fieldplan.design.patch_chance import PatchChances

LATTICES = {"square-grid": SQUARE, "triangular-grid": TRIANGULAR}
STARTS, FEW_STARTS = 256, 64
"""Starts of a grid that are averaged, and those for a first guess."""
DOUBTFUL_SHARE = 0.25
"""Of the patch's width: above it no chance is claimed (half the radius of a circle)."""


@dataclass(frozen=True)
class EndlessGround:
    """The textbook's ground: no edge cuts the patch, and no stratum's border.

    Parameters
    ----------
    areas : tuple of float
        Square metres of each stratum.
    layout : str
    patch : Patch
    losses : tuple of float
        By stratum. On a grid a hit is kept with at least 1 − loss, and only that is counted.
    """

    areas: tuple[float, ...]
    layout: str
    patch: Patch
    losses: tuple[float, ...]

    def chance(self, counts: Sequence[int], *, scale: float = 1.0) -> PatchChance:
        """Weigh the strata's chances by their areas."""
        patch = self.patch.scaled(scale)
        chances = [
            area / sum(self.areas) * self._within(patch, area, number, count)
            for number, (area, count) in enumerate(zip(self.areas, counts, strict=True))
        ]
        return PatchChance(math.fsum(chances))

    def smallest_scale(self, counts: Sequence[int], chance: float) -> float:
        """Halve the interval until the scale is known to 1 in 10,000."""
        low, high = 0.0, 1.0
        while self.chance(counts, scale=high).chance < chance:
            low, high = high, high * 2
            if high > 1e6:
                return math.inf
        while high - low > 1e-4 * high:
            middle = (low + high) / 2
            enough = self.chance(counts, scale=middle).chance >= chance
            low, high = (low, middle) if enough else (middle, high)
        return high

    def by_scale(self, counts: Sequence[int], scales: Sequence[float]) -> list[float]:
        """Give the chance for each of several scales."""
        return [self.chance(counts, scale=scale).chance for scale in scales]

    def _within(self, patch: Patch, area: float, number: int, count: int) -> float:
        if self.layout not in LATTICES:
            return chance_at_random(patch, area, count) if patch.area < area else 1.0
        lattice = LATTICES[self.layout]
        found = chance_on_grid(patch, lattice.spacing(area, count), lattice=lattice)
        return found * (1 - self.losses[number])


@dataclass(frozen=True)
class PatchQuestion:
    """What is asked about a patch, with the campaign's layout, losses and receiver."""

    asked: Asked
    table: "SmallestPatch"

    @property
    def patch(self) -> Patch:
        """The patch as it lies."""
        return Patch(self.table.length_m, self.table.width_m or self.table.length_m)

    @property
    def direction(self) -> float | None:
        """Degrees clockwise from north; None where nobody knows."""
        typed = self.table.direction_degrees
        return None if typed == "unknown" else float(typed)

    @property
    def design(self) -> "DesignTable":
        """The design that lays the locations out."""
        designs = self.asked.campaign.design
        wanted = self.asked.question.design
        return next((design for design in designs if design.id == wanted), designs[0])

    @property
    def lattice(self) -> Lattice | None:
        """None where the places are random."""
        return LATTICES.get(self.design.layout)

    @property
    def error_m(self) -> float:
        """Within how many metres the receiver finds a place; 0 where nobody said."""
        return self.asked.campaign.field.position_accuracy_m or 0.0

    @property
    def doubtful(self) -> bool:
        """The receiver is too coarse for any chance to be claimed."""
        return self.error_m > DOUBTFUL_SHARE * self.patch.width

    @property
    def out_of_reach(self) -> bool:
        """Endless ground counts no more than the share of a grid that is kept."""
        most = 1 - max(self.losses)
        endless_grid = self.lattice is not None and self.asked.frame is None
        return endless_grid and self.table.probability >= most

    @property
    def least_scale(self) -> float:
        """Smallest patch of this shape, as a share of the one asked about, with a chance."""
        return self.error_m / (DOUBTFUL_SHARE * self.patch.width)

    @property
    def reach(self) -> float:
        """Scale of the part of the patch that is hit however far each place is off."""
        return 1 - 2 * self.error_m / self.patch.width

    @property
    def losses(self) -> tuple[float, ...]:
        """Share of locations in each stratum that yields nothing."""
        return tuple(part.loss for part in self.asked.question.parts)

    @property
    def areas(self) -> tuple[float, ...]:
        """Square metres of each stratum."""
        total = self.asked.area_m2 or 0.0
        return tuple(part.weight * total for part in self.asked.question.parts)

    @cached_property
    def chances(self) -> "PatchChances":
        """What the layout makes of the patch, on the true population where there is one."""
        return self._chances(STARTS)

    @cached_property
    def rough_chances(self) -> "PatchChances":
        """The same from a few starts of a grid, for a first guess."""
        return self._chances(FEW_STARTS)

    def _chances(self, starts: int) -> "PatchChances":
        frame = self.asked.frame
        if frame is None:
            return EndlessGround(self.areas, self.design.layout, self.patch, self.losses)
        from fieldplan.design.patch_starts import patch_chances

        return patch_chances(
            self.design.layout,
            frame,
            self.patch,
            direction=self.direction,
            exact_count=self.design.exact_count,
            losses=self.losses,
            starts=starts,
        )

    def planned(self, counts: Sequence[int]) -> tuple[int, ...]:
        """Turn results into the locations that are visited for them."""
        question = self.asked.question
        if question.locations is not None:
            fixed = fixed_counts(question)
            if fixed.needed == tuple(counts):
                return fixed.planned
        return planned_counts(question, counts)

    def laid(self, counts: Sequence[int]) -> tuple[int, ...]:
        """Turn results into the locations on which the chance depends.

        A grid is laid with all the locations planned, of which some are lost at random; what is
        left of random places is as random as they were.
        """
        return tuple(counts) if self.lattice is None else self.planned(counts)

    def endless_count(self, layout: str) -> float:
        """Count the locations, not rounded on a grid, that endless ground of this area takes."""
        area, patch = self.asked.area_m2 or 0.0, self.patch.scaled(self.reach)
        if layout not in LATTICES:
            return float(count_at_random(patch, area, self.table.probability))
        lattice = LATTICES[layout]
        widest = spacing_for_chance(patch, self.table.probability, lattice=lattice)
        return lattice.count(area, widest)


def patch_question(asked: Asked) -> PatchQuestion:
    """Put the objective's table as a question about this campaign.

    Parameters
    ----------
    asked : Asked

    Raises
    ------
    CampaignError
        The objective has no table.
    DesignError
        There is no area, or the patch does not fit into it.
    """
    table = asked.objective.smallest_patch
    if table is None:
        message = (
            "[objective.smallest_patch] is missing; write length_m and probability below "
            "[[objective]]."
        )
        raise CampaignError(message)
    question = PatchQuestion(asked, table)
    layout = question.design.layout
    if asked.frame is not None:
        from fieldplan.design.patch import check_fits

        check_fits(asked.frame, question.patch)
    elif asked.area_m2 is None:
        message = (
            f"a patch of {question.patch.length:g} m by {question.patch.width:g} m lies somewhere "
            "in an area, and none is given; type --area in m², or name a campaign file."
        )
        raise DesignError(message)
    elif question.patch.area >= asked.area_m2:
        message = (
            f"a patch of {question.patch.length:g} m by {question.patch.width:g} m "
            f"({question.patch.area:.0f} m²) does not fit into {asked.area_m2:.10g} m²; give a "
            "smaller patch."
        )
        raise DesignError(message)
    if layout == "census":
        message = f'layout "{layout}" visits what is on a list; a patch lies in an area.'
        raise DesignError(message)
    return question
