"""The campaign as asked: frozen values, checked once when the file is read."""

from collections.abc import Mapping
from datetime import date
from pathlib import Path
from typing import Annotated, Literal

from pydantic import BaseModel, ConfigDict, Field

from fieldplan.campaign.field_reading import FieldReading
from fieldplan.campaign.questions.all_clear import AllClear
from fieldplan.campaign.questions.change import Change
from fieldplan.campaign.questions.mean_and_background import MeanAndBackground
from fieldplan.campaign.questions.mean_and_level import MeanAndLevel
from fieldplan.campaign.questions.share import ShareTable
from fieldplan.campaign.questions.smallest_patch import SmallestPatch
from fieldplan.campaign.questions.upper_share import UpperShare
from fieldplan.campaign.questions.which_exceed import WhichExceed
from fieldplan.campaign.rules_table import Rules as Rules
from fieldplan.campaign.table import (
    Identifier,
    NonNegativeNumber,
    PositiveNumber,
    Share,
    Table,
    Words,
)

FILL_IN = "FILL IN"
"""What a campaign file holds where its author did not know yet; never replaced by a number."""


class PlanTable(Table):
    """``[plan]``: what the campaign is called, who prepared it and when."""

    id: Identifier
    title: Words
    revision: Annotated[int, Field(ge=1, le=99)] | None = None
    prefix: Annotated[str, Field(pattern=r"^[A-Z][A-Z0-9]?$")] | None = None
    site: str = ""
    prepared_by: str = ""
    reviewed_by: str = ""
    decides: str = ""
    prepared_on: date | None = None
    fieldwork_from: date | None = None
    fieldwork_to: date | None = None
    background: str = ""
    decision: str = ""


class Analyte(Table):
    """``[[analyte]]``: what the laboratory measures, in which unit and against which level."""

    id: Identifier
    name: str = ""
    unit: Words
    matrix: str = ""
    basis: str = ""
    fraction: str = ""
    laboratory_names: tuple[str, ...] = ()
    reporting_limit: PositiveNumber | None = None
    action_level: PositiveNumber | None = None
    action_level_source: str = ""

    @property
    def label(self) -> str:
        """What people read: the name as its author typed it, else the id.

        Capitals carry meaning ("As" is no "as"), so a name is never set in another case.

        Examples
        --------
        >>> Analyte(id="arsenic-as", name="Arsenic (As)", unit="mg/kg").label
        'Arsenic (As)'
        """
        return self.name.strip() or self.id


class Exclusion(Table):
    """``[[frame.exclusion]]``: a part of the site that is left out of the population, and why."""

    file: str
    buffer_m: NonNegativeNumber = 0.0
    reason: Words


class FrameTable(Table):
    """``[[frame]]``: the population that the mean shall speak for."""

    id: Identifier = "site"
    kind: Literal["area", "list", "line"]
    boundary: str | None = None
    boundary_assumed: bool = False
    crs: str | None = None
    strata: str | None = None
    stratum_column: str = "stratum"
    list_file: str | None = None
    line_file: str | None = None
    branch_column: str = "branch"
    columns: Mapping[str, str] = {}
    exclusion: tuple[Exclusion, ...] = ()
    inset_m: NonNegativeNumber = 0.0
    accept_shift_accuracy_m: PositiveNumber | None = None
    unit_is: str = ""
    depth_top_m: NonNegativeNumber | None = None
    depth_bottom_m: PositiveNumber | None = None
    depth_datum: str = ""
    size_fraction: str = ""
    time_window: str = ""
    why_this_area: str = ""


class Event(Table):
    """``[[event]]``: one round of field work."""

    id: Identifier = "round-1"
    note: str = ""


class DesignTable(Table):
    """``[[design]]``: how locations are laid out and shared between strata."""

    id: Identifier = "main"
    frame: str | None = None
    layout: Literal[
        "simple-random",
        "stratified",
        "square-grid",
        "triangular-grid",
        "compact-strata",
        "balanced-list",
        "even-spacing",
        "census",
    ]
    per_cell: Literal[1, 2] = 1
    variance: Literal["pairs", "neighbours", "covariance"] = "pairs"
    allocation: Literal["proportional", "neyman", "cost-optimal", "equal-precision"] = (
        "proportional"
    )
    equal_in: Literal["standard-error", "relative-standard-error"] = "standard-error"
    floor: Annotated[int, Field(ge=2)] = 2
    least: Mapping[str, Annotated[int, Field(ge=2)]] = {}
    most: Mapping[str, Annotated[int, Field(ge=1)]] = {}
    alternates: Annotated[int, Field(ge=0)] = 0
    minimum_spacing_m: NonNegativeNumber = 0.0
    exact_count: bool = True
    starts: Annotated[int, Field(ge=1, le=100)] = 1
    locations: Annotated[int, Field(ge=2)] | None = None
    increments: Annotated[int, Field(ge=1, le=1000)] | Literal["choose"] = 1
    increments_at: Literal["own-places", "one-place"] = "own-places"
    replicates: Annotated[int, Field(ge=2)] | Literal["choose"] = "choose"
    ranking_set_size: Annotated[int, Field(ge=2, le=20)] | None = None
    ranking_correlation: Annotated[float, Field(ge=0, le=1)] | None = None
    why: str = ""

    @property
    def takes_composites(self) -> bool:
        """Whether a result comes from several increments in one jar."""
        return self.increments != 1


class Targeted(Table):
    """``[[targeted]]``: places chosen by judgement; a class of their own, never in the mean."""

    file: str
    columns: Mapping[str, str] = {}
    reason: Words


class Objective(Table):
    """``[[objective]]``: the question, its target, and the assurance that somebody chose.

    A budget has no assurance: it sets no precision that n could miss. A question other than the
    mean has a table of its own below, named as the question.
    """

    design: str | None = None
    analyte: str | None = None
    question: Literal[
        "mean",
        "mean-and-level",
        "mean-and-background",
        "change",
        "upper-share",
        "all-clear",
        "share",
        "smallest-patch",
        "which-exceed",
    ]
    standard_error: PositiveNumber | None = None
    half_width: PositiveNumber | None = None
    relative_half_width: Annotated[float, Field(gt=0, lt=10)] | None = None
    budget: PositiveNumber | None = None
    assurance: Annotated[float, Field(ge=0.5, lt=1)] | Literal["plain"] | None = None
    assurance_chosen_by: str = ""
    decides_n: bool = False
    first_stage: Annotated[int, Field(ge=2)] | None = None
    mean_from: NonNegativeNumber | None = None
    mean_to: PositiveNumber | None = None
    all_clear: AllClear | None = None
    mean_and_level: MeanAndLevel | None = None
    smallest_patch: SmallestPatch | None = None
    mean_and_background: MeanAndBackground | None = None
    change: Change | None = None
    upper_share: UpperShare | None = None
    which_exceed: WhichExceed | None = None
    share: ShareTable | None = None


class Sigma(Table):
    """``[[sigma]]``: where the standard deviation comes from: a pilot file or a typed value.

    A typed value has ``source``; ``source = "ASSUMED"`` stamps it as such on every page.
    ``from_results`` is the number of results behind a typed value, when it is known.
    """

    analyte: str | None = None
    stratum: str | None = None
    part: Literal["total", "between-locations", "sampling", "analysis"] = "total"
    pilot: str | None = None
    columns: Mapping[str, str] = {}
    value: PositiveNumber | None = None
    source: str = ""
    from_results: Annotated[int, Field(ge=2)] | None = None
    expected_mean: PositiveNumber | None = None
    skewness: float | None = None
    excess_kurtosis: NonNegativeNumber | None = None
    correlation_between_visits: Annotated[float, Field(ge=-0.99, le=0.99)] | None = None
    correlation_days: PositiveNumber | None = None
    visit_spacing_days: PositiveNumber | None = None


class Cost(Table):
    """``[cost]``: money per campaign, location, jar, analysis and crew-day, and for being wrong."""

    currency: Words
    mobilisation: NonNegativeNumber = 0.0
    per_location: NonNegativeNumber = 0.0
    per_sample: NonNegativeNumber = 0.0
    per_analysis: NonNegativeNumber = 0.0
    per_increment: NonNegativeNumber = 0.0
    per_ranking: NonNegativeNumber = 0.0
    per_location_by_stratum: Mapping[str, NonNegativeNumber] = {}
    per_analysis_by_stratum: Mapping[str, NonNegativeNumber] = {}
    per_crew_day: NonNegativeNumber = 0.0
    locations_per_day: PositiveNumber | None = None
    wrongly_acted: PositiveNumber | None = None
    wrongly_left: PositiveNumber | None = None


class QualityControl(Table):
    """``[[qc]]``: control samples, counted apart from n."""

    kind: Literal[
        "field duplicate", "equipment blank", "field blank", "trip blank", "temperature blank"
    ]
    share: Annotated[float, Field(gt=0, le=1)] | None = None
    count: Annotated[int, Field(ge=1)] | None = None
    source: Words


class Loss(Table):
    """``[loss]``: the share of locations that is expected to yield no result."""

    share: Share = 0.0
    by_stratum: Mapping[str, Share] = {}
    reason: str = ""


class FieldTable(Table):
    """``[field]``: what the crew needs to know that no map shows.

    ``facts`` switch cautions on; ``offset_within_m`` is how far a blocked location may move.
    """

    method: str = ""
    position_accuracy_m: PositiveNumber | None = None
    offset_within_m: NonNegativeNumber = 0.0
    offset_rule: str = ""
    facts: tuple[str, ...] = ()
    ground_penetration: bool | None = None
    contact: str = ""
    laboratory: str = ""
    utc_offset: str = ""


class Clearance(Table):
    """``[[clearance]]``: the reference that closes a hold point; dates as typed by a person."""

    topic: Words
    reference: Words
    given_on: date
    expires_on: date


class Draw(Table):
    """``[draw]``: the seed and the version of the drawing procedure."""

    seed: Annotated[int, Field(ge=0, lt=2**63)]
    version: Literal[1] = 1


class Paper(Table):
    """``[paper]``: the sheet size of printed pages."""

    size: Literal["A4", "Letter"] = "A4"


class Campaign(Table):
    """A whole campaign file, checked: references resolved, defaults in, nothing left to fill in.

    Tables that may repeat are tuples from the start; where there is one of a thing its id may be
    left out of the file and every reference to it is filled in by the reader.
    """

    format: Literal[1]
    plan: PlanTable
    analyte: tuple[Analyte, ...] = Field(min_length=1)
    frame: tuple[FrameTable, ...] = Field(min_length=1)
    event: tuple[Event, ...] = (Event(),)
    design: tuple[DesignTable, ...] = Field(min_length=1)
    targeted: tuple[Targeted, ...] = ()
    objective: tuple[Objective, ...] = Field(min_length=1)
    sigma: tuple[Sigma, ...] = ()
    field_reading: tuple[FieldReading, ...] = ()
    cost: Cost | None = None
    qc: tuple[QualityControl, ...] = ()
    loss: Loss = Loss()
    rules: Rules = Rules()
    field: FieldTable = FieldTable()
    clearance: tuple[Clearance, ...] = ()
    draw: Draw
    paper: Paper = Paper()

    @property
    def deciding_objective(self) -> Objective:
        """The objective that decides n: the first one marked so, or the only one."""
        marked = [objective for objective in self.objective if objective.decides_n]
        return marked[0] if marked else self.objective[0]

    @property
    def also_deciding(self) -> tuple[Objective, ...]:
        """The other objectives that are marked as deciding n: their targets are kept as well."""
        first = self.deciding_objective
        return tuple(o for o in self.objective if o.decides_n and o is not first)

    @property
    def deciding_analyte(self) -> Analyte:
        """The analyte of the deciding objective."""
        wanted = self.deciding_objective.analyte
        return next((a for a in self.analyte if a.id == wanted), self.analyte[0])

    def analyte_called(self, name: str) -> Analyte:
        """Return the analyte of this id; KeyError when the campaign has none."""
        for analyte in self.analyte:
            if analyte.id == name:
                return analyte
        raise KeyError(name)

    @property
    def prefix(self) -> str:
        """One or two signs that open sample ids and made names."""
        if self.plan.prefix:
            return self.plan.prefix
        letters = "".join(c for c in self.plan.id.upper() if c.isalpha() and c.isascii())
        return (letters or "FP")[:2]


class ReadCampaign(BaseModel):
    """What ``read_campaign`` hands on: the campaign with the file it came from.

    ``folder`` is where relative paths start; ``text`` is the file as read, for the record.
    """

    model_config = ConfigDict(frozen=True)

    campaign: Campaign
    path: Path
    text: str

    @property
    def folder(self) -> Path:
        """The folder that relative paths in the file start from."""
        return self.path.parent
