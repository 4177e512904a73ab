"""How a reviewer without this program draws the same places again: in words, and line by line.

A test follows the lines with nothing but whole numbers and a hash, and gets the same places.
"""

from collections.abc import Iterator

from fieldplan.base.draws import key_text
from fieldplan.campaign.model import Campaign
from fieldplan.design.balanced_procedure import PSEUDOCODE as BALANCED
from fieldplan.design.balanced_procedure import balanced_steps
from fieldplan.design.line_procedure import PSEUDOCODE as ALONG_LINES
from fieldplan.design.line_procedure import line_steps
from fieldplan.design.model import Locations

_PURPOSES = {
    "square-grid": "grid",
    "triangular-grid": "grid",
    "compact-strata": "cell places",
    "balanced-list": "raster",
    "even-spacing": "starts",
}
_GRIDS = {"square-grid": "√(A/n)", "triangular-grid": "√(A/(0.866 n))"}


def procedure_in_words(campaign: Campaign, locations: Locations) -> tuple[str, ...]:
    """Say how the places of this campaign were drawn, one step a sentence or two.

    Parameters
    ----------
    campaign : Campaign
        Its seed, design id and minimum spacing are quoted.
    locations : Locations
        As drawn; one of its strata serves as the example.

    Returns
    -------
    tuple of str
        Steps in their order.
    """
    return tuple(_steps(campaign, locations))


def _steps(campaign: Campaign, locations: Locations) -> Iterator[str]:
    if locations.layout == "census":
        yield "Every unit of the list is visited, in the order of the file. Nothing is drawn."
        return
    design = campaign.design[0]
    stratum = locations.places[0].stratum
    unit = locations.places[0].location_id if _is_list(campaign) else ""
    purpose = first_purpose(locations.layout, unit=unit)
    example = key_text(locations.seed, design.id, stratum, purpose)
    yield (
        "Every random number belongs to a key: a line of text made of the version of the "
        "procedure, the seed, the design, the stratum and the purpose. The first one here is "
        f"“{example}”."
    )
    yield (
        "The first 128 bits of the SHA-256 digest of that line are the key of the published "
        "counter-based generator Philox4x64-10 (Salmon and others 2011), whose counter starts at "
        "1. It yields whole numbers of 64 bits; the upper 53 bits divided by 2 to the power 53 are "
        "a random number between 0 and 1."
    )
    if locations.layout == "balanced-list":
        yield from balanced_steps(listed=_is_list(campaign), spacing_m=design.minimum_spacing_m)
    elif _is_list(campaign):
        yield from _list_steps()
    elif _kind(campaign) == "line":
        yield from line_steps(locations.layout, design.starts, design.minimum_spacing_m)
    elif locations.layout in _GRIDS:
        yield from _grid_steps(campaign, locations)
    elif locations.layout == "compact-strata":
        yield from _cell_steps(design.per_cell, design.minimum_spacing_m)
    else:
        yield from _random_steps(design.minimum_spacing_m)
    yield (
        "Targeted places are not drawn. They were chosen by judgement and never enter the mean."
        if locations.of_class("targeted")
        else "No place was added or moved by judgement."
    )


def first_purpose(layout: str, *, unit: str = "") -> str:
    """Return the purpose in the first key of a stratum.

    Parameters
    ----------
    layout : str
    unit : str
        Id of the first unit of a list; empty for an area or lines.

    Examples
    --------
    >>> first_purpose("stratified", unit="MW-7"), first_purpose("square-grid")
    ('unit MW-7', 'grid')
    """
    if unit:
        return "pivots" if layout == "balanced-list" else f"unit {unit}"
    return _PURPOSES.get(layout, "places")


def _is_list(campaign: Campaign) -> bool:
    return _kind(campaign) == "list"


def _kind(campaign: Campaign) -> str:
    wanted = campaign.design[0].frame
    frame = next((f for f in campaign.frame if f.id == wanted), campaign.frame[0])
    return frame.kind


def _list_steps() -> Iterator[str]:
    yield (
        "Each unit of the list has a key of its own, with its id as the purpose, and so a number "
        "of its own: the first of its generator. In each stratum the units are visited in the "
        "order of these numbers. The order of the file plays no part."
    )
    yield (
        "The first units of that order, as many as were planned, are the random locations; the "
        "next ones are the alternates. A later revision that asks for more keeps all it had."
    )


_CANDIDATE = (
    "The stratum's polygon stands in a box of whole metres whose sides are widened to multiples of "
    "a power of two. Two random numbers give a candidate in the box, easting first, rounded to the "
    "centimetre."
)


def _cell_steps(per_cell: int, spacing_m: float) -> Iterator[str]:
    cells = "as many cells as it gets locations"
    if per_cell == 2:
        cells = "half as many cells as it gets locations; with an odd number cell 1 gets three"
    yield (
        f"Each stratum is cut into {cells}. Nothing in the cut is random: on a raster of "
        "whole centimetres centres start along a Hilbert curve, then move to the middle of their "
        "cells while each cell's pull is raised or lowered until all hold the same number of "
        "raster points. A place belongs to the centre from which the squared distance less the "
        "pull is least. All of it is whole-number arithmetic, so that the cut is the same on "
        "every machine."
    )
    yield (
        f"{_CANDIDATE} A candidate strictly inside the polygon, whose corners are in whole "
        "millimetres, goes to its cell. The first one into a cell becomes its location; later "
        "ones are passed over"
        + (
            " until every cell has one. Then a second round begins."
            if per_cell == 2
            else ", until every cell has one."
        )
    )
    if spacing_m:
        yield (
            f"A candidate closer than {spacing_m:g} m to a place kept before it in the stratum is "
            "passed over too."
        )
    yield (
        "The places are numbered in the order in which they were kept. Alternates are drawn in the "
        "same way with the purpose “cell alternates”, no cell getting a second one before all have "
        "one, and numbered after the locations. An alternate stands in for any lost location of "
        "its stratum, in the order of the list; its result counts in the cell in which it lies. A "
        "revision with another number cuts other cells and draws all places of the stratum anew."
    )


def _random_steps(spacing_m: float) -> Iterator[str]:
    yield (
        f"{_CANDIDATE} A candidate strictly inside the polygon, whose corners are in whole "
        "millimetres, is kept; any other is passed over."
    )
    if spacing_m:
        yield (
            f"A candidate closer than {spacing_m:g} m to a place kept before it in the stratum is "
            "passed over too."
        )
    yield (
        "The places are numbered in the order in which they were kept. The first ones, as many as "
        "were planned, are the random locations; the next ones are the alternates. A later "
        "revision that asks for more keeps all it had."
    )


def _grid_steps(campaign: Campaign, locations: Locations) -> Iterator[str]:
    yield (
        f"The spacing is {_GRIDS[locations.layout]}, to the millimetre, A being the net area of "
        "the stratum in square metres and n the number planned (MARSSIM 2000, section 5.5.2.5). "
        "Random numbers give the origin of the grid and its direction. Its nodes are rounded to "
        "the centimetre; those strictly inside the polygon are the random locations."
    )
    if campaign.design[0].exact_count:
        yield (
            "A grid that does not put exactly the planned number inside is dropped, and the next "
            "random numbers of the same key start another."
        )
    yield (
        "The places are numbered in an order of their own, drawn with the purpose “grid order”. "
        "Alternates are no nodes of the grid: they are random places drawn with the purpose "
        "“alternates”, and numbered after it."
    )


PSEUDOCODE = """\
STREAM(seed, design, stratum, purpose)
  In each of the four parts put a backslash before every backslash and every bar.
  line    = "fieldplan draw 1|" seed "|" design "|" stratum "|" purpose
  digest  = SHA-256 of the line, in Unicode normal form C, as UTF-8
  key     = (bytes 1-8 of the digest, bytes 9-16), each one whole number, the
            highest byte first
  block k = Philox4x64-10 with that key and counter (k, 0, 0, 0), k = 1, 2, ...
  RAW     = the next whole number: four from block 1, four from block 2, ...
  UNIFORM = floor(RAW / 2^11) * 2^-53
  BELOW(m)= repeat r = RAW until r < 2^64 - (2^64 mod m); then r mod m
  ORDER(m)= the list 0 ... m-1; for i = m-1 down to 1: exchange items i and BELOW(i + 1)

All arithmetic below is in IEEE 754 double precision, one rounding an operation.
ROUND is to the nearest whole number, halves to the even one.

BOX(polygon)
  Corners in whole millimetres. For the eastings, and likewise the northings:
  quarter = floor((highest - lowest) / 4000)
  step    = the largest power of two <= quarter, at least 1          [metres]
  low     = floor(lowest / (1000 step)) * step
  high    = ceiling(highest / (1000 step)) * step                    [whole metres]

INSIDE(place)
  Strictly inside the polygon and outside its holes, in exact arithmetic: a place on
  a line is not inside.

AREA(stratum, count, purpose, taken)
  S = STREAM(seed, design, stratum, purpose)
  until count places are kept:
    e = 100 low_e + ROUND(UNIFORM of S * 100 (high_e - low_e))       [centimetres]
    n = 100 low_n + ROUND(UNIFORM of S * 100 (high_n - low_n))
    keep (e, n) if INSIDE, if it is none of those kept or taken, and, where there
    is a minimum spacing of d centimetres, if (e - e')^2 + (n - n')^2 >= d^2 for
    all (e', n') kept or taken

simple-random and stratified, area:
  AREA(stratum, planned + alternates, "places", nothing); random places first.

simple-random and stratified, list:
  Each unit has the first RAW of STREAM(seed, design, stratum, "unit " id).
  Sort by it, equal numbers by id; random units first, alternates next.

square-grid and triangular-grid, area:
  L = ROUND(1000 * sqrt(measure / (h * planned))) / 1000             [metres]
      with h = 1 for squares, h = 0.8660254037844386 for triangles
  shift = 0 for squares, 0.5 for triangles; H = L * h
  S = STREAM(seed, design, stratum, "grid")
  repeat
    along = UNIFORM, across = UNIFORM of S
    repeat x = 2 UNIFORM - 1, y = 2 UNIFORM - 1 until 0 < x*x + y*y <= 1
    c = x / sqrt(x*x + y*y), s = y / sqrt(x*x + y*y)
    for all whole i, j (j mod 2 is 0 or 1):
      a = (i + along + shift * (j mod 2)) * L
      b = (j + across) * H
      e = 100 low_e + ROUND((a*c - b*s) * 100)
      n = 100 low_n + ROUND((a*s + b*c) * 100)
      keep (e, n) if INSIDE
  until exactly as many are kept as planned (without exact_count: 2 or more)
  Sort the m kept by e, then n, and number them from 0. Their list order is ORDER(m)
  of STREAM(seed, design, stratum, "grid order").
  Alternates: AREA(stratum, alternates, "alternates", taken = the grid's places).

CELLS(polygon, k)                                    [whole numbers throughout]
  w       = the smaller of: the larger of 4000 and 64 k, the larger of 60000 and 16 k
  step    = the largest even number <= sqrt(10000 measure / w), at least 2       [cm]
  corner  = (100 low_e + step/2, 100 low_n + step/2)
  points  = all (i, j) from 0 on with INSIDE(corner + step (i, j)),
            i < 100 (high_e - low_e) / step, j < 100 (high_n - low_n) / step;
            m of them; X = 16 (i, j)
  Sort the points by HILBERT(i, j). Centre c (c = 0 ... k-1) is floor(sum of X /
  number), either coordinate for itself, over points floor(c m / k) to
  floor((c+1) m / k) - 1.
  All pulls are 0. For turn = 0 ... 69:
    The cell of a point is the c with the least |X - centre c|^2 - pull c, the lowest
    of equals: among all cells when turn is 69 or a multiple of 10, else among the 14
    whose centres are nearest to that of the cell it was in, of equals the lowest.
    held c = points in cell c
    turn < 30:  centre c = floor(sum of its X / held c) where held c > 0; gain = 80
    turn >= 30: keep the pulls as they stand if the largest |k held c - m| is smaller
                than at any turn before, from 30 on;
                gain = 60 - floor(30 (turn - 30) / 40)
    pull c  = pull c + floor(gain (m - k held c) / k); then take the least off all.
  With the pulls that were kept: centre c = corner + floor(step centre c / 16),
  pull c = floor(step^2 pull c / 256)                                [cm and cm^2]
  The cell of a place is the c with the least |place - centre c|^2 - pull c, the
  lowest of equals. Cells are numbered c + 1.

HILBERT(i, j)
  d = 0; for s = 2^15, 2^14, ... 1:
    right = whether i has bit s, up = whether j has bit s
    d = d + s^2 * (0, 1, 2 or 3: neither, up alone, both, right alone)
    i = i mod s, j = j mod s; if right alone: i = s - 1 - i, j = s - 1 - j
    if not up: exchange i and j

FILL(stratum, purpose, quotas, count, taken)
  S = STREAM(seed, design, stratum, purpose)
  In a round every cell with a quota left waits for one place; the next round begins
  when none waits any more. Candidates as in AREA, with S: one that AREA would keep is
  kept if its cell waits, until count places are kept.

compact-strata, area, with p per cell:
  k = floor(planned / p), at least 1. Every cell gets floor(planned / k), cell 1 the
  rest.
  Random places: FILL(stratum, "cell places", those, planned, nothing)
  Alternates:    FILL(stratum, "cell alternates", no limit, alternates, random places)

Field duplicates:
  Rank the random locations of each stratum by the first RAW of
  STREAM(seed, design, "", "duplicate at " location_id). With m locations and d
  duplicates so far in a stratum, the next one goes to the largest m / (2 d + 1), the
  first of equals in the frame's order, and there to the next in rank.

Sample ids, T samples in all: first those of every location in print order, then of
the duplicates by location_id, then of the blanks:
  S = STREAM(seed, design, "", "id of " role " " location_id); for a blank its kind
  and number stand for role and location.
  F = 100, times 10 until 9 F >= 10 T; number = F + BELOW(9 F), again until it is free.
  check   = the check digit of ISO/IEC 7064 MOD 11,10 of revision number, read as one
            row of digits; the id is prefix revision "-" number check.
"""


def procedure_pseudocode() -> str:
    """Return the whole procedure line by line, with nothing left to guess.

    Examples
    --------
    >>> procedure_pseudocode().splitlines()[0]
    'STREAM(seed, design, stratum, purpose)'
    """
    return PSEUDOCODE.replace(
        "Field duplicates:\n", f"{BALANCED}\n{ALONG_LINES}\nField duplicates:\n"
    )
