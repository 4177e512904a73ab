"""Verticals of a cross-section: middles of widths, and centroids of equal discharge."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import cumulative_trapezoid

from fieldplan.stats.verticals import (
    equal_discharge_verticals,
    equal_width_verticals,
    station_discharges,
)

TAPE = [3.0, 5.0, 7.5, 9.0, 12.0, 16.0, 18.0]
DEPTH = [0.0, 0.6, 1.1, 1.4, 1.2, 0.5, 0.0]
SPEED = [0.0, 0.21, 0.38, 0.52, 0.44, 0.18, 0.0]


def test_mid_sections_worked_by_hand():
    """Width half-way to both neighbours times depth times velocity; edges carry nothing.

    Station 2: (2.0 + 2.5)/2 = 2.25 m · 0.6 m · 0.21 m/s = 0.2835 m³/s; station 3: 2.0 · 1.1 · 0.38
    = 0.836; station 4: 2.25 · 1.4 · 0.52 = 1.638; station 5: 3.5 · 1.2 · 0.44 = 1.848; station 6:
    3.0 · 0.5 · 0.18 = 0.27.
    """
    flows = station_discharges(TAPE, DEPTH, SPEED)
    assert flows == pytest.approx([0.0, 0.2835, 0.836, 1.638, 1.848, 0.27, 0.0])


@pytest.mark.parametrize("count", [1, 2, 5, 10])
def test_each_centroid_halves_its_share_of_the_discharge(count):
    """By brute force: the flow a metre summed in steps of a millimetre up to each vertical."""
    found = equal_discharge_verticals(TAPE, DEPTH, SPEED, count)
    borders = np.array([3.0, 4.0, 6.25, 8.25, 10.5, 14.0, 17.0, 18.0])
    flows = np.array([0.0, 0.2835, 0.836, 1.638, 1.848, 0.27, 0.0])
    at = np.arange(3.0, 18.0, 0.001) + 0.0005
    number = np.searchsorted(borders, at, side="right") - 1
    a_metre = flows[number] / np.diff(borders)[number]
    summed = np.cumsum(a_metre) * 0.001 / flows.sum()
    shares = np.interp(found, at, summed)
    assert shares == pytest.approx((np.arange(count) + 0.5) / count, abs=2e-4)


def test_a_parabola_agrees_with_its_integral():
    """A fine gauging of depth 4x(1 − x) and even velocity: centroids by the closed integral.

    Discharge up to x is 3x² − 2x³ of the whole.
    """
    tape = np.linspace(0.0, 1.0, 2001)
    depth = 4 * tape * (1 - tape)
    found = equal_discharge_verticals(tape, depth, np.ones_like(tape), 4)
    assert 3 * found**2 - 2 * found**3 == pytest.approx([0.125, 0.375, 0.625, 0.875], abs=1e-5)
    by_scipy = cumulative_trapezoid(depth, tape, initial=0.0)
    assert np.interp(found, tape, by_scipy / by_scipy[-1]) == pytest.approx(
        [0.125, 0.375, 0.625, 0.875], abs=1e-5
    )


@given(st.floats(-50, 50), st.floats(0.5, 80), st.integers(1, 40))
def test_equal_widths_are_even_and_inside(left, width, count):
    """Half a width from each edge, a width apart; even depth and speed give the same places."""
    found = equal_width_verticals(left, left + width, count)
    assert found[0] - left == pytest.approx(width / count / 2)
    assert left + width - found[-1] == pytest.approx(width / count / 2)
    if count > 1:
        assert np.diff(found) == pytest.approx(np.full(count - 1, width / count))


def test_a_tape_from_the_other_bank_gives_the_same_verticals():
    """Which bank the tape starts at is nobody's business."""
    found = equal_discharge_verticals(TAPE, DEPTH, SPEED, 5)
    other = equal_discharge_verticals(TAPE[::-1], DEPTH[::-1], SPEED[::-1], 5)
    assert other[::-1] == pytest.approx(found)
    assert equal_width_verticals(12.0, 2.0, 5).tolist() == [11.0, 9.0, 7.0, 5.0, 3.0]


def test_still_water_between_two_channels_gets_no_vertical():
    """A bar without flow carries no share."""
    found = equal_discharge_verticals(
        [0, 2, 4, 6, 8, 10, 12], [0, 1, 0, 0, 0, 1, 0], [0, 1, 0, 0, 0, 1, 0], 4
    )
    assert not ((found > 3.0) & (found < 9.0)).any()


@pytest.mark.parametrize(
    ("call", "words"),
    [
        (lambda: equal_width_verticals(2.0, 2.0, 3), "leave no width"),
        (lambda: equal_width_verticals(2.0, 4.0, 0), "0 verticals were asked for"),
        (lambda: equal_discharge_verticals(TAPE, DEPTH, SPEED, 0), "0 verticals"),
        (lambda: station_discharges([0, 1], [0, 0], [0, 0]), "2 distances, 2 depths"),
        (lambda: station_discharges([0, 1, 2], [0, -1, 0], [0, 1, 0]), "station 2 has a depth of"),
        (lambda: station_discharges([0, 1, 2], [0, 1, 0], [0, float("nan"), 0]), "velocity of nan"),
        (lambda: station_discharges([0, 2, 1], [0, 1, 0], [0, 1, 0]), "station 3 at 1 m is out of"),
        (lambda: station_discharges([0, 0, 1], [0, 1, 0], [0, 1, 0]), "station 2 at 0 m is out of"),
        (lambda: station_discharges([0, 1, 2], [0, 1, 0], [0, 0, 0]), "leave no discharge"),
    ],
)
def test_gaugings_that_cannot_serve_are_refused(call, words):
    """Which station, which number, what to do."""
    with pytest.raises(ValueError, match=words):
        call()
