"""Visits to one place: a row a visit, told apart by the day of collection."""

from collections.abc import Sequence
from dataclasses import replace

from fieldplan.campaign.model import Campaign
from fieldplan.lab.model import LabRow, Spread, StratumSpread, VisitCorrelation


def told_apart_by_day(rows: Sequence[LabRow]) -> list[LabRow]:
    """Let every visit of a file that knows one place count as a location of its own.

    Parameters
    ----------
    rows : sequence of LabRow
        Of one analyte.

    Returns
    -------
    list of LabRow
        With the day behind the id of the place; as they were where the file has several places,
        one day only, or rows without a day: two results of one place are then a question.

    Examples
    --------
    >>> from datetime import date
    >>> weir = LabRow(2, "weir", "", "nitrate", "2.1", 2.1, True, None, "mg/L",
    ...               collected_on=date(2026, 3, 2))
    >>> rows = told_apart_by_day([weir, replace(weir, row=3, collected_on=date(2026, 4, 1))])
    >>> [row.location_id for row in rows]
    ['weir 2026-03-02', 'weir 2026-04-01']
    """
    places = {row.location_id.casefold() for row in rows}
    days = {row.collected_on for row in rows}
    if len(places) != 1 or "" in places or len(days) < 2 or None in days:
        return list(rows)
    return [replace(row, location_id=f"{row.location_id} {row.collected_on}") for row in rows]


def declared_visits(
    entry: StratumSpread, campaign: Campaign, analyte: str
) -> VisitCorrelation | None:
    """Give the correlation of visits that the campaign declares for a stratum, or for the site.

    Parameters
    ----------
    entry : StratumSpread
    campaign : Campaign
    analyte : str

    Returns
    -------
    VisitCorrelation or None
    """
    deciding = campaign.deciding_analyte.id
    found = None
    for sigma in sorted(campaign.sigma, key=lambda each: each.stratum is not None):
        applies = (sigma.stratum or entry.stratum).casefold() == entry.stratum.casefold()
        rho = sigma.correlation_between_visits
        if (sigma.analyte or deciding) == analyte and applies and rho is not None:
            found = VisitCorrelation(rho, sigma.correlation_days, sigma.visit_spacing_days)
    return found


def with_visits(campaign: Campaign, spread: Spread) -> Spread:
    """Put the correlation of visits that a campaign declares into a spread.

    Parameters
    ----------
    campaign : Campaign
    spread : Spread
    """
    strata = [
        replace(entry, visits=declared_visits(entry, campaign, entry.analyte))
        for entry in spread.strata
    ]
    return replace(spread, strata=tuple(strata))
