"""Rules of ``[objective.mean_and_level]``: one clear line for each slip."""

from pathlib import Path

import pytest

from fieldplan.campaign import read_campaign
from tests.unit.campaign.files import bent, inspected, told

MEAN = (
    'question = "mean"\nstandard_error = 6.0\nassurance = 0.80\nassurance_chosen_by = "L. Fenn"\n'
)
TABLE = {"assume": '"above-level"', "gray_edge": "110", "alpha": "0.05", "beta": "0.2"}
LEVEL = (
    'unit = "mg/kg"',
    'unit = "mg/kg"\naction_level = 150\naction_level_source = "invented note, 2024"',
)


def campaign(*, level: bool = True, layout: str = "simple-random", **changes: str) -> str:
    """Write a campaign that asks on which side of 150 mg/kg lead lies."""
    keys = "".join(f"{key} = {value}\n" for key, value in (TABLE | changes).items())
    asked = f'question = "mean-and-level"\n[objective.mean_and_level]\n{keys}'
    changed = [(MEAN, asked), ('"simple-random"', f'"{layout}"')]
    return bent(*changed, *([LEVEL] if level else []))


def test_a_whole_table_is_read(tmp_path: Path) -> None:
    """All four keys are read, the others have their defaults."""
    (tmp_path / "campaign.toml").write_text(campaign(), encoding="utf-8")
    for name in ("boundary.geojson", "pilot.csv"):
        (tmp_path / name).write_text("", encoding="utf-8")
    table = read_campaign(tmp_path / "campaign.toml").campaign.objective[0].mean_and_level
    assert table is not None
    assert (table.assume, table.gray_edge, table.alpha, table.beta) == (
        "above-level",
        110,
        0.05,
        0.2,
    )
    assert (table.test, table.assurance, table.decisions) == ("t", "plain", 1)


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"alpha": "0.4", "beta": "0.6"}, "alpha and beta sum to 1; together they must stay"),
        ({"alpha": "0"}, "alpha"),
        ({"beta": "1.0"}, "beta"),
        ({"gray_edge": "150"}, "the gray region has no width"),
        ({"gray_edge": "170"}, "so the edge lies below it (got 170)"),
        ({"assume": '"below-level"'}, "so the edge lies above it (got 110)"),
        ({"assume": '"above"'}, "above-level"),
        ({"test": '"z"'}, "signed-rank"),
        ({"decisions": "12"}, "12 decisions either stand alone or carry one claim"),
        ({"together": '"each-alone"'}, "one decision stands alone"),
        ({"assurance": "0.3"}, "assurance"),
    ],
)
def test_each_slip_is_one_clear_line(tmp_path: Path, changes: dict[str, str], words: str) -> None:
    """The line says the rule and what was typed."""
    lines = told(tmp_path, campaign(**changes))
    assert sum(words in line for line in lines) == 1, lines


def test_a_missing_level_is_said(tmp_path: Path) -> None:
    """Without an action level there is nothing to compare with."""
    lines = told(tmp_path, campaign(level=False))
    assert any("the analyte has no action_level" in line for line in lines), lines


def test_ranks_do_not_suit_strata(tmp_path: Path) -> None:
    """Strata of different weight have no common count."""
    text = campaign(layout="stratified", test='"sign"').replace(
        'boundary = "boundary.geojson"', 'boundary = "boundary.geojson"\nstrata = "s.geojson"'
    )
    lines = told(tmp_path, text)
    assert any('Write test = "t"' in line for line in lines), lines


def test_a_missing_table_is_said(tmp_path: Path) -> None:
    """The question names the table it reads."""
    text = bent((MEAN, 'question = "mean-and-level"\n'), LEVEL)
    assert any("mean_and_level" in line and "missing" in line for line in told(tmp_path, text))


def test_what_is_still_to_fill_in_breaks_no_rule(tmp_path: Path) -> None:
    """A draft may wait for its gray edge; the rules between keys then have nothing to hold to."""
    lines = told(tmp_path, campaign(gray_edge='"FILL IN"'))
    assert not any("gray region" in line or "Traceback" in line for line in lines)
    assert inspected(tmp_path, campaign(gray_edge='"FILL IN"')) is not None
