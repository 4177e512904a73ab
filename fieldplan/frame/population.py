"""For what the mean speaks, in sentences ready to print."""

from fieldplan.base.units import (
    METRES_PER_MILE,
    acres,
    area_in_words,
    hectares,
    length_in_words,
    significant,
)
from fieldplan.campaign.model import FrameTable
from fieldplan.frame.model import Branch, ExcludedArea, Population

_CENSUS = (
    "Every unit is visited (a census): the choice of places adds no error to the mean; "
    "differences in time, in sampling and in the laboratory remain."
)


def area_population(
    table: FrameTable, *, gross: float, excluded: tuple[ExcludedArea, ...], net: float
) -> Population:
    """State the population of an area: gross, each exclusion, inset, net.

    Parameters
    ----------
    table : FrameTable
        For the inset, what one n is, and whether the boundary is assumed.
    gross, net : float
        Square metres before and after exclusions and inset.
    excluded : tuple of ExcludedArea
        In the order in which they were taken out; none counted twice.

    Returns
    -------
    Population
    """
    inset_loss = max(gross - (net + sum(area.area_m2 for area in excluded)), 0.0)
    share = net / gross
    sentences = [f"The mean speaks for {_percent(share)} of the site: {_of(net, gross)}."]
    for area in excluded:
        edge = f", with {area.buffer_m:g} m around it" if area.buffer_m else ""
        sentences.append(
            f"Left out: {area.reason}{edge}: {area_in_words(area.area_m2)}, "
            f"{_percent(area.area_m2 / gross)} of the site."
        )
    if table.inset_m:
        sentences.append(
            f"Left out: a strip of {table.inset_m:g} m along the boundary and its holes: "
            f"{area_in_words(inset_loss)}, {_percent(inset_loss / gross)} of the site."
        )
    if excluded or table.inset_m:
        sentences.append("Nothing is said about what was left out.")
    if table.boundary_assumed:
        sentences.append("The boundary is ASSUMED; so is every area here.")
    sentences.append(one_is(table))
    return Population("m²", gross, inset_loss, net, share, tuple(sentences))


def line_population(
    table: FrameTable,
    branches: tuple[Branch, ...],
    *,
    excluded: tuple[ExcludedArea, ...],
    inset_loss: float,
    net: float,
) -> Population:
    """State the population of lines: gross, branches, each exclusion, ends, net.

    Parameters
    ----------
    table : FrameTable
        For the inset and what one n is.
    branches : tuple of Branch
        All of them, whole.
    excluded : tuple of ExcludedArea
        In the order in which they were taken out; none counted twice.
    inset_loss, net : float
        Metres that the inset alone takes, and that are left.

    Returns
    -------
    Population
    """
    gross = net + inset_loss + sum(stretch.taken for stretch in excluded)
    share = net / gross
    sentences = [f"The mean speaks for {_percent(share)} of the lines: {_long(net, gross)}."]
    if len(branches) > 1:
        sentences.append(
            f"They have {len(branches)} branches{_branch_lengths(branches)}. Every metre counts "
            "alike, so that a branch weighs by its length."
        )
    for stretch in excluded:
        edge = f", with {stretch.buffer_m:g} m around it" if stretch.buffer_m else ""
        sentences.append(
            f"Left out: {stretch.reason}{edge}: {length_in_words(stretch.taken)}, "
            f"{_percent(stretch.taken / gross)} of the lines."
        )
    if table.inset_m:
        sentences.append(
            f"Left out: {table.inset_m:g} m at each end where no other branch joins: "
            f"{length_in_words(inset_loss)}, {_percent(inset_loss / gross)} of the lines."
        )
    if excluded or table.inset_m:
        sentences.append("Nothing is said about what was left out.")
    sentences.append(one_is(table))
    return Population("m", gross, inset_loss, net, share, tuple(sentences))


_FEW_BRANCHES = 6


def _branch_lengths(branches: tuple[Branch, ...]) -> str:
    """Name the branches with their lengths where they are few."""
    if len(branches) > _FEW_BRANCHES:
        return ""
    told = [f"{branch.name}, {_kilometres(branch.length_m)}" for branch in branches]
    return f" ({'; '.join(told)})"


def _kilometres(metres: float) -> str:
    return f"{metres:.0f} m" if metres < 1000 else f"{significant(metres / 1000)} km"


def _long(net: float, gross: float) -> str:
    """Write how much of how long, with miles beside kilometres."""
    if net == gross:
        return f"all of {length_in_words(gross, 3)}"
    if gross < 1000:
        return f"{significant(net)} of {significant(gross)} m"
    parts = [significant(m / unit) for unit in (1000.0, METRES_PER_MILE) for m in (net, gross)]
    return f"{parts[0]} of {parts[1]} km ({parts[2]} of {parts[3]} miles)"


def list_population(table: FrameTable, count: int, *, census: bool) -> Population:
    """State the population of a list: all its units.

    Parameters
    ----------
    table : FrameTable
        For what one n is.
    count : int
        N, the number of units.
    census : bool
        All units are visited.

    Returns
    -------
    Population
    """
    whole = f"all {count} units" if count > 1 else "the one unit"
    sentences = [f"The mean speaks for 100 % of the list: {whole}, and for nothing between them."]
    if census:
        sentences.append(_CENSUS)
    sentences.append(one_is(table))
    return Population("units", float(count), 0.0, float(count), 1.0, tuple(sentences))


def one_is(table: FrameTable) -> str:
    """Say what one n is.

    Examples
    --------
    >>> one_is(FrameTable(kind="area"))
    'One n is: one location.'
    """
    told = table.unit_is.strip().rstrip(".")
    what = "one place on the line" if table.kind == "line" else "one location"
    return f"One n is: {what} ({told})." if told else f"One n is: {what}."


def _percent(share: float) -> str:
    """Write a share so that 99.97 % never reads 100 % and 0.02 % never reads 0 %."""
    percent = 100 * share
    if percent in (0.0, 100.0):
        return f"{percent:.0f} %"
    for digits in (1, 2, 3, 4):
        text = f"{percent:.{digits}f}"
        if 0 < float(text) < 100:
            return f"{text} %"
    return "less than 0.0001 %" if percent < 50 else "over 99.9999 %"


def _of(net: float, gross: float) -> str:
    if net == gross:
        return f"all of {area_in_words(gross)}"
    if gross < 1000:
        return f"{significant(net, 4)} of {significant(gross, 4)} m²"
    parts = [
        significant(measure(area), 4) for measure in (hectares, acres) for area in (net, gross)
    ]
    return f"{parts[0]} of {parts[1]} ha ({parts[2]} of {parts[3]} acres)"
