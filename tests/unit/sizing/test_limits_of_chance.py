"""How far the chance can be trusted: what the sheet and docs/methods.md say, simulated."""

import math
import re
from pathlib import Path

import numpy as np
import pytest
from numpy.random import Generator
from numpy.typing import NDArray
from scipy import stats

from fieldplan.sizing.answer import answer
from fieldplan.sizing.conditions import NEAR_NORMAL
from fieldplan.sizing.counting import assured_counts
from fieldplan.sizing.money import Prices
from fieldplan.sizing.question import Part
from fieldplan.stats.assurance import n_for_half_width_at_assurance
from tests.unit.sizing.asking import ask, three, whole

METHODS = Path(__file__).parents[3] / "docs" / "methods.md"
STATED = 0.8
SITE = ((0.654, 0.164, 0.182), (25.3, 89.9, 44.0), (6, 4, 5))
"""Weights, sigmas and pilots of a site of three strata."""


def drawn(family: str, shape: tuple[int, ...], generator: Generator) -> NDArray[np.float64]:
    """Draw results of mean 0 and sd 1; skewed ones of a population with mean 1 and sd 1."""
    if family == "normal":
        return generator.standard_normal(shape)
    if family == "gamma":
        return generator.exponential(1.0, shape) - 1
    logs = math.sqrt(math.log(2)) * generator.standard_normal(shape)
    return np.exp(logs - math.log(2) / 2) - 1


def noise(share: float, campaigns: int) -> float:
    """Give 4 standard errors of a simulated share, and half a percent for rounding."""
    return 4 * math.sqrt(share * (1 - share) / campaigns) + 0.005


def said(row: str) -> dict[str, tuple[float, float]]:
    """Read a row of the table in docs/methods.md: lowest and highest share by family."""
    line = next(line for line in METHODS.read_text("utf-8").splitlines() if row in line)
    cells = [[float(n) / 100 for n in re.findall(r"\d+", cell)] for cell in line.split("|")[2:4]]
    return {name: (min(c), max(c)) for name, c in zip(("gamma", "lognormal"), cells, strict=True)}


@pytest.mark.parametrize("family", ["gamma", "lognormal"])
def test_skewed_pilots_keep_a_standard_error_as_rarely_as_said(family: str) -> None:
    """Simulation: the upper limit s·√(df/χ²) reaches the true sigma in this share of pilots."""
    generator, campaigns = np.random.default_rng(1908), 40_000
    found = []
    for n0 in (3, 5, 8, 12, 20, 50):
        squares = drawn(family, (campaigns, n0), generator).var(axis=1, ddof=1)
        upper = squares * (n0 - 1) / stats.chi2.ppf(1 - STATED, n0 - 1)
        found.append(float((upper >= 1).mean()))
    low, high = said("standard error, one population")[family]
    assert min(found) == pytest.approx(low, abs=noise(low, campaigns))
    assert max(found) == pytest.approx(high, abs=noise(high, campaigns))


@pytest.mark.slow
@pytest.mark.parametrize("family", ["gamma", "lognormal"])
def test_skewed_pilots_keep_a_half_width_as_rarely_as_said(family: str) -> None:
    """Simulation of pilot and campaign: the share of intervals that came out narrow enough."""
    generator, campaigns, width = np.random.default_rng(7), 1000, 0.35
    low, high = said("half-width, one population")[family]
    for n0 in (5, 20):
        kept = 0
        for _ in range(campaigns):
            s = float(drawn(family, (n0,), generator).std(ddof=1))
            n = n_for_half_width_at_assurance(
                s, width, assurance=STATED, confidence=0.95, pilot_n=n0
            )
            spread = drawn(family, (n,), generator).std(ddof=1)
            kept += stats.t.ppf(0.975, n - 1) * spread / math.sqrt(n) <= width
        room = noise(low, campaigns)
        assert low - room <= kept / campaigns <= high + room


def stratified(
    site: tuple[tuple[float, ...], tuple[float, ...], tuple[int, ...]],
    target: float,
    *,
    family: str = "normal",
    floor: int = 2,
    campaigns: int = 800,
) -> float:
    """Simulate pilots, size by Neyman at 80 %, and give the share that keeps the target."""
    generator, kept = np.random.default_rng(31), 0
    for _ in range(campaigns):
        parts = tuple(
            Part(str(k), w, sigma * float(drawn(family, (n0,), generator).std(ddof=1)), results=n0)
            for k, (w, sigma, n0) in enumerate(zip(*site, strict=True))
        )
        question = ask(parts, target, allocation="neyman", floor=floor, assurance=STATED)
        counts = assured_counts(question, STATED) or []
        variance = sum((w * s) ** 2 / n for w, s, n in zip(*site[:2], counts, strict=True))
        kept += variance <= target**2
    return kept / campaigns


@pytest.mark.slow
@pytest.mark.parametrize("family", ["gamma", "lognormal"])
def test_skewed_strata_keep_their_target_as_rarely_as_said(family: str) -> None:
    """Simulation of three strata with pilots of 6, 4 and 5."""
    stated = said("standard error, three strata")[family][0]
    assert stratified(SITE, 10.0, family=family, floor=4) == pytest.approx(
        stated, abs=noise(stated, 800)
    )


@pytest.mark.slow
@pytest.mark.parametrize(
    ("site", "target"),
    [
        (((1 / 6,) * 6, (20.0, 30.0, 40.0, 50.0, 60.0, 70.0), (3,) * 6), 4.0),
        (((0.9, 0.05, 0.05), (20.0, 360.0, 360.0), (10, 3, 3)), 9.0),
        (((0.64, 0.22, 0.14), (18.0, 45.0, 90.0), (4, 4, 4)), 4.5),
    ],
)
def test_small_pilots_keep_less_than_stated_as_said(
    site: tuple[tuple[float, ...], tuple[float, ...], tuple[int, ...]], target: float
) -> None:
    """Simulation: between the 72 and 80 % of the sheet, near normal results."""
    room = noise(0.72, 800)
    assert 0.72 - room <= stratified(site, target) <= 0.80 + room


def test_the_sheet_says_the_range_of_the_documented_figures() -> None:
    """Both are read from the table, so that neither can be changed alone."""
    rows = [
        said(row) for row in ("one population, pilots of 3", "three strata, N", "half-width, o")
    ]
    for family in ("gamma", "lognormal"):
        low = min(row[family][0] for row in rows)
        high = max(row[family][1] for row in rows)
        assert f"{100 * low:.0f} to {100 * high:.0f} %" in NEAR_NORMAL


def test_small_pilots_are_named_where_neyman_follows_them() -> None:
    """Proportional counts follow no pilot, and the chance of one population is exact."""
    parts = (
        Part("field", 0.7, 20.0, results=6),
        Part("tip", 0.2, 60.0, results=4),
        Part("yard", 0.1, 40.0, results=5),
    )
    named = "Fewer than 5 results stand behind sigma in tip (4), and Neyman allocation follows them"
    assert named in " ".join(answer(ask(parts, 6.0, allocation="neyman")).conditions)
    priced = ask(parts, 6.0, allocation="cost-optimal", prices=Prices("EUR", per_location=30.0))
    assert "cost-optimal allocation follows them" in " ".join(answer(priced).conditions)
    for question in (
        ask(parts, 6.0),
        ask(parts, 6.0, allocation="equal-precision"),
        ask(whole(results=3), 6.0),
        ask(three(results=5), 9.0, allocation="neyman"),
    ):
        assert "Fewer than" not in " ".join(answer(question).conditions)
