"""How a reviewer draws a balanced list again: in words, and line by line."""

from collections.abc import Iterator

PSEUDOCODE = """\
In the next three, units are numbered from 0 and stand on whole centimetres. Nearer is
the smaller squared distance; of equals, the unit with the lower number.

PIVOTS(units, count, purpose)                           [whole numbers throughout]
  W = number of units. Each has the share count; with count = W all are drawn.
  S = STREAM(seed, design, stratum, purpose); open = the row of all units, by number
  while units are open:
    i = item BELOW(number of open) of that row, counted from 0; j = the open unit
    nearest to i; a, b = their shares
    a + b <= W: i gets a + b and j gets 0 if BELOW(a + b) < a, else j and i
    a + b > W:  r = a + b - W; i gets W and j gets r if BELOW(W - r) < W - b, else j
    and i
    i, and then j, leaves the row if its share is 0 or W; the last of the row takes its
    place there.
  Drawn are the units with the share W, by number.

PAIRS(units)
  left = units; until none is left:
    List each unit of left with each of its 6 nearest of left, closest pair first, of
    equals by the lower number, then by the higher. Go through them: two that are both
    without a partner become partners. left = those still without.
  At most 20 times, until nothing changes: for each unit u by number, for each c of its
  6 nearest of all units, nearest first: m and d are the partners of u and c. If c is
  not m and |u c|^2 + |m d|^2 < |u m|^2 + |c d|^2: u and c, m and d become partners.

HALVES(units, purpose)
  S = STREAM(seed, design, stratum, purpose); M = all units
  while M holds more than one:
    Of an odd number, item BELOW(number of M) of M by number, counted from 0, is alone.
    For each of PAIRS(the others), by its lower number: if BELOW(2) is 1 the lower
    number goes on and the other is its second, else the other way round.
    M = those that go on, and the one alone.
  List = M. From the last halving back to the first: append to the list the seconds of
  that halving, in the order in which those that went on stand in it.

balanced-list, area:
  T = 8 planned, doubled until T >= 64
  step = floor(sqrt(10000 measure / (8 T))), 1 or more               [centimetres]
  S = STREAM(seed, design, stratum, "raster")
  for i = 0 ... while i step < 100 (high_e - low_e), and for each i
  for j = 0 ... while j step < 100 (high_n - low_n):
    e = 100 low_e + i step + floor(UNIFORM of S * step)
    n = 100 low_n + j step + floor(UNIFORM of S * step)
    (e, n) is the next unit if INSIDE
  List = HALVES(PIVOTS(units, T, "pivots"), "halves"); those drawn are numbered anew
  from 0. With a minimum spacing, pass over what stands closer than that to a place
  kept before it. Random places are the first on it, as many as planned; alternates
  the next.

balanced-list, list:
  Units by id. T = planned, doubled as long as 2 T <= number of units.
  Drawn = PIVOTS(units, T, "pivots"). List = HALVES(drawn, "halves"), then
  HALVES(the others, "rest"), both numbered anew from 0.
"""


def balanced_steps(*, listed: bool, spacing_m: float) -> Iterator[str]:
    """Say how a balanced list was drawn, one step a sentence or two.

    Parameters
    ----------
    listed : bool
        The population is a list of units.
    spacing_m : float
        The minimum spacing; 0 for none.
    """
    if listed:
        yield (
            "In each stratum the planned number is doubled as often as the list has units for it. "
            "So many units are drawn by the local pivotal method (Grafström, Lundström and Schelin "
            "2012), with the purpose “pivots”."
        )
    else:
        yield (
            "A raster is laid over the box of the stratum. In each of its squares two random "
            "numbers give a spot, in whole centimetres; those strictly inside the polygon, whose "
            "corners are in whole millimetres, stand for the ground. From them the local pivotal "
            "method (Grafström, Lundström and Schelin 2012), with the purpose “pivots”, draws "
            "eight times as many places as are planned, and at least 64."
        )
    yield (
        "At first every candidate has the same probability. One is picked at random; it and its "
        "nearest neighbour put their probabilities together, and chance settles which of the two "
        "keeps what, so that no expected value changes. Whoever reaches 0 is out, whoever reaches "
        "1 is drawn. Neighbours are so seldom drawn together."
    )
    yield (
        "What was drawn is halved again and again, down to the planned number and on to one: "
        "neighbours pair up, and chance, with the purpose “halves”, says which of a pair comes in "
        "the first half of the list. So every first part of the list is spread over the ground."
        + (" The units that were not drawn follow in an order of the same kind." if listed else "")
    )
    if spacing_m:
        yield (f"A place closer than {spacing_m:g} m to one before it on the list is passed over.")
    yield (
        "The first places on the list, as many as were planned, are the random locations; the next "
        "ones are the alternates, taken in the order of the list. Another planned number draws "
        "another list; more alternates only lengthen it."
    )
