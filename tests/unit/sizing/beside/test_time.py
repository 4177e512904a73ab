"""Visits that resemble each other, beside a mean and in its number."""

import math
from dataclasses import replace
from datetime import date, timedelta
from typing import Any

import numpy as np
import pytest

from fieldplan.lab.model import Spread, StratumSpread, VisitCorrelation
from fieldplan.sizing import size_asked
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.beside.time import finding
from fieldplan.sizing.model import Finding
from fieldplan.sizing.question import Part, Question
from fieldplan.sizing.visit_series import series_of
from fieldplan.sizing.visits import as_visits, unhidden_sigma
from fieldplan.stats.period_mean import period_variance_share
from fieldplan.stats.series_correlation import correlation_of_visits
from fieldplan.stats.time_series import effective_number, results_behind_sigma, sigma_of_series
from tests.unit.sizing.askings import asked_mean, asked_numbers

RHO = "sigma.correlation_between_visits=0.35"
START = date(2024, 1, 10)


def amounts(found: Finding | None) -> dict[str, float | int | None]:
    """Give the numbers by name."""
    assert found is not None
    return {amount.name: amount.value for amount in found.amounts}


def monthly(values: list[float], **more: Any) -> StratumSpread:
    """A pilot of one visit every 30 days."""
    days = tuple(START + timedelta(days=30 * k) for k in range(len(values)))
    parts: dict[str, Any] = {"days": days, "positions": (None,) * len(values)}
    sigma = float(np.std(values, ddof=1))
    return StratumSpread(
        "analyte",
        parts.pop("stratum", more.pop("stratum", "site")),
        sigma,
        float(np.mean(values)),
        len(values),
        "pilot.csv",
        values=tuple(values),
        detected=(True,) * len(values),
        **(parts | more),
    )


def with_entries(asked: Asked, *entries: StratumSpread) -> Asked:
    """Put pilots behind a question, a part each."""
    share = 1 / len(entries)
    parts = tuple(Part(e.stratum, share, e.sigma, results=e.results, mean=e.mean) for e in entries)
    question: Question = replace(asked.question, parts=as_visits(parts, entries))
    return replace(asked, spread=Spread("analyte", "mg/L", entries), question=question)


def drifting(n: int = 36, seed: int = 4) -> list[float]:
    """Visits whose neighbours resemble each other by 0.7."""
    random = np.random.default_rng(seed)
    values = [float(random.standard_normal())]
    while len(values) < n:
        values.append(0.7 * values[-1] + math.sqrt(1 - 0.49) * float(random.standard_normal()))
    return [10 + 2 * value for value in values]


def test_36_independent_visits_become_75_in_the_number_itself() -> None:
    """σ = 6 for a standard error of 1 is 36; 36 × 1.35/0.65 = 74.77. Ends counted it is 74."""
    assert size_asked(asked_mean(sigma=6.0, standard_error=1.0)).needed == 36
    asked = asked_mean(sigma=6.0, standard_error=1.0, keys=(RHO,))
    size = size_asked(asked)
    assert size.needed == 75
    assert size.standard_error == pytest.approx(6 * math.sqrt(1.35 / 0.65 / 75))
    numbers = amounts(finding(asked, size))
    assert numbers["independent"] == pytest.approx(36)
    assert numbers["visits_by_factor"] == 75
    assert numbers["worth"] == pytest.approx(75 * 0.65 / 1.35)
    assert numbers["factor"] == pytest.approx(1.35 / 0.65)


def test_the_number_never_falls_short_of_the_whole_sum() -> None:
    """The factor's n is worth at least the independent visits, over targets and correlations."""
    for rho in (0.1, 0.5, 0.8):
        for target in (0.5, 1.0, 2.3):
            key = f"sigma.correlation_between_visits={rho}"
            size = size_asked(asked_mean(sigma=6.0, standard_error=target, keys=(key,)))
            assert effective_number(size.needed, rho) >= (6 / target) ** 2 - 1e-9


def test_a_correlation_is_carried_over_to_the_planned_days() -> None:
    """By hand: 0.35³ = 0.042875 at three times the days; 36 × 1.0896 = 39.2."""
    keys = (RHO, "sigma.correlation_days=30", "sigma.visit_spacing_days=90")
    asked = asked_mean(sigma=6.0, standard_error=1.0, keys=keys)
    size = size_asked(asked)
    found = finding(asked, size)
    assert size.needed == 40
    assert amounts(found)["rho"] == pytest.approx(0.042875)
    assert found is not None
    assert [row[0] for row in found.rows][:2] == ["45.0", "90.0"]
    assert [int(row[2]) for row in found.rows] == sorted(
        (int(r[2]) for r in found.rows), reverse=True
    )
    assert [step.symbol for step in found.steps] == ["ρ", "f", "s", "n'"]
    assert found.picture is not None
    assert found.picture.marks == (("planned", 90.0),)


def test_a_negative_correlation_gets_no_credit() -> None:
    """The factor of a long series, 0.8/1.2, would promise a short one more than it keeps."""
    size = size_asked(
        asked_mean(sigma=6.0, standard_error=1.0, keys=("sigma.correlation_between_visits=-0.2",))
    )
    assert size.needed == 36


def test_a_question_about_single_values_takes_no_notice() -> None:
    """Correlation changes how well a mean is known, not where single values lie."""
    one = asked_numbers(question="all-clear", keys=("share=0.05",))
    assert finding(one, size_asked(one)) is None


def test_nothing_is_said_where_nothing_is_declared_or_seen() -> None:
    """Bare numbers have no visits."""
    asked = asked_mean(sigma=6.0, standard_error=1.0)
    assert finding(asked, size_asked(asked)) is None


def test_a_pilot_of_dated_visits_speaks_for_itself() -> None:
    """Its correlation, and the visits that the same precision would take."""
    values = drifting()
    asked = with_entries(asked_mean(sigma=2.0, standard_error=0.5), monthly(values))
    size = size_asked(asked)
    found = finding(asked, size)
    seen = correlation_of_visits([30.0 * k for k in range(36)], values)
    assert amounts(found)["rho"] == pytest.approx(seen.rho)
    assert seen.low > 0
    assert found is not None
    assert f"resemble their neighbours by {seen.rho:.2f}" in found.answer
    assert f"instead of {size.plain_n}" in found.answer
    assert "correlation_between_visits" in found.warnings[0]
    assert (amounts(found)["visits_by_factor"] or 0) >= (amounts(found)["visits_ends_counted"] or 0)


def test_a_pilot_without_clear_correlation_leaves_n_as_it_is() -> None:
    """One sentence, no warning."""
    values = list(np.random.default_rng(8).standard_normal(30) + 10)
    asked = with_entries(asked_mean(sigma=2.0, standard_error=0.5), monthly(values))
    found = finding(asked, size_asked(asked))
    assert found is not None
    assert "show no clear correlation" in found.answer
    assert found.warnings == ()


def test_the_declared_correlation_is_held_against_the_pilot() -> None:
    """Visits that drift speak against a declared 0.01."""
    entry = monthly(drifting(), visits=VisitCorrelation(0.01))
    asked = with_entries(asked_mean(sigma=2.0, standard_error=0.5), entry)
    found = finding(asked, size_asked(asked))
    assert found is not None
    assert "speak against the declared 0.01" in found.warnings[0]


def test_a_pilot_of_visits_loses_what_its_s_hides() -> None:
    """Sigma is raised by the hidden part before the factor; n0 counts the visits it is worth."""
    values = drifting()
    entry = monthly(values, visits=VisitCorrelation(0.5))
    (part,) = as_visits([Part("site", 1.0, entry.sigma, results=36)], [entry])
    assert unhidden_sigma(entry.sigma, entry) == pytest.approx(
        sigma_of_series(entry.sigma, 36, 0.5)
    )
    assert part.sigma == pytest.approx(sigma_of_series(entry.sigma, 36, 0.5) * math.sqrt(3))
    assert part.results == int(results_behind_sigma(36, 0.5)) == 21
    typed = StratumSpread("analyte", "site", 5.0, None, 36, "x", visits=VisitCorrelation(0.5))
    (part,) = as_visits([Part("site", 1.0, 5.0, results=36)], [typed])
    assert (part.sigma, part.results) == (pytest.approx(5 * math.sqrt(3)), 36)


def test_fair_weather_visits_are_noticed_and_weighed() -> None:
    """By hand: 0.72 × 2.1 + 0.28 × 5.6 = 3.08, though 90 % of the visits saw low flow."""
    random = np.random.default_rng(3)
    around = random.standard_normal(18) * 0.3
    low = [float(2.1 + x) for x in around - around.mean()]
    high = [5.4, 5.8]
    days = [START + timedelta(days=30 * k) for k in range(20)]
    entries = (
        monthly(high, stratum="high flow", days=(days[7], days[13])),
        monthly(
            low, stratum="low flow", days=tuple(d for k, d in enumerate(days) if k not in (7, 13))
        ),
    )
    asked = with_entries(asked_mean(sigma=2.0, standard_error=0.5), *entries)
    shares = {"high flow": 0.28, "low flow": 0.72}
    parts = tuple(replace(part, weight=shares[part.name]) for part in asked.question.parts)
    asked = replace(asked, question=replace(asked.question, parts=parts, unit="mg/L"))
    found = finding(asked, size_asked(asked))
    assert found is not None
    said = next(line for line in found.warnings if "fell in" in line)
    assert "90 % of the pilot's visits fell in low flow, which is 72 % of the whole" in said
    assert "their plain mean is 2.45 mg/L, weighed by share 3.08 mg/L" in said
    assert [row[0] for row in found.rows] == ["high flow", "low flow"]
    assert [row[2] for row in found.rows] == ["10 %", "90 %"]


def test_strata_count_with_their_own_correlation() -> None:
    """Independent visits in one season, 0.35 in the other: sigma is raised there only."""
    entries = (
        StratumSpread("analyte", "summer", 4.0, 3.0, None, "x", visits=VisitCorrelation(0.35)),
        StratumSpread("analyte", "winter", 4.0, 5.0, None, "x"),
    )
    asked = with_entries(asked_mean(sigma=4.0, standard_error=0.5), *entries)
    size = size_asked(asked)
    found = finding(asked, size)
    assert found is not None
    assert [(row[0], row[1]) for row in found.rows] == [("summer", "0.35"), ("winter", "0")]
    counts = [stratum.needed for stratum in size.strata]
    worth = counts[0] * 0.65 / 1.35 + counts[1]
    assert amounts(found)["worth"] == pytest.approx(worth)
    assert 0.25 * 16 * (1 / counts[1] + 1.35 / 0.65 / counts[0]) == pytest.approx(
        (size.standard_error or 0) ** 2
    )


@pytest.mark.parametrize(
    "changes",
    [
        {"days": (START,) * 12},
        {"days": (*(START + timedelta(days=k) for k in range(11)), None)},
        {"positions": tuple((52.0, -1.9 + k / 100) for k in range(12))},
        {"days": ()},
    ],
)
def test_results_that_are_no_visits_to_one_place_are_no_series(changes: dict[str, Any]) -> None:
    """One day, a missing day, several places, or no days at all."""
    assert series_of([monthly(drifting(12), **changes)]) is None
    assert series_of([monthly(drifting(12))]) is not None
    assert series_of([monthly(drifting(7))]) is None


def test_what_the_pilot_shows_is_what_n_becomes_once_it_is_declared() -> None:
    """Writing the shown correlation into the campaign must give the number that was foretold."""
    values = drifting(60, seed=1)
    plain = with_entries(asked_mean(sigma=2.0, standard_error=0.5), monthly(values))
    foretold = amounts(finding(plain, size_asked(plain)))
    rho = float(foretold["rho"] or 0.0)
    declared = monthly(values, visits=VisitCorrelation(rho))
    asked = with_entries(asked_mean(sigma=2.0, standard_error=0.5), declared)
    assert size_asked(asked).plain_n == foretold["visits_by_factor"]


def test_the_mean_of_the_very_period_is_known_better() -> None:
    """By hand from the share of the function, with sigma as typed."""
    asked = asked_mean(sigma=6.0, standard_error=1.0, keys=(RHO,))
    numbers = amounts(finding(asked, size_asked(asked)))
    assert numbers["period_standard_error"] == pytest.approx(
        6 * math.sqrt(period_variance_share(75, 0.35))
    )
    assert (numbers["period_standard_error"] or 9) < 6 / math.sqrt(75)


def test_the_answer_says_how_near_visits_come_to_the_mean_of_their_own_period() -> None:
    """Who asks for the mean of this very year reads that number first, not the long run's."""
    asked = asked_mean(sigma=0.9, standard_error=0.3, keys=(RHO,))
    size = size_asked(asked)
    found = finding(asked, size)
    assert found is not None
    error = amounts(found)["period_standard_error"]
    assert f"its own mean with a standard error of {error:.3g}" in found.answer
    assert error < (size.standard_error or 0.0)
    assert f"against {size.standard_error:.3g}" in found.answer
