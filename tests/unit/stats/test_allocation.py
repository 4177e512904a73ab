"""Sharing results between strata, against brute force."""

import itertools
import math
from collections.abc import Iterable, Iterator
from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldplan.base.errors import DesignError
from fieldplan.stats.allocation import (
    Allocation,
    first_that,
    lowest_variance,
    share_total,
    smallest_total,
    unrounded_shares,
    unrounded_total,
)
from fieldplan.stats.strata import Strata
from tests.unit.stats.published import row

SITE = Strata((0.64, 0.22, 0.14), (18, 45, 90), (None, None, None))


@st.composite
def small_sites(draw: st.DrawFn) -> Strata:
    """Draw two or three strata, some of them short lists."""
    count = draw(st.integers(2, 3))
    sizes = [draw(st.floats(0.05, 1)) for _ in range(count)]
    sigmas = tuple(draw(st.floats(0.5, 20)) for _ in range(count))
    lists = tuple(draw(st.none() | st.integers(1, 9)) for _ in range(count))
    weights = tuple(size / sum(sizes) for size in sizes)
    return Strata(weights, sigmas, lists, floor=draw(st.integers(2, 4)))


def every_way(site: Strata, total: int) -> Iterator[tuple[int, ...]]:
    """List every set of whole counts of this total within floors and lists."""
    ranges = [
        range(floor, min(cap, total) + 1) for floor, cap in zip(site.floors, site.caps, strict=True)
    ]
    return (counts for counts in itertools.product(*ranges) if sum(counts) == total)


def test_totals_and_counts_of_the_three_strata() -> None:
    """By hand: 34.02² / 81 = 14.29; 1786.86 / 81 = 22.06; SE 8.80 and 8.06."""
    assert unrounded_total(SITE, 81.0) == pytest.approx(14.29, abs=0.005)
    assert unrounded_total(SITE, 81.0, allocation="proportional") == pytest.approx(22.06, abs=0.005)
    assert smallest_total(SITE, 81.0, allocation="neyman") == [5, 4, 6]
    assert math.sqrt(SITE.variance([5, 4, 6])) == pytest.approx(8.80, abs=0.005)
    raised = Strata(SITE.weights, SITE.sigmas, SITE.populations, floor=6)
    assert smallest_total(raised, 81.0, allocation="neyman") == [6, 6, 6]
    assert math.sqrt(SITE.variance([6, 6, 6])) == pytest.approx(8.06, abs=0.005)


@settings(max_examples=50, deadline=None)
@given(small_sites(), st.integers(0, 14))
def test_neyman_counts_have_the_smallest_variance_of_all(site: Strata, extra: int) -> None:
    """Brute force over every way to share the total."""
    total = min(sum(site.floors) + extra, site.most)
    found = share_total(site, total, allocation="neyman")
    best = min(site.variance(counts) for counts in every_way(site, total))
    assert sum(found) == total
    assert site.variance(found) <= best * (1 + 1e-9)


@settings(max_examples=50, deadline=None)
@given(small_sites(), st.integers(0, 14))
def test_proportional_counts_are_the_best_rounding(site: Strata, extra: int) -> None:
    """Brute force over every set of counts within one of the held shares."""
    total = min(sum(site.floors) + extra, site.most)
    found = share_total(site, total, allocation="proportional")
    shares = _held(site, total)
    near = [
        counts
        for counts in every_way(site, total)
        if all(abs(n - share) < 1 - 1e-6 for n, share in zip(counts, shares, strict=True))
    ]
    assert sum(found) == total
    assert all(abs(n - share) < 1 + 1e-6 for n, share in zip(found, shares, strict=True))
    if near:
        assert site.variance(found) <= min(map(site.variance, near)) * (1 + 1e-9)


def _held(site: Strata, total: int) -> list[float]:
    """Share by weight and hold at floor or list, by taking out one bound stratum at a time."""
    fixed: dict[int, float] = {}
    while True:
        free = [k for k in range(len(site.weights)) if k not in fixed]
        if not free:
            return [fixed[k] for k in range(len(site.weights))]
        left = total - sum(fixed.values())
        weight = sum(site.weights[k] for k in free)
        shares = {k: left * site.weights[k] / weight for k in free}
        low = {k: site.floors[k] - shares[k] for k in free if shares[k] < site.floors[k]}
        high = {k: shares[k] - site.caps[k] for k in free if shares[k] > site.caps[k]}
        if not low and not high:
            return [fixed.get(k, shares.get(k, 0.0)) for k in range(len(site.weights))]
        # Fix the side that is off by more in sum; the other may come free again.
        if sum(low.values()) >= sum(high.values()):
            fixed |= {k: float(site.floors[k]) for k in low}
        else:
            fixed |= {k: float(site.caps[k]) for k in high}


@settings(max_examples=25, deadline=None)
@given(small_sites(), st.floats(0.2, 1.5))
def test_neyman_total_is_the_smallest_that_meets_the_target(site: Strata, share: float) -> None:
    """Brute force: no smaller total meets the target in any way; this one cannot do better."""
    target = share * site.variance(site.floors)
    reachable = [min(cap, floor + 6) for floor, cap in zip(site.floors, site.caps, strict=True)]
    if site.variance(reachable) > target:
        return
    found = smallest_total(site, target, allocation="neyman")
    assert site.variance(found) <= target * (1 + 1e-8)
    for total in range(sum(site.floors), sum(found)):
        assert all(site.variance(c) > target * (1 - 1e-8) for c in every_way(site, total))
    best = min(site.variance(c) for c in every_way(site, sum(found)))
    assert site.variance(found) <= best * (1 + 1e-9)


@settings(max_examples=25, deadline=None)
@given(small_sites(), st.floats(0.02, 1.5))
def test_proportional_total_is_the_smallest_of_its_kind(site: Strata, share: float) -> None:
    """Walk up from the floors: the first total whose rounded shares meet the target."""
    target = share * site.variance(site.floors)
    if site.variance([min(cap, 200) for cap in site.caps]) > target:
        return
    found = smallest_total(site, target, allocation="proportional")
    total = sum(site.floors)
    while site.variance(share_total(site, total, allocation="proportional")) > target * (1 + 1e-9):
        total += 1
    assert sum(found) == total


@settings(max_examples=40, deadline=None)
@given(small_sites(), st.integers(0, 40))
def test_bound_on_the_variance_is_a_bound_and_never_rises(site: Strata, extra: int) -> None:
    """The search relies on both."""
    total = min(sum(site.floors) + extra, site.most)
    for allocation in ("neyman", "proportional"):
        bound = lowest_variance(site, total, allocation=allocation)
        assert bound <= site.variance(share_total(site, total, allocation=allocation)) * (1 + 1e-9)
        if total > sum(site.floors):
            before = lowest_variance(site, total - 1, allocation=allocation)
            assert bound <= before * (1 + 1e-9)


def test_large_totals_are_shared_at_once() -> None:
    """A million results: Neyman's shares by formula, each within one of the whole counts."""
    counts = share_total(SITE, 1_000_000, allocation="neyman")
    shares = unrounded_shares(SITE, 1_000_000, allocation="neyman")
    assert sum(counts) == 1_000_000
    assert all(abs(n - share) <= 1 for n, share in zip(counts, shares, strict=True))


@pytest.mark.parametrize(
    ("row_id", "position"), [("A06-008", 0), ("A06-012", 0)], ids=["24 cities", "58 schools"]
)
def test_neyman_shares_equal_the_printed_ones(row_id: str, position: int) -> None:
    """Source: Cochran 1977, sec. 5.9 and exercise 5 (values.csv): nearest whole number."""
    inputs = row(row_id).inputs
    whole = sum(inputs["w"])
    site = Strata(
        tuple(w / whole for w in inputs["w"]), tuple(inputs["s"]), (None,) * len(inputs["w"])
    )
    shares = unrounded_shares(site, inputs["n"], allocation="neyman")
    assert round(shares[position]) == row(row_id).exact


def test_totals_of_the_handbook_strata() -> None:
    """Source: Berthouex & Brown 2002 (values.csv A06-018, A06-022): 262.8 and 208, SE = E / 2."""
    inputs = row("A06-018").inputs
    site = Strata(tuple(inputs["w"]), tuple(math.sqrt(v) for v in inputs["s2"]), (None, None, None))
    target = (inputs["E"] / 2) ** 2
    total = unrounded_total(site, target, allocation="proportional")
    assert total == pytest.approx(row("A06-018").exact, rel=1e-9)
    assert sum(smallest_total(site, target, allocation="neyman")) == row("A06-022").exact
    # The note of A06-019 has 109/123/32, each rounded for itself, which sums to 264.
    assert share_total(site, 263, allocation="neyman") == [109, 122, 32]


def test_sum_of_n_s_equals_the_printed_one() -> None:
    """Source: Cochran 1977, sec. 5.9 exercise (values.csv A06-009): Σ N S = 26841."""
    inputs = row("A06-009").inputs
    whole = sum(inputs["N"])
    site = Strata(tuple(n / whole for n in inputs["N"]), tuple(inputs["S"]), (None,) * 6)
    # Neyman's total for V = 1 is (Σ W S)².
    assert math.sqrt(unrounded_total(site, 1.0)) * whole == pytest.approx(row("A06-009").exact)


def test_finite_lists_need_fewer() -> None:
    """Closed form: with W = N/ΣN the term is Σ W S² / ΣN (Cochran 1977, eq. 5.25)."""
    site = Strata((0.25, 0.75), (6.0, 2.0), (10, 30))
    total = unrounded_total(site, 0.5)
    assert total == pytest.approx(3.0**2 / (0.5 + (0.25 * 36 + 0.75 * 4) / 40))
    assert total < unrounded_total(Strata((0.25, 0.75), (6.0, 2.0), (None, None)), 0.5)


def test_first_that_says_when_nothing_fits() -> None:
    """A test that never holds ends with a line, not with an endless search."""
    site = Strata((0.5, 0.5), (1.0, 1.0), (5, 6))
    with pytest.raises(DesignError, match="more than 11 results"):
        first_that(site, lambda counts: False, never_above=10.0, allocation="neyman")


@pytest.mark.parametrize(("total", "said"), [(5, "ask for 6 or more"), (100, "more than the 26")])
def test_totals_outside_floors_and_lists_are_refused(total: int, said: str) -> None:
    """Floors cannot be filled, or lists give no more."""
    site = Strata((0.3, 0.3, 0.4), (1.0, 1.0, 1.0), (6, 10, 10))
    with pytest.raises(DesignError, match=said):
        share_total(site, total, allocation="neyman")


@settings(max_examples=50, deadline=None)
@given(small_sites(), st.integers(0, 14), st.data())
def test_cost_optimal_counts_are_beaten_by_none_of_their_cost(
    site: Strata, extra: int, data: st.DataObject
) -> None:
    """Brute force: no counts that cost as much or less have a smaller variance."""
    costs = tuple(data.draw(st.floats(20, 300)) for _ in site.weights)
    site = replace(site, costs=costs)
    total = min(sum(site.floors) + extra, site.most)
    found = share_total(site, total, allocation="cost-optimal")
    money = site.cost(found) * (1 + 1e-12)
    totals = range(sum(site.floors), sum(site.floors) + 2 * extra + 5)
    for other in itertools.chain.from_iterable(every_way(site, t) for t in totals):
        if site.cost(other) <= money:
            assert site.variance(other) >= site.variance(found) * (1 - 1e-9)


@settings(max_examples=50, deadline=None)
@given(small_sites(), st.integers(0, 14))
def test_equal_precision_has_the_smallest_worst_stratum(site: Strata, extra: int) -> None:
    """Brute force over every way to share the total: the largest σ² (1/n − 1/N) is smallest."""

    def worst(counts: Iterable[int]) -> float:
        parts = zip(site.sigmas, counts, site.populations, strict=True)
        return max(s**2 * (1 / n - (0.0 if size is None else 1 / size)) for s, n, size in parts)

    total = min(sum(site.floors) + extra, site.most)
    found = share_total(site, total, allocation="equal-precision")
    assert sum(found) == total
    assert worst(found) <= min(map(worst, every_way(site, total))) * (1 + 1e-9) + 1e-12


def test_equal_precision_levels_out_what_it_is_told_to() -> None:
    """By hand: σ of 10, 20 at means of 10, 40 are shares of 1 and 0.5, so 4 to 1."""
    site = Strata((0.5, 0.5), (10.0, 20.0), (None, None), levelled=(1.0, 0.5))
    assert share_total(site, 50, allocation="equal-precision") == [40, 10]
    absolute = replace(site, levelled=())
    assert share_total(absolute, 50, allocation="equal-precision") == [10, 40]


@pytest.mark.parametrize("allocation", ["cost-optimal", "equal-precision"])
def test_unrounded_totals_keep_the_target_exactly(allocation: Allocation) -> None:
    """Put back into the variance, the unrounded shares of the unrounded total give the target."""
    site = replace(SITE, populations=(None, 60, 900), costs=(75.0, 60.0, 240.0))
    total = unrounded_total(site, 25.0, allocation=allocation)
    shares = unrounded_shares(site, total, allocation=allocation)
    assert site.variance(shares) == pytest.approx(25.0, rel=1e-12)


def test_cost_optimal_total_is_the_handbook_formula() -> None:
    """Closed form: (Σ W σ √c)(Σ W σ/√c) / V (Cochran 1977, eq. 5.25, from memory)."""
    site = replace(SITE, costs=(75.0, 60.0, 240.0))
    parts = list(zip(site.weights, site.sigmas, site.costs, strict=True))
    above = math.fsum(w * s * math.sqrt(c) for w, s, c in parts)
    below = math.fsum(w * s / math.sqrt(c) for w, s, c in parts)
    total = unrounded_total(site, 25.0, allocation="cost-optimal")
    assert total == pytest.approx(above * below / 25.0, rel=1e-12)


def test_handbook_strata_get_neymans_share_where_the_print_is_wrong() -> None:
    """Source: Berthouex & Brown 2002 (values.csv A06-019): 109 of 263; the page prints 71.

    The page shares by W s² there, against its own rule of W s.
    """
    inputs = row("A06-019").inputs
    site = Strata(tuple(inputs["w"]), tuple(inputs["s"]), (None,) * 3)
    shares = unrounded_shares(site, inputs["n"], allocation="neyman")
    assert round(shares[0]) == row("A06-019").exact


@pytest.mark.parametrize("allocation", ["proportional", "neyman", "equal-precision"])
def test_ceilings_and_floors_by_stratum_hold(allocation: Allocation) -> None:
    """Bounds come before shares; what they hold back goes to the others."""
    site = replace(SITE, least=(2, 8, 2), ceilings=(None, None, 3))
    counts = share_total(site, 30, allocation=allocation)
    assert sum(counts) == 30
    assert counts[1] >= 8
    assert counts[2] <= 3


def test_ceilings_that_forbid_a_target_are_named() -> None:
    """A target that only more results could keep."""
    site = replace(SITE, ceilings=(5, 5, 5))
    with pytest.raises(DesignError, match="more than the 15 results that the ceilings allow"):
        smallest_total(site, 1.0, allocation="proportional")
