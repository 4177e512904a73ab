"""What a question may look at, and what it answers."""

from dataclasses import dataclass
from typing import TYPE_CHECKING

from fieldplan.sizing.model import Finding
from fieldplan.sizing.question import Question
from fieldplan.stats.allocation import share_total

if TYPE_CHECKING:
    from fieldplan.campaign.model import Analyte, Campaign, Objective
    from fieldplan.frame.model import Frame
    from fieldplan.lab.model import Spread, StratumSpread


@dataclass(frozen=True)
class Asked:
    """Everything that a question, or what stands beside an answer, may use.

    Parameters
    ----------
    campaign : Campaign
    objective : Objective
        The one asked; its sub-tables hold the questions' keys.
    question : Question
        Parts with weights and sigmas, prices, controls, confidence. ``target`` and ``value`` mean
        something for the question ``mean`` only. Where ``sigma_known`` is False the sigmas are 0.
    frame : Frame or None
        None for bare numbers.
    spread : Spread or None
        None where no sigma is known.
    area_m2 : float or None
        Of the population; None for a list, or where nobody said.
    sigma_known : bool
    """

    campaign: "Campaign"
    objective: "Objective"
    question: Question
    frame: "Frame | None" = None
    spread: "Spread | None" = None
    area_m2: float | None = None
    sigma_known: bool = True

    @property
    def analyte(self) -> "Analyte":
        """The analyte that the objective asks about."""
        name = self.objective.analyte or self.campaign.deciding_analyte.id
        return self.campaign.analyte_called(name)

    @property
    def level(self) -> float | None:
        """The analyte's action level."""
        return self.analyte.action_level

    @property
    def entries(self) -> "tuple[StratumSpread, ...]":
        """What is known of the analyte's spread, by stratum."""
        return () if self.spread is None else entries_of(self.spread, self.analyte.id)

    @property
    def population(self) -> int | None:
        """N of the list; None for an area."""
        return self.question.total_population

    def shared(self, total: int) -> tuple[int, ...]:
        """Share a total between the strata as the design does, floors in."""
        question = self.question
        allocation = question.allocation if self.sigma_known else "proportional"
        least = max(total, sum(question.sharing.floors))
        return tuple(share_total(question.sharing, least, allocation=allocation))


def entries_of(spread: "Spread", analyte: str) -> "tuple[StratumSpread, ...]":
    """Give what a spread says of one analyte, by stratum."""
    if analyte == spread.analyte:
        return spread.strata
    return tuple(entry for entry in spread.others if entry.analyte == analyte)


@dataclass(frozen=True)
class Answered:
    """What a question answers: counts, the target in words, and the finding with its working.

    Parameters
    ----------
    needed : tuple of int
        Results by stratum.
    target : str
        In words, e.g. ``none of the results above 150 mg/kg``.
    finding : Finding
        ``answer`` opens the sentences of the size.
    unrounded : float or None
    """

    needed: tuple[int, ...]
    target: str
    finding: Finding
    unrounded: float | None = None
