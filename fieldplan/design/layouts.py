"""The layouts by the names that a campaign file uses."""

from difflib import get_close_matches

from fieldplan.base.errors import DesignError
from fieldplan.campaign.model import DesignTable
from fieldplan.design.balanced_list import BalancedList
from fieldplan.design.census import Census
from fieldplan.design.compact_strata import CompactStrata
from fieldplan.design.even_spacing import EvenSpacing
from fieldplan.design.grid import SQUARE_GRID, TRIANGULAR_GRID
from fieldplan.design.model import Layout
from fieldplan.design.simple_random import SimpleRandom
from fieldplan.design.stratified import Stratified

LAYOUTS: tuple[Layout, ...] = (
    SimpleRandom(),
    Stratified(),
    SQUARE_GRID,
    TRIANGULAR_GRID,
    CompactStrata(),
    BalancedList(),
    EvenSpacing(),
    Census(),
)


def layout_named(name: str) -> Layout:
    """Return the layout called ``name`` in a campaign file.

    Raises
    ------
    DesignError
        There is none of that name.

    Examples
    --------
    >>> layout_named("stratified").name
    'stratified'
    """
    for layout in LAYOUTS:
        if layout.name == name:
            return layout
    names = [layout.name for layout in LAYOUTS]
    near = get_close_matches(name, names, n=1)
    hint = f' Did you mean "{near[0]}"?' if near else ""
    message = f'layout "{name}" is unknown; the layouts are {", ".join(names)}.{hint}'
    raise DesignError(message)


def layout_of(design: DesignTable) -> Layout:
    """Return the layout of a design, with the keys of the campaign file that belong to it.

    Examples
    --------
    >>> layout_of(DesignTable(layout="compact-strata", per_cell=2)).per_cell
    2
    """
    by_curves = design.variance == "covariance"
    if design.layout == CompactStrata.name:
        return CompactStrata(design.per_cell, "covariance" if by_curves else "pairs")
    if design.layout == BalancedList.name:
        return BalancedList("covariance" if by_curves else "neighbours")
    if design.layout == EvenSpacing.name:
        return EvenSpacing(starts=design.starts)
    return layout_named(design.layout)
