"""The local pivotal method: neighbours settle between them who is drawn.

Whole numbers decide everything: coordinates in centimetres, squared distances, shares of a unit.
So a draw is the same on every machine and with every version of the libraries.
"""

from collections.abc import Sequence

from fieldplan.base.draws import Stream
from fieldplan.base.errors import DesignError
from fieldplan.design.buckets import Buckets

NEIGHBOURS = 6
"""Nearest units among which a unit looks for its partner when a list is halved."""
MOST_ROUNDS = 20
"""Rounds of exchanging partners; after a handful there is nothing left to gain."""

Place = tuple[int, int]


def balanced_sample(
    places: Sequence[Place], shares: Sequence[int], whole: int, stream: Stream
) -> list[int]:
    """Draw units so that neighbours seldom come together, each with its own probability.

    Parameters
    ----------
    places : sequence of (int, int)
        Easting and northing of each unit in centimetres.
    shares : sequence of int
        Probability of each unit times ``whole``, from 0 to ``whole``; their sum is a multiple of
        ``whole``.
    whole : int
        What a probability of 1 amounts to.
    stream : Stream

    Returns
    -------
    list of int
        Numbers of the units drawn, rising; as many as the probabilities sum to.

    Raises
    ------
    DesignError
        Places and shares differ in number, a share is out of bounds, or they sum to no whole
        number of units.

    Notes
    -----
    The second local pivotal method of Grafström, Lundström and Schelin (2012), Spatially balanced
    sampling through the pivotal method, Biometrics 68, 514 (from memory): a random unit that is
    not settled and its nearest neighbour put their shares together. If these make no more than a
    whole, one of the two takes all and the other gets nothing; otherwise one gets a whole and the
    other the rest; chances are such that the expected share of neither changes (Deville and Tillé
    1998, Biometrika 85, 89). Probabilities are therefore exact.

    Examples
    --------
    >>> row = [(0, 0), (1, 0), (50, 0), (51, 0)]
    >>> balanced_sample(row, [1, 1, 1, 1], 2, Stream(1, "main", "site", "pivots"))
    [1, 2]
    """
    _check_shares(places, shares, whole)
    eastings, northings = [east for east, _ in places], [north for _, north in places]
    share = list(shares)
    drawn = [i for i, part in enumerate(share) if part == whole]
    open_units = [i for i, part in enumerate(share) if 0 < part < whole]
    turn = {unit: at for at, unit in enumerate(open_units)}
    while open_units:
        buckets, half = Buckets(eastings, northings, open_units), len(open_units) // 2
        while len(open_units) > half:
            one = open_units[stream.below(len(open_units))]
            other = buckets.nearest(one)
            share[one], share[other] = _settled(share[one], share[other], whole, stream)
            for unit in (one, other):
                if 0 < share[unit] < whole:
                    continue
                buckets.take(unit)
                last = open_units.pop()
                if last != unit:
                    open_units[turn[unit]], turn[last] = last, turn[unit]
                if share[unit]:
                    drawn.append(unit)
    return sorted(drawn)


def _settled(one: int, other: int, whole: int, stream: Stream) -> tuple[int, int]:
    """Let two units put their shares together and share them out anew by chance."""
    both = one + other
    if both <= whole:
        return (both, 0) if stream.below(both) < one else (0, both)
    rest = both - whole
    return (whole, rest) if stream.below(whole - rest) < whole - other else (rest, whole)


def _check_shares(places: Sequence[Place], shares: Sequence[int], whole: int) -> None:
    if len(places) != len(shares):
        message = f"{len(places)} places came with {len(shares)} shares; give one for each."
        raise DesignError(message)
    outside = [part for part in shares if not 0 <= part <= whole]
    if outside or whole < 1 or sum(shares) % whole:
        what = f"{outside[0]} of {whole}" if outside else f"{sum(shares)} in all, of {whole} each"
        message = (
            f"shares must lie between 0 and a whole and add up to a number of wholes; got {what}."
        )
        raise DesignError(message)


def balanced_order(places: Sequence[Place], stream: Stream) -> list[int]:
    """Put units in an order of which every first part is well spread.

    Parameters
    ----------
    places : sequence of (int, int)
        Easting and northing of each unit in centimetres.
    stream : Stream

    Returns
    -------
    list of int
        Numbers of the units.

    Notes
    -----
    The units are halved again and again: neighbours pair up, and chance decides which of a pair
    comes in the first half (a pivotal step with two equal shares). Of an odd number one unit,
    chosen at random, has no partner and belongs to the first half. The second half stands in the
    order of its partners. Every unit is equally likely in every position.

    Examples
    --------
    >>> row = [(0, 0), (1, 0), (50, 0), (51, 0)]
    >>> balanced_order(row, Stream(1, "main", "site", "order"))
    [1, 3, 0, 2]
    """
    members = list(range(len(places)))
    second: list[dict[int, int]] = []
    while len(members) > 1:
        lone = [members[stream.below(len(members))]] if len(members) % 2 else []
        pairs = close_pairs(places, [unit for unit in members if unit not in lone])
        chosen = dict(pair if stream.below(2) else pair[::-1] for pair in pairs)
        second.append(chosen)
        members = sorted([*lone, *chosen])
    order = members
    for partner in reversed(second):
        order = order + [partner[unit] for unit in order if unit in partner]
    return order


def close_pairs(places: Sequence[Place], members: Sequence[int]) -> list[tuple[int, int]]:
    """Pair an even number of units so that partners stand close together.

    Parameters
    ----------
    places : sequence of (int, int)
    members : sequence of int
        Their numbers, rising.

    Returns
    -------
    list of (int, int)
        Lower number first, by rising lower number.

    Notes
    -----
    The closest pair is taken first, among each unit and its six nearest; those left over pair up
    in the same way. Then two pairs exchange partners wherever this lowers the sum of squared
    distances, until it does so nowhere.

    Examples
    --------
    >>> close_pairs([(0, 0), (4, 0), (5, 0), (9, 0)], [0, 1, 2, 3])
    [(0, 1), (2, 3)]
    """
    eastings, northings = [east for east, _ in places], [north for _, north in places]
    partner: dict[int, int] = {}
    near: dict[int, list[int]] = {}
    left = list(members)
    while left:
        buckets = Buckets(eastings, northings, left)
        found = {unit: buckets.nearest_few(unit, NEIGHBOURS) for unit in left}
        near = near or {unit: [other for _, other in few] for unit, few in found.items()}
        for _, one, other in sorted(
            (away, min(unit, other), max(unit, other))
            for unit, few in found.items()
            for away, other in few
        ):
            if one not in partner and other not in partner:
                partner[one], partner[other] = other, one
        left = [unit for unit in left if unit not in partner]
    _exchange(places, near, partner)
    return [(unit, partner[unit]) for unit in members if unit < partner[unit]]


def _exchange(places: Sequence[Place], near: dict[int, list[int]], partner: dict[int, int]) -> None:
    """Exchange partners between two pairs wherever this brings them closer."""

    def apart(one: int, other: int) -> int:
        (east, north), (e, n) = places[one], places[other]
        return (east - e) * (east - e) + (north - n) * (north - n)

    for _ in range(MOST_ROUNDS):
        exchanged = False
        for unit, few in near.items():
            for closer in few:
                mate, its_mate = partner[unit], partner[closer]
                now = apart(unit, mate) + apart(closer, its_mate)
                if closer != mate and apart(unit, closer) + apart(mate, its_mate) < now:
                    partner[unit], partner[closer] = closer, unit
                    partner[mate], partner[its_mate] = its_mate, mate
                    exchanged = True
        if not exchanged:
            return
