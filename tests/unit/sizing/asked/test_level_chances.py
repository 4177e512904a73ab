"""What is said of a decision about a level: the shape a chance holds for, limits, alpha."""

import re

import numpy as np
import pytest
from scipy import stats

from fieldplan.base.errors import DesignError
from fieldplan.cli import entry
from fieldplan.sizing.asked.sure_words import sure_words
from fieldplan.sizing.question import Part, Question
from fieldplan.stats.risks import check_risks
from tests.command_runner import command_runner

LEVEL = ["--question", "mean-and-level", "--sigma", "48", "--level", "150", "--one-sided"]
RISKS = ["--with", "alpha=0.05", "--with", "beta=0.2"]
BELOW = [*LEVEL, "--with", "assume=above-level", "--with", "gray_edge=110"]
ABOVE = [*LEVEL, "--with", "assume=below-level", "--with", "gray_edge=190"]


def said(*words: str) -> str:
    """Give what the command prints, on one line."""
    outcome = command_runner().invoke(entry, ["size", *words])
    assert outcome.exit_code == 0, outcome.output
    return " ".join(outcome.stdout.split())


@pytest.mark.parametrize("kurtosis", [[], ["--excess-kurtosis", "6"]])
def test_chance_names_the_shape_that_it_was_reckoned_for(kurtosis) -> None:
    """A chance under declared heavy tails is none for near normal results, nor the reverse."""
    words = said(*BELOW, *RISKS, "--pilot-n", "8", *kurtosis)
    assert ("if single results are near normal" in words) is not bool(kurtosis)
    assert ("with the heavy tails declared (excess kurtosis 6)" in words) is bool(kurtosis)
    chance = float(re.search(r"chance that 11 are enough is (\d+) %", words)[1])
    assert (chance < 45) is bool(kurtosis)


def test_other_questions_name_the_shape_too() -> None:
    """The same sentence serves every question with a pilot."""
    part = Part("site", 1.0, 20.0, results=8, excess_kurtosis=6.0)
    words = sure_words(Question((part,), "standard_error", 1.0), 0.39)
    assert "with the heavy tails declared (excess kurtosis 6)" in words
    assert "half of campaigns" not in sure_words(Question((part,), "standard_error", 1.0), None)


@pytest.mark.parametrize(
    ("words", "name", "alpha"), [(BELOW, "upper", 0.05), (ABOVE, "lower", 0.01)]
)
def test_limit_to_expect_is_the_one_that_decides_and_stands_there_once(words, name, alpha):
    """Simulation: mean distance of the t limit over 100 000 made campaigns of normal results."""
    told = said(*words, "--with", f"alpha={alpha:g}", "--with", "beta=0.2", "--population", "400",
                "--more", "mean-and-level")  # fmt: skip
    told_once = re.findall(
        rf"the {100 * (1 - alpha):g} % {name} limit on average ([\d.]+) (above|below) the", told
    )
    assert [side for _, side in told_once] == ["above" if name == "upper" else "below"]
    assert "upper limit 2" not in told
    n = int(re.search(r"(\d+) results are needed", told)[1])
    rng = np.random.default_rng(5)
    s = np.std(rng.normal(0.0, 48.0, (100_000, n)), axis=1, ddof=1)
    far = stats.t.ppf(1 - alpha, n - 1) * s * np.sqrt((1 / n) * (1 - n / 400))
    tolerance = 4 * float(np.std(far)) / np.sqrt(len(far)) + 0.05
    assert float(told_once[0][0]) == pytest.approx(float(np.mean(far)), abs=tolerance)


@pytest.mark.parametrize("words", [BELOW, ABOVE])
def test_skewness_says_how_often_the_level_is_left_wrongly_either_way(words) -> None:
    """Simulation: 200 000 gamma campaigns of skewness 2 with their mean at the level, t test."""
    told = said(*words, *RISKS, "--pilot-n", "8", "--skewness", "2")
    stated = float(re.search(r"come out \w+ it in about ([\d.]+) % of campaigns", told)[1])
    rng = np.random.default_rng(6)
    n, campaigns = 11, 200_000
    made = rng.exponential(1.0, (campaigns, n)) - 1.0
    t = np.mean(made, axis=1) / np.std(made, axis=1, ddof=1) * np.sqrt(n)
    point = stats.t.ppf(0.95, n - 1)
    wrong = 100 * float(np.mean(t < -point if words is BELOW else t > point))
    error = np.sqrt(wrong * (100 - wrong) / campaigns)
    assert stated == pytest.approx(wrong, abs=4 * error + 0.55)


@pytest.mark.parametrize("question", [BELOW, ["--question", "share", "--with", "compare_with=0.3",
                                             "--with", "expected=0.15"]])  # fmt: skip
def test_alpha_above_one_half_is_refused_in_one_line(question) -> None:
    """Beyond one half Student's quantile is below 0: the limit lies on the wrong side."""
    assert stats.t.ppf(1 - 0.6, 9) < 0
    outcome = command_runner().invoke(
        entry, ["size", *question, "--with", "alpha=0.6", "--with", "beta=0.05"]
    )
    assert outcome.exit_code != 0
    text = outcome.stderr + str(outcome.exception or "")
    assert "alpha" in text
    assert "0.5 at most" in text
    with pytest.raises(DesignError, match=r"0\.5 at most"):
        check_risks(0.6, 0.05)
    check_risks(0.5, 0.05)
