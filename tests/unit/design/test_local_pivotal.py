"""The local pivotal method and the balanced order, against brute force on small frames."""

import random
from collections import Counter
from fractions import Fraction
from functools import cache
from itertools import pairwise

import pytest

from fieldplan.base.draws import Stream
from fieldplan.base.errors import DesignError
from fieldplan.design.buckets import Buckets
from fieldplan.design.local_pivotal import balanced_order, balanced_sample, close_pairs

PLACES = [(0, 0), (3, 1), (4, 1), (9, 5), (9, 6)]
Shares = tuple[int, ...]


def squared(one: tuple[int, int], other: tuple[int, int]) -> int:
    """Squared distance."""
    return (one[0] - other[0]) ** 2 + (one[1] - other[1]) ** 2


def chances(shares: Shares, whole: int) -> dict[Shares, Fraction]:
    """Follow every turn that chance can take; give the probability of every end."""

    @cache
    def ends(state: Shares) -> dict[Shares, Fraction]:
        still = [i for i, part in enumerate(state) if 0 < part < whole]
        if not still:
            return {state: Fraction(1)}
        found: Counter[Shares] = Counter()
        for i in still:
            j = min((k for k in still if k != i), key=lambda k: (squared(PLACES[i], PLACES[k]), k))
            a, b = state[i], state[j]
            if a + b <= whole:
                turns = [(a + b, 0, Fraction(a, a + b)), (0, a + b, Fraction(b, a + b))]
            else:
                r = a + b - whole
                turns = [
                    (whole, r, Fraction(whole - b, whole - r)),
                    (r, whole, Fraction(whole - a, whole - r)),
                ]
            for mine, its, chance in turns:
                after = list(state)
                after[i], after[j] = mine, its
                for end, more in ends(tuple(after)).items():
                    found[end] += more * chance / len(still)
        return dict(found)

    return ends(shares)


@pytest.mark.parametrize(
    ("shares", "whole"), [((2, 2, 2, 2, 2), 5), ((1, 4, 3, 2, 5), 5), ((3, 1, 2, 6, 4), 8)]
)
def test_every_sample_comes_as_often_as_brute_force_says(shares: Shares, whole: int) -> None:
    """All turns of a frame of five followed exactly, against 3000 draws, 4 standard errors."""
    exact = chances(shares, whole)
    for unit, part in enumerate(shares):
        drawn = sum(chance for end, chance in exact.items() if end[unit] == whole)
        assert drawn == Fraction(part, whole)
    draws = 3000
    found = Counter(
        tuple(balanced_sample(PLACES, shares, whole, Stream(seed, "main", "site", "pivots")))
        for seed in range(draws)
    )
    for end, chance in exact.items():
        sample = tuple(unit for unit, part in enumerate(end) if part == whole)
        p = float(chance)
        assert abs(found.pop(sample, 0) / draws - p) <= 4 * (p * (1 - p) / draws) ** 0.5
    assert not found


def test_neighbours_seldom_come_together() -> None:
    """Of two close pairs one each is drawn, whatever the seed, when half are drawn."""
    row = [(0, 0), (1, 0), (50, 0), (51, 0)]
    for seed in range(50):
        one, other = balanced_sample(row, [1] * 4, 2, Stream(seed, "main", "site", "pivots"))
        assert one in {0, 1}
        assert other in {2, 3}


@pytest.mark.parametrize(
    ("shares", "whole", "told"),
    [
        ([1, 1], 2, "3 places came with 2 shares"),
        ([3, 1, 0], 2, "3 of 2"),
        ([1, 1, 1], 2, "3 in all"),
        ([0, 0, 0], 0, "0 in all"),
    ],
)
def test_shares_that_make_no_sample_are_refused(shares: list[int], whole: int, told: str) -> None:
    """A share above one unit, or half a unit too many, has no sample."""
    with pytest.raises(DesignError, match=told):
        balanced_sample(PLACES[:3], shares, whole, Stream(1, "main", "site", "pivots"))


@pytest.mark.parametrize("span", [(1, 1), (3, 3), (400, 1), (1, 90_000), (700, 650)])
def test_neighbours_from_buckets_are_those_of_brute_force(span: tuple[int, int]) -> None:
    """Lines, clumps and places in one spot included, while places are taken away."""
    chance = random.Random(7)
    places = [(chance.randrange(span[0]), chance.randrange(span[1])) for _ in range(60)]
    places += [(span[0] * 3, span[1] * 5)]
    eastings, northings = [e for e, _ in places], [n for _, n in places]
    left = list(range(len(places)))
    buckets = Buckets(eastings, northings, left)
    while len(left) > 2:
        gone = left.pop(chance.randrange(len(left)))
        buckets.take(gone)
        for i in left[::5]:
            near = sorted((squared(places[i], places[j]), j) for j in left if j != i)
            assert buckets.nearest(i) == near[0][1]
            assert buckets.nearest_few(i, 6) == near[:6]


def all_matchings(units: list[int]) -> list[list[tuple[int, int]]]:
    """Every way to put units in pairs."""
    if not units:
        return [[]]
    first, *rest = units
    return [
        [(first, other), *more]
        for other in rest
        for more in all_matchings([u for u in rest if u != other])
    ]


def test_pairs_are_close_to_the_best_of_all_pairings() -> None:
    """Of the 105 ways to pair eight places, none is much better in most cases: brute force."""
    worse = []
    for seed in range(40):
        chance = random.Random(seed)
        places = [(chance.randrange(1000), chance.randrange(1000)) for _ in range(8)]
        pairs = close_pairs(places, list(range(8)))
        assert sorted(unit for pair in pairs for unit in pair) == list(range(8))
        sums = [
            sum(squared(places[i], places[j]) for i, j in way)
            for way in all_matchings(list(range(8)))
        ]
        worse.append(sum(squared(places[i], places[j]) for i, j in pairs) / min(sums))
    assert sorted(worse)[len(worse) // 2] == 1.0
    assert max(worse) < 2.0


@pytest.mark.parametrize("count", [1, 2, 5, 8])
def test_every_unit_is_equally_likely_in_every_position(count: int) -> None:
    """900 orders of a lopsided frame, each share within 4 binomial standard errors."""
    places = [(k * k * k, 7 * k) for k in range(count)]
    draws = 900
    seen = Counter(
        (unit, at)
        for seed in range(draws)
        for at, unit in enumerate(balanced_order(places, Stream(seed, "main", "site", "halves")))
    )
    p = 1 / count
    room = 4 * (p * (1 - p) / draws) ** 0.5
    for unit in range(count):
        for at in range(count):
            assert abs(seen[unit, at] / draws - p) <= room


def test_first_parts_of_an_order_are_spread_along_a_row() -> None:
    """Of 64 units in a row the first 32 hold one of each two, the first 8 leave no gap of 25."""
    row = [(100 * k, 0) for k in range(64)]
    for seed in range(20):
        order = balanced_order(row, Stream(seed, "main", "site", "halves"))
        assert sorted(order) == list(range(64))
        first = sorted(order[:8])
        gaps = [later - earlier for earlier, later in pairwise([-1, *first, 64])]
        assert max(gaps) <= 24
        assert len({unit // 2 for unit in order[:32]}) == 32
