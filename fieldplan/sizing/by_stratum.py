"""What a campaign file says by stratum: bounds, prices; names that no stratum has are refused."""

from collections.abc import Iterable, Mapping
from dataclasses import replace
from difflib import get_close_matches
from typing import TYPE_CHECKING

from fieldplan.base.errors import CampaignError
from fieldplan.sizing.question import Part
from fieldplan.sizing.words import FEW, named, typed

if TYPE_CHECKING:
    from fieldplan.campaign.model import Campaign, Cost, DesignTable


def bounded(
    parts: tuple[Part, ...], campaign: "Campaign", design: "DesignTable"
) -> tuple[Part, ...]:
    """Give parts their bounds, and what a location costs there beyond the common prices.

    Parameters
    ----------
    parts : tuple of Part
        Empty where too little is known of an analyte.
    campaign : Campaign
    design : DesignTable

    Raises
    ------
    CampaignError
        A bound or a price is typed for a stratum that the frame does not have; all at once.
    """
    known = [part.name for part in parts]
    cost = campaign.cost
    tables: dict[str, Mapping[str, float]] = {
        "[design.least]": design.least,
        "[design.most]": design.most,
    }
    if cost is not None:
        tables["[cost.per_location_by_stratum]"] = cost.per_location_by_stratum
        tables["[cost.per_analysis_by_stratum]"] = cost.per_analysis_by_stratum
    if parts:
        faults = [line for where, table in tables.items() for line in unknown(table, known, where)]
        if faults:
            raise CampaignError(*faults)
    return tuple(
        replace(
            part,
            least=design.least.get(part.name, 0),
            most=design.most.get(part.name),
            extra_cost=part.extra_cost + (0.0 if cost is None else _beyond(cost, part.name)),
        )
        for part in parts
    )


def _beyond(cost: "Cost", name: str) -> float:
    """Give what a location with its analysis costs in a stratum beyond the common prices."""
    visit = cost.per_location_by_stratum.get(name, cost.per_location) - cost.per_location
    return visit + cost.per_analysis_by_stratum.get(name, cost.per_analysis) - cost.per_analysis


def unknown(table: Mapping[str, float], known: Iterable[str], where: str) -> list[str]:
    """Say which names of a table are no strata of the frame, one line each.

    Parameters
    ----------
    table : mapping of str to float
    known : iterable of str
    where : str
        How the table is called in the file.

    Examples
    --------
    >>> unknown({"yrad": 7}, ["meadow", "yard"], "[design.most]")[0].split("; ")[-1]
    "did you mean 'yard'?"
    """
    names, lines = list(known), []
    shown = ", ".join(names) if len(names) <= FEW else named(names)
    for name, value in table.items():
        if name not in names:
            near = get_close_matches(name, names, n=1)
            hint = f"did you mean '{near[0]}'?" if near else "correct it or leave it out."
            lines.append(
                f"{where} has {typed(value)} for '{name}', which is no stratum of the "
                f"frame ({shown}); {hint}"
            )
    return lines
