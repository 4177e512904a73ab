"""Non-detects to come, beside a mean."""

import math
from dataclasses import replace

import numpy as np
import pytest
from scipy import stats

from fieldplan.cli import entry
from fieldplan.sizing import size_asked
from fieldplan.sizing.beside.non_detects import finding
from fieldplan.sizing.model import Finding
from fieldplan.sizing.non_detects import forecast
from fieldplan.sizing.question import Part
from fieldplan.stats.censored_fit import fit_censored
from tests.command_runner import command_runner
from tests.unit.sizing.asking import ask
from tests.unit.sizing.askings import asked_mean
from tests.unit.sizing.beside.test_near_normal import amounts, with_pilot


def found_for(limit: float, **typed: object) -> Finding | None:
    """Give the finding for bare numbers and a reporting limit."""
    asked = asked_mean(keys=(f"analyte.reporting_limit={limit}",), **typed)
    return finding(asked, size_asked(asked))


def test_shares_below_the_limit_are_those_of_the_models() -> None:
    """Mean 10, CV 0.8, limit 9, by scipy's lognormal and gamma; a normal reaches below 0."""
    found = found_for(9, sigma=8.0, mean=10.0, results=12, half_width=3.0)
    sigma = math.sqrt(math.log(1.64))
    lognormal = stats.lognorm.cdf(9, sigma, scale=10 / math.sqrt(1.64))
    gamma = stats.gamma.cdf(9, 1 / 0.64, scale=6.4)
    told = amounts(found)
    assert told["share_below_high"] == pytest.approx(lognormal)
    assert told["share_below_low"] == pytest.approx(gamma)
    assert [line[0] for line in found.rows] == ["lognormal", "gamma"]
    assert f"({100 * gamma:.0f} to {100 * lognormal:.0f} %)" in found.answer


def test_the_interval_is_as_much_wider_as_drawn_campaigns_show() -> None:
    """Fresh lognormal campaigns of 30: ends with non-detects at 0 and at the limit.

    The mean of their half-widths differs from one at the expected s by about 1/(4n) and by
    skewness; 4 % covers both, and the error of 20,000 campaigns is below that.
    """
    found = found_for(9, sigma=8.0, mean=10.0, results=12, half_width=3.0)
    assert "Of 30 results" in found.answer
    sigma = math.sqrt(math.log(1.64))
    values = np.random.default_rng(21).lognormal(math.log(10) - sigma**2 / 2, sigma, (20_000, 30))
    reach = stats.t.ppf(0.975, 29) / math.sqrt(30)

    def ends(at: np.ndarray) -> tuple[float, float]:
        spread = math.sqrt(at.var(axis=1, ddof=1).mean())
        return at.mean() - reach * spread, at.mean() + reach * spread

    low = ends(np.where(values < 9, 0.0, values))[0]
    high = ends(np.where(values < 9, 9.0, values))[1]
    whole = ends(values)
    wider = (high - low) / (whole[1] - whole[0])
    told = float(next(line[2] for line in found.rows if line[0] == "lognormal"))
    assert told == pytest.approx(wider, rel=0.04)


def test_a_pilot_with_non_detects_is_fitted_by_likelihood() -> None:
    """The forecast is that of the fits, which their own tests hold to scipy."""
    values, detected = [2.5, 2.5, 6.0, 7.5, 9.0, 12.0, 20.0, 31.0], [False] * 2 + [True] * 6
    asked = asked_mean(sigma=10.0, mean=10.0, results=20, standard_error=2.5,
                       keys=("analyte.reporting_limit=5",))  # fmt: skip
    asked = with_pilot(asked, values, detected)
    lognormal, gamma = forecast(asked, [16], 5.0)
    for one in (lognormal, gamma):
        fit = fit_censored(values[2:], [5.0, 5.0], one.model)
        assert (one.parts[0].mean, one.parts[0].cv) == pytest.approx((fit.mean, fit.cv))
    found = finding(asked, size_asked(asked))
    assert amounts(found)["pilot_share"] == 0.25
    low, high = stats.beta.ppf(0.05, 2, 7), stats.beta.ppf(0.95, 3, 6)
    assert amounts(found)["pilot_share_low"] == pytest.approx(low)
    assert f"a share of {100 * low:.0f} % to {100 * high:.0f} %" in found.warnings[0]


def test_the_pilots_limit_stands_in_where_the_campaign_names_none() -> None:
    """Its largest; and the sheet says so."""
    asked = asked_mean(sigma=10.0, mean=10.0, results=20, standard_error=2.5)
    values = [2.5, 3.5, 6.0, 7.5, 9.0, 12.0, 20.0, 31.0]
    asked = with_pilot(asked, values, [False] * 2 + [True] * 6)
    found = finding(asked, size_asked(asked))
    assert "below the reporting limit of 7" in found.answer
    assert any("the pilot's largest" in line for line in found.assumptions)


def test_where_no_mean_should_be_claimed_it_is_said_and_what_would_help() -> None:
    """11 results at 80 % below: fewer than 3 detects in 61 of 100; at 70 % more results help."""
    hopeless = found_for(14, sigma=8.0, mean=10.0, results=12, half_width=6.0)
    total = int(hopeless.answer.split()[1])
    share = amounts(hopeless)["share_below_high"]
    chance = stats.binom.cdf(2, total, 1 - share)
    assert amounts(hopeless)["fewer_than_3"] == pytest.approx(chance)
    assert "a method with a lower limit would" in hopeless.warnings[0]
    assert "no mean should be claimed" in hopeless.warnings[0]
    helped = found_for(10.5, sigma=8.0, mean=10.0, results=12, half_width=8.0)
    enough = amounts(helped)["n_against_bounds"]
    assert f"from {enough} results on" in helped.warnings[0]


def test_strata_are_forecast_one_by_one() -> None:
    """Shares weighed by the results in each stratum, by scipy's gamma."""
    parts = (Part("meadow", 0.6, 5.0, mean=6.0), Part("yard", 0.4, 30.0, mean=60.0))
    plain = asked_mean(sigma=1.0, mean=1.0, results=20, standard_error=0.5)
    asked = replace(plain, question=ask(parts, 3.0), spread=None)
    gamma = next(one for one in forecast(asked, [10, 20], 5.0) if one.model == "gamma")
    shares = [stats.gamma.cdf(5, (m / s) ** 2, scale=s * s / m) for m, s in ((6, 5), (60, 30))]
    assert gamma.share == pytest.approx((10 * shares[0] + 20 * shares[1]) / 30)


@pytest.mark.parametrize(
    ("limit", "typed"),
    [
        (1.0, {"sigma": 3.0, "mean": 10.0}),  # hardly any below
        (9.0, {"sigma": 3.0}),  # no mean to place the limit against
        (9.0, {"sigma": 8.0, "mean": 10.0, "population": 12}),  # every unit taken
    ],
)
def test_nothing_is_said_where_few_or_nothing_is_known(
    limit: float, typed: dict[str, float]
) -> None:
    """It speaks only where many are to be expected."""
    target = 0.01 if "population" in typed else typed["sigma"] / 5
    assert found_for(limit, **typed, standard_error=target) is None


def test_a_normal_that_keeps_above_zero_is_one_of_the_models() -> None:
    """CV 0.3 puts 0.04 % below 0: then its share counts in the spread."""
    found = found_for(8.0, sigma=3.0, mean=10.0, results=12, standard_error=0.6)
    assert [line[0] for line in found.rows] == ["lognormal", "gamma", "normal"]
    assert amounts(found)["share_below_low"] == pytest.approx(stats.norm.cdf(8, 10, 3), abs=0.02)


def test_more_says_it_in_full_from_the_command_line() -> None:
    """Reached by topic, with the limit typed."""
    typed = ["size", "--sigma", "8", "--mean", "10", "--half-width", "3"]
    outcome = command_runner().invoke(
        entry, [*typed, "--with", "analyte.reporting_limit=9", "--more", "non-detects"]
    )
    assert outcome.exit_code == 0, outcome.output
    assert "Results below the reporting limit" in outcome.stdout
    wrong = command_runner().invoke(
        entry, [*typed, "--with", "analyte.reporting_limit=-9", "--more", "non-detects"]
    )
    assert wrong.exit_code == 2
    assert "reporting_limit" in wrong.stderr


def test_what_the_rules_make_of_them_is_said_before_the_field() -> None:
    """Of 30 results 60 % are expected below: without a shape by-share comes to the bounds."""
    bare = found_for(9, sigma=8.0, mean=10.0, results=12, half_width=3.0)
    assert not [line for line in bare.assumptions if line.startswith("The rules")]
    told = {}
    for rules in (("non_detects=by-share",), ("non_detects=by-share", "declared_shape=lognormal")):
        keys = (
            "analyte.reporting_limit=9",
            *(f"rules.{rule}" for rule in rules),
        )
        asked = asked_mean(keys=keys, sigma=8.0, mean=10.0, results=12, half_width=3.0)
        found = finding(asked, size_asked(asked))
        told[len(rules)] = found.assumptions[-1]
    assert "comes to bounds;" in told[1]
    assert "lognormal-likelihood" in told[2]
    fixed = (*keys[:1], "rules.non_detects=kaplan-meier")
    asked = asked_mean(keys=fixed, sigma=8.0, mean=10.0, results=12, half_width=3.0)
    said = finding(asked, size_asked(asked)).assumptions[-1]
    assert said.startswith("The rules fix non_detects = kaplan-meier for the answer;")
