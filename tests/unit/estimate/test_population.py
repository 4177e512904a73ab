"""For what the mean speaks: ground not reached, and places that do not belong to it."""

import numpy as np
import pytest

from fieldplan.design.model import MeanEstimate, StratumEstimate
from fieldplan.estimate import estimate
from fieldplan.estimate.population import mean_without, share_outside
from fieldplan.returns.model import LostLocation
from tests.unit.estimate.known import result, returned, strata_plan

WEIGHTS = {"pasture": 0.65, "tip": 0.17, "yard": 0.18}
COUNTS = {"pasture": 14, "tip": 12, "yard": 7}
MEANS = {"pasture": 57.0, "tip": 302.0, "yard": 130.0}


def test_places_found_outside_cut_the_weight_of_their_stratum_beside_the_answer() -> None:
    """By hand: weights 0.65, 0.17·8/12, 0.18 sum to 0.94333; 94.6767 / 0.94333 is 100.4.

    The mean of the recorded weights, 37.05 + 51.34 + 23.4, is 111.79.
    """
    plan = strata_plan(WEIGHTS, dict.fromkeys(WEIGHTS, 30.0), COUNTS)
    lost = [LostLocation(f"tip-{n}", "tip", "outside", "") for n in range(1, 5)]
    results = [
        result(f"{name}-{n}", MEANS[name] + (-1) ** n * 3, stratum=name)
        for name, count in COUNTS.items()
        for n in range(5 if name == "tip" else 1, count + 1)
        if name != "yard" or n > 1
    ]
    answer = estimate(plan, returned(results, lost))
    assert answer.mean.mean == pytest.approx(111.79)
    said = answer.population_sentence
    assert "4 of 12 places of tip outside the population: about 5.7 % of what was mapped" in said
    assert "take nothing to lie outside" in said
    assert "the mean would be 100 mg/kg instead of 112 mg/kg" in said
    assert said in answer.sentences
    assert "outside the population:" not in estimate(plan, returned(results)).population_sentence


def test_in_a_single_stratum_the_mean_does_not_move_but_what_it_speaks_for_shrinks() -> None:
    """Cutting the only weight cancels out."""
    plan = strata_plan({"site": 1.0}, {"site": 8.0}, {"site": 5})
    results = [result(f"site-{n}", 10.0 + n, stratum="site") for n in range(1, 5)]
    lost = [LostLocation("site-5", "site", "outside", "")]
    said = estimate(plan, returned(results, lost)).population_sentence
    assert "1 of 5 places of site outside the population: about 20 % of what" in said
    assert "the mean itself does not move" in said


def test_cutting_weights_by_the_shares_found_meets_the_mean_of_what_lies_inside() -> None:
    """Simulation: a third of the tip does not belong; the weights as mapped are far off.

    4000 campaigns, seed 12; tolerance 4 standard errors of the simulated mean. The mean of a
    ratio is off by about W² p (1 - p) / n · (302 - 100) = 0.11, a quarter of that tolerance.
    """
    plan = strata_plan(WEIGHTS, dict.fromkeys(WEIGHTS, 30.0), COUNTS)
    noise = np.random.default_rng(12)
    inside = {"pasture": 1.0, "tip": 2 / 3, "yard": 1.0}
    true = sum(WEIGHTS[k] * inside[k] * MEANS[k] for k in WEIGHTS)
    true /= sum(WEIGHTS[k] * inside[k] for k in WEIGHTS)
    cut, mapped = [], []
    for _ in range(4000):
        strata, lost = [], []
        for name, count in COUNTS.items():
            n = int(noise.binomial(count, inside[name]))
            mean = MEANS[name] + 40 * noise.standard_normal() / n**0.5
            strata.append(StratumEstimate(name, n, mean, 40.0, WEIGHTS[name], 1.0))
            lost += [LostLocation(f"{name}-{k}", name, "outside", "") for k in range(count - n)]
        whole = MeanEstimate(33, 0.0, 1.0, 20.0, tuple(strata), "")
        cut.append(mean_without(whole, share_outside(plan, lost)))
        mapped.append(mean_without(whole, {}))
    tolerance = 4 * np.std(cut) / len(cut) ** 0.5
    assert np.mean(cut) == pytest.approx(true, abs=tolerance)
    assert abs(np.mean(mapped) - true) > 10 * tolerance
