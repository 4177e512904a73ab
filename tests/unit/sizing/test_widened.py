"""A half-width for the skew-widened interval: its n, its chance, its words and refusals."""

import math
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from fieldplan.base.errors import DesignError
from fieldplan.sizing.answer import answer
from fieldplan.sizing.asked.mean_and_level import count
from fieldplan.sizing.beside import findings_beside
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Part, Question
from fieldplan.sizing.shapes import SiteShape, misses
from fieldplan.sizing.widened import chance_of_reach, widened_counts
from fieldplan.stats.mean_shape import Shape
from fieldplan.stats.skew_interval import skew_interval
from tests.unit.sizing.askings import asked_numbers

KEYS = ("rules.mean_interval=skew-widened", "rules.promised_class=cv-up-to-2")


def wide(**changes: Any) -> Question:
    """Ask for a half-width of 6 at sigma 12 and mean 15."""
    part = Part("site", 1.0, 12.0, results=12, mean=15.0)
    asked = Question(
        (part,), "half_width", 6.0, mean=15.0, unit="mg/kg",
        mean_interval="skew-widened", promised_class="cv-up-to-2",
    )  # fmt: skip
    return replace(asked, **changes)


def test_n_is_the_first_whose_expected_half_width_meets_the_target() -> None:
    """Oracle: counting upward from the fewest of the class."""
    question = wide()
    (n,) = widened_counts(question)
    widths = {k: Precision(question).half_width([k]) for k in range(10, n + 1)}
    assert n == next(k for k, width in widths.items() if width <= 6.0)


def test_the_expected_half_width_is_that_of_campaigns_drawn_outright() -> None:
    """Oracle: lognormal campaigns of numpy through ``skew_interval``; four standard errors."""
    question = wide()
    (n,) = widened_counts(question)
    sigma, campaigns = math.sqrt(math.log1p(0.8**2)), 3000
    rng = np.random.default_rng(3)
    reaches = []
    for values in 15 * rng.lognormal(-(sigma**2) / 2, sigma, (campaigns, n)):
        low, high = skew_interval(values, population_class="cv-up-to-2")
        reaches.append(((high or 0.0) - (low or 0.0)) / 2)
    error = float(np.std(reaches)) * math.sqrt(1 / campaigns + 1 / 8000)
    assert Precision(question).half_width([n]) == pytest.approx(np.mean(reaches), abs=4 * error)


def test_the_answer_says_students_n_beside() -> None:
    """The better interval is wider and needs more; both numbers are said."""
    found = answer(wide())
    student = answer(wide(mean_interval="student-t", promised_class=None))
    assert found.plain_n > student.plain_n
    said = " ".join(found.sentences)
    assert f"Student's t would ask for {student.plain_n}" in said
    assert "skew-widened, cv-up-to-2" in said
    assert [step.symbol for step in found.steps].count("n(t)") == 1
    assert found.half_width is not None
    assert found.half_width <= 6.0


def test_fewer_than_the_class_has_are_never_planned() -> None:
    """A wide target still takes the fewest results for which the promise is kept."""
    found = answer(wide(value=100.0))
    assert found.needed == 10
    assert "10 is the fewest for which the promise is kept" in " ".join(found.sentences)


def test_typed_locations_below_the_class_are_said_not_to_keep_it() -> None:
    """What a person fixes is said to fall short, not changed."""
    found = answer(wide(locations=6))
    assert "NOT KEPT: skew-widened keeps its promise for cv-up-to-2 from 10" in " ".join(
        found.sentences
    )


def test_assurance_asks_for_more_and_its_chance_is_met() -> None:
    """The smallest number whose chance is the stated one, counted upward."""
    question = wide(assurance=0.8)
    found = answer(question)
    assert found.needed > found.plain_n
    chances = [Precision(question).chance([n]) or 0.0 for n in (found.needed - 1, found.needed)]
    assert chances[0] < 0.8 <= chances[1]


def test_the_chance_with_sigma_known_is_the_share_of_campaigns() -> None:
    """Oracle: campaigns of numpy through ``skew_interval``; 40 ranked reaches stand for all."""
    part = Part("site", 1.0, 6.0, mean=15.0)
    question = wide(parts=(part,), value=3.4)
    n, cv, campaigns = 20, 0.4, 3000
    chance = chance_of_reach(Precision(question), [n], 3.4, pilot=math.inf)
    shares = []
    rng, sigma = np.random.default_rng(8), math.sqrt(math.log1p(cv**2))
    drawn = (
        15 * rng.gamma(1 / cv**2, cv**2, (campaigns, n)),
        15 * rng.lognormal(-(sigma**2) / 2, sigma, (campaigns, n)),
    )
    for family in drawn:
        ends = [skew_interval(values, population_class="cv-up-to-2") for values in family]
        shares.append(np.mean([((high or 0) - (low or 0)) / 2 <= 3.4 for low, high in ends]))
    error = math.sqrt(0.25 / campaigns + 0.25 / 10_000)
    assert chance == pytest.approx(min(shares), abs=4 * error + 0.5 / 40)


def test_a_mean_to_expect_is_asked_for() -> None:
    """The interval depends on the coefficient of variation."""
    bare = Part("site", 1.0, 12.0, results=12)
    with pytest.raises(DesignError, match="write expected_mean"):
        answer(wide(parts=(bare,), mean=None))


def test_strata_and_short_lists_are_refused() -> None:
    """No evidence stands behind them."""
    halves = tuple(Part(name, 0.5, 12.0, results=12, mean=15.0) for name in "ab")
    with pytest.raises(DesignError, match="for strata there is no evidence"):
        answer(wide(parts=halves))
    short = Part("site", 1.0, 12.0, results=12, mean=15.0, population=60)
    with pytest.raises(DesignError, match="of 60 units is more than a tenth"):
        answer(wide(parts=(short,)))


def test_a_pilot_outside_the_class_is_warned_of() -> None:
    """CV 0.8 fits both; CV 1.2, or zeros, do not fit the smaller class."""
    narrow = {"promised_class": "cv-up-to-1"}
    assert "lies outside" not in " ".join(answer(wide(**narrow)).sentences)
    spread = Part("site", 1.0, 18.0, results=12, mean=15.0)
    said = " ".join(answer(wide(parts=(spread,), value=12.0, **narrow)).sentences)
    assert "What is known lies outside cv-up-to-1: a coefficient of variation of 1.2" in said
    zeros = Part("site", 1.0, 12.0, results=12, mean=15.0, zeros=0.25)
    said = " ".join(answer(wide(parts=(zeros,), **narrow)).sentences)
    assert "25 % zeros or non-detects, and the class has no zeros" in said


def test_conditions_hold_the_evidence_for_the_class() -> None:
    """Words about Student's t would be about another interval."""
    said = " ".join(answer(wide()).conditions)
    assert "in the worst of them" in said
    assert "A t interval" not in said


def test_near_normal_judges_the_fixed_interval() -> None:
    """Student's t falls short at this n and CV; the fixed interval does not, so nothing is said."""
    typed = {
        "sigma": 12.0, "mean": 15.0, "pilot_n": 12, "half_width": 6.0, "area": 5000.0,
        "layout": "simple-random",
    }  # fmt: skip
    topics = {}
    for keys in ((), KEYS):
        asked = asked_numbers(**typed, keys=keys)
        size = answer(asked.question)
        topics[keys] = [f.topic for f in findings_beside(asked, size, wanted="all")]
    assert "near-normal" in topics[()]
    assert not {"near-normal", "two-stages", "mean-band"} & set(topics[KEYS])


def test_misses_of_the_fixed_interval_are_simulated() -> None:
    """A gamma shape with zeros as well; the share is that of ``widened_misses``."""
    shape = Shape("gamma", 0.9, zeros=0.3)
    found = misses(wide(), SiteShape("gamma with 30 % zeros", (shape,)), (20,))
    assert 0.93 < found.held < 1.0
    assert found.too_low + found.too_high == pytest.approx(1 - found.held)


def test_a_test_against_a_level_says_that_its_chances_are_students() -> None:
    """The number is by the t test; the limit that will be reported is another one."""
    asked = asked_numbers(
        question="mean-and-level", sigma=12.0, mean=15.0, area=5000.0, layout="simple-random",
        level=30.0, keys=("assume=above-level", "gray_edge=20", "alpha=0.05", "beta=0.2", *KEYS),
    )  # fmt: skip
    assert any("[rules] fix skew-widened" in line for line in count(asked).finding.warnings)
