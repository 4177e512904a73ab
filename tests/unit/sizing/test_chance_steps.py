"""A stranger can do the working of a chance again from what is printed alone."""

import math
from itertools import pairwise

import pytest
from scipy import stats

from fieldplan.base.working import Step
from fieldplan.packet.sheets.wording import number
from fieldplan.sizing.answer import answer
from fieldplan.sizing.question import Part, Question
from tests.unit.sizing.asking import ask, three

FLOORED = (
    Part("pasture", 0.654006, 25.2916, results=6),
    Part("tip", 0.164097, 89.9225, results=4),
    Part("yard", 0.181897, 43.9574, results=5),
)
LISTED = tuple(
    Part(name, weight, sigma, results=n0, population=size)
    for name, weight, sigma, n0, size in (
        ("north", 0.6, 18.0, 6, 60),
        ("south", 0.3, 45.0, 5, 30),
        ("west", 0.1, 90.0, 4, 6),
    )
)
COMMON = (
    Part("a", 0.64, 18.0, results=9, pilot="one"),
    Part("b", 0.22, 45.0, results=9, pilot="one"),
    Part("c", 0.14, 90.0, results=5, pilot="two"),
)
QUESTIONS = [
    ask(FLOORED, 10.0, allocation="neyman", floor=4, assurance=0.8),
    ask(FLOORED, 20.86, target="half_width", allocation="neyman", floor=4, assurance=0.8),
    ask(LISTED, 5.0, allocation="neyman", assurance=0.8),
    ask(COMMON, 9.0, allocation="neyman", assurance=0.8),
    ask(three(results=8), 9.0, assurance=0.9),
    ask(three(results=8), 20.0, target="half_width", interval="upper-limit", assurance=0.67),
]


def printed(step: Step) -> dict[str, float]:
    """Read a step's inputs back as the sheet prints them, six digits each."""
    return {entry.symbol: float(number(entry.value)) for entry in step.inputs}


def by_stratum(given: dict[str, float], letter: str) -> dict[str, float]:
    """Pick the inputs ``letter(stratum)``."""
    return {
        symbol[len(letter) + 1 : -1]: value
        for symbol, value in given.items()
        if symbol.startswith(f"{letter}(")
    }


@pytest.mark.parametrize("question", QUESTIONS)
def test_degrees_of_freedom_can_be_computed_again(question: Question) -> None:
    """Satterthwaite's formula over the printed terms, by hand; the terms sum to V."""
    steps = answer(question).steps
    pairs = [(step, after) for step, after in pairwise(steps) if step.symbol == "df"]
    assert len(pairs) == 2
    for step, _ in pairs:
        v, n0 = by_stratum(printed(step), "v"), by_stratum(printed(step), "n0")
        df = math.fsum(v.values()) ** 2 / math.fsum(v[k] ** 2 / (n0[k] - 1) for k in v)
        assert step.unrounded == pytest.approx(df, rel=1e-5)
        chance = steps[steps.index(step) + 1 :]
        chance = next(later for later in chance if later.symbol == "chance")
        assert printed(chance)["V"] == pytest.approx(math.fsum(v.values()), rel=1e-5)
        assert printed(chance)["df"] == pytest.approx(df, rel=1e-5)


@pytest.mark.parametrize("question", QUESTIONS[:4])
def test_the_factor_for_neyman_can_be_computed_again(question: Question) -> None:
    """exp(Σ p (1 − p/P) / (n0 − 1)) over the printed shares, which sum to the printed P."""
    found = [step for step in answer(question).steps if step.symbol == "m"]
    assert found
    for step in found:
        given = printed(step)
        p, n0 = by_stratum(given, "p"), by_stratum(given, "n0")
        assert given["P"] == pytest.approx(math.fsum(p.values()), rel=1e-5)
        excess = math.fsum(p[k] * (1 - p[k] / given["P"]) / (n0[k] - 1) for k in p)
        assert step.unrounded == pytest.approx(math.exp(excess), rel=1e-5)
        assert step.source.startswith("derived here, no published source")


def test_strata_at_their_floor_or_taken_whole_have_no_share() -> None:
    """The yard stands at its floor of 4, the west list at its 6: neither follows its pilot."""
    floored = next(step for step in answer(QUESTIONS[0]).steps if step.symbol == "m")
    assert set(by_stratum(printed(floored), "p")) == {"pasture", "tip"}
    listed = [step for step in answer(QUESTIONS[2]).steps if step.symbol == "m"][-1]
    assert set(by_stratum(printed(listed), "p")) == {"north", "south"}


@pytest.mark.parametrize("question", QUESTIONS)
def test_the_chance_can_be_computed_again(question: Question) -> None:
    """By scipy from the printed inputs: χ² for a standard error, F for a half-width."""
    chances = [step for step in answer(question).steps if step.symbol == "chance"]
    assert len(chances) == 2
    for step in chances:
        given = printed(step)
        predicted = given.get("m", 1.0) * given["V"]
        if "SE" in given:
            chance = stats.chi2.sf(given["df"] * predicted / given["SE"] ** 2, given["df"])
        else:
            level = 0.975 if question.interval == "two-sided" else 0.95
            assert given["t"] == pytest.approx(stats.t.ppf(level, given["df'"]), rel=1e-5)
            ratio = given["h"] ** 2 / (given["t"] ** 2 * predicted)
            chance = stats.f.cdf(ratio, given["df'"], given["df"])
        assert step.unrounded == pytest.approx(chance, abs=1e-4)
        assert ("the factor m derived here, no published source" in step.source) == ("m" in given)
