"""What stands on the screen: no line too wide, nothing twice, no digit that does not count."""

from collections.abc import Iterator
from pathlib import Path
from typing import get_args

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldplan.campaign.model import DesignTable
from fieldplan.campaign.questions import MODULES
from fieldplan.cli import entry
from fieldplan.cli.screen_table import WIDTH, table_lines
from fieldplan.cli.size_findings import amount_words
from fieldplan.sizing.beside import QUICK, THOROUGH
from fieldplan.sizing.model import Amount
from tests.command_runner import command_runner

DEMO_SITES = Path(__file__).parents[3] / "demo_sites"
CAMPAIGNS = sorted(DEMO_SITES.rglob("campaign.toml"))
CLEAR = ("--question", "all-clear", "--with", "share=0.05")


def run(*words: str) -> str:
    """Run a command that succeeds; return what it prints."""
    outcome = command_runner().invoke(entry, ["size", *words])
    assert outcome.exit_code == 0, f"{outcome.stderr} {outcome.exception}"
    return outcome.stdout


@pytest.mark.parametrize("path", CAMPAIGNS, ids=lambda path: path.parent.name)
def test_no_screen_of_a_demo_is_wider_than_eighty_columns(path: Path) -> None:
    """A table that breaks on the screen cannot be read; all topics and the whole working."""
    for line in run(str(path), "--more", "all", "--explain").splitlines():
        assert len(line) <= 80, line


def test_demos_were_found() -> None:
    """The check above would hold for an empty folder too."""
    assert len(CAMPAIGNS) >= 5


def test_a_sentence_that_opened_the_answer_is_not_said_again_below_its_topic() -> None:
    """Five lines twice on one screen make the reader look for the difference."""
    printed = run(*CLEAR, "--more", "all-clear")
    assert printed.count("59 results, none of them above the level") == 1
    assert printed.count("It says nothing about the mean") == 1
    assert "Chance to notice what must not stay unnoticed: 95.15 %" in printed


@pytest.mark.parametrize("path", CAMPAIGNS[:1], ids=lambda path: path.parent.name)
def test_an_unknown_topic_is_answered_by_all_that_there_are(path: Path) -> None:
    """The short screen leaves out what takes long; the list of topics must not."""
    outcome = command_runner().invoke(entry, ["size", str(path), "--more", "nonsense"])
    assert outcome.exit_code == 2
    said = outcome.stderr.strip()
    assert said.startswith("--more nonsense is no topic; there are ")
    named = said.partition("there are ")[2].removesuffix(", and all here.").split(", ")
    assert {"strata", "frontier"} <= set(named) <= {*QUICK, *THOROUGH}
    for topic in named:
        assert run(str(path), "--more", topic)


def test_a_folder_is_taken_for_the_campaign_file_in_it() -> None:
    """``check`` takes it, so who learnt that types it again."""
    folder = DEMO_SITES / "hobbin-ley"
    assert run(str(folder), "--quiet") == run(str(folder / "campaign.toml"), "--quiet")


def test_a_folder_without_a_campaign_file_is_refused_in_one_line(tmp_path: Path) -> None:
    """One line in the tool's own words."""
    for command in ("size", "pack", "locate"):
        outcome = command_runner().invoke(entry, [command, str(tmp_path)])
        assert "holds no campaign file (.toml)" in str(outcome.exception), command
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize(
    ("amount", "words"),
    [
        (Amount("chance_of_hitting", "Chance of hitting the patch", 0.890559), "89.06 %"),
        (Amount("length", "Length of the smallest patch", 46.1035, "m"), "46.1 m"),
        (Amount("saved", "Money saved", 59.8926, "EUR"), "59.89 EUR"),
        (Amount("share_ground", "Share of the variance from the ground", 0.530241), "53.02 %"),
        (Amount("cost", "Cost", 28196.43, "EUR"), "28196 EUR"),
        (Amount("n", "Results", 12345, "results"), "12345 results"),
        (Amount("share", "Smallest share noticed", 2e-5), "below 0.01 %"),
        (Amount("chance", "Chance to notice", 0.999999), "above 99.99 %"),
        (Amount("chance", "Chance to notice", 1.0), "100 %"),
        (Amount("rho", "Correlation", 0.35), "0.35"),
        (Amount("tiny", "Standard error", 0.00012345678, "mg/kg"), "0.0001235 mg/kg"),
        (Amount("none", "Mean", None, "mg/kg"), "not known"),
        (Amount("minus", "Mean", -12.3456, "mg/kg"), "-12.35 mg/kg"),
        (Amount("ten", "Length", 9.99999, "m"), "10 m"),
    ],
)
def test_amounts_have_four_digits_that_count(amount: Amount, words: str) -> None:
    """More would be false; --json keeps them all."""
    assert amount_words(amount) == words


def test_help_names_every_question_layout_and_topic_and_where_more_stands() -> None:
    """Nobody should have to type a wrong word to learn the right ones."""
    printed = run("--help")
    said = set(printed.replace(",", " ").replace("(", " ").split())
    layouts = get_args(DesignTable.model_fields["layout"].annotation)
    assert {"mean", *MODULES, *layouts, *QUICK, *THOROUGH} <= said
    for page in ("docs/campaign-file.md", "docs/sizing.md"):
        assert page in printed
        assert (DEMO_SITES.parent / page).is_file()


def test_every_example_in_the_help_runs() -> None:
    """An example that is refused is worse than none."""
    assert max(map(len, run("--help").splitlines())) <= 80
    examples = [line.split()[2:] for line in run("--help").splitlines()
                if line.strip().startswith("fieldplan size")]  # fmt: skip
    assert len(examples) >= 6
    for words in examples:
        real = [str(CAMPAIGNS[0]) if word == "campaign.toml" else word for word in words]
        assert run(*real)


@st.composite
def tables(draw: st.DrawFn) -> tuple[list[str], list[list[str]]]:
    """Make headings and rows of words of up to 14 letters."""
    words = st.lists(st.text("abcdefgh", min_size=1, max_size=14), min_size=1, max_size=8)
    cells = words.map(" ".join)
    width = draw(st.integers(1, 7))
    columns = draw(st.lists(cells, min_size=width, max_size=width))
    row = st.lists(cells, min_size=width, max_size=width)
    return columns, draw(st.lists(row, min_size=1, max_size=5))


def _words(texts: list[str]) -> Iterator[str]:
    for text in texts:
        yield from text.split()


@given(tables())
def test_every_table_fits_and_loses_no_word(table: tuple[list[str], list[list[str]]]) -> None:
    """Broken headings, broken cells or stacked rows: the same words, none too wide."""
    columns, rows = table
    lines = table_lines(columns, rows)
    assert max(map(len, lines)) <= WIDTH
    printed = sorted(word.rstrip(":") for word in _words(lines))
    expected = sorted(_words([cell for row in (columns, *rows) for cell in row]))
    stacked = sorted(
        _words([f"{c} {cell}" for row in rows for c, cell in zip(columns[1:], row[1:], strict=True)]
               + [row[0] for row in rows])
    )  # fmt: skip
    assert printed in (expected, stacked)
