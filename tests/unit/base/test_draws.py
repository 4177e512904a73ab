"""Keyed streams: reproducible, independent, fair."""

import math
from collections import Counter
from itertools import permutations

import numpy as np
import pytest

from fieldplan.base.draws import Stream, key_text


def test_stream_depends_on_every_part_of_its_key() -> None:
    """Two purposes, strata, designs or seeds must never share numbers."""
    keys = [(1, "a", "b", "c"), (2, "a", "b", "c"), (1, "x", "b", "c"), (1, "a", "x", "c")]
    keys += [(1, "a", "b", "x"), (1, "a", "b|c", "c"), (1, "a", "b", "c|c"), (1, "a", "b\\", "c")]
    assert len({Stream(*key).raw(1)[0] for key in keys}) == len(keys)


def test_bars_and_backslashes_never_make_two_keys_read_the_same() -> None:
    """A stratum is named by its owner and may hold any sign."""
    parts = ["a", "a|", "|a", "a\\", "a\\|", "|", "||", "\\", ""]
    spelled = {key_text(1, "main", s, p) for s in parts for p in parts}
    assert len(spelled) == len(parts) ** 2


def test_composed_and_decomposed_letters_give_one_key() -> None:
    """File formats spell é in two ways; the stratum is the same."""
    assert key_text(1, "main", "pré", "x") == key_text(1, "main", "pre\u0301", "x")


def test_numbers_do_not_depend_on_how_many_are_read_at_once() -> None:
    """The first places of a long list are the places of a short one."""
    whole = Stream(3, "main", "site", "places")
    parts = Stream(3, "main", "site", "places")
    pieces = [parts.uniforms(k) for k in (1, 2, 3, 5, 8, 13)]
    assert np.concatenate(pieces).tolist() == whole.uniforms(32).tolist()


def test_uniforms_fill_the_unit_interval_evenly() -> None:
    """Mean 1/2 and variance 1/12, each within 4 standard errors; never 1."""
    n = 200_000
    uniforms = Stream(11, "main", "site", "places").uniforms(n)
    assert uniforms.min() >= 0.0
    assert uniforms.max() < 1.0
    assert abs(uniforms.mean() - 1 / 2) < 4 * math.sqrt(1 / 12 / n)
    # Variance of (u - 1/2)² is 1/80 - 1/144 = 1/180.
    assert abs(((uniforms - 1 / 2) ** 2).mean() - 1 / 12) < 4 * math.sqrt(1 / 180 / n)


def test_whole_numbers_below_a_bound_are_equally_likely() -> None:
    """Each of 7 values within 4 binomial standard errors of n/7."""
    n, bound = 21_000, 7
    stream = Stream(5, "main", "site", "test")
    found = Counter(stream.below(bound) for _ in range(n))
    tolerance = 4 * math.sqrt(n * (1 / bound) * (1 - 1 / bound))
    assert set(found) == set(range(bound))
    assert all(abs(count - n / bound) < tolerance for count in found.values())


def test_a_bound_that_divides_nothing_still_lets_numbers_through() -> None:
    """With 2**63 + 1 nearly half of all raw numbers are passed over."""
    bound = 2**63 + 1
    stream, raws = Stream(5, "m", "s", "t"), Stream(5, "m", "s", "t").raw(100).tolist()
    kept = [raw for raw in raws if raw < bound]
    assert [stream.below(bound) for _ in kept] == kept


@pytest.mark.parametrize("bound", [0, -3, 2**64 + 1])
def test_impossible_bounds_are_refused_with_their_value(bound: int) -> None:
    """A bound of 0 would loop for ever."""
    with pytest.raises(ValueError, match=str(bound)):
        Stream(1, "m", "s", "t").below(bound)


def test_every_order_of_four_is_equally_likely() -> None:
    """All 24 orders within 4 binomial standard errors of n/24."""
    n = 12_000
    stream = Stream(9, "main", "site", "order")
    found = Counter(tuple(stream.permutation(4)) for _ in range(n))
    tolerance = 4 * math.sqrt(n * (1 / 24) * (23 / 24))
    assert set(found) == set(permutations(range(4)))
    assert all(abs(count - n / 24) < tolerance for count in found.values())


@pytest.mark.parametrize("count", [0, 1])
def test_orders_of_nothing_and_of_one_are_trivial(count: int) -> None:
    """A grid may hold one place, a plan no duplicate."""
    assert Stream(1, "m", "s", "t").permutation(count) == list(range(count))
