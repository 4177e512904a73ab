"""Pilots that are bunched, weighed by area."""

import numpy as np
import pytest

from fieldplan.sizing.beside.bunched import finding
from tests.factories import make_frame
from tests.unit.sizing.beside.test_space import (
    amounts,
    asked_with,
    entry,
    field_at,
    one_frame,
    random_places,
)


def test_bunched_places_are_weighed_by_area_with_a_warning() -> None:
    """Half of the pilot lies round one source; its mean and s by area stand beside n."""
    random = np.random.default_rng(1)
    near = random.uniform([20, 20], [45, 45], (14, 2))
    places = np.vstack([near, random_places(14, seed=9)])
    values = [*(random.normal(150, 5, 14)), *(random.normal(60, 5, 14))]
    asked, size = asked_with(one_frame(), entry(places, [float(v) for v in values]))
    found = finding(asked, size)
    assert found is not None
    assert "28 places are bunched" in found.answer
    numbers = amounts(found)
    assert (numbers["weighed_mean"] or 999) < np.mean(values) - 20
    assert (numbers["worth"] or 999) < 20
    ratio = (float(numbers["weighed_sigma"] or 0) / float(np.std(values, ddof=1))) ** 2
    n = int(np.ceil((size.unrounded or 0) * ratio))
    assert f"the weighed one would take {n} results" in found.warnings[0]
    assert size.unrounded == pytest.approx(float(np.var(values, ddof=1)) / 9)


def test_an_even_pilot_is_no_bunched_one() -> None:
    """Nothing is said of places drawn at random, of few places, or of places without a map."""
    for n in (7, 25, 40):
        places = random_places(n)
        assert finding(*asked_with(one_frame(), entry(places, field_at(places)))) is None


def test_strata_are_looked_at_one_by_one() -> None:
    """A denser stratum is no bunched pilot, but one end of a stratum is: each has its own draw."""
    random = np.random.default_rng(6)
    meadow = random.uniform([2, 2], [138, 118], (12, 2))
    whole = random.uniform([142, 62], [198, 118], (30, 2))
    whole[::2] -= [0, 60]
    whole = whole[~((abs(whole - [170, 50]) < 12).all(axis=1))]
    end = random.uniform([142, 2], [158, 18], (20, 2))
    pilots = entry(meadow, field_at(meadow), "meadow"), entry(whole, field_at(whole), "yard")
    assert finding(*asked_with(make_frame(), *pilots, target=5.0)) is None
    pilots = entry(meadow, field_at(meadow), "meadow"), entry(end, field_at(end), "yard")
    found = finding(*asked_with(make_frame(), *pilots, target=5.0))
    assert found is not None
    assert "20 places in yard are bunched" in found.answer
    assert "meadow" not in found.answer
    assert set(amounts(found)) == {"worth_yard", "weighed_mean_yard", "weighed_sigma_yard"}
