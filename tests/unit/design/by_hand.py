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
