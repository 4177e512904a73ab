"""What strata gain, and which analyte decides: by hand and by brute force."""

import math
from dataclasses import replace

import pytest

from fieldplan.campaign.model import DesignTable
from fieldplan.lab.model import Spread, StratumSpread
from fieldplan.sizing import size
from fieldplan.sizing.model import Finding, Size
from tests.factories import make_campaign, make_frame, make_spread
from tests.several_analytes import campaign_with_zinc, spread_with_zinc, zinc_objective

W = 16800 / 23600, 6800 / 23600


def sized(
    topic: str, *, spread: Spread | None = None, allocation: str = "neyman", **changes: object
) -> tuple[Size, Finding | None]:
    """Size the campaign of two strata and take one finding."""
    design = (DesignTable(layout="stratified", allocation=allocation, **changes),)  # type: ignore[arg-type]
    found = size(
        make_campaign(design=design), spread or make_spread(), make_frame(), beside=[topic]
    )
    return found, next((f for f in found.findings if f.topic == topic), None)


def with_means(*means: float | None) -> Spread:
    """Sigmas of 18 and 45 round these means."""
    entries = tuple(
        replace(entry, mean=mean) for entry, mean in zip(make_spread().strata, means, strict=True)
    )
    return replace(make_spread(), strata=entries)


def amount(finding: Finding, name: str) -> float:
    """Take one number of a finding."""
    return float(next(a.value for a in finding.amounts if a.name == name) or 0)


def test_gain_is_the_textbook_ratio() -> None:
    """By hand: Σ W s² + Σ W (m − mean)² over n, against Σ W² s²/n_h."""
    found, finding = sized("strata", spread=with_means(40.0, 120.0))
    assert finding is not None
    mean = W[0] * 40 + W[1] * 120
    within = W[0] * 18**2 + W[1] * 45**2
    between = W[0] * (40 - mean) ** 2 + W[1] * (120 - mean) ** 2
    counts = [entry.needed for entry in found.strata]
    stratified = (W[0] * 18) ** 2 / counts[0] + (W[1] * 45) ** 2 / counts[1]
    gain = (within + between) / sum(counts) / stratified
    assert amount(finding, "gain") == pytest.approx(gain)
    assert amount(finding, "between") == pytest.approx(between)
    simple = math.ceil((within + between) / stratified)
    assert amount(finding, "results_without") == simple
    assert f"the same precision would take {simple}." in finding.answer


def test_luck_of_the_pilots_is_taken_off_what_lies_between() -> None:
    """By hand: Σ W (1 − W) s²/n0 with two results behind each mean."""
    entries = tuple(
        StratumSpread("lead", name, s, m, 2, "pilot.csv", values=(m - 1, m + 1))
        for name, s, m in (("meadow", 18.0, 40.0), ("yard", 45.0, 120.0))
    )
    _, finding = sized("strata", spread=replace(make_spread(), strata=entries))
    assert finding is not None
    luck = W[0] * W[1] * (18**2 + 45**2) / 2
    raw = W[0] * W[1] * 80**2
    assert amount(finding, "between") == pytest.approx(raw - luck)


def test_unknown_means_give_a_gain_of_at_least_so_much() -> None:
    """The spread inside strata alone bounds it from below, and the sentence says so."""
    _, finding = sized("strata", spread=with_means(None, 120.0))
    assert finding is not None
    assert "at least" in finding.answer
    assert "the gain may be larger" in finding.answer
    assert not any(a.name == "between" for a in finding.amounts)


def test_shares_that_cost_more_than_strata_gain_are_said() -> None:
    """Equal precision of both means overfills the small stratum."""
    _, finding = sized("strata", spread=with_means(80.0, 80.0), allocation="equal-precision")
    assert finding is not None
    assert finding.answer.startswith("These shares cost more than the strata gain")
    assert "For 9 mg/kg in every single stratum it would take 29 results." in finding.answer


def test_every_way_of_sharing_is_answered_after_rounding() -> None:
    """The table has the number, standard error and cost of each; the chosen one is the plan's."""
    found, finding = sized("strata", spread=with_means(40.0, 120.0))
    assert finding is not None
    rows = {row[0].removesuffix(" (chosen)"): row for row in finding.rows}
    assert list(rows) == ["proportional", "neyman", "cost-optimal", "equal-precision"]
    assert int(rows["neyman"][1]) == found.needed
    assert rows["neyman"][3] == f"{found.cost:.0f} EUR"
    assert all(float(row[2].split()[0]) <= 9.0 for row in rows.values())


def test_relative_precision_is_levelled_by_the_means() -> None:
    """By hand: s/mean of 0.45 and 0.375, so shares of 0.2025 to 0.140625."""
    found, finding = sized(
        "strata",
        spread=with_means(40.0, 120.0),
        allocation="equal-precision",
        equal_in="relative-standard-error",
    )
    assert finding is not None
    assert "relative standard error of" in finding.answer
    meadow, yard = (entry.needed for entry in found.strata)
    assert meadow / yard == pytest.approx(0.2025 / 0.140625, rel=0.2)


def test_one_stratum_has_nothing_to_gain() -> None:
    """Nor has a campaign with one objective an analyte that decides with others."""
    from fieldplan.sizing.asked.model import Asked
    from fieldplan.sizing.beside import deciding_analytes, strata
    from fieldplan.sizing.question import Part, Question

    campaign = make_campaign()
    question = Question((Part("site", 1.0, 20.0),), "standard_error", 6.0)
    asked = Asked(campaign, campaign.objective[0], question)
    found = size(campaign, make_spread(), make_frame())
    one = replace(found, strata=found.strata[:1])
    assert strata.finding(asked, one) is None
    assert deciding_analytes.finding(asked, found) is None


@pytest.mark.parametrize(
    ("allocation", "said"),
    [
        ("neyman", "Lead (52 %) and Zinc (48 %) decide the number and its shares together. Alone"),
        ("proportional", "Lead decides the number; the shares are set by other rules. Alone"),
    ],
)
def test_deciding_analytes_are_named_with_what_each_alone_needs(allocation: str, said: str) -> None:
    """The multipliers are those of the unrounded optimum; alone is the analyte's own answer."""
    lead, zinc = _alone(allocation)
    finding, needed = _deciding(allocation, 9.0)
    assert finding.answer.startswith(said)
    assert f"Lead {lead} and Zinc {zinc} would be needed; together {needed}." in finding.answer


def test_an_analyte_without_a_multiplier_is_kept_with_room_to_spare() -> None:
    """A standard error of 90 asks for nothing."""
    finding, _ = _deciding("neyman", 90.0)
    assert finding.answer.startswith(
        "Lead alone decides the number and its shares; Zinc is kept with room to spare."
    )
    saved = {a.name: a.value for a in finding.amounts if a.name.startswith("saved_")}
    assert saved["saved_zinc"] == pytest.approx(0.0, abs=1e-9)
    assert (saved["saved_lead"] or 0) > 0


def _deciding(allocation: str, target: float) -> tuple[Finding, int]:
    objective = zinc_objective(standard_error=target, assurance="plain", decides_n=True)
    design = (DesignTable(layout="stratified", allocation=allocation),)  # type: ignore[arg-type]
    campaign = campaign_with_zinc(objective, design=design)
    found = size(campaign, spread_with_zinc({"meadow": 30.0, "yard": 10.0}), make_frame())
    return next(f for f in found.findings if f.topic == "deciding-analytes"), found.needed


def _alone(allocation: str) -> tuple[int, int]:
    design = (DesignTable(layout="stratified", allocation=allocation),)  # type: ignore[arg-type]
    lead = size(make_campaign(design=design), make_spread(), make_frame()).needed
    entries = tuple(
        replace(entry, sigma=sigma)
        for entry, sigma in zip(make_spread().strata, (30.0, 10.0), strict=True)
    )
    spread = replace(make_spread(), strata=entries)
    return lead, size(make_campaign(design=design), spread, make_frame()).needed
