"""Units of a list in drawn order: every unit carries a random number of its own."""

from collections.abc import Iterable

from fieldplan.base.draws import Stream
from fieldplan.frame.model import ListUnit


def units_in_drawn_order(
    units: Iterable[ListUnit], *, seed: int, design: str, stratum: str
) -> tuple[ListUnit, ...]:
    """Put the units of one stratum in random order, every order equally likely.

    Parameters
    ----------
    units : iterable of ListUnit
        Their order in the file does not matter.
    seed : int
    design, stratum : str
        Parts of the key; see :func:`fieldplan.base.draws.key_text`.

    Returns
    -------
    tuple of ListUnit
        By rising random number; equal numbers by unit id.

    Notes
    -----
    A unit's number is the first raw output of the stream with purpose ``unit`` and its id. Since
    it depends on no other unit, one that joins or leaves the list moves nobody else's turn:
    permanent random numbers, as in Ohlsson (1995), Coordination of samples using permanent random
    numbers, in Cox et al. (eds), Business Survey Methods, ch. 9.

    Examples
    --------
    >>> wells = [ListUnit(f"MW-{i}", "site", 0.0, 0.0, 0.0, 0.0) for i in range(1, 6)]
    >>> [u.unit_id for u in units_in_drawn_order(wells, seed=3, design="main", stratum="site")]
    ['MW-3', 'MW-1', 'MW-5', 'MW-4', 'MW-2']
    """

    def number(unit: ListUnit) -> tuple[int, str]:
        stream = Stream(seed, design, stratum, f"unit {unit.unit_id}")
        return int(stream.raw(1)[0]), unit.unit_id

    return tuple(sorted(units, key=number))
