"""The drawing procedure followed line by line, with whole numbers, a hash and nothing else.

Written from ``procedure_pseudocode()`` and from the published algorithm of Philox4x64-10: Salmon,
Moraes, Dror and Shaw (2011), Parallel random numbers: as easy as 1, 2, 3, SC11. No numpy, no
geometry library, nothing from the package.
"""

import hashlib
import unicodedata
from math import sqrt

Place = tuple[int, int]
Ring = list[Place]
"""Corners in whole millimetres; the closing corner is left out."""

MASK = 2**64 - 1
MULTIPLIERS = 0xD2E7470EE14C6C93, 0xCA5A826395121157
WEYL = 0x9E3779B97F4A7C15, 0xBB67AE8584CAA73B


def philox(counter: list[int], key: list[int]) -> list[int]:
    """Ten rounds of Philox4x64."""
    c0, c1, c2, c3 = counter
    k0, k1 = key
    for _ in range(10):
        first, second = MULTIPLIERS[0] * c0, MULTIPLIERS[1] * c2
        c0, c1, c2, c3 = (
            (second >> 64) ^ c1 ^ k0,
            second & MASK,
            (first >> 64) ^ c3 ^ k1,
            first & MASK,
        )
        k0, k1 = (k0 + WEYL[0]) & MASK, (k1 + WEYL[1]) & MASK
    return [c0, c1, c2, c3]


class Numbers:
    """STREAM of the pseudo-code."""

    def __init__(self, seed: int, design: str, stratum: str, purpose: str) -> None:
        parts = [str(seed), design, stratum, purpose]
        spelled = ["".join("\\" + c if c in "\\|" else c for c in part) for part in parts]
        line = unicodedata.normalize("NFC", "fieldplan draw 1|" + "|".join(spelled))
        digest = hashlib.sha256(line.encode("utf-8")).digest()
        self.key = [int.from_bytes(digest[:8], "big"), int.from_bytes(digest[8:16], "big")]
        self.block = 0
        self.ready: list[int] = []

    def raw(self) -> int:
        if not self.ready:
            self.block += 1
            self.ready = philox([self.block, 0, 0, 0], self.key)
        return self.ready.pop(0)

    def uniform(self) -> float:
        return self.raw() // 2**11 * 2.0**-53

    def below(self, bound: int) -> int:
        while True:
            number = self.raw()
            if number < 2**64 - 2**64 % bound:
                return number % bound

    def order(self, count: int) -> list[int]:
        items = list(range(count))
        for i in range(count - 1, 0, -1):
            j = self.below(i + 1)
            items[i], items[j] = items[j], items[i]
        return items


def inside(rings: list[Ring], place: Place) -> bool:
    """Exact ray casting over all rings, in whole millimetres; False on a line."""
    x, y = place[0] * 10, place[1] * 10
    crossings = 0
    for ring in rings:
        for (x1, y1), (x2, y2) in zip(ring, ring[1:] + ring[:1], strict=True):
            turn = (x2 - x1) * (y - y1) - (y2 - y1) * (x - x1)
            between = min(x1, x2) <= x <= max(x1, x2) and min(y1, y2) <= y <= max(y1, y2)
            if turn == 0 and between:
                return False
            if (y1 > y) != (y2 > y) and (turn > 0) == (y2 > y1):
                crossings += 1
    return crossings % 2 == 1


def box(rings: list[Ring]) -> tuple[Place, Place]:
    """Return (low, high) of the eastings and of the northings, in whole metres."""
    sides = []
    for axis in (0, 1):
        values = [corner[axis] for ring in rings for corner in ring]
        step, quarter = 1, (max(values) - min(values)) // 4000
        while 2 * step <= quarter:
            step *= 2
        low = min(values) // (1000 * step) * step
        high = -(-max(values) // (1000 * step)) * step
        sides.append((low, high))
    return sides[0], sides[1]


def area(
    numbers: Numbers, rings: list[Ring], count: int, *, apart: int = 0, taken: Ring | None = None
) -> Ring:
    """AREA of the pseudo-code, in centimetres."""
    east, north = box(rings)
    before, kept = list(taken or []), []
    while len(kept) < count:
        e = 100 * east[0] + round(numbers.uniform() * (100 * (east[1] - east[0])))
        n = 100 * north[0] + round(numbers.uniform() * (100 * (north[1] - north[0])))
        others = before + kept
        clear = all((e - x) ** 2 + (n - y) ** 2 >= apart**2 for x, y in others)
        if inside(rings, (e, n)) and (e, n) not in others and clear:
            kept.append((e, n))
    return kept


def grid(
    key: tuple[int, str, str], rings: list[Ring], measure: float, planned: int, *, triangular: bool
) -> Ring:
    """Draw a grid of exactly the planned number of places, in centimetres, in list order."""
    h, shift = (0.8660254037844386, 0.5) if triangular else (1.0, 0.0)
    side = round(1000 * sqrt(measure / (h * planned))) / 1000
    numbers = Numbers(*key, "grid")
    kept: Ring = []
    while len(kept) != planned:
        along, across = numbers.uniform(), numbers.uniform()
        x = y = 2.0
        while not 0 < x * x + y * y <= 1:
            x, y = 2 * numbers.uniform() - 1, 2 * numbers.uniform() - 1
        c, s = x / sqrt(x * x + y * y), y / sqrt(x * x + y * y)
        kept = nodes(rings, side, h * side, shift, (along, across, c, s))
    kept.sort()
    return [kept[k] for k in Numbers(*key, "grid order").order(planned)]


def nodes(
    rings: list[Ring], side: float, rows: float, shift: float, start: tuple[float, ...]
) -> Ring:
    """Return the nodes of one grid that lie inside; tries every node within reach of the box."""
    along, across, c, s = start
    east, north = box(rings)
    reach = int(sqrt((east[1] - east[0]) ** 2 + (north[1] - north[0]) ** 2) / min(side, rows)) + 3
    found = []
    for j in range(-reach, reach + 1):
        for i in range(-reach, reach + 1):
            a, b = (i + along + shift * (j % 2)) * side, (j + across) * rows
            place = (
                100 * east[0] + round((a * c - b * s) * 100),
                100 * north[0] + round((a * s + b * c) * 100),
            )
            if inside(rings, place):
                found.append(place)
    return found


def hilbert(place: Place) -> int:
    """HILBERT of the pseudo-code."""
    i, j = place
    d, s = 0, 2**15
    while s:
        right, up = bool(i & s), bool(j & s)
        d += (
            s
            * s
            * {(False, False): 0, (False, True): 1, (True, True): 2, (True, False): 3}[right, up]
        )
        i, j = i % s, j % s
        if right and not up:
            i, j = s - 1 - i, s - 1 - j
        if not up:
            i, j = j, i
        s //= 2
    return d


Pulled = list[tuple[int, int, int]]
"""Centres and pulls."""


def nearest(place: Place, cells: Pulled, among: list[int]) -> int:
    """Tell the cell of a place, the lowest of equals."""
    x, y = place
    far = [((x - cells[c][0]) ** 2 + (y - cells[c][1]) ** 2 - cells[c][2], c) for c in among]
    return min(far)[1]


def cells(rings: list[Ring], measure: float, k: int) -> Pulled:
    """CELLS of the pseudo-code."""
    w = min(max(4000, 64 * k), max(60000, 16 * k))
    step = max(2, int(sqrt(10000 * measure / w)) // 2 * 2)
    east, north = box(rings)
    corner = 100 * east[0] + step // 2, 100 * north[0] + step // 2
    points = [
        (i, j)
        for i in range(-(-100 * (east[1] - east[0]) // step))
        for j in range(-(-100 * (north[1] - north[0]) // step))
        if inside(rings, (corner[0] + step * i, corner[1] + step * j))
    ]
    m = len(points)
    run = sorted(points, key=hilbert)
    spots = [(16 * i, 16 * j) for i, j in points]
    centres = [
        middle([(16 * i, 16 * j) for i, j in run[c * m // k : (c + 1) * m // k]]) for c in range(k)
    ]
    pulls, kept, best = [0] * k, [0] * k, None
    cell = [0] * m
    for turn in range(70):
        now = [(*centre, pull) for centre, pull in zip(centres, pulls, strict=True)]
        every = turn % 10 == 0 or turn == 69
        around = [near_cells(centres, c, k if every else 14) for c in range(k)]
        cell = [nearest(spot, now, around[c]) for spot, c in zip(spots, cell, strict=True)]
        held = [cell.count(c) for c in range(k)]
        gain = 80 if turn < 30 else 60 - 30 * (turn - 30) // 40
        if turn < 30:
            centres = [
                middle([s for s, own in zip(spots, cell, strict=True) if own == c]) or centres[c]
                for c in range(k)
            ]
        else:
            off = max(abs(k * number - m) for number in held)
            if best is None or off < best:
                best, kept = off, pulls
        pulls = [p + gain * (m - k * h) // k for p, h in zip(pulls, held, strict=True)]
        pulls = [p - min(pulls) for p in pulls]
    return [
        (corner[0] + step * x // 16, corner[1] + step * y // 16, step**2 * p // 256)
        for (x, y), p in zip(centres, kept, strict=True)
    ]


def middle(spots: Ring) -> Place:
    """Return the mean of places, either coordinate rounded down; nothing of nothing."""
    if not spots:
        return ()  # type: ignore[return-value]
    return sum(x for x, _ in spots) // len(spots), sum(y for _, y in spots) // len(spots)


def near_cells(centres: Ring, cell: int, count: int) -> list[int]:
    """Name the cells nearest to one, of equals the lowest."""
    x, y = centres[cell]
    far = sorted(((x - a) ** 2 + (y - b) ** 2, c) for c, (a, b) in enumerate(centres))
    return [c for _, c in far[:count]]


def fill(
    numbers: Numbers,
    rings: list[Ring],
    cut: Pulled,
    quotas: list[int],
    count: int,
    taken: Ring,
) -> Ring:
    """FILL of the pseudo-code, in centimetres."""
    east, north = box(rings)
    left, kept = list(quotas), []
    waits = [c for c, quota in enumerate(left) if quota]
    while len(kept) < count:
        e = 100 * east[0] + round(numbers.uniform() * (100 * (east[1] - east[0])))
        n = 100 * north[0] + round(numbers.uniform() * (100 * (north[1] - north[0])))
        if not inside(rings, (e, n)) or (e, n) in taken + kept:
            continue
        own = nearest((e, n), cut, list(range(len(cut))))
        if own in waits:
            kept.append((e, n))
            left[own] -= 1
            waits.remove(own)
            waits = waits or [c for c, quota in enumerate(left) if quota]
    return kept


def nearer(units: Ring, own: int, among: list[int]) -> list[int]:
    """Put other units in order of distance, of equals the lower number first."""
    x, y = units[own]
    return sorted(
        (i for i in among if i != own),
        key=lambda i: ((units[i][0] - x) ** 2 + (units[i][1] - y) ** 2, i),
    )


def pivots(units: Ring, count: int, numbers: Numbers) -> list[int]:
    """PIVOTS of the pseudo-code."""
    whole = len(units)
    share = [count] * whole
    row = [i for i in range(whole) if count < whole]
    while row:
        i = row[numbers.below(len(row))]
        x, y = units[i]
        j = min(
            (k for k in row if k != i),
            key=lambda k: ((units[k][0] - x) ** 2 + (units[k][1] - y) ** 2, k),
        )
        a, b = share[i], share[j]
        if a + b <= whole:
            share[i], share[j] = (a + b, 0) if numbers.below(a + b) < a else (0, a + b)
        else:
            r = a + b - whole
            won = numbers.below(whole - r) < whole - b
            share[i], share[j] = (whole, r) if won else (r, whole)
        for k in (i, j):
            if share[k] in (0, whole):
                row[row.index(k)] = row[-1]
                row.pop()
    return [i for i in range(whole) if share[i] == whole]


def pairs(units: Ring, members: list[int]) -> list[Place]:
    """PAIRS of the pseudo-code, by the lower number."""

    def apart(i: int, j: int) -> int:
        return (units[i][0] - units[j][0]) ** 2 + (units[i][1] - units[j][1]) ** 2

    partner: dict[int, int] = {}
    left = members
    while left:
        couples = {
            (apart(i, j), min(i, j), max(i, j)) for i in left for j in nearer(units, i, left)[:6]
        }
        for _, i, j in sorted(couples):
            if i not in partner and j not in partner:
                partner[i], partner[j] = j, i
        left = [i for i in left if i not in partner]
    for _ in range(20):
        before = dict(partner)
        for u in members:
            for c in nearer(units, u, members)[:6]:
                m, d = partner[u], partner[c]
                if c != m and apart(u, c) + apart(m, d) < apart(u, m) + apart(c, d):
                    partner.update({u: c, c: u, m: d, d: m})
        if partner == before:
            break
    return [(i, partner[i]) for i in members if i < partner[i]]


def halves(units: Ring, numbers: Numbers) -> list[int]:
    """HALVES of the pseudo-code."""
    members, halvings = list(range(len(units))), []
    while len(members) > 1:
        alone = [members[numbers.below(len(members))]] if len(members) % 2 else []
        second = {}
        for low, high in pairs(units, [i for i in members if i not in alone]):
            if numbers.below(2) == 1:
                second[low] = high
            else:
                second[high] = low
        halvings.append(second)
        members = sorted([*second, *alone])
    for second in halvings[::-1]:
        members = members + [second[i] for i in members if i in second]
    return members


def balanced(
    key: tuple[int, str, str], rings: list[Ring], measure: float, planned: int, count: int
) -> Ring:
    """Draw the first places of a balanced list in an area, in centimetres."""
    length = 8 * planned
    while length < 64:
        length *= 2
    step = max(1, int(sqrt(10000 * measure / (8 * length))))
    numbers = Numbers(*key, "raster")
    east, north = box(rings)
    spots = []
    for i in range(-(-100 * (east[1] - east[0]) // step)):
        for j in range(-(-100 * (north[1] - north[0]) // step)):
            e = 100 * east[0] + i * step + int(numbers.uniform() * step)
            n = 100 * north[0] + j * step + int(numbers.uniform() * step)
            if inside(rings, (e, n)):
                spots.append((e, n))
    drawn = [spots[i] for i in pivots(spots, length, Numbers(*key, "pivots"))]
    return [drawn[i] for i in halves(drawn, Numbers(*key, "halves"))][:count]


def balanced_units(key: tuple[int, str, str], wells: dict[str, Place], planned: int) -> list[str]:
    """Put all units of a list, known by id and place in centimetres, in balanced order."""
    ids = sorted(wells)
    places = [wells[name] for name in ids]
    length = planned
    while 2 * length <= len(ids):
        length *= 2
    drawn = pivots(places, length, Numbers(*key, "pivots"))
    rest = [i for i in range(len(ids)) if i not in drawn]
    order = [drawn[i] for i in halves([places[i] for i in drawn], Numbers(*key, "halves"))]
    order += [rest[i] for i in halves([places[i] for i in rest], Numbers(*key, "rest"))]
    return [ids[i] for i in order]


def compact(
    key: tuple[int, str, str],
    rings: list[Ring],
    measure: float,
    planned: int,
    spare: int,
    *,
    per_cell: int,
) -> Ring:
    """Draw compact strata and their alternates, in centimetres, in list order."""
    k = max(1, planned // per_cell)
    cut = cells(rings, measure, k)
    quotas = [planned // k] * k
    quotas[0] += planned - sum(quotas)
    places = fill(Numbers(*key, "cell places"), rings, cut, quotas, planned, [])
    rest = fill(Numbers(*key, "cell alternates"), rings, cut, [spare] * k, spare, places)
    return places + rest


def units(key: tuple[int, str, str], ids: list[str]) -> list[str]:
    """Put list units in drawn order."""
    return sorted(ids, key=lambda name: (Numbers(*key, f"unit {name}").raw(), name))


def check_digit(digits: str) -> str:
    """ISO/IEC 7064 MOD 11,10, from its recursion."""
    p = 10
    for d in digits:
        s = (p + int(d)) % 10
        p = (10 if s == 0 else s) * 2 % 11
    return next(str(d) for d in range(10) if (p + d) % 10 == 1)


def sample_ids(
    seed: int, design: str, opening: str, wanted: list[str], total: int
) -> dict[str, str]:
    """Give an id to each "role location" in turn; an id opens with prefix and revision."""
    revision = opening.lstrip("ABCDEFGHIJKLMNOPQRSTUVWXYZ")
    first = 100
    while 9 * first < 10 * total:
        first *= 10
    given: dict[str, str] = {}
    taken: set[int] = set()
    for name in wanted:
        numbers = Numbers(seed, design, "", f"id of {name}")
        number = first + numbers.below(9 * first)
        while number in taken:
            number = first + numbers.below(9 * first)
        taken.add(number)
        given[name] = f"{opening}-{number}{check_digit(f'{revision}{number}')}"
    return given
