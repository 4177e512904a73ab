"""What a person could say about a campaign, before there is a file of it."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import date
from typing import Literal

TargetKind = Literal["standard_error", "half_width", "relative_half_width", "budget"]


@dataclass(frozen=True)
class Answers:
    """What a person could say about a campaign; None where the answer is not known yet.

    Parameters
    ----------
    seed : int
        Always known: it is drawn when nobody gives one.
    plan_id, title, site, prepared_by, decision, decides : str, optional
    prepared_on : date, optional
    boundary, strata, list_file : str, optional
        Path from the campaign file, ``/`` between folders. A list makes the frame a list.
    boundary_assumed : bool
        The boundary is a circle round a point.
    list_in_strata : bool
        The list says in which stratum each member lies.
    depth_m : (float, float), optional
        Top and bottom of the sampled interval, in metres below the ground surface.
    analyte, unit : str, optional
        The analyte's name and the laboratory's unit.
    action_level, action_level_source : float, str, optional
    target_kind, target : str, float, optional
        Which form the target takes, and its amount.
    pilot : str, optional
        Path of the pilot results; the typed sigma is ignored when it is given.
    pilot_columns : mapping of str to str
        Our column name to the pilot's.
    sigma, sigma_source, from_results, expected_mean : float, str, int, float, optional
        A typed standard deviation, where it comes from, how many results are behind it, and the
        mean that is expected.
    assurance : float or "plain", optional
    chosen_by : str, optional
        Who chose the assurance.
    left_open : frozenset of str
        Names of the answers above that were asked for and are not known: the file says FILL IN
        there. What was neither given nor asked for is left out of it where it may be.
    """

    seed: int
    plan_id: str | None = None
    title: str | None = None
    site: str | None = None
    prepared_by: str | None = None
    prepared_on: date | None = None
    decision: str | None = None
    decides: str | None = None
    boundary: str | None = None
    boundary_assumed: bool = False
    strata: str | None = None
    list_file: str | None = None
    list_in_strata: bool = False
    depth_m: tuple[float, float] | None = None
    analyte: str | None = None
    unit: str | None = None
    action_level: float | None = None
    action_level_source: str | None = None
    target_kind: TargetKind | None = None
    target: float | None = None
    pilot: str | None = None
    pilot_columns: Mapping[str, str] = field(default_factory=dict)
    sigma: float | None = None
    sigma_source: str | None = None
    from_results: int | None = None
    expected_mean: float | None = None
    assurance: float | Literal["plain"] | None = None
    chosen_by: str | None = None
    left_open: frozenset[str] = frozenset()

    @property
    def divided(self) -> bool:
        """Whether the population has strata, as far as is known."""
        if self.list_file is not None:
            return self.list_in_strata
        return self.strata is not None or "strata" in self.left_open

    @property
    def guessed_without_results(self) -> bool:
        """Whether sigma is typed and nobody can say how many results are behind it."""
        typed = self.pilot is None and self.sigma is not None
        return typed and self.from_results is None
