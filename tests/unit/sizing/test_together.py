"""Several analytes, and costs that differ, through the whole question: brute force and bounds."""

import itertools
import math
from dataclasses import replace

import pytest

from fieldplan.base.errors import CampaignError, DesignError
from fieldplan.campaign.model import Cost, DesignTable
from fieldplan.sizing import size
from fieldplan.sizing.answer import answer
from fieldplan.sizing.counting import (
    affordable_counts,
    needed_counts,
    plain_counts,
    planned_counts,
    total_cost,
)
from fieldplan.sizing.money import Prices
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import ControlRate, Part, Question, TargetKind
from fieldplan.sizing.together import everyone, keeps
from fieldplan.stats.allocation import Allocation, share_total
from tests.factories import make_frame
from tests.several_analytes import campaign_with_zinc, spread_with_zinc, zinc_objective

WEIGHTS, LEAD, ZINC = (0.5, 0.3, 0.2), (10.0, 20.0, 30.0), (30.0, 10.0, 8.0)
PRICES = Prices("EUR", mobilisation=100.0, per_location=30.0, per_analysis=45.0)


def parts(sigmas: tuple[float, ...], **more: object) -> tuple[Part, ...]:
    """Three strata; keyword arguments hold one value for each."""
    rows = [dict(zip(more, row, strict=True)) for row in zip(*more.values(), strict=True)]
    rows = rows or [{}, {}, {}]
    return tuple(
        Part(name, w, s, **row)
        for name, w, s, row in zip("abc", WEIGHTS, sigmas, rows, strict=True)
    )


def both(
    allocation: Allocation = "neyman", *, lead: float = 6.0, zinc: float = 6.0, **more: object
) -> Question:
    """Lead and zinc in the same samples."""
    extra = more.pop("extra_cost", None)
    named = {} if extra is None else {"extra_cost": extra}
    other = Question(
        parts(ZINC, **named),
        "standard_error",
        zinc,
        allocation=allocation,
        analyte="zinc",
        **more,  # type: ignore[arg-type]
    )
    return Question(
        parts(LEAD, **named), "standard_error", lead, allocation=allocation, analyte="lead",
        also=(other,), **more,  # type: ignore[arg-type]
    )  # fmt: skip


def every_way(most: int = 22) -> list[tuple[int, ...]]:
    """List all counts of three strata up to a size that no answer here reaches."""
    return list(itertools.product(range(2, most + 1), repeat=3))


def test_both_targets_are_kept_with_the_fewest_results() -> None:
    """Brute force over all counts of three strata."""
    question = both()
    counts = plain_counts(question)
    assert all(keeps(member, counts) for member in everyone(question))
    fewest = min(
        sum(way)
        for way in every_way()
        if all(Precision(m).standard_error(way) <= m.value for m in everyone(question))
    )
    assert sum(counts) == fewest
    assert max(counts) < 22


def test_both_targets_are_kept_for_the_least_money() -> None:
    """Brute force: with a dear third stratum the cheapest counts are not the fewest."""
    question = both("cost-optimal", lead=4.5, prices=PRICES, extra_cost=(0.0, 0.0, 225.0))
    counts = plain_counts(question)
    costs = (75.0, 75.0, 300.0)

    def money(way: tuple[int, ...]) -> float:
        return math.fsum(c * n for c, n in zip(costs, way, strict=True))

    least = min(
        money(way)
        for way in every_way()
        if all(Precision(m).standard_error(way) <= m.value for m in everyone(question))
    )
    assert money(tuple(counts)) == pytest.approx(least)
    assert sum(counts) > sum(plain_counts(both(lead=4.5)))
    assert total_cost(question, counts) == pytest.approx(100 + least)


@pytest.mark.parametrize("allocation", ["proportional", "equal-precision"])
def test_fixed_shares_take_the_smallest_total_that_keeps_both(allocation: Allocation) -> None:
    """One result fewer, shared alike, misses a target."""
    question = both(allocation)
    counts = plain_counts(question)
    assert all(keeps(member, counts) for member in everyone(question))
    fewer = share_total(question.sharing, sum(counts) - 1, allocation=question.allocation)
    assert not all(keeps(member, fewer) for member in everyone(question))


def test_assurances_and_half_widths_of_every_analyte_are_kept() -> None:
    """Each is held to its own; and no single result can be taken away."""
    known = {"results": (8, 8, 8)}
    zinc = Question(
        parts(ZINC, **known), "half_width", 16.0, allocation="neyman", analyte="zinc", assurance=0.8
    )
    lead = Question(
        parts(LEAD, **known), "standard_error", 6.0, allocation="neyman", analyte="lead",
        assurance=0.9, also=(zinc,),
    )  # fmt: skip
    counts = needed_counts(lead)
    assert (Precision(everyone(lead)[0]).chance(counts) or 0) >= 0.9
    assert (Precision(zinc).chance(counts) or 0) >= 0.8
    for k in range(3):
        fewer = [n - (j == k) for j, n in enumerate(counts)]
        assert min(fewer) < 2 or not all(keeps(member, fewer) for member in everyone(lead))


@pytest.mark.parametrize("allocation", ["neyman", "cost-optimal"])
@pytest.mark.parametrize(
    ("lead", "zinc"),
    [
        (("half_width", 14.0, None), ("half_width", 16.0, 0.8)),
        (("standard_error", 6.0, 0.9), ("standard_error", 7.0, None)),
        (("half_width", 13.0, 0.8), ("standard_error", 6.0, 0.67)),
    ],
)
def test_half_widths_and_assurances_are_kept_at_the_least_cost(
    allocation: Allocation,
    lead: tuple[TargetKind, float, float | None],
    zinc: tuple[TargetKind, float, float | None],
) -> None:
    """Brute force over all counts of two strata: neither t nor luck makes another set cheaper."""

    def asked(
        sigmas: tuple[float, float], target: TargetKind, value: float, sure: float | None
    ) -> Question:
        two = tuple(
            Part(name, w, s, results=10, extra_cost=extra)
            for name, w, s, extra in zip("ab", (0.6, 0.4), sigmas, (0.0, 150.0), strict=True)
        )
        return Question(
            two, target, value, allocation=allocation, assurance=sure, prices=PRICES, analyte="x"
        )

    question = replace(asked((12.0, 25.0), *lead), also=(asked((25.0, 10.0), *zinc),))
    costs = (75.0, 225.0) if allocation == "cost-optimal" else (1.0, 1.0)
    counts = needed_counts(question)
    own = costs[0] * counts[0] + costs[1] * counts[1]
    assert all(keeps(member, counts) for member in everyone(question))
    for way in itertools.product(range(2, 60), repeat=2):
        if costs[0] * way[0] + costs[1] * way[1] < own - 1e-9:
            assert not all(keeps(member, way) for member in everyone(question))


def test_an_easy_second_analyte_changes_nothing() -> None:
    """Its target is kept by what the first one needs."""
    alone = replace(both(), also=())
    assert plain_counts(both(zinc=60.0)) == plain_counts(alone)


def test_a_budget_with_dear_strata_buys_the_smallest_variance() -> None:
    """Brute force over all counts that the money buys, mobilisation off."""
    question = Question(
        parts(LEAD, extra_cost=(0.0, 0.0, 225.0)), "budget", 1700.0,
        allocation="cost-optimal", prices=PRICES,
    )  # fmt: skip
    counts = affordable_counts(question)
    assert (total_cost(question, counts) or 0) <= 1700.0
    best = min(
        Precision(question).variance(way)
        for way in every_way()
        if (total_cost(question, way) or 0) <= 1700.0
    )
    assert Precision(question).variance(counts) == pytest.approx(best)


def test_a_budget_with_losses_and_controls_is_spent_and_not_exceeded() -> None:
    """Whole locations, rounded control samples: nothing more fits in."""
    lost = parts(LEAD, loss=(0.1, 0.2, 0.0), extra_cost=(0.0, 20.0, 100.0))
    question = Question(
        lost, "budget", 3000.0, allocation="cost-optimal", prices=PRICES,
        controls=(ControlRate("field duplicate", 0.1, None, "house"),),
    )  # fmt: skip
    counts = affordable_counts(question)

    def money(way: list[int]) -> float:
        return total_cost(question, planned_counts(question, way)) or 0.0

    assert money(counts) <= 3000.0
    for k in range(3):
        assert money([n + (j == k) for j, n in enumerate(counts)]) > 3000.0


def test_most_locations_hold_after_losses() -> None:
    """At most 4 visits with a loss of 20 % leave 3 results to count on."""
    tight = parts(LEAD, most=(None, None, 4), loss=(0.0, 0.0, 0.2))
    question = Question(tight, "standard_error", 5.5, allocation="neyman")
    counts = plain_counts(question)
    assert counts[2] == 3
    assert planned_counts(question, counts)[2] == 4
    typed = replace(question, locations=20)
    assert [entry.planned for entry in answer(typed).strata][2] == 4


def test_bounds_that_forbid_a_target_are_named_with_what_they_leave() -> None:
    """By hand: 0.2·30/√4 = 3 remains of the third stratum, whatever lies elsewhere."""
    tight = parts(LEAD, most=(None, None, 4))
    question = Question(tight, "standard_error", 2.0, allocation="neyman", unit="mg/kg")
    with pytest.raises(DesignError, match=r"≤ 2 mg/kg is out of reach.*c \(4\).*stays at 3\.00"):
        answer(question)


def test_an_assurance_out_of_reach_is_left_out_of_the_list() -> None:
    """Those that nobody chose are shown where they can be had."""
    tight = parts(LEAD, most=(None, None, 4), results=(8, 8, 8))
    found = answer(Question(tight, "standard_error", 4.2, allocation="neyman"))
    assert [entry.assurance for entry in found.assured] == [0.67, 0.8]
    with pytest.raises(DesignError, match="more than the design's most allows"):
        answer(Question(tight, "standard_error", 4.2, allocation="neyman", assurance=0.99))


@pytest.mark.parametrize(
    ("more", "said"),
    [
        ({"allocation": "cost-optimal"}, r"add a \[cost\] table"),
        ({"allocation": "cost-optimal", "prices": Prices("EUR")}, "in a it is 0"),
        (
            {"allocation": "equal-precision", "equal_in": "relative-standard-error"},
            "a has none; give a pilot",
        ),
    ],
)
def test_shares_that_lack_what_they_are_made_of_are_refused(
    more: dict[str, object], said: str
) -> None:
    """One line each, with the stratum."""
    with pytest.raises(DesignError, match=said):
        Question(parts(LEAD), "standard_error", 2.0, **more)  # type: ignore[arg-type]


def test_bounds_that_cross_are_refused_with_the_stratum() -> None:
    """A loss makes room for fewer results than locations."""
    crossed = parts(LEAD, most=(None, 2, None), loss=(0.0, 0.5, 0.0))
    with pytest.raises(
        DesignError, match="b may have at most 2 locations, of which losses leave 1"
    ):
        Question(crossed, "standard_error", 2.0)
    short = parts(LEAD, least=(0, 9, 0), population=(None, 5, None))
    with pytest.raises(DesignError, match=r"b has 5 units, fewer than the 9 .*\[design.least\]"):
        Question(short, "standard_error", 2.0)


def test_weights_that_do_not_sum_up_are_refused() -> None:
    """They are shares of one population."""
    two = Part("a", 0.5, 1.0), Part("b", 0.4, 2.0)
    with pytest.raises(DesignError, match=r"weights of a and b sum to 0\.9; .* must sum to 1"):
        Question(two, "standard_error", 1.0)


@pytest.mark.parametrize(
    ("other", "said"),
    [
        ({"target": "budget", "value": 900.0, "prices": PRICES}, "a budget decides n alone"),
        ({"parts": (Part("x", 1.0, 3.0),)}, "the strata of zinc differ from those of lead"),
    ],
)
def test_analytes_that_cannot_decide_together_are_refused(
    other: dict[str, object], said: str
) -> None:
    """One line each, with the remedy."""
    question = both()
    (zinc,) = question.also
    with pytest.raises(DesignError, match=said):
        replace(question, also=(replace(zinc, **other),))  # type: ignore[arg-type]


def test_one_population_keeps_both_targets_as_well() -> None:
    """Without strata the harder analyte decides: (30/4)² = 56.25 of 60 units' 29.03."""
    zinc = Question((Part("site", 1.0, 30.0, population=60),), "standard_error", 4.0, analyte="z")
    lead = Question(
        (Part("site", 1.0, 20.0, population=60),), "standard_error", 4.0, analyte="l", also=(zinc,)
    )
    found = answer(lead)
    assert found.needed == answer(zinc).needed == 30
    assert found.steps[0].unrounded == pytest.approx(56.25 / (1 + 56.25 / 60))
    typed = answer(replace(lead, locations=20))
    assert "≤ 4 for l and standard error of the mean ≤ 4 for z" in " ".join(typed.sentences)


def test_a_campaign_keeps_the_targets_of_all_objectives_that_decide() -> None:
    """From file to size: counts, target in words, and what each analyte gets."""
    campaign = campaign_with_zinc(
        zinc_objective(standard_error=9.0, assurance="plain", decides_n=True),
        design=(DesignTable(layout="stratified", allocation="neyman"),),
    )
    found = size(campaign, spread_with_zinc({"meadow": 30.0, "yard": 10.0}), make_frame())
    assert (found.standard_error or math.inf) <= 9.0
    (zinc,) = found.others
    assert zinc.meets
    assert (zinc.standard_error or math.inf) <= 9.0
    assert "for lead and standard error of the mean ≤ 9 µg/g for zinc" in found.target
    topics = {finding.topic: finding for finding in found.findings}
    assert topics["deciding-analytes"].answer.startswith("Lead (52 %) and Zinc (48 %) decide")


def test_an_analyte_that_decides_needs_a_sigma_in_every_stratum() -> None:
    """It is told, and by name; an analyte that does not decide is only reported."""
    objective = zinc_objective(standard_error=9.0, assurance="plain", decides_n=True)
    with pytest.raises(DesignError, match=r"Zinc, which decides n too: stratum yard has no sigma"):
        size(campaign_with_zinc(objective), spread_with_zinc({"meadow": 30.0}), make_frame())


def test_names_that_are_no_strata_are_refused_all_at_once() -> None:
    """Bounds and prices alike, each with the nearest name."""
    design = DesignTable(layout="stratified", least={"meadwo": 3}, most={"pond": 4})
    cost = Cost(currency="EUR", per_location=30.0, per_location_by_stratum={"yrad": 9.0})
    campaign = campaign_with_zinc(design=(design,), cost=cost)
    with pytest.raises(CampaignError) as told:
        size(campaign, spread_with_zinc(), make_frame())
    assert len(told.value.problems) == 3
    assert "did you mean 'meadow'?" in told.value.problems[0]
    assert "[design.most] has 4 for 'pond'" in told.value.problems[1]
    assert "did you mean 'yard'?" in told.value.problems[2]


def test_prices_by_stratum_stand_for_the_common_ones() -> None:
    """By hand: 400 + 5·(30 + 45) + 6·(90 + 45) + 2·45 for control samples."""
    cost = Cost(
        currency="EUR", mobilisation=400.0, per_location=30.0, per_analysis=45.0,
        per_location_by_stratum={"yard": 90.0},
    )  # fmt: skip
    campaign = campaign_with_zinc(cost=cost)
    found = size(campaign, spread_with_zinc(), make_frame())
    meadow, yard = (entry.planned for entry in found.strata)
    controls = sum(entry.count for entry in found.qc)
    aimed = 1  # the targeted place, at the common price
    by_hand = 400 + (meadow + aimed) * 75 + yard * 135 + controls * 45
    assert found.cost == pytest.approx(by_hand)


def test_the_number_for_each_assurance_is_the_one_that_choosing_it_gives() -> None:
    """Source: the same question with that assurance chosen for every analyte."""
    known = {"results": (8, 8, 8)}
    zinc = Question(
        parts(ZINC, **known), "standard_error", 6.0, allocation="neyman", analyte="zinc",
        assurance=0.8,
    )  # fmt: skip
    asked = Question(
        parts(LEAD, **known), "standard_error", 6.0, allocation="neyman", analyte="lead",
        assurance=0.8, also=(zinc,),
    )  # fmt: skip
    listed = answer(asked).assured
    assert [entry.assurance for entry in listed] == [0.67, 0.8, 0.9]
    for entry in listed:
        others = (replace(zinc, assurance=entry.assurance),)
        chosen = answer(replace(asked, assurance=entry.assurance, also=others))
        assert chosen.needed == entry.n
        assert (entry.chance or 0) >= entry.assurance


def test_a_ceiling_that_costs_results_is_named_with_what_would_do_without() -> None:
    """Source: by hand: a at 4, SE² = (0.5·30)²/4 + (0.5·10)²/n at most 60 asks for n = 7 in b."""
    a, b = Part("a", 0.5, 30.0, most=4), Part("b", 0.5, 10.0)
    bound = Question((a, b), "standard_error", 60.0**0.5, allocation="neyman")
    free = replace(bound, parts=(replace(a, most=None), b))
    found, without = answer(bound), answer(free).needed
    assert [entry.needed for entry in found.strata] == [4, 7]
    assert without < 11
    line = f"[design.most] holds a at 4 locations; without it {without} results would do."
    assert line in found.sentences
