"""From campaign, frame and spread to the question that sizing answers."""

import math
from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

from fieldplan.base.errors import CampaignError, DesignError
from fieldplan.sizing.by_stratum import bounded, unknown
from fieldplan.sizing.money import Prices
from fieldplan.sizing.question import ControlRate, Part, Question, TargetKind
from fieldplan.sizing.visits import as_visits
from fieldplan.sizing.words import typed

if TYPE_CHECKING:
    from fieldplan.campaign.model import Campaign, Cost, Loss, Objective
    from fieldplan.frame.model import Frame
    from fieldplan.lab.model import Spread, StratumSpread

TARGETS: tuple[TargetKind, ...] = (
    "standard_error",
    "half_width",
    "relative_half_width",
    "budget",
)


def question_of(campaign: "Campaign", spread: "Spread", frame: "Frame") -> Question:
    """Ask how many for the objective that decides n.

    Parameters
    ----------
    campaign : Campaign
    spread : Spread
        One sigma for every stratum of the frame.
    frame : Frame

    Returns
    -------
    Question

    Raises
    ------
    CampaignError
        The objective has no target, or one that lacks its mean or prices.
    DesignError
        A stratum has no sigma.
    """
    objective = campaign.deciding_objective
    kind, value = target_of(objective)
    mean = expected_mean(spread.strata, frame, site=spread.site)
    _check_support(campaign, kind, value, mean=mean)
    parts = parts_of(campaign, frame, spread.strata)
    question = ask(campaign, objective, parts=parts, mean=mean, targeted=len(frame.targeted))
    also = tuple(_asked_also(campaign, spread, frame, o) for o in campaign.also_deciding)
    return replace(question, also=also) if also else question


def _asked_also(
    campaign: "Campaign", spread: "Spread", frame: "Frame", objective: "Objective"
) -> Question:
    """Ask for another objective that decides n; what its analyte lacks stops the sizing."""
    from fieldplan.sizing.asked.model import entries_of

    analyte = campaign.analyte_called(objective.analyte or campaign.deciding_analyte.id)
    entries = entries_of(spread, analyte.id)
    mean = expected_mean(entries, frame, site=spread.site if analyte.id == spread.analyte else None)
    kind, value = target_of(objective)
    try:
        _check_support(campaign, kind, value, mean=mean)
        return ask(campaign, objective, parts=parts_of(campaign, frame, entries), mean=mean)
    except (CampaignError, DesignError) as fault:
        lines = [f"{analyte.label}, which decides n too: {line}" for line in fault.problems]
        raise type(fault)(*lines) from fault


def ask(
    campaign: "Campaign",
    objective: "Objective",
    *,
    parts: tuple[Part, ...],
    mean: float | None,
    targeted: int = 0,
) -> Question:
    """Put one objective as a question.

    Parameters
    ----------
    campaign : Campaign
    objective : Objective
    parts : tuple of Part
        From ``parts_of``.
    mean : float or None
        From ``expected_mean``.
    targeted : int
        Places chosen by judgement, for the cost.

    Returns
    -------
    Question

    Raises
    ------
    DesignError
        A relative half-width without a mean, or a budget without prices.
    """
    kind, value = target_of(objective)
    design = next((d for d in campaign.design if d.id == objective.design), campaign.design[0])
    analyte = campaign.analyte_called(objective.analyte or campaign.deciding_analyte.id)
    cost, assurance = campaign.cost, objective.assurance
    parts = bounded(parts, campaign, design)
    if cost is not None and design.takes_composites and isinstance(design.increments, int):
        more = design.increments * cost.per_increment
        parts = tuple(replace(part, extra_cost=part.extra_cost + more) for part in parts)
    return Question(
        parts=parts,
        target=kind,
        value=value,
        mean=mean,
        assurance=None if assurance == "plain" else assurance,
        assurance_chosen_by=objective.assurance_chosen_by,
        confidence=campaign.rules.confidence,
        interval=campaign.rules.interval,
        allocation=design.allocation,
        equal_in=design.equal_in,
        floor=design.floor,
        alternates=design.alternates,
        locations=design.locations,
        census=design.layout == "census",
        grid=design.layout.endswith("-grid"),
        cells=design.layout in {"compact-strata", "balanced-list"},
        starts=design.starts if design.layout == "even-spacing" else 0,
        targeted=targeted,
        prices=None if cost is None else prices_of(cost),
        controls=tuple(ControlRate(qc.kind, qc.share, qc.count, qc.source) for qc in campaign.qc),
        design=design.id,
        analyte=analyte.id,
        unit=analyte.unit,
        increments=design.increments if isinstance(design.increments, int) else 1,
        one_place=design.increments_at == "one-place",
        mean_interval=campaign.rules.mean_interval,
        promised_class=campaign.rules.promised_class,
    )


def prices_of(cost: "Cost") -> Prices:
    """Take the prices out of the ``[cost]`` table."""
    return Prices(
        currency=cost.currency,
        mobilisation=cost.mobilisation,
        per_location=cost.per_location,
        per_analysis=cost.per_analysis,
        per_sample=cost.per_sample,
        per_crew_day=cost.per_crew_day,
        locations_per_day=cost.locations_per_day,
    )


def target_of(objective: "Objective") -> tuple[TargetKind, float]:
    """Give the one target of an objective, and its number.

    Parameters
    ----------
    objective : Objective

    Raises
    ------
    CampaignError
        It has no target, or several.
    """
    given = [(kind, getattr(objective, kind)) for kind in TARGETS]
    typed_ones = [(kind, value) for kind, value in given if value is not None]
    if len(typed_ones) != 1:
        found = " and ".join(kind for kind, _ in typed_ones) or "none of them"
        message = (
            f"[[objective]] has {found}; it needs exactly one of standard_error, half_width, "
            "relative_half_width or budget."
        )
        raise CampaignError(message)
    return typed_ones[0]


def _check_support(
    campaign: "Campaign", kind: TargetKind, value: float, *, mean: float | None
) -> None:
    if kind == "relative_half_width" and mean is None:
        message = (
            f"[[objective]] relative_half_width = {typed(value)} needs an expected mean to be a "
            "share of; write expected_mean in every [[sigma]] table, or name a pilot file there."
        )
        raise CampaignError(message)
    if kind == "relative_half_width" and mean is not None and mean <= 0:
        message = (
            f"[[objective]] relative_half_width = {typed(value)} cannot be a share of an expected "
            f"mean of {mean:g}; use half_width instead."
        )
        raise CampaignError(message)
    if kind == "budget" and campaign.cost is None:
        message = (
            f"[[objective]] budget = {typed(value)} needs prices; add a [cost] table with "
            "currency, mobilisation, per_location and per_analysis."
        )
        raise CampaignError(message)


def expected_mean(
    entries: Sequence["StratumSpread"], frame: "Frame", *, site: "StratumSpread | None" = None
) -> float | None:
    """Weigh the strata's means; fall back on the site's where one is missing.

    Parameters
    ----------
    entries : sequence of StratumSpread
    frame : Frame
    site : StratumSpread or None

    Returns
    -------
    float or None
        In the analyte's unit.
    """
    means = {entry.stratum: entry.mean for entry in entries}
    known = [(s.weight, means.get(s.name)) for s in frame.strata]
    if all(mean is not None for _, mean in known):
        return math.fsum(weight * (mean or 0.0) for weight, mean in known)
    return site.mean if site is not None else None


def parts_of(
    campaign: "Campaign",
    frame: "Frame",
    spread: Sequence["StratumSpread"],
    *,
    of_mean: bool = True,
) -> tuple[Part, ...]:
    """Give every stratum of the frame its weight, sigma and expected loss.

    Parameters
    ----------
    campaign : Campaign
    frame : Frame
    spread : sequence of StratumSpread
        Of one analyte.
    of_mean : bool
        A mean is asked for, so that visits which resemble each other count for less.

    Raises
    ------
    CampaignError
        A loss is typed for a stratum that the frame does not have.
    DesignError
        A stratum has no sigma.
    """
    entries = {entry.stratum: entry for entry in spread}
    missing = [s.name for s in frame.strata if s.name not in entries]
    if missing:
        message = (
            f"stratum {', '.join(missing)} has no sigma; add a [[sigma]] table for it with a value "
            "and its source, or a pilot with at least 2 results there."
        )
        raise DesignError(message)
    losses = _losses(campaign, list(entries))
    parts = tuple(
        Part(
            name=stratum.name,
            weight=stratum.weight,
            sigma=entries[stratum.name].sigma,
            results=entries[stratum.name].results,
            population=stratum.count,
            loss=losses.get(stratum.name, campaign.loss.share),
            pilot=_pilot(entries[stratum.name]),
            source=entries[stratum.name].source,
            assumed=entries[stratum.name].assumed,
            skewness=entries[stratum.name].skewness,
            excess_kurtosis=entries[stratum.name].excess_kurtosis,
            mean=entries[stratum.name].mean,
            mean_from=_mean_from(entries[stratum.name]),
            zeros=_zeros(entries[stratum.name]),
        )
        for stratum in frame.strata
    )
    return as_visits(parts, spread) if of_mean else parts


def with_losses(parts: tuple[Part, ...], loss: "Loss") -> tuple[Part, ...]:
    """Give parts the loss that is expected in each.

    Parameters
    ----------
    parts : tuple of Part
    loss : Loss

    Raises
    ------
    CampaignError
        A loss is typed for a stratum that is none of the parts.
    """
    names = [part.name for part in parts]
    for name, share in loss.by_stratum.items():
        if name not in names:
            message = (
                f"[loss] by_stratum has {typed(share)} for '{name}', which is no stratum "
                f"({', '.join(names)}); correct it or leave it out."
            )
            raise CampaignError(message)
    return tuple(replace(part, loss=loss.by_stratum.get(part.name, loss.share)) for part in parts)


def _losses(campaign: "Campaign", names: list[str]) -> Mapping[str, float]:
    """Take the losses typed by stratum; a name that the frame does not have is refused."""
    losses = campaign.loss.by_stratum
    faults = unknown(losses, names, "[loss] by_stratum")
    if faults:
        raise CampaignError(*faults)
    return losses


def _mean_from(entry: "StratumSpread") -> str:
    """Name the source of a mean, and how non-detects entered it."""
    missing = entry.detected.count(False)
    return f"{entry.source}, non-detects at half their limit" if missing else entry.source


def _zeros(entry: "StratumSpread") -> float:
    """Give the share of zeros and non-detects among a pilot's results."""
    if not entry.values:
        return 0.0
    detected = entry.detected or (True,) * len(entry.values)
    pairs = zip(entry.values, detected, strict=True)
    return sum(value == 0 or not seen for value, seen in pairs) / len(entry.values)


def _pilot(entry: "StratumSpread") -> str:
    """Name the pilot behind a sigma: equal values from one source are one pilot, used twice."""
    return f"{entry.source} {entry.sigma!r} {entry.results} {entry.values!r}"
