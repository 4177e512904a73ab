"""None may exceed: counts, what they notice, and what is said beside them."""

import itertools
import math
import re
from dataclasses import replace

import pytest
from scipy import stats

from fieldplan.base.errors import CampaignError, DesignError
from fieldplan.campaign.model import Objective
from fieldplan.sizing import asked as questions
from fieldplan.sizing.asked.all_clear import bought, count
from fieldplan.sizing.asked.counting_claims import chance_noticed
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.question import Part
from tests.factories import make_plan
from tests.unit.sizing.asked.asked_for import amount, asked_for, listed
from tests.unit.stats.published import row

HALVES = (Part("a", 0.5, 20.0), Part("b", 0.5, 20.0))
UNEVEN = (Part("a", 0.6, 20.0), Part("b", 0.3, 20.0), Part("c", 0.1, 20.0))


@pytest.mark.parametrize(("share", "confidence"), [(0.05, 0.95), (0.1, 0.9), (0.1, 0.95)])
def test_area_takes_the_numbers_of_the_table(share: float, confidence: float) -> None:
    """Source: Wilks 1941; Natrella 1963: 59, 22 and 29 (values.csv A04-026 to 028)."""
    expected = {0.95: {0.05: "A04-026", 0.1: "A04-028"}, 0.9: {0.1: "A04-027"}}[confidence][share]
    answered = count(asked_for("all-clear", share=share, confidence=confidence))
    assert sum(answered.needed) == row(expected).exact
    assert answered.unrounded == pytest.approx(math.log(1 - confidence) / math.log(1 - share))


@pytest.mark.parametrize("row_id", ["A04-034", "A04-035"])
def test_list_takes_the_numbers_of_the_table(row_id: str) -> None:
    """Source: Cannon & Roe 1982, table 1 (values.csv, from memory): N = 100, D = 5 and 10."""
    inputs = row(row_id).inputs
    units = asked_for("all-clear", parts=listed(100), units=inputs["D"])
    assert sum(count(units).needed) == row(row_id).exact
    share = asked_for("all-clear", parts=listed(100), share=inputs["D"] / 100)
    assert sum(count(share).needed) == row(row_id).exact


def test_claim_says_no_more_than_was_shown() -> None:
    """The words of the claim: confidence, share, population; never that no place exceeds."""
    answered = count(asked_for("all-clear", share=0.05))
    assert answered.finding.answer == (
        "59 results, none of them above 150 mg/kg, would show with 95 % confidence that less than "
        "5 % of the site's possible samples exceed it."
    )
    said = " ".join(answered.finding.warnings)
    assert "nothing about the mean, nor that no place exceeds 150 mg/kg" in said
    assert "1 % above it would stay unseen in 55 % of such campaigns" in said  # 0.99⁵⁹
    assert "One result above the level ends the claim" in said
    for verdict in ("safe", "clean", "pass", "complian", "approved"):
        assert verdict not in f"{answered.finding.answer} {said}".lower()


def test_whole_list_is_looked_at_where_one_unit_must_not_stay_unseen() -> None:
    """Closed form: n units of 14 hold the one with chance n/14."""
    found = count(asked_for("all-clear", parts=listed(14), units=1))
    assert found.needed == (14,)
    assert found.finding.answer.startswith("All 14 units of the list must be looked at")
    half = asked_for("all-clear", parts=listed(14), units=1, confidence=0.6)
    assert count(half).needed == (math.ceil(0.6 * 14),)
    assert "9 of the 14 units of the list must be looked at" in count(half).finding.answer


def test_one_unit_that_must_not_stay_unseen_is_no_proof_of_the_rest() -> None:
    """Two of 40 wells that nobody looked at may exceed: chance 2/40 that the one is among them."""
    asked = asked_for("all-clear", parts=listed(40), units=1)
    answered = count(asked)
    assert answered.needed == (38,)
    assert answered.finding.answer.endswith("of the 2 units left nothing is known.")
    assert "exceeds it" not in answered.finding.answer
    said = " ".join(answered.finding.warnings)
    assert "nor that no unit exceeds 150 mg/kg: 1 of 40 above it would stay unseen in 5 %" in said
    assert "though 2 units stay unseen" in bought(asked, (38,)).answer


@pytest.mark.parametrize(
    ("question", "keys", "told"),
    [
        ("all-clear", {"share": 0.05}, "The level of Lead is not written down"),
        ("upper-share", {"share": 0.95}, "The level of Lead is not written down"),
        ("share", {"expected": 0.2, "margin": 0.1}, "what counts is that it is found at all"),
        (
            "share",
            {"expected": 0.1, "compare_with": 0.3, "alpha": 0.05, "beta": 0.2},
            "what counts is that it is found at all",
        ),
    ],
)
def test_a_claim_about_an_unnamed_level_says_so(
    question: str, keys: dict[str, float], told: str
) -> None:
    """Nobody could check later which level was meant; with the level written it is named."""
    named = asked_for(question, **keys)
    frame = make_plan().frame
    analyte = named.campaign.analyte[0].model_copy(update={"action_level": None})
    campaign = named.campaign.model_copy(update={"analyte": (analyte,)})
    unnamed = replace(named, campaign=campaign, frame=frame)
    found = questions.count(unnamed).finding
    assert told in " ".join(found.warnings)
    assert "have it" not in found.answer
    assert told not in " ".join(questions.count(replace(named, frame=frame)).finding.warnings)


@pytest.mark.parametrize("parts", [HALVES, UNEVEN])
def test_strata_keep_the_chance_wherever_the_share_lies(parts: tuple[Part, ...]) -> None:
    """Brute force over a grid of ways to spread 5 % over the strata."""
    asked = asked_for("all-clear", parts=parts, share=0.05)
    needed = count(asked).needed
    promised = chance_noticed(asked, needed, 0.05, allowed=0)
    assert promised >= 0.95
    weights = [part.weight for part in parts]
    for spread in itertools.product([k / 20 for k in range(21)], repeat=len(parts)):
        total = math.fsum(w * s for w, s in zip(weights, spread, strict=True))
        if total == 0:
            continue
        above = [0.05 * s / total for s in spread]
        if max(above) <= 1:
            missed = math.prod((1 - p) ** n for p, n in zip(above, needed, strict=True))
            assert 1 - missed >= promised - 1e-12
    assert 59 <= sum(needed) <= 59 + 4 * len(parts)


def test_strata_of_a_list_keep_the_chance_wherever_the_units_lie() -> None:
    """Brute force with scipy: every split of 4 exceeding units over three short lists."""
    asked = asked_for("all-clear", parts=listed(20, 12, 8), units=4)
    needed = count(asked).needed
    worst = 0.0
    for split in itertools.product(range(5), repeat=3):
        if sum(split) == 4:
            sizes = (20, 12, 8)
            strata = zip(sizes, split, needed, strict=True)
            missed = math.prod(float(stats.hypergeom.pmf(0, *one)) for one in strata)
            worst = max(worst, missed)
    assert worst <= 0.05
    assert amount(count(asked), "chance_to_notice") == pytest.approx(1 - worst)


def test_uneven_strata_cost_more_and_are_told() -> None:
    """A claim by counting cannot use a stratum that was sampled more thickly than its size."""
    parts = (Part("a", 0.8, 5.0), Part("b", 0.2, 80.0))
    found = count(asked_for("all-clear", parts=parts, share=0.05, allocation="neyman"))
    assert sum(found.needed) > 100
    assert any("in proportion about 59 results" in line for line in found.finding.warnings)


def test_given_counts_say_what_they_could_claim() -> None:
    """Inverse: 20 results claim 1 − 0.05^(1/20) = 13.9 %; a list by its hypergeometric."""
    found = bought(asked_for("all-clear", share=0.05), (20,))
    assert amount(found, "smallest_share_noticed") == pytest.approx(1 - 0.05 ** (1 / 20))
    assert amount(found, "chance_to_notice") == pytest.approx(1 - 0.95**20)
    assert "less than 14 % of the site's possible samples exceed it" in found.answer
    units = bought(asked_for("all-clear", parts=listed(100), share=0.05), (45,))
    assert amount(units, "most_units_unseen") == 4
    assert "no more than 4 of the 100 units" in units.answer


def test_whole_list_needs_no_confidence() -> None:
    """With every unit looked at nothing is left to claim."""
    found = bought(asked_for("all-clear", parts=listed(22), units=2), (22,))
    assert "none of them exceeds 150 mg/kg if no result does" in found.answer
    assert "confidence" not in found.answer
    assert amount(found, "chance_to_notice") == 1.0
    assert amount(found, "most_units_unseen") == 0


def test_reporting_limit_above_the_level_is_warned_of() -> None:
    """A non-detect below 200 says nothing about 150."""
    asked = asked_for("all-clear", share=0.05)
    high = asked.analyte.model_copy(update={"reporting_limit": 200.0})
    campaign = asked.campaign.model_copy(update={"analyte": (high,)})
    warnings = count(replace(asked, campaign=campaign)).finding.warnings
    assert "reporting limit of 200 mg/kg lies above the level" in warnings[0]
    assert not any("reporting limit" in line for line in count(asked).finding.warnings)


def test_question_and_its_inverse_agree() -> None:
    """What n was counted for, n buys; one less does not."""
    asked = asked_for("all-clear", share=0.03, confidence=0.9)
    total = sum(count(asked).needed)
    assert amount(bought(asked, (total,)), "chance_to_notice") >= 0.9
    assert amount(bought(asked, (total - 1,)), "chance_to_notice") < 0.9


def test_working_repeats_its_own_arithmetic() -> None:
    """The step's formula with the step's inputs gives the step's number."""
    (step,) = count(asked_for("all-clear", share=0.05)).finding.steps
    values = {entry.symbol: entry.value for entry in step.inputs}
    assert step.unrounded == pytest.approx(math.log(1 - values["C"]) / math.log(1 - values["p"]))
    assert step.rounded == math.ceil(step.unrounded) == 59


def test_what_cannot_be_counted_is_refused() -> None:
    """Units of an area, more units than the list has, a missing table."""
    with pytest.raises(DesignError, match="80 units must not stay unnoticed, and the list has 50"):
        count(asked_for("all-clear", parts=listed(50), units=80))
    with pytest.raises(DesignError, match="this population is an area"):
        count(asked_for("all-clear", units=3))
    whole = asked_for("all-clear", share=0.05)
    bare = Objective(analyte="lead", question="all-clear")
    with pytest.raises(CampaignError, match=r"\[objective\.all_clear\] is missing"):
        count(Asked(whole.campaign, bare, whole.question))


@pytest.mark.parametrize("n", [2, 20, 40, 45, 55, 58, 59, 300, 3000])
def test_share_claimed_from_given_counts_has_the_confidence_it_states(n: int) -> None:
    """Closed form: none of n above the level notices a share p with chance 1 − (1 − p)ⁿ."""
    found = bought(asked_for("all-clear", share=0.05), (n,))
    words = re.search(r"less than ([\d.]+) % of", found.answer)
    assert words is not None
    share = float(words[1]) / 100
    assert 1 - (1 - share) ** n >= 0.95 - 1e-12
    step = 0.001 if share >= 0.01 else 0.05 * share
    assert 1 - (1 - share + 1.5 * step) ** n < 0.95
