"""Results from several random starts: starts come from the record, the working gives the answer."""

import math
from dataclasses import replace

import pytest

from fieldplan.base.working import Step
from fieldplan.estimate.means import means_by
from fieldplan.estimate.working import working
from fieldplan.returns.model import Returns
from tests.factories import make_returns
from tests.unit.estimate.known import result
from tests.unit.packet.line_plans import line_plan


def returned(without: tuple[str, ...] = (), used: tuple[str, ...] = ()) -> Returns:
    """Results that rise along each branch, at all random locations but some, and at alternates."""
    results = [
        result(
            place.location_id,
            40 + 0.05 * (place.along_m or 0.0) + number % 3,
            stratum=place.stratum,
            location_class=place.location_class,
        )
        for number, place in enumerate(line_plan().locations.places)
        if place.location_id not in without
        and (place.location_class == "random" or place.location_id in used)
    ]
    return replace(make_returns(), results=tuple(results), lost=())


def amounts(step: Step) -> dict[str, float]:
    """Inputs of a step by their symbols."""
    return {quantity.symbol: float(quantity.value) for quantity in step.inputs}


@pytest.mark.parametrize("lost", [False, True])
def test_printed_inputs_give_the_printed_standard_error(lost):
    """Σ m (x̄ − mean)²/(n (k − 1)) by stratum and √(Σ W² V), from the inputs of the steps alone."""
    plan = line_plan()
    places = plan.locations.places
    gone = (places[0].location_id,) if lost else ()
    spare = next(p for p in places if p.location_class == "alternate" and p.stratum == "lower")
    means = means_by(
        plan, returned(gone, (spare.location_id,) if lost else ()), plan.campaign.rules
    )
    steps = {step.symbol: step for step in working(means, "mg/kg")}
    total = 0.0
    for name in ("lower", "upper"):
        told = amounts(steps[f"V {name}"])
        k = int(told["k"])
        centre = told[f"mean {name}"]
        squares = sum(told[f"m {j}"] * (told[f"mean {j}"] - centre) ** 2 for j in range(1, k + 1))
        assert sum(told[f"m {j}"] for j in range(1, k + 1)) == told["n"]
        variance = squares / (told["n"] * (k - 1))
        assert steps[f"V {name}"].unrounded == pytest.approx(variance)
        total += plan.frame.stratum(name).weight ** 2 * variance
    assert means.half.standard_error == pytest.approx(math.sqrt(total))
    assert steps["SE"].unrounded == pytest.approx(math.sqrt(total))
    parts = amounts(steps["df"])
    own = [(parts[f"part {n}"], parts[f"k {n}"] - 1) for n in ("lower", "upper")]
    freedom = sum(p for p, _ in own) ** 2 / sum(p**2 / f for p, f in own)
    assert means.half.degrees_of_freedom == pytest.approx(freedom)


def test_an_alternate_counts_with_the_start_that_the_record_gives_it():
    """It stands in for a lost location, and its result belongs to one start."""
    plan = line_plan()
    spare = next(p for p in plan.locations.places if p.location_class == "alternate")
    assert spare.start == 1
    means = means_by(plan, returned((), (spare.location_id,)), plan.campaign.rules)
    without = means_by(plan, returned(), plan.campaign.rules)
    own = next(e for e in means.half.start_variances if e.stratum == spare.stratum)
    before = next(e for e in without.half.start_variances if e.stratum == spare.stratum)
    assert own.counts[0] == before.counts[0] + 1
    assert own.counts[1:] == before.counts[1:]
