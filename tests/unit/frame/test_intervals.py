"""Stretches of a line: unions and cuts against sets of single millimetres."""

from itertools import pairwise

from hypothesis import given
from hypothesis import strategies as st

from fieldplan.frame.intervals import shared, total_m, united, without

stretches = st.lists(
    st.tuples(st.integers(0, 40), st.integers(0, 40)).filter(lambda pair: pair[0] <= pair[1]),
    max_size=6,
)


def millimetres(intervals):
    """The single millimetres that stretches hold: a brute force of all three operations."""
    return {at for low, high in intervals for at in range(low, high)}


@given(stretches, stretches)
def test_unions_shares_and_cuts_are_those_of_sets(first, second):
    """Python's own sets are the oracle."""
    one, other = united(first), united(second)
    assert millimetres(one) == millimetres(first)
    assert millimetres(shared(one, other)) == millimetres(first) & millimetres(second)
    assert millimetres(without(one, other)) == millimetres(first) - millimetres(second)
    assert round(1000 * total_m(one)) == len(millimetres(first))


@given(stretches)
def test_stretches_are_in_order_and_apart(first):
    """Two that touch are one; an empty one is none."""
    found = united(first)
    assert all(low < high for low, high in found)
    assert all(a[1] < b[0] for a, b in pairwise(found))
