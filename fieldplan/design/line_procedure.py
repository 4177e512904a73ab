"""How a reviewer draws the places of lines again: in words, and line by line."""

from collections.abc import Iterator

PSEUDOCODE = """\
PLACE(stratum, t)
  The stratum's reaches stand in the record by branch and distance, their ends and
  corners in whole millimetres. Laid end to end they are T millimetres long.
  Let reach r be the one that holds t, o = t - (sum of the reaches before r).
  Its edge i, from corner i to corner i + 1, has the length sqrt(dx*dx + dy*dy);
  b_i is the sum of the edges before it, added up from the first.
  i = the last edge with b_i <= o; f = min((o - b_i) / length_i, 1)
  e = ROUND((x_i + f*dx) / 10), n = ROUND((y_i + f*dy) / 10)         [centimetres]
  distance along the branch = ROUND((from_r + o) / 10)               [centimetres]

LINE(stratum, count, purpose, taken)
  S = STREAM(seed, design, stratum, purpose)
  until count places are kept:
    (e, n) = PLACE(stratum, floor(UNIFORM of S * T))
    keep it if it is none of those kept or taken, and, where there is a minimum
    spacing of d centimetres, if (e - e')^2 + (n - n')^2 >= d^2 for all of them

simple-random and stratified, lines:
  LINE(stratum, planned + alternates, "places", nothing); random places first.

even-spacing, lines, with k starts:
  S = STREAM(seed, design, stratum, "starts")
  for start j = 1 ... k, in this order:
    m = planned div k, and one more if j <= planned mod k
    u = UNIFORM of S
    for i = 0 ... m - 1: PLACE(stratum, min(floor((i + u) * T / m), T - 1))
  List order: ORDER(planned) of STREAM(seed, design, stratum, "even order") over these
  places. Alternates: LINE(stratum, alternates, "alternates", taken = these places);
  they belong to starts 1, 2, ... k, 1, 2, ... in turn.
"""


def line_steps(layout: str, starts: int, spacing_m: float) -> Iterator[str]:
    """Say how places were drawn along lines, one step a sentence or two.

    Parameters
    ----------
    layout : str
    starts : int
        Of even spacing.
    spacing_m : float
        The minimum spacing; 0 for none.
    """
    yield (
        "The reaches of a stratum that belong to the population are laid end to end, by branch and "
        "by distance along it, in whole millimetres. What was left out takes no room, and a branch "
        "counts by its length."
    )
    if layout == "even-spacing":
        yield from _even_steps(starts)
    else:
        yield (
            "One random number times that length is a distance, and the place at that distance, "
            "rounded to the centimetre, is a candidate."
        )
        if spacing_m:
            yield (
                f"A candidate closer than {spacing_m:g} m, in a straight line, to a place kept "
                "before it in the stratum is passed over."
            )
        yield (
            "Places are numbered in the order in which they were kept: random locations first, "
            "alternates next. A longer list begins with the shorter one."
        )


def _even_steps(starts: int) -> Iterator[str]:
    if starts == 1:
        yield (
            "That length is parted into as many equal pieces as there are locations. One random "
            "number says how far into each piece its location lies."
        )
    else:
        yield (
            f"The locations are shared among {starts} starts; with a remainder the first ones get "
            "one more. For each start that length is parted into as many equal pieces as it has "
            "locations, and a random number of its own says how far into each piece its location "
            "lies."
        )
    yield (
        "A random order gives the list order. Alternates are places drawn at random along the same "
        "reaches with the purpose “alternates”"
        + (", and count with the starts in turn." if starts > 1 else ".")
    )
