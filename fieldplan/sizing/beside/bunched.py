"""A pilot whose places are bunched together: its mean and s with each result weighed by area."""

from dataclasses import dataclass
from typing import TYPE_CHECKING

from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.model import Amount, Finding, Size
from fieldplan.sizing.visits import ABOUT_MEANS
from fieldplan.sizing.words import counted, figure, with_unit
from fieldplan.stats.precision import whole

if TYPE_CHECKING:
    from fieldplan.sizing.pilot_ground import PilotGround

THIESSEN = "Thiessen 1911, Monthly Weather Review 39:1082 (from memory)"
FEWEST = 8
"""Fewer places on a map are not called bunched (house rule)."""


@dataclass(frozen=True)
class Bunched:
    """One stratum whose pilot is bunched.

    Parameters
    ----------
    stratum : str
    places : int
    worth : float
        Even places that tell as much, by area.
    mean, sigma : float
        Plain.
    weighed_mean, weighed_sigma : float
        With each result weighed by the area nearest to it.
    """

    stratum: str
    places: int
    worth: float
    mean: float
    sigma: float
    weighed_mean: float
    weighed_sigma: float


def finding(asked: Asked, size: Size) -> Finding | None:
    """Say where the pilot is bunched, and what its area says instead.

    Parameters
    ----------
    asked : Asked
    size : Size

    Returns
    -------
    Finding or None
        None where no stratum has a bunched pilot of 8 places or more with positions.
    """
    frame = asked.frame
    if frame is None or frame.kind != "area" or size.question not in ABOUT_MEANS:
        return None
    from fieldplan.sizing.pilot_ground import pilot_ground

    ground = pilot_ground(asked.entries, frame) if asked.sigma_known else None
    found = [] if ground is None else _bunched(asked, ground)
    if not found:
        return None
    return Finding(
        topic="bunched",
        title="A pilot whose places are bunched",
        answer=" ".join(_words(asked, each) for each in found),
        amounts=tuple(amount for each in found for amount in _amounts(asked, each)),
        assumptions=(
            "A pilot counts as bunched where the areas nearest to its places are less even than in "
            "99 of 100 pilots drawn at random over the same ground (house rule).",
            "Weighing by area sets the mean right where places were taken round a source; it does "
            "not make a few places more, nor does it know why they were taken there.",
        ),
        warnings=(_warning(asked, size, found),),
        sources=(THIESSEN, "Isaaks & Srivastava 1989, Applied Geostatistics, ch. 10 (from memory)"),
    )


def _bunched(asked: Asked, ground: "PilotGround") -> list[Bunched]:
    import numpy as np

    from fieldplan.sizing.pilot_ground import cells_of
    from fieldplan.stats.pilot_places import (
        area_weights,
        is_bunched,
        weighed_spread,
        worth_of_weights,
    )

    found = []
    frame = asked.frame
    for stratum in frame.strata if frame is not None else ():
        own = ground.within(stratum.name)
        if stratum.geometry is None or len(own.values) < FEWEST:
            continue
        cells = cells_of(stratum.geometry).centres
        if len(cells) < len(own.values) or not is_bunched(own.places, cells):
            continue
        weights = area_weights(own.places, cells)
        if np.count_nonzero(weights) > 1:
            mean, sigma = weighed_spread(own.values, weights)
            found.append(
                Bunched(
                    stratum=stratum.name,
                    places=len(own.values),
                    worth=worth_of_weights(weights),
                    mean=float(own.values.mean()),
                    sigma=float(own.values.std(ddof=1)),
                    weighed_mean=mean,
                    weighed_sigma=sigma,
                )
            )
    return found


def _words(asked: Asked, each: Bunched) -> str:
    unit = asked.question.unit
    where = "" if len(asked.question.parts) == 1 else f" in {each.stratum}"
    mean, plain, sigma, s = (
        with_unit(figure(value), unit)
        for value in (each.weighed_mean, each.mean, each.weighed_sigma, each.sigma)
    )
    return (
        f"The pilot's {each.places} places{where} are bunched; by area they are worth "
        f"{each.worth:.1f} even ones. Weighed by the area nearest to each, their mean is {mean} "
        f"instead of {plain}, and s is {sigma} instead of {s}."
    )


def _warning(asked: Asked, size: Size, found: list[Bunched]) -> str:
    """Say which s decides n, and what the other would ask for where that is simple."""
    would = ""
    if len(asked.question.parts) == 1 and size.unrounded is not None and found[0].sigma > 0:
        n = whole(size.unrounded * (found[0].weighed_sigma / found[0].sigma) ** 2)
        would = f" (the weighed one would take {counted(n, 'result')} by the plain formula)"
    return (
        f"n takes the unweighed s{would}. Take new pilot places between the bunches, or type the s "
        "that is fair into [[sigma]] with its source."
    )


def _amounts(asked: Asked, each: Bunched) -> tuple[Amount, ...]:
    unit, one = asked.question.unit, len(asked.question.parts) == 1
    ending, where = ("", "") if one else (f"_{each.stratum}", f" in {each.stratum}")
    return (
        Amount(f"worth{ending}", f"Even places that the pilot{where} is worth", each.worth),
        Amount(f"weighed_mean{ending}", f"Mean{where}, weighed by area", each.weighed_mean, unit),
        Amount(f"weighed_sigma{ending}", f"s{where}, weighed by area", each.weighed_sigma, unit),
    )
