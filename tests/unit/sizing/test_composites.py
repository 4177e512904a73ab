"""Designs of composites: n counts composites, and the choice of increments is the cheapest."""

import math

import numpy as np
import pytest

from fieldplan.base.errors import DesignError
from fieldplan.cli.size_options import BadOption
from fieldplan.design import locate
from fieldplan.design.model import StratumCount
from fieldplan.lab.model import PartSpread, SplitSpread, Spread, StratumSpread
from fieldplan.sizing import Size, size, size_asked
from fieldplan.sizing.composites import spread_of_composites
from fieldplan.stats.composite_costs import (
    CompositePrices,
    Limits,
    cheapest_for_standard_error,
    most_precise_for_budget,
)
from fieldplan.stats.composites import ErrorParts, composite_sigma
from fieldplan.stats.distributions import chi_square_quantile
from fieldplan.stats.nested import nested_components
from tests.factories import make_campaign, make_frame
from tests.unit.sizing.askings import asked_mean

PARTS = ErrorParts(24.0, 10.0, 5.0)
SIGMAS = ("sigma.sampling=10", "sigma.analysis=5")
PRICES = (
    "cost.currency=EUR",
    "cost.per_increment=4",
    "cost.per_location=30",
    "cost.per_analysis=60",
)


def sized(*keys: str, target: float = 3.0, **typed: object) -> Size:
    """Size bare numbers with keys of a campaign."""
    return size_asked(
        asked_mean(
            sigma=PARTS.total, standard_error=target, keys=(*SIGMAS, *PRICES, *keys), **typed
        )
    )


def test_n_is_the_number_of_composites_whatever_the_increments() -> None:
    """By the formula of a composite: (576 + 100)/k + 25, over 9, rounded up."""
    for k in (2, 10, 30, 400):
        found = sized(f"design.increments={k}")
        assert found.needed == math.ceil((676 / k + 25) / 9)
        assert (found.increments, found.replicates) == (k, found.needed)
        assert found.strata[0].sigma == pytest.approx(composite_sigma(PARTS, k))
        assert found.cost == found.needed * (90 + 4 * k)
    assert (sized().increments, sized().replicates) == (1, 1)


def test_increments_round_one_place_leave_the_differences_between_places() -> None:
    """576 + 100/k + 25: no number of increments brings it below 601 of 701."""
    keys = ("design.increments=50", 'design.increments_at="one-place"')
    found = sized(*keys)
    assert found.needed == math.ceil((576 + 2 + 25) / 9)
    assert "all round one location" in found.sentences[1]


@pytest.mark.parametrize("target", [0.8, 1.5, 3.0, 6.0])
@pytest.mark.parametrize("price", [0.5, 4.0, 40.0])
def test_the_chosen_increments_are_the_cheapest(target: float, price: float) -> None:
    """Two routes: the design search of stats, and brute force over every number by hand."""
    key = f"cost.per_increment={price}"
    found = sized("design.increments=choose", key, target=target)
    prices, limits = CompositePrices(price, 90.0), Limits(most_increments=100)
    best = cheapest_for_standard_error(PARTS, target, prices, limits=limits)
    assert found.cost == pytest.approx(best.cost)
    counts = [max(2, math.ceil((676 / k + 25) / target**2 - 1e-9)) for k in range(1, 101)]
    each = [n * (90 + price * k) for k, n in enumerate(counts, start=1)]
    assert found.cost == pytest.approx(min(each))


def _campaign(text: dict[str, object], **objective: object) -> Size:
    """Size the two strata of Quarry Field with their sigma split."""
    campaign = make_campaign()
    design = campaign.design[0].model_copy(update={"increments": "choose", **text})
    asked = campaign.objective[0].model_copy(
        update={"standard_error": None, "assurance": "plain", **objective}
    )
    cost = campaign.cost
    assert cost is not None
    cost = cost.model_copy(update={"per_increment": 3.0})
    changed = campaign.model_copy(update={"design": (design,), "objective": (asked,), "cost": cost})
    return size(changed, make_split_spread(), make_frame())


def make_split_spread() -> Spread:
    """Two strata whose parts are known, one with twice the spread of the other."""

    def split(stratum: str, between: float) -> SplitSpread:
        sigmas = {"between-locations": between, "sampling": 8.0, "analysis": 4.0}
        return SplitSpread(
            "lead",
            stratum,
            tuple(PartSpread(part, sigma, "typed", 19.0) for part, sigma in sigmas.items()),
            typed=True,
        )

    def whole(stratum: str, between: float) -> StratumSpread:
        sigma = math.hypot(between, 8.0, 4.0)
        return StratumSpread("lead", stratum, sigma, 50.0, 20, "typed")

    return Spread(
        "lead",
        "mg/kg",
        (whole("meadow", 20.0), whole("yard", 40.0)),
        splits=(split("meadow", 20.0), split("yard", 40.0)),
    )


def test_a_budget_is_spent_where_it_is_most_precise() -> None:
    """Brute force over the increments; the numbers of the search must buy no less."""
    chosen = _campaign({}, budget=2500.0)
    each = [_campaign({"increments": k}, budget=2500.0).standard_error for k in range(2, 58)]
    assert chosen.standard_error == pytest.approx(min(e for e in each if e is not None))
    assert chosen.cost is not None
    assert chosen.cost <= 2500.0


def test_a_budget_for_one_stratum_agrees_with_the_search_of_stats() -> None:
    """Two routes to one design; mobilisation is 0 here."""
    best = most_precise_for_budget(PARTS, 1300.0, CompositePrices(4.0, 90.0))
    for k in range(2, 101, 7):
        found = sized(f"design.increments={k}")
        if found.cost is not None and found.cost <= 1300.0 and found.standard_error is not None:
            assert best.standard_error <= found.standard_error * (1 + 1e-9)


def test_typed_replicates_get_the_fewest_increments_that_do() -> None:
    """One increment fewer would need another composite."""
    found = sized("design.increments=choose", "design.replicates=6")
    assert (found.needed, found.number_from) == (6, "locations")
    assert (676 / found.increments + 25) / 6 <= 9
    assert (676 / (found.increments - 1) + 25) / 6 > 9
    with pytest.raises(DesignError, match="replicates = 2 do not meet the target"):
        sized("design.increments=choose", "design.replicates=2")


def test_a_chance_follows_the_degrees_of_freedom_of_the_parts() -> None:
    """By hand for the meadow: Satterthwaite over 400/k, 64/k and 16 with 19 each."""
    design = make_campaign().design[0].model_copy(update={"increments": 10})
    entry = spread_of_composites(make_split_spread(), design).strata[0]
    terms = (40.0, 6.4, 16.0)
    worth = sum(terms) ** 2 / sum(term**2 / 19 for term in terms)
    assert entry.sigma == pytest.approx(math.sqrt(62.4))
    assert entry.results == math.floor(worth) + 1


def test_the_shape_of_a_composite_is_that_of_a_mean() -> None:
    """Gamma, closed form: the mean of k has skewness over √k and excess kurtosis over k."""
    design = make_campaign().design[0].model_copy(update={"increments": 16})
    parts = (PartSpread("between-locations", 9.0, "x"), PartSpread("analysis", 1e-9, "x"))
    entry = StratumSpread(
        "lead", "meadow", 9.0, 9.0, 20, "x", values=(1.0, 2.0), skewness=2.0, excess_kurtosis=6.0
    )
    spread = Spread("lead", "mg/kg", (entry,), splits=(SplitSpread("lead", "meadow", parts),))
    found = spread_of_composites(spread, design).strata[0]
    assert found.skewness == pytest.approx(0.5)
    assert found.excess_kurtosis == pytest.approx(6 / 16)
    assert found.values == (), "values of single samples are none of composites"


def test_composites_whose_parts_nobody_knows_are_refused() -> None:
    """Which part is missing depends on what increments average."""
    spread = Spread("lead", "mg/kg", make_split_spread().strata)
    design = make_campaign().design[0].model_copy(update={"increments": 30})
    with pytest.raises(DesignError, match=r'average the ground only.*part = "analysis"'):
        spread_of_composites(spread, design)
    near = design.model_copy(update={"increments_at": "one-place"})
    with pytest.raises(DesignError, match=r'sampling at one place only.*part = "sampling"'):
        spread_of_composites(spread, near)


def test_no_map_draws_composites_as_locations() -> None:
    """Increments that came back as results would count as n."""
    campaign = make_campaign()
    design = campaign.design[0].model_copy(update={"increments": 30})
    changed = campaign.model_copy(update={"design": (design,)})
    counts = [StratumCount("meadow", 3, 0), StratumCount("yard", 3, 0)]
    with pytest.raises(DesignError, match=r"design.increments = 30: locations of increments"):
        locate(changed, make_frame(), counts)


def test_bad_keys_are_refused_on_the_command_line() -> None:
    """The same checks as in a file."""
    with pytest.raises(BadOption, match=r"design\.increments"):
        sized("design.increments=0")
    with pytest.raises(BadOption, match=r"^--with sigma\.analysis: "):
        asked_mean(sigma=9.0, standard_error=1.0, keys=("sigma.analysis=-4",))
    with pytest.raises(BadOption, match="leave nothing of the whole"):
        asked_mean(sigma=9.0, standard_error=1.0, keys=("sigma.analysis=9.5",))


@pytest.mark.slow
@pytest.mark.parametrize(("increments", "lowest"), [(10, 0.76), (30, 0.78)])
def test_a_stated_chance_is_about_kept_by_simulated_pilots(increments: int, lowest: float) -> None:
    """Simulation, seed fixed: 10 places, 2 jars, 2 analyses; 80 % stated.

    Satterthwaite over parts of one file is approximate: 78 to 84 % were measured, and the bounds
    stand 4·√(0.8·0.2/R) away from them.
    """
    rng, runs = np.random.default_rng(41), 1200
    room = 4 * math.sqrt(0.16 / runs)
    design = make_campaign().design[0].model_copy(update={"increments": increments})
    truth = composite_sigma(PARTS, increments)
    kept = 0
    for _ in range(runs):
        ground = rng.normal(0, 24, (10, 1, 1)) + rng.normal(0, 10, (10, 2, 1))
        found = nested_components((ground + rng.normal(0, 5, (10, 2, 2))).tolist())
        parts = tuple(
            PartSpread(c.stage.replace(" l", "-l"), c.sigma, "x", c.degrees_of_freedom)
            for c in found.components
        )
        whole = StratumSpread("lead", "meadow", math.sqrt(found.total), None, 10, "x")
        spread = Spread("lead", "", (whole,), splits=(SplitSpread("lead", "meadow", parts),))
        entry = spread_of_composites(spread, design).strata[0]
        # n follows s as n = s²/SE² with the upper limit of s² put in; it is enough where that
        # limit is above the true variance.
        known = entry.degrees_of_freedom or 1
        kept += entry.sigma**2 * known / chi_square_quantile(0.2, known) >= truth**2
    assert lowest - room <= kept / runs <= 0.84 + room


def test_a_typed_analysis_leaves_the_pilot_of_the_whole_to_hold_the_chance():
    """Source: simulation: pilots of 8 single samples, the analysis exact; 80 % or more."""
    rng = np.random.default_rng(8)
    between, analysis, k, target = 26.0, 5.0, 3, 3.0
    true = math.sqrt(between**2 / k + analysis**2)
    campaigns, kept = 400, 0
    for _ in range(campaigns):
        s = rng.normal(0, math.hypot(between, analysis), 8).std(ddof=1)
        s = max(s, 1.01 * analysis)
        asked = asked_mean(
            sigma=float(s), results=8, standard_error=target, assurance=0.8,
            keys=(f"sigma.analysis={analysis}", f"design.increments={k}"),
        )  # fmt: skip
        kept += true / math.sqrt(size_asked(asked, beside=()).needed) <= target
    assert kept / campaigns >= 0.8 - 4 * math.sqrt(0.8 * 0.2 / campaigns)
