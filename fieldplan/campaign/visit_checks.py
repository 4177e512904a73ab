"""Rules for visits that resemble each other: a correlation, and the days it belongs to."""

from collections.abc import Iterator
from typing import Any

from fieldplan.campaign.problems import Problem, shown
from fieldplan.campaign.table import tables

RHO, ITS_DAYS, PLANNED = "correlation_between_visits", "correlation_days", "visit_spacing_days"


def visit_problems(data: dict[str, Any]) -> Iterator[Problem]:
    """Find spacings without a correlation, and a correlation that cannot be carried over.

    Parameters
    ----------
    data : dict
        Screened tables with references filled in.

    Yields
    ------
    Problem
    """
    for i, sigma in enumerate(tables(data, "sigma")):
        rho, its_days, planned = (sigma.get(key) for key in (RHO, ITS_DAYS, PLANNED))
        if rho is None:
            for key in (ITS_DAYS, PLANNED):
                if isinstance(sigma.get(key), int | float):
                    text = f"days say nothing without {RHO} (got {shown(sigma[key])}). Add it."
                    yield Problem(("sigma", i, key), text)
            continue
        if isinstance(its_days, int | float) and planned is None:
            text = (
                f"{RHO} belongs to visits {shown(its_days)} days apart, and nothing says how far "
                f"apart the planned ones are. Add {PLANNED}."
            )
            yield Problem(("sigma", i, ITS_DAYS), text)
        below = isinstance(rho, int | float) and rho < 0
        if below and its_days is not None and planned is not None and its_days != planned:
            text = (
                f"a correlation below 0 (got {shown(rho)}) says nothing about visits "
                f"{shown(planned)} days apart. Type the one of visits so far apart, without "
                f"{ITS_DAYS}."
            )
            yield Problem(("sigma", i, RHO), text)
