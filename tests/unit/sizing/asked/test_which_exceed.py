"""Which units of a list exceed: every unit sampled, pools tested first."""

from pathlib import Path

import numpy as np
import pytest

from fieldplan.base.errors import DesignError
from fieldplan.campaign.read import inspect_text
from fieldplan.cli import entry
from fieldplan.cli.size_options import BadOption
from fieldplan.sizing import Size, size_asked
from fieldplan.stats.pooling import analyses_of_units
from tests.command_runner import command_runner
from tests.unit.campaign.files import bent
from tests.unit.sizing.askings import asked_numbers


def sized(*keys: str, population: int = 200, **typed: object) -> Size:
    """Ask it of a list of bare numbers."""
    return size_asked(
        asked_numbers(question="which-exceed", keys=keys, population=population, **typed)
    )


def amounts(found: Size) -> dict[str, float]:
    """Give the numbers of the finding by name."""
    return {a.name: a.value for a in found.findings[0].amounts if a.value is not None}


def test_every_unit_is_sampled_and_pools_are_of_the_published_size() -> None:
    """Dorfman 1943, table I (values.csv A07-029 and A07-030): pools of 8 at 2 %, 27 %."""
    found = sized("share=0.02")
    assert found.needed == 200
    told = amounts(found)
    assert told["pool_size"] == 8
    assert round(100 * told["analyses_per_unit"]) == 27


def test_analyses_to_expect_equal_those_of_simulated_lists() -> None:
    """Simulation, seed fixed: 23 units at 10 % in pools of 4, the last of 3; 4 standard errors."""
    rng, runs = np.random.default_rng(13), 20_000
    positive = rng.random((runs, 23)) < 0.10
    totals = np.zeros(runs)
    for start in range(0, 23, 4):
        pool = positive[:, start : start + 4]
        totals += 1 + pool.any(axis=1) * pool.shape[1]
    error = totals.std(ddof=1) / runs**0.5
    assert abs(totals.mean() - analyses_of_units(0.10, 4, 23)) <= 4 * error


def test_dilution_and_the_campaign_cap_the_pool() -> None:
    """A unit at 10 in 8 gives 1.25, in 9 it gives 1.11, which a limit of 1.2 does not show."""
    keys = ("share=0.001", "analyte.reporting_limit=1.2")
    found = sized(*keys, level=10.0)
    assert amounts(found)["pool_size"] == 8
    assert any("8 units are the most" in line for line in found.sentences)
    assert amounts(sized(*keys, "largest_pool=5", level=10.0))["pool_size"] == 5


def test_where_many_exceed_no_pool_is_proposed() -> None:
    """Above 31 % every pool costs more than single analyses."""
    found = sized("share=0.4")
    assert "no pool saves an analysis" in found.sentences[0]
    assert amounts(found)["expected_analyses"] == 200


def test_bad_input_is_refused_with_its_value(tmp_path: Path) -> None:
    """One line each: an area, a share of nothing, a reporting limit above the level."""
    with pytest.raises(BadOption, match="an area has no units to tell apart"):
        size_asked(asked_numbers(question="which-exceed", keys=("share=0.02",), area=900.0))
    with pytest.raises(DesignError, match="reporting limit of 12 is above the level of 10"):
        sized("share=0.02", "analyte.reporting_limit=12", level=10.0)
    table = "[objective.which_exceed]\nshare = 0.02\nlargest_pool = 1\n\n[[sigma]]\npilot"
    text = bent(
        ('"mean"\nstandard_error = 6.0\nassurance = 0.80\n', '"which-exceed"\n'),
        ('assurance_chosen_by = "L. Fenn"\n', ""),
        ("[[sigma]]\npilot", table),
    )  # fmt: skip
    told = inspect_text(text, tmp_path / "campaign.toml").problems
    assert any("an area has no units to tell apart" in line for line in told), told
    assert any("one unit is no pool (got 1)" in line for line in told), told


def test_it_can_be_asked_on_the_command_line() -> None:
    """With prices the answer says what the pools save: 200 − 54.85 analyses of 60."""
    outcome = command_runner().invoke(
        entry,
        ["size", "--question", "which-exceed", "--population", "200", "--with", "share=0.02",
         "--with", "cost.per_analysis=60", "--with", "cost.currency=EUR", "--json"],
    )  # fmt: skip
    assert outcome.exit_code == 0, outcome.output
    assert "saves about 8709 EUR" in outcome.stdout


@pytest.mark.parametrize("share", [0.3, 0.35])
def test_pool_that_saves_less_than_one_analysis_is_not_proposed(share: float) -> None:
    """Brute force over every pool size: 37 units at 30 % take 36.6 analyses at the best."""
    best = min(
        37 // m * (1 + m * (1 - (1 - share) ** m)) + (37 % m) for m in range(2, 37)
    )  # what is left over, one by one
    assert best > 36
    found = sized(f"share={share}", "analyte.reporting_limit=2", population=37, level=10.0)
    told = amounts(found)
    assert (told["pool_size"], told["expected_analyses"]) == (1, 37)
    finding = found.findings[0]
    assert "one by one" in finding.answer
    assert "Pools of" not in finding.answer
    assert "pool of 1 " not in " ".join(finding.warnings)
    assert finding.picture is None


def test_pool_that_saves_more_than_one_analysis_is_proposed_at_any_share() -> None:
    """Closed form: 1/3 + 1 − 0.7³ = 0.990 a unit, two analyses in 198."""
    assert amounts(sized("share=0.3", population=198))["pool_size"] == 3


def test_dilution_is_said_as_a_fraction() -> None:
    """A pool of 32 at one in a thousand; the one unit in it counts 1/32."""
    said = " ".join(sized("share=0.001", population=500).findings[0].warnings)
    assert "1/32 of it in a pool of 32" in said
