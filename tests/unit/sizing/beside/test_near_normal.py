"""What the planned interval delivers, beside a mean, over shapes that fit."""

import math
from dataclasses import replace

import numpy as np
import pytest
from scipy import stats

from fieldplan.cli import entry
from fieldplan.lab.model import Spread, StratumSpread
from fieldplan.sizing import size_asked
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.beside import mean_band, near_normal
from fieldplan.sizing.model import Finding
from fieldplan.sizing.question import Part
from fieldplan.sizing.shapes import misses, n_within, sampled, site_shapes
from fieldplan.stats.mean_simulation import simulate_coverage
from tests.command_runner import command_runner
from tests.unit.sizing.asking import ask
from tests.unit.sizing.askings import asked_mean
from tests.unit.stats.published import row


def both(**typed: object) -> tuple[Finding | None, Finding | None]:
    """Give near_normal and mean_band for bare numbers."""
    asked = asked_mean(**typed)
    size = size_asked(asked)
    return near_normal.finding(asked, size), mean_band.finding(asked, size)


def amounts(finding: Finding) -> dict[str, float | int | None]:
    """Give the numbers by name."""
    return {amount.name: amount.value for amount in finding.amounts}


def with_pilot(asked: Asked, values: list[float], detected: list[bool]) -> Asked:
    """Put pilot values behind a question of one part, as the reader would."""
    sigma, mean = float(np.std(values, ddof=1)), float(np.mean(values))
    entry_ = StratumSpread(
        "analyte", asked.question.parts[0].name, sigma, mean, len(values), "pilot.csv",
        values=tuple(values), detected=tuple(detected),
    )  # fmt: skip
    part = replace(
        asked.question.parts[0], sigma=sigma, mean=mean, results=len(values), pilot="pilot.csv"
    )
    return replace(
        asked,
        spread=Spread("analyte", "mg/kg", (entry_,), entry_),
        question=replace(asked.question, parts=(part,)),
    )


def test_an_exponential_and_a_lognormal_hold_what_the_reference_says() -> None:
    """values.csv A10-005: exponential, n = 30, 92.71 %; the lognormal of CV 1 holds less."""
    found, _ = both(sigma=10.0, mean=10.0, results=20, standard_error=10 / math.sqrt(30))
    assert found is not None
    told = amounts(found)
    assert told["held_high"] == pytest.approx(row("A10-005").exact, abs=0.005)
    assert told["held_low"] < told["held_high"]
    assert found.answer.startswith(
        "At n = 30 the 95 % interval is expected to hold the mean in 90 to 93 of 100 campaigns"
    )
    assert "the true mean nearly always lies above it" in found.answer
    assert told["mean_above"] > 20 * told["mean_below"]


def test_the_sentence_holds_by_a_simulation_of_another_make() -> None:
    """Fresh gamma and lognormal campaigns of CV 0.8 at n = 20; 4 standard errors and the grain."""
    found, _ = both(sigma=8.0, mean=10.0, results=20, standard_error=8 / math.sqrt(20))
    generator, campaigns, sigma = np.random.default_rng(14), 20_000, math.sqrt(math.log(1.64))
    draws = {
        "gamma": generator.gamma(1 / 0.64, 0.64, (campaigns, 20)),
        "lognormal": generator.lognormal(-(sigma**2) / 2, sigma, (campaigns, 20)),
    }
    for line in found.rows:
        values = draws[line[0]]
        t = (values.mean(axis=1) - 1) / (values.std(axis=1, ddof=1) / math.sqrt(20))
        q = stats.t.ppf(0.975, 19)
        for text, truth in ((line[3], np.mean(t < -q)), (line[4], np.mean(t > q))):
            room = 100 * 4 * math.sqrt(truth * (1 - truth) / campaigns) + 0.4
            assert float(text) == pytest.approx(100 * truth, abs=room)


def test_the_textbook_thirty_is_tested() -> None:
    """At a CV of 1 thirty results hold 92.7 and 90.4 of 100: the column says so."""
    found, _ = both(sigma=10.0, mean=10.0, results=20, standard_error=2.5)
    place = found.columns.index("Holds at 30")
    gamma, lognormal = (float(line[place]) for line in found.rows)
    assert gamma == pytest.approx(92.7, abs=0.4)
    assert lognormal == pytest.approx(90.5, abs=0.5)  # 90.5 in a study made before this code


def test_one_sided_asks_for_far_more() -> None:
    """Cochran's 25·G1² belongs to two sides; the limit's rule is 121·G1² (Hall 1992)."""
    two, _ = both(sigma=10.0, mean=10.0, results=20, standard_error=2.0)
    one, _ = both(sigma=10.0, mean=10.0, results=20, standard_error=2.0, one_sided=True)
    assert "upper limit is expected to lie above the mean" in one.answer
    rules = [found.steps[-1] for found in (two, one)]
    assert [step.formula for step in rules] == ["n = 25·G1²", "n = 121·G1²"]
    assert rules[0].unrounded == pytest.approx(25 * 16)  # lognormal of CV 1: G1 = 4
    assert amounts(one)["n_within_a_point"] > 4 * amounts(two)["n_within_a_point"]
    assert amounts(one)["mean_below"] == 0


@pytest.mark.parametrize(
    "typed",
    [
        {"sigma": 2.0, "mean": 10.0},  # CV 0.2: within a point whatever the shape
        {"sigma": 10.0},  # no mean, no skewness
        {"sigma": 10.0, "mean": 10.0, "confidence": 0.995},  # outside the table
    ],
)
def test_nothing_is_said_where_nothing_is_known_or_wrong(typed: dict[str, float]) -> None:
    """A sentence on every screen is read on none."""
    found, _ = both(**typed, standard_error=typed["sigma"] / 5)
    assert found is None


def test_a_skewness_alone_is_enough() -> None:
    """A t statistic does not know the mean's place: skewness alone says what it delivers."""
    found, band = both(sigma=10.0, skewness=2.0, results=20, standard_error=10 / math.sqrt(30))
    assert amounts(found)["held_low"] == pytest.approx(0.927, abs=0.004)  # gamma, A10-005
    assert "error of" in band.answer
    mirrored, _ = both(sigma=10.0, skewness=-2.0, results=20, standard_error=10 / math.sqrt(30))
    assert amounts(mirrored)["mean_below"] == pytest.approx(amounts(found)["mean_above"])


def test_a_census_has_no_interval_to_judge() -> None:
    """Every unit visited leaves no error from choosing places."""
    typed = {"sigma": 10.0, "mean": 10.0, "standard_error": 0.01, "population": 12}
    assert both(**typed) == (None, None)


def test_zeros_in_the_pilot_bring_shapes_with_a_lump() -> None:
    """Half the pilot below the limit: the lump's shapes have its share and its CV at zero."""
    asked = asked_mean(sigma=10.0, mean=10.0, results=20, standard_error=2.5)
    values = [2.5, 2.5, 2.5, 2.5, 8.0, 15.0, 22.0, 60.0]
    asked = with_pilot(asked, values, [False] * 4 + [True] * 4)
    shapes = {shape.name: shape for shape in site_shapes(asked)}
    assert set(shapes) == {
        "gamma",
        "lognormal",
        "gamma with 50 % zeros",
        "lognormal with 50 % zeros",
    }
    at_zero = [0.0] * 4 + values[4:]
    assert shapes["gamma with 50 % zeros"].parts[0].whole_cv == pytest.approx(
        np.std(at_zero, ddof=1) / np.mean(at_zero)
    )
    found = near_normal.finding(asked, size_asked(asked))
    assert "with or without a lump of zeros" in found.answer
    assert any("count as zeros" in line for line in found.assumptions)


def test_strata_as_one_sample_come_near_a_simulation_of_the_strata() -> None:
    """The single sample whose mean leans as much, against campaigns drawn stratum by stratum."""
    parts = (
        Part("meadow", 0.6, 8.0, mean=10.0, results=8),
        Part("yard", 0.4, 30.0, mean=25.0, results=8),
    )
    plain = asked_mean(sigma=10.0, mean=10.0, results=20, standard_error=2.5)
    asked = replace(plain, question=ask(parts, 3.5), spread=None)
    counts = [14, 16]
    for shape in site_shapes(asked):
        quick = misses(asked.question, shape, counts)
        drawn = simulate_coverage(
            sampled(asked.question, shape, counts), confidence=0.95, kind="two-sided"
        )
        assert quick.held == pytest.approx(drawn.held, abs=4 * drawn.standard_error + 0.01)
        assert n_within(asked.question, shape, counts) > sum(counts)


def test_the_band_is_where_nine_means_in_ten_fall() -> None:
    """A gamma's mean is a gamma: scipy's quantiles, for the shape that serves worst."""
    _, band = both(sigma=10.0, skewness=2.0, mean=10.0, results=20, standard_error=2.0)
    low, high = band.picture.series[:2]
    sigma = math.sqrt(math.log(2))
    means = np.random.default_rng(5).lognormal(-(sigma**2) / 2, sigma, (40_000, 25)).mean(axis=1)
    place = low.x.index(25.0)
    for line, level in ((low, 0.05), (high, 0.95)):
        assert line.y[place] == pytest.approx(10 * np.quantile(means, level), rel=0.015)
    assert f"between {low.y[place]:.2f} and {high.y[place]:.1f}" in band.answer
    assert {30.0, 25.0} <= set(low.x)
    labels = [series.label for series in band.picture.series if series.style == "points"]
    assert labels == ["true mean above", "true mean below"]


def test_a_rare_part_is_spoken_of_with_its_chance() -> None:
    """(1 − p)^n: 11.3 % at 25 results, 27.7 of 100 campaigns for a twentieth."""
    _, band = both(sigma=10.0, mean=10.0, results=20, standard_error=2.0)
    assert amounts(band)["share_met"] == pytest.approx(1 - 0.05 ** (1 / 25))
    rows = dict(band.rows)
    assert float(rows["5 % of the site"]) == pytest.approx(100 * 0.95**25, abs=0.05)
    assert "(1 − p)^25" in band.warnings[-1]


def test_a_short_list_is_judged_as_a_list() -> None:
    """22 wells, 15 of them drawn: no band beyond the list, units instead of shares."""
    found, band = both(
        sigma=8.0, mean=10.0, results=10, half_width=3.0, population=22, assurance=0.8
    )
    total = int(found.answer.split()[3])
    assert "without replacement" in " ".join(found.assumptions)
    assert "results on" not in found.answer
    assert [line[-1] for line in found.rows] == ["–", "–"]
    assert max(band.picture.series[0].x) < 22
    rows = dict(band.rows)
    assert float(rows["1 unit of 22"]) == pytest.approx(100 * (1 - total / 22), abs=0.05)
    place = band.picture.series[0].x.index(float(total))
    width = band.picture.series[1].y[place] - band.picture.series[0].y[place]
    error = 8 * math.sqrt((1 - total / 22) / total)
    assert width == pytest.approx(2 * stats.norm.ppf(0.95) * error, rel=0.1)


def test_a_small_pilot_may_hide_a_tail_and_a_large_one_less() -> None:
    """The same CV from 8 and from 60 results: what is not ruled out shrinks."""
    shares = []
    for results in (8, 60):
        _, band = both(sigma=6.0, mean=10.0, results=results, standard_error=1.2)
        words = band.warnings[0]
        assert words.startswith(f"{results} results cannot show a long tail")
        shares.append(int(words.rsplit("about ", 1)[1].split()[0]))
    assert shares[0] < shares[1]


def test_more_says_it_in_full_and_json_holds_it() -> None:
    """Reached from the command line by topic."""
    typed = ["size", "--sigma", "45", "--mean", "44", "--pilot-n", "8", "--standard-error", "9"]
    outcome = command_runner().invoke(
        entry, [*typed, "--more", "near-normal", "--more", "mean-band"]
    )
    assert outcome.exit_code == 0, outcome.output
    assert "Is the mean near normal at this number of results?" in outcome.stdout
    assert "Where the mean falls at this number of results" in outcome.stdout
    refused = command_runner().invoke(
        entry, ["size", "--sigma", "45", "--standard-error", "9", "--more", "near-normal"]
    )
    assert refused.exit_code == 2
    assert "nothing given says anything about it" in refused.stderr


def test_thousands_of_results_are_judged_by_expansion_and_agree_with_drawing() -> None:
    """At the border of 2,000 both ways must give the same misses and the same band."""
    asked = asked_mean(sigma=10.0, mean=10.0, results=20, standard_error=2.5)
    values = [2.5, 2.5, 8.0, 15.0, 22.0, 60.0, 31.0, 12.0]
    asked = with_pilot(asked, values, [False] * 2 + [True] * 6)
    shape = next(shape for shape in site_shapes(asked) if shape.zeros)
    quick = misses(asked.question, shape, [2001])
    drawn = simulate_coverage(
        sampled(asked.question, shape, [1999]), confidence=0.95, kind="two-sided", campaigns=4_000
    )
    assert quick.held == pytest.approx(drawn.held, abs=4 * drawn.standard_error)
    low, high = mean_band._expanded_band(asked.question, shape, [1999])
    room = 4 * math.sqrt(0.05 * 0.95 / 4_000) / 0.103 * (high - low) / 3.29
    assert (low, high) == pytest.approx(drawn.band, abs=room)
