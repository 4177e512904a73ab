"""What stands beside a number about composites, duplicates and ranked sets."""

import math
from dataclasses import replace

import pytest

from fieldplan.lab.model import PartSpread, SplitSpread
from fieldplan.sizing import size, size_asked
from fieldplan.sizing.beside.parts import warnings
from fieldplan.sizing.model import Finding
from fieldplan.stats.ranked_sets import ranked_count, relative_precision
from tests.factories import make_campaign, make_frame, make_spread
from tests.unit.sizing.askings import asked_mean
from tests.unit.sizing.test_composites import PRICES, SIGMAS, make_split_spread

SIGMA = math.hypot(24.0, 10.0, 5.0)


def found(topic: str, *keys: str, **typed: object) -> Finding | None:
    """Give one finding beside bare numbers."""
    numbers = {"sigma": SIGMA, "standard_error": 3.0} | typed
    findings = size_asked(asked_mean(keys=keys, **numbers)).findings
    return next((finding for finding in findings if finding.topic == topic), None)


def amounts(finding: Finding | None) -> dict[str, float]:
    """Give the numbers of a finding by name."""
    assert finding is not None
    return {a.name: a.value for a in finding.amounts if a.value is not None}


def test_shares_of_the_variance_are_those_of_the_parts() -> None:
    """By hand: 576, 100 and 25 of 701; SE is √(701/78)."""
    told = amounts(found("parts", *SIGMAS))
    assert told["share_between_locations"] == pytest.approx(576 / 701)
    assert told["share_sampling"] == pytest.approx(100 / 701)
    assert told["share_analysis"] == pytest.approx(25 / 701)
    assert told["standard_error"] == pytest.approx(math.sqrt(701 / 78))
    assert told["error_between_locations"] == pytest.approx(math.sqrt(701 / 156))
    assert told["error_sampling"] == pytest.approx(math.sqrt(651 / 78))
    assert told["error_analysis"] == pytest.approx(math.sqrt(688.5 / 78))


def test_what_is_said_to_change_is_what_another_sizing_gives() -> None:
    """The inverse: n fixed, the increments doubled or the laboratory's variance halved."""
    keys = ("design.increments=20", "design.replicates=6")
    told = amounts(found("parts", *SIGMAS, *keys))
    more = size_asked(
        asked_mean(
            sigma=SIGMA, standard_error=3.0,
            keys=(*SIGMAS, "design.increments=40", "design.replicates=6"),
        )
    )  # fmt: skip
    assert told["error_sampling"] == pytest.approx(more.standard_error)
    better = math.hypot(24.0, 10.0, 5 / math.sqrt(2))
    lab = size_asked(
        asked_mean(
            sigma=better, standard_error=3.0,
            keys=("sigma.sampling=10", f"sigma.analysis={5 / math.sqrt(2)!r}", *keys),
        )
    )  # fmt: skip
    assert told["error_analysis"] == pytest.approx(lab.standard_error)


@pytest.mark.parametrize(
    ("sampling", "analysis", "words"),
    [
        (10, 5, "more locations pay most"),
        (22, 5, "more increments in each jar pay most"),
        (5, 22, "a better laboratory, or a second analysis, pays most"),
    ],
)
def test_one_answer_names_the_largest_part(sampling: float, analysis: float, words: str) -> None:
    """Without prices the largest share is where an effort counts."""
    keys = (f"sigma.sampling={sampling}", f"sigma.analysis={analysis}")
    finding = found("parts", *keys, sigma=math.hypot(12.0, sampling, analysis))
    assert finding is not None
    assert words in finding.answer


def test_with_prices_the_answer_is_what_the_money_buys() -> None:
    """A second analysis for 1 EUR beats places for 90, though places make most of the spread."""
    dear = [key.replace("analysis=60", "analysis=1") for key in PRICES]
    finding = found("parts", *SIGMAS, *dear)
    assert finding is not None
    assert "most for the money" in finding.answer
    gains = {
        name: (701 - left) / cost
        for name, left, cost in (("places", 350.5, 31), ("jar", 651, 4), ("analysis", 688.5, 1))
    }
    assert max(gains, key=lambda name: gains[name]) in {"jar", "analysis"}
    best = max(gains, key=lambda name: gains[name])
    wanted = {"jar": "more increments", "analysis": "a better laboratory"}[best]
    assert wanted in finding.answer


def test_strata_bring_their_parts_by_weight_and_number() -> None:
    """By hand: Σ W²·part²/n over meadow and yard."""
    campaign = make_campaign()
    result = size(campaign, make_split_spread(), make_frame())
    finding = next(f for f in result.findings if f.topic == "parts")
    brought = dict.fromkeys(("between", "sampling", "analysis"), 0.0)
    for entry, between in zip(result.strata, (20.0, 40.0), strict=True):
        factor = entry.weight**2 / entry.needed
        brought["between"] += factor * between**2
        brought["sampling"] += factor * 64
        brought["analysis"] += factor * 16
    total = sum(brought.values())
    assert amounts(finding)["share_sampling"] == pytest.approx(brought["sampling"] / total)
    assert len(finding.rows) == 6


def test_nothing_is_said_where_nothing_tells_the_parts() -> None:
    """A pilot without duplicates has no parts, and an ordinary campaign no composites."""
    result = size(make_campaign(), make_spread(), make_frame())
    topics = {finding.topic for finding in result.findings}
    assert not topics & {"parts", "composites", "ranked-sets"}


def test_a_composite_says_what_it_can_hide() -> None:
    """The level over k: 300 in 30 increments is 10."""
    finding = found("composites", *SIGMAS, "design.increments=30", level=300.0, unit="mg/kg")
    assert finding is not None
    assert "Only a result below 10.0 mg/kg, the level over 30" in finding.answer
    assert amounts(finding)["result_without_high_increment"] == 10.0
    assert finding.steps[0].unrounded == pytest.approx(math.sqrt(676 / 30 + 25))


def test_fewer_than_three_replicates_are_remarked() -> None:
    """ITRC ISM-1 asks for three (values and notes: seen there)."""
    finding = found("composites", *SIGMAS, "design.increments=100", standard_error=5.0)
    assert finding is not None
    assert "at least 3 replicates" in finding.warnings[0]
    many = found("composites", *SIGMAS, "design.increments=100", standard_error=2.0)
    assert many is not None
    assert many.warnings == ()


def test_ranked_sets_are_counted_in_whole_cycles() -> None:
    """By hand: 78/1.44 = 54.2, in cycles of 3 that is 57."""
    keys = ("design.ranking_set_size=3", "design.ranking_correlation=0.8")
    told = amounts(found("ranked-sets", *keys))
    precision = relative_precision(3, correlation=0.8)
    assert told["relative_precision"] == precision
    assert told["ranked_results"] == ranked_count(78, 3, precision) == 57
    assert told["places_looked_at"] == 171


def test_a_ranking_that_costs_too_much_is_said_to() -> None:
    """Break-even by definition: 57 results of 94 and 171 looks cost what 78 results cost."""
    keys = ("design.ranking_set_size=3", "design.ranking_correlation=0.8")
    price = (78 - 57) * 94.0 / 171
    for typed, words in ((price - 0.5, "which is less"), (price + 0.5, "which is no less")):
        prices = [*PRICES, f"cost.per_ranking={typed:.2f}", "cost.per_sample=4"]
        finding = found("ranked-sets", *keys, *prices)
        assert finding is not None
        assert words in finding.answer
        assert amounts(finding)["highest_price"] == pytest.approx(price)


def test_a_list_is_not_doubled_beyond_its_units() -> None:
    """By hand: n of 60 units, then all of them, where no error from choosing is left."""
    finding = found("parts", *SIGMAS, population=60)
    assert finding is not None
    told = amounts(finding)
    result = size_asked(asked_mean(keys=SIGMAS, sigma=SIGMA, standard_error=3.0, population=60))
    assert 2 * result.needed > 60
    assert told["error_between_locations"] == 0.0
    assert "twice the units, or all of them" in finding.answer
    few = amounts(found("parts", *SIGMAS, population=6000))
    n = size_asked(asked_mean(keys=SIGMAS, sigma=SIGMA, standard_error=3.0, population=6000)).needed
    by_hand = SIGMA * math.sqrt((1 - 2 * n / 6000) / (2 * n))
    assert few["error_between_locations"] == pytest.approx(by_hand)


def test_nothing_is_promised_of_what_stands_together() -> None:
    """Composites with field duplicates alone: a second analysis may help or not."""
    campaign = make_campaign()
    design = campaign.design[0].model_copy(update={"increments": 60})
    spread = make_split_spread()
    together = tuple(
        replace(
            split,
            parts=(split.parts[0], replace(split.parts[1], part="sampling and analysis")),
        )
        for split in spread.splits
    )
    result = size(
        campaign.model_copy(update={"design": (design,)}),
        replace(spread, splits=together),
        make_frame(),
    )
    finding = next(f for f in result.findings if f.topic == "parts")
    assert "laboratory duplicates would tell" in finding.answer
    assert set(amounts(finding)) & {"error_sampling_and_analysis", "error_analysis"} == set()
    composites = next(f for f in result.findings if f.topic == "composites")
    assert "counts with the laboratory here" in composites.warnings[0]


@pytest.mark.parametrize(("strata", "words"), [(2, "in s0 and s1 came"), (9, "in 9 strata came")])
def test_a_part_that_was_cut_at_zero_is_said_once(strata: int, words: str) -> None:
    """However many strata it concerns."""
    parts = (
        PartSpread("between-locations", 0.0, "x", cut_at_zero=True),
        PartSpread("analysis", 4.0, "x"),
    )
    splits = [SplitSpread("lead", f"s{k}", parts) for k in range(strata)]
    (told,) = [line for line in warnings(splits) if "negative" in line]
    assert words in told
