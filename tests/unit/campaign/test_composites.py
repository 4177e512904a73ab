"""Rules for composites, ranked sets and the parts of sigma in a campaign file."""

from pathlib import Path

import pytest

from fieldplan.campaign.read import inspect_text
from tests.unit.campaign.files import PLAIN, bent

DESIGN = 'layout = "simple-random"'
SIGMA = 'pilot = "pilot.csv"'
PRICES = '[cost]\ncurrency = "EUR"\nper_increment = 3.0\n[draw]'


def problems(tmp_path: Path, *changes: tuple[str, str]) -> list[str]:
    """Give the problems of the plain campaign with changes."""
    return list(inspect_text(bent(*changes), tmp_path / "campaign.toml").problems)


def design(text: str) -> tuple[str, str]:
    """Add a line to the design."""
    return (DESIGN, f"{DESIGN}\n{text}")


def test_composites_are_read(tmp_path: Path) -> None:
    """A number, or the choice where there are prices to choose by."""
    assert PLAIN.count(SIGMA) == 1
    assert problems(tmp_path, design("increments = 30\nreplicates = 3")) == []
    assert problems(tmp_path, design('increments = "choose"'), ("[draw]", PRICES)) == []


REFUSED = [
    ("increments = 0", "design.increments: "),
    ("increments = 2.5", "design.increments: "),
    ("increments = 30\nreplicates = 1", "design.replicates: "),
    ("replicates = 3", "design.replicates: belongs to composites, and increments is 1 (got 3)"),
    (
        'increments_at = "one-place"',
        'design.increments_at: belongs to composites, and increments is 1 (got "one-place")',
    ),
    (
        "increments = 30\nlocations = 12",
        "design.locations: with composites the number fixed by hand is that of replicates (got 12)",
    ),
    (
        'increments = "choose"',
        "design.increments: increments are chosen by cost, and cost.per_increment is missing",
    ),
    (
        "ranking_set_size = 3",
        "design.ranking_correlation: ranking_set_size needs ranking_correlation beside it",
    ),
    ("ranking_set_size = 1\nranking_correlation = 0.8", "design.ranking_set_size: "),
    ("ranking_set_size = 3\nranking_correlation = 1.8", "design.ranking_correlation: "),
]


@pytest.mark.parametrize(("typed", "told"), REFUSED, ids=[typed for typed, _ in REFUSED])
def test_what_composites_cannot_be_is_refused(tmp_path: Path, typed: str, told: str) -> None:
    """The key, the rule, what was typed, and the remedy."""
    found = problems(tmp_path, design(typed))
    assert [line for line in found if told in line], found


def test_members_of_a_list_are_no_composites(tmp_path: Path) -> None:
    """A well gives one result; several wells in one jar are no sample of any."""
    found = problems(
        tmp_path,
        design("increments = 4"),
        ('kind = "area"', 'kind = "list"'),
        ('boundary = "boundary.geojson"', 'list_file = "wells.csv"'),
    )
    assert [line for line in found if "composites are sized for areas" in line], found


def test_questions_about_single_places_take_no_composites(tmp_path: Path) -> None:
    """A composite averages away the very place that is asked about."""
    found = problems(
        tmp_path,
        design("increments = 4"),
        ('question = "mean"', 'question = "all-clear"'),
    )
    assert [line for line in found if "asks about single places" in line], found


@pytest.mark.parametrize(
    ("table", "keys"),
    [
        ("all_clear", "share = 0.05"),
        ("upper_share", "share = 0.95"),
        ("share", "expected = 0.1\nmargin = 0.05"),
        ("smallest_patch", "length_m = 30\nprobability = 0.9"),
    ],
)
def test_nor_do_their_tables_beside_a_mean(tmp_path: Path, table: str, keys: str) -> None:
    """Composites below a level prove nothing of their increments, whatever decides n."""
    below = ("[draw]", f"[objective.{table}]\n{keys}\n[draw]")
    found = problems(tmp_path, design("increments = 4"), below)
    assert [line for line in found if f"objective.{table}: asks about single places" in line], found
    assert not [line for line in problems(tmp_path, below) if "single places" in line]


PARTS = [
    (
        f'{SIGMA}\n[[sigma]]\npart = "between-locations"\nvalue = 3.0\nsource = "x"',
        "is given whole as well, so this part follows",
    ),
    (
        'part = "sampling"\nvalue = 3.0\nsource = "x"',
        "has this part alone",
    ),
    (
        f'{SIGMA}\n[[sigma]]\npart = "analysis"\nvalue = 3.0\nsource = "x"\nskewness = 2.0',
        "belongs to the whole sigma or to part",
    ),
    (
        f'{SIGMA}\n[[sigma]]\npart = "analysis"\nvalue = -3.0\nsource = "x"',
        "a number above 0",
    ),
    (
        f'{SIGMA}\n[[sigma]]\npart = "analysis"\nvalue = 0.0\nsource = "x"',
        "a number above 0",
    ),
    (
        f'{SIGMA}\n[[sigma]]\npart = "laboratory"\nvalue = 3.0\nsource = "x"',
        '"between-locations", "sampling", "analysis"',
    ),
    (
        f'{SIGMA}\n[[sigma]]\npart = "analysis"\nvalue = 3.0\nsource = "x"\n'
        '[[sigma]]\npart = "analysis"\nvalue = 4.0\nsource = "y"',
        "part analysis, stands twice",
    ),
]


@pytest.mark.parametrize(("text", "told"), PARTS, ids=range(len(PARTS)))
def test_parts_of_sigma_that_do_not_fit_are_refused(tmp_path: Path, text: str, told: str) -> None:
    """Parts that contradict each other, or stand alone, size nothing."""
    found = problems(tmp_path, (SIGMA, text))
    assert [line for line in found if told in line], found
