"""A mean against a level: counts, what they buy, and what is said beside them."""

import math
from dataclasses import replace

import numpy as np
import pytest
from scipy import optimize, stats

from fieldplan.base.errors import CampaignError, DesignError
from fieldplan.campaign.model import Objective
from fieldplan.campaign.questions.mean_and_level import MeanAndLevel
from fieldplan.sizing.asked.level_decision import decision_of
from fieldplan.sizing.asked.mean_and_level import bought, count
from fieldplan.sizing.asked.model import Answered, Asked
from fieldplan.sizing.model import Finding
from fieldplan.sizing.question import Part, Question
from fieldplan.stats.power import one_sample_n
from fieldplan.stats.rank_tests import sign_planned_n, sign_share, sign_test_n
from tests.factories import make_campaign

THREE = (
    Part("a", 0.64, 18.0, results=8),
    Part("b", 0.22, 45.0, results=6),
    Part("c", 0.14, 90.0, results=5),
)


def asked(
    *, parts: tuple[Part, ...] = (Part("site", 1.0, 48.0, results=8),), **more: object
) -> Asked:
    """Ask about lead against the 150 mg/kg of the made campaign; words change the table."""
    question = {
        key: more.pop(key)
        for key in ("interval", "confidence", "allocation", "locations", "census")
        if key in more
    }
    table = {"assume": "above-level", "gray_edge": 110.0, "alpha": 0.05, "beta": 0.2} | more
    objective = Objective(
        analyte="lead", question="mean-and-level", mean_and_level=MeanAndLevel(**table)
    )
    kind = {"interval": "upper-limit"} | question
    return Asked(
        make_campaign(objective=(objective,)),
        objective,
        Question(parts, "standard_error", 1.0, unit="mg/kg", **kind),
    )


def amount(found: Answered | Finding, name: str) -> float | None:
    """Read one amount of a finding."""
    finding = found.finding if isinstance(found, Answered) else found
    return next(entry.value for entry in finding.amounts if entry.name == name)


def test_one_population_takes_the_exact_number() -> None:
    """The same question in stats, which scipy's noncentral t confirms: 11."""
    found = count(asked())
    assert found.needed == (one_sample_n(40.0, 48.0, alpha=0.05, beta=0.2),) == (11,)
    assert amount(found, "formula_n") == 11
    assert found.unrounded == pytest.approx(10.2557, abs=5e-5)


def test_both_directions_take_the_same_number_and_say_who_carries_the_doubt() -> None:
    """The two starts mirror each other about the level; only the words differ."""
    below = count(asked())
    above = count(asked(assume="below-level", gray_edge=190.0, interval="lower-limit"))
    assert below.needed == above.needed
    assert "taken to lie at 150 mg/kg or above" in below.finding.assumptions[0]
    assert "taken to lie at 150 mg/kg or below" in above.finding.assumptions[0]
    assert "comes out below 150 mg/kg" in below.finding.answer
    assert "comes out above 150 mg/kg" in above.finding.answer
    low, high = (amount(found, "mean_at_80_percent") for found in (below, above))
    assert low is not None
    assert high is not None
    assert low + high == pytest.approx(300.0)


def test_eight_of_ten_campaigns_come_out_at_that_mean() -> None:
    """Draw 20,000 campaigns at the mean that is printed: four standard errors."""
    found = bought(asked(), (11,))
    mean = amount(found, "mean_at_80_percent")
    assert mean is not None
    drawn = np.random.default_rng(51).normal(mean, 48.0, (20_000, 11))
    limit = drawn.mean(axis=1) + stats.t.isf(0.05, 10) * drawn.std(axis=1, ddof=1) / math.sqrt(11)
    assert abs(float(np.mean(limit < 150)) - 0.8) < 4 * math.sqrt(0.16 / 20_000)
    margin = amount(found, "expected_margin")
    bar = 4 * float((limit - drawn.mean(axis=1)).std()) / math.sqrt(20_000)
    assert abs(float((limit - drawn.mean(axis=1)).mean()) - float(margin or 0)) < bar


def test_strata_keep_beta_in_simulated_campaigns() -> None:
    """Three strata, Satterthwaite's degrees of freedom: power within four errors and 0.01.

    The statistic of a stratified mean has no exact noncentral t; the rest is the approximation.
    """
    found = count(asked(parts=THREE, gray_edge=130.0, allocation="neyman"))
    generator = np.random.default_rng(52)
    mean, variance = np.zeros(20_000), np.zeros(20_000)
    below = np.zeros(20_000)
    for part, n in zip(THREE, found.needed, strict=True):
        drawn = generator.normal(130.0, part.sigma, (20_000, n))
        term = part.weight**2 * drawn.var(axis=1, ddof=1) / n
        mean += part.weight * drawn.mean(axis=1)
        variance += term
        below += term**2 / (n - 1)
    limit = mean + stats.t.isf(0.05, variance**2 / below) * np.sqrt(variance)
    share = float(np.mean(limit < 150))
    power = amount(found, "power_at_gray_edge")
    assert abs(share - float(power or 0)) < 0.01 + 4 * math.sqrt(0.16 / 20_000)
    assert float(power or 0) >= 0.8


def test_strata_have_no_smaller_total() -> None:
    """Brute force: every smaller total, shared as the design does, has less power."""
    question = asked(parts=THREE, gray_edge=130.0, allocation="neyman")
    decision = decision_of(question)
    total = sum(count(question).needed)
    for fewer in range(6, total):
        assert decision.power(question.shared(fewer), decision.width) < 0.8


def test_chance_to_be_enough_is_the_chance_of_a_small_sigma() -> None:
    """Second route: the largest sigma that n bears, by scipy, against the pilot's chi-square."""
    largest = optimize.brentq(
        lambda s: stats.nct.sf(stats.t.isf(0.05, 10), 10, 40 * math.sqrt(11) / s) - 0.8, 20, 90
    )
    expected = stats.chi2.sf(7 * (48 / largest) ** 2, 7)
    assert amount(bought(asked(), (11,)), "chance_enough") == pytest.approx(expected, rel=1e-7)


@pytest.mark.parametrize("test", ["t", "sign", "signed-rank"])
def test_assurance_is_kept_and_one_fewer_does_not_keep_it(test: str) -> None:
    """Definition, for every test; a sign test's saw may keep it below as well."""
    question = asked(test=test, assurance=0.8)
    n = sum(count(question).needed)
    decision = decision_of(question)
    assert (decision.chance_enough((n,)) or 0) >= 0.8 - 1e-9
    if test == "t":
        assert (decision.chance_enough((n - 1,)) or 0) < 0.8
    assert n > sum(decision.needed())


def test_sign_test_takes_the_exact_number_and_shows_the_published_one() -> None:
    """Binomial in stats; the published rule adds 20 % for losses."""
    found = count(asked(test="sign"))
    share = sign_share(40.0, 48.0)
    assert found.needed == (sign_test_n(share, alpha=0.05, beta=0.2),)
    planned = next(step for step in found.finding.steps if step.symbol == "N(planned)")
    assert planned.rounded == sign_planned_n(share, alpha=0.05, beta=0.2)
    assert any("median" in line for line in found.finding.warnings)


def test_signed_rank_takes_a_seventh_more_than_t() -> None:
    """11 / 0.864 = 12.7."""
    found = count(asked(test="signed-rank"))
    assert found.needed == (13,)
    assert float(amount(found, "power_at_gray_edge") or 0) > 0.8


@pytest.mark.parametrize("test", ["t", "sign", "signed-rank"])
@pytest.mark.parametrize("chance", [0.3, 0.5, 0.95])
def test_reach_undoes_power(test: str, chance: float) -> None:
    """Inverse and forward must agree, signed ranks to what interpolation promises."""
    decision = decision_of(asked(test=test))
    reach = decision.reach((17,), chance)
    assert reach is not None
    assert decision.power((17,), reach) == pytest.approx(chance, abs=5e-4)


@pytest.mark.parametrize("test", ["sign", "signed-rank"])
def test_few_results_can_show_nothing_by_ranks(test: str) -> None:
    """With 4 results the rarest outcome has chance 1/16 at the level, above alpha."""
    found = bought(asked(test=test), (4,))
    assert "however far" in found.answer
    assert amount(found, "mean_at_80_percent") is None
    assert amount(found, "chance_enough") == 0.0
    assert found.picture is None


def test_a_whole_list_leaves_no_doubt() -> None:
    """All units analysed: every mean off the level is shown."""
    part = Part("wells", 1.0, 48.0, results=8, population=12)
    found = bought(asked(parts=(part,)), (12,))
    assert amount(found, "power_at_gray_edge") == 1.0
    assert "its mean is known" in found.answer
    assert amount(found, "expected_margin") == 0.0


def test_a_list_needs_fewer_than_an_area() -> None:
    """The list correction shrinks the standard error; scipy's noncentral t agrees."""
    part = Part("wells", 1.0, 48.0, results=8, population=14)
    n = sum(count(asked(parts=(part,))).needed)
    for tried, enough in ((n - 1, False), (n, True)):
        error = 48 * math.sqrt((1 - tried / 14) / tried)
        power = stats.nct.sf(stats.t.isf(0.05, tried - 1), tried - 1, 40 / error)
        assert (power >= 0.8) == enough


def test_ranks_refuse_a_list_that_is_too_short() -> None:
    """They do not know the list; t does."""
    part = Part("wells", 1.0, 48.0, results=8, population=12)
    with pytest.raises(DesignError, match="list has 12 units"):
        count(asked(parts=(part,), test="sign"))


def test_ranks_refuse_strata() -> None:
    """Strata of different weight have no common median by counting."""
    with pytest.raises(DesignError, match="same say"):
        count(asked(parts=THREE, test="sign"))


def test_each_alone_shares_out_both_chances_and_all_or_nothing_one() -> None:
    """Bonferroni by hand: alpha 0.05/4, beta 0.2/4; one claim for all keeps alpha."""
    alone = decision_of(asked(decisions=4, together="each-alone"))
    claim = decision_of(asked(decisions=4, together="all-or-nothing"))
    assert alone.risks == (0.0125, 0.05)
    assert claim.risks == (0.05, 0.05)
    assert sum(alone.needed()) > sum(claim.needed()) > 11
    words = " ".join(count(alone.asked).finding.warnings)
    assert "19 % if independent and at most 20 %" in words  # 1 − 0.95⁴ = 0.185, 4 · 0.05


def test_the_interval_that_is_fixed_must_be_the_one_tested() -> None:
    """A one-sided test at 0.05 is a 95 % limit, or the upper end of a 90 % interval."""

    def told(**more: object) -> bool:
        return any("[rules]" in line for line in count(asked(**more)).finding.warnings)

    assert not told(interval="upper-limit", confidence=0.95)
    assert not told(interval="two-sided", confidence=0.9)
    assert told(interval="two-sided", confidence=0.95)
    assert told(interval="lower-limit", confidence=0.95)


def test_skewness_behind_sigma_is_not_kept_quiet() -> None:
    """A gamma population of skewness 2 at the level: about 12 % come out below, not 5 %."""
    part = Part("site", 1.0, 48.0, results=8, skewness=2.0)
    line = next(
        words for words in count(asked(parts=(part,))).finding.warnings if "skewness" in words
    )
    drawn = np.random.default_rng(53).gamma(1.0, 1.0, (40_000, 11))
    limit = drawn.mean(axis=1) + stats.t.isf(0.05, 10) * drawn.std(axis=1, ddof=1) / math.sqrt(11)
    share = float(np.mean(limit < 1.0))
    said = float(line.split("about ")[1].split(" %")[0]) / 100
    # The sentence takes the worse of gamma and lognormal and rounds to whole percents.
    assert share - 0.01 < said < share + 0.03


def test_unknown_pilot_leaves_the_chance_unsaid() -> None:
    """Nobody said how many results stand behind sigma."""
    found = count(asked(parts=(Part("site", 1.0, 48.0),), assurance=0.8))
    assert amount(found, "chance_enough") is None
    assert "Nobody said" in found.finding.warnings[0]
    assert found.needed == (11,)


def test_the_working_holds_all_numbers_it_uses() -> None:
    """Recompute the guidance formula and the margin from the printed inputs."""
    found = count(asked())
    steps = {step.symbol: {q.symbol: q.value for q in step.inputs} for step in found.finding.steps}
    values = {step.symbol: step.unrounded for step in found.finding.steps}
    z = steps["n(formula)"]
    formula = ((z["z(alpha)"] + z["z(beta)"]) * z["s"] / z["Δ"]) ** 2 + z["z(alpha)"] ** 2 / 2
    assert values["n(formula)"] == pytest.approx(formula)
    m = steps["margin"]
    assert values["margin"] == pytest.approx(m["t"] * m["c4"] * m["SE"])
    p = steps["power"]
    assert values["power"] == pytest.approx(
        float(stats.nct.sf(p["t"], 10, p["Δ"] / p["SE"])), abs=1e-9
    )
    e = steps["chance"]
    assert values["chance"] == pytest.approx(
        float(stats.chi2.sf(e["df"] * (e["d"] / e["Δ"]) ** 2, e["df"])), abs=1e-9
    )


@pytest.mark.parametrize("test", ["t", "sign", "signed-rank"])
def test_the_picture_shows_the_chance_of_the_wrong_call(test: str) -> None:
    """From the level on to claim the side, from the gray edge on not to; nothing between."""
    question = asked(test=test)
    found = count(question)
    decision = decision_of(question)
    picture = found.finding.picture
    assert picture is not None
    at_level, at_edge = (series for series in picture.series if series.style == "line")
    for mean, percent in zip(at_level.x, at_level.y, strict=True):
        shown = 100 * decision.power(found.needed, 150 - mean)
        assert mean >= 150
        assert percent == pytest.approx(shown, abs=1.0)
    for mean, percent in zip(at_edge.x, at_edge.y, strict=True):
        missed = 100 - 100 * decision.power(found.needed, 150 - mean)
        assert mean <= 110
        assert percent == pytest.approx(missed, abs=1.0)
    assert [value for _, value in picture.marks] == [150, 110]
    assert picture.levels == (("alpha 5 %", 5.0), ("beta 20 %", 20.0))


@pytest.mark.parametrize(("assume", "edge"), [("above-level", 110.0), ("below-level", 170.0)])
def test_wrong_calls_grow_rarer_away_from_the_gray_region(assume: str, edge: float) -> None:
    """Power rises with the distance, whichever side carries the doubt; a mean stays above 0."""
    picture = count(asked(assume=assume, gray_edge=edge)).finding.picture
    assert picture is not None
    for series in picture.series:
        assert list(series.y) == sorted(series.y, reverse=True)
        assert min(series.x) >= 0


def test_lines_name_the_gray_edge_and_the_level() -> None:
    """The table shows where the two chances stand."""
    rows = dict(count(asked()).finding.rows)
    assert rows["150.0"] == "5 %"
    assert rows["110.0"] == "82 %"


@pytest.mark.parametrize(
    ("assume", "edge"),
    [("above-level", 150.0), ("above-level", 170.0), ("below-level", 110.0)],
)
def test_a_gray_region_on_the_wrong_side_is_refused(assume: str, edge: float) -> None:
    """The same rule as in the file, for those who build the objective themselves."""
    with pytest.raises(CampaignError, match="gray_edge is"):
        count(asked(assume=assume, gray_edge=edge))


def test_a_missing_level_or_table_is_said() -> None:
    """Both are needed, and neither is made up."""
    question = asked()
    bare = replace(question, objective=Objective(analyte="lead", question="mean-and-level"))
    with pytest.raises(CampaignError, match="is missing"):
        count(bare)
    analyte = question.campaign.analyte[0].model_copy(update={"action_level": None})
    campaign = question.campaign.model_copy(update={"analyte": (analyte,)})
    with pytest.raises(CampaignError, match="no level to compare"):
        count(replace(question, campaign=campaign))


def test_a_region_too_narrow_for_any_campaign_is_refused() -> None:
    """A millionth of sigma asks for more results than any campaign has."""
    with pytest.raises(DesignError, match="more than"):
        count(asked(gray_edge=149.999))


@pytest.mark.parametrize("edge", [10.0, 30.0, 60.0, 100.0])
@pytest.mark.parametrize("test", ["sign", "signed-rank"])
def test_ranks_keep_beta_where_the_gray_region_is_wide(edge: float, test: str) -> None:
    """Student's t may need only 3 or 4 results, from which no rank test ever reaches alpha."""
    question = asked(gray_edge=edge, test=test)
    n = sum(count(question).needed)
    assert n >= 5
    assert decision_of(question).power((n,), 150 - edge) >= 0.8
