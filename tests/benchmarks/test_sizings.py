"""Every closed-form answer comes at once, beside one draw of the evidence it saves."""

import numpy as np
import pytest

from fieldplan.sizing import size_asked
from tests.benchmarks.placement import seconds
from tests.benchmarks.sizings import QUESTIONS, asked_of


def thrown_campaigns() -> float:
    """Draw 20,000 campaigns of 60 results and their spread: the plain way to a chance."""
    rng = np.random.default_rng(1)
    return float(rng.normal(size=(20_000, 60)).std(axis=1, ddof=1).mean())


@pytest.mark.benchmark
@pytest.mark.parametrize("name", list(QUESTIONS))
def test_an_answer_takes_less_than_simulating_a_few_numbers(name: str) -> None:
    """One simulation gives a chance at one n; to find n by them takes more than five."""
    asked = asked_of(name)
    peer = seconds(thrown_campaigns, 3)
    assert seconds(lambda: size_asked(asked, beside=()), 5) < 5 * peer
