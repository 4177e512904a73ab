"""Results in compact cells: cells come from the record, and the working gives what is printed."""

from dataclasses import replace

import numpy as np
import pytest

from fieldplan.base.working import Step
from fieldplan.campaign.model import DesignTable, Draw
from fieldplan.design import locate
from fieldplan.design.model import StratumCount
from fieldplan.estimate.means import Means, means_by, planned_cells
from fieldplan.estimate.working import working
from fieldplan.plan.model import Plan
from fieldplan.plan.record import plan_from_record, plan_to_record
from fieldplan.returns.model import LocationResult, Returns
from fieldplan.sizing.model import StratumSize
from tests.factories import make_campaign, make_plan, make_returns, make_size
from tests.unit.design.sites import MEADOW_POLYGON, YARD_POLYGON, area_frame

FRAME = area_frame(meadow=MEADOW_POLYGON, yard=YARD_POLYGON)


def planned(counts: dict[str, int], **keys: object) -> Plan:
    """Plan both strata in cells, two alternates each."""
    design = DesignTable(layout="compact-strata", alternates=2, **keys)  # type: ignore[arg-type]
    campaign = make_campaign(design=(design,), draw=Draw(seed=3))
    sizes = tuple(
        StratumSize(s.name, s.weight, 10.0, counts[s.name], counts[s.name], 2) for s in FRAME.strata
    )
    total = sum(counts.values())
    return make_plan(
        campaign=campaign,
        frame=FRAME,
        size=replace(make_size(), strata=sizes, needed=total, planned=total),
        locations=locate(campaign, FRAME, [StratumCount(n, k, 2) for n, k in counts.items()]),
    )


def returned(plan: Plan, without: tuple[str, ...] = (), used: tuple[str, ...] = ()) -> Returns:
    """Results that rise eastward at all random locations but some, and at some alternates."""
    results = []
    for number, place in enumerate(plan.locations.places):
        if place.location_id in without:
            continue
        if place.location_class == "alternate" and place.location_id not in used:
            continue
        value = 50 + 0.2 * place.easting + number % 3
        results.append(
            LocationResult(
                place.location_id, place.stratum, place.location_class, (), (),
                value, value, value, True, True, "", place.latitude, place.longitude,
                None, None, None, "",
            )
        )  # fmt: skip
    return replace(make_returns(), results=tuple(results), lost=())


def answered(plan: Plan, returns: Returns) -> Means:
    """Estimate by the plan's own rules."""
    return means_by(plan, returns, plan.campaign.rules)


def step(steps: tuple[Step, ...], symbol: str) -> Step:
    """Find one step."""
    return next(found for found in steps if found.symbol == symbol)


def inputs(found: Step) -> dict[str, float]:
    """Give the inputs of a step by their symbols."""
    return {quantity.symbol: quantity.value for quantity in found.inputs}


def test_an_alternate_counts_in_the_cell_in_which_it_lies() -> None:
    """Recomputed from the plan's places alone, cell by cell."""
    plan = planned({"meadow": 9, "yard": 6})
    spare = next(p for p in plan.locations.of_class("alternate") if p.stratum == "yard")
    lost = next(
        p for p in plan.locations.of_class("random") if p.stratum == "yard" and p.cell != spare.cell
    )
    means = answered(plan, returned(plan, without=(lost.location_id,), used=(spare.location_id,)))
    yard = means.values[1]
    assert yard.cells is not None
    assert sorted(yard.cells.tolist()) == sorted(
        [c for c in range(1, 7) if c != lost.cell] + [spare.cell]
    )
    entry = means.half.cell_variances[1]
    (joined,) = entry.joined
    assert joined[0] == lost.cell
    shares = {cell.number: cell.share for cell in planned_cells(plan, "yard")}
    shares[joined[1]] += shares.pop(lost.cell)
    by_hand = sum(a * yard.values[yard.cells == c].mean() for c, a in shares.items())
    assert means.half.strata[1].mean == pytest.approx(by_hand)


def test_the_working_gives_the_printed_numbers() -> None:
    """Each step recomputed from its own inputs, pairs and few cells."""
    plan = planned({"meadow": 9, "yard": 6})
    means = answered(plan, returned(plan))
    steps = working(means, "mg/kg")
    for name, count in (("meadow", 9), ("yard", 6)):
        shown = inputs(step(steps, f"mean {name}"))
        total = sum(shown[f"a {c}"] * shown[f"m {c}"] for c in range(1, count + 1))
        assert total == pytest.approx(step(steps, f"mean {name}").unrounded)
        variance = step(steps, f"V {name}")
        assert sum(inputs(variance).values()) == pytest.approx(variance.unrounded)
    error = inputs(step(steps, "SE"))
    squared = sum(error[f"W {name}"] ** 2 * error[f"V {name}"] for name in ("meadow", "yard"))
    assert squared**0.5 == pytest.approx(means.half.standard_error)
    freedom = inputs(step(steps, "df"))
    assert freedom["Σ v"] == pytest.approx(squared)
    known = freedom["Σ v"] ** 2 / freedom["Σ (v²/(f + 2))"] - 2
    assert min(max(known, 1.0), freedom["Σ f"]) == pytest.approx(means.half.degrees_of_freedom)


def test_many_cells_are_summed_up_and_curves_shown_by_their_averages() -> None:
    """No working of hundreds of lines; the curve's step carries what it rests on."""
    plan = planned({"meadow": 30, "yard": 6}, variance="covariance")
    means = answered(plan, returned(plan))
    steps = working(means, "mg/kg")
    assert "a min" in inputs(step(steps, "mean meadow"))
    shown = inputs(step(steps, "V meadow"))
    assert 0 <= shown["ν"] <= 1
    assert 0 <= shown["c"] <= 1
    assert shown["q"] == pytest.approx(1 / 30, rel=0.01)
    assert "v 1 + " in " ".join(inputs(step(steps, "V yard")))
    assert [entry.rule for entry in means.half.cell_variances] == ["covariance", "pairs"]


def test_cells_come_back_from_the_record_as_they_were_drawn() -> None:
    """The estimate reads the record alone; nothing is cut anew for it."""
    plan = planned({"meadow": 8, "yard": 4}, per_cell=2)
    again = plan_from_record(plan_to_record(plan))
    assert again.locations == plan.locations
    assert planned_cells(again, "meadow") == planned_cells(plan, "meadow")
    shares = [cell.share for cell in planned_cells(again, "meadow")]
    assert np.sum(shares) == pytest.approx(1.0)


def test_records_from_before_cells_still_read() -> None:
    """Places of an older record have no cell."""
    record = plan_to_record(make_plan())
    for place in record["locations"]["places"]:
        for key in ("cell", "cell_share", "cell_centre"):
            del place[key]
    from fieldplan.plan.record import seal

    record["seal"] = seal(record)
    assert {p.cell for p in plan_from_record(record).locations.places} == {0}
