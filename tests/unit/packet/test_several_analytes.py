"""Plan sheet, results sheet and results folder name every analyte, each in its own unit."""

import csv
import json
from dataclasses import replace
from functools import cache
from pathlib import Path

import pytest

from fieldplan.base.document import Table
from fieldplan.estimate import estimate_all
from fieldplan.estimate.model import Answers
from fieldplan.packet.maps.results import results_content
from fieldplan.packet.results_writer import write_results
from fieldplan.packet.sheets.answer import answer_words
from fieldplan.packet.sheets.number_section import other_blocks
from fieldplan.packet.sheets.plan_sheet import plan_sheet
from fieldplan.packet.sheets.results_sheet import results_sheet
from fieldplan.returns.several import Received
from tests.factories import make_plan, make_returns, make_size
from tests.several_analytes import ZINC, plan_with_zinc, spread_with_zinc
from tests.unit.estimate.test_several import zinc
from tests.unit.packet.sheet_text import headings_of, text_of, words_of


@cache
def answers() -> Answers:
    """Lead in full, zinc beside it."""
    return estimate_all(plan_with_zinc(), Received(make_returns(), (zinc(),)))


def table_of(plan_others: object = None) -> Table:
    """The small table of the plan sheet."""
    plan = plan_with_zinc()
    if plan_others is not None:
        plan = replace(plan, size=replace(plan.size, others=plan_others))  # type: ignore[arg-type]
    (table,) = [block for block in other_blocks(plan) if isinstance(block, Table)]
    return table


def test_the_plan_sheet_sets_what_n_buys_for_the_other_analyte() -> None:
    """Error, its own target, kept or not, and with what chance, in its own unit."""
    assert table_of().rows == (
        ("Zinc", "13.6 µg/g", "standard error of the mean ≤ 15 µg/g", "yes",
         "62 % (80 % asked for)"),
    )  # fmt: skip
    text = words_of(plan_sheet(plan_with_zinc()))
    assert "Also asked: mean of Zinc, standard error of the mean ≤ 15 µg/g" in text
    assert "The mean of Zinc from the same jars, as closely as section 5 says." in text
    assert "Other analytes and objectives" in text


def test_what_is_not_known_is_a_dash_and_a_sentence() -> None:
    """No sigma: nothing is promised, and the sheet says why."""
    plan = plan_with_zinc(known=False)
    (zinc_,) = plan.size.others
    (row,) = table_of((zinc_,)).rows
    assert row == ("Zinc", "–", "–", "–", "–")
    text = "\n".join(text_of(block) for block in other_blocks(plan))
    assert zinc_.sentence in text


def test_a_target_that_falls_short_stands_on_page_one_and_one_that_is_kept_does_not() -> None:
    """What has to be decided before field work comes first; the rest is looked up."""
    plan = plan_with_zinc()
    (short,) = plan.size.others
    kept = replace(short, chance=0.9)
    for other, shown in ((short, 1), (kept, 0)):
        changed = replace(plan, size=replace(plan.size, others=(other,)))
        text = "\n".join(text_of(block) for block in answer_words(changed))
        assert text.count(other.sentence) == shown


def test_an_assumed_sigma_of_another_analyte_keeps_its_stamp() -> None:
    """A guess is a guess whoever decided n."""
    plan = replace(plan_with_zinc(), spread=spread_with_zinc(assumed=True))
    text = "\n".join(text_of(block) for block in answer_words(plan))
    assert "ASSUMED for Zinc: the standard deviation of 30 µg/g in meadow is a guess" in text
    assumed = replace(plan.size.others[0], assumed=True)
    assert table_of((assumed,)).rows[0][1] == "13.6 µg/g (sigma ASSUMED)"


def test_a_plan_of_one_analyte_says_nothing_of_others() -> None:
    """An empty heading would make a reader look for what is missing."""
    text = words_of(plan_sheet(make_plan(size=make_size())))
    assert "Other analytes" not in text
    assert "Also asked" not in text


def test_the_main_sheet_says_each_other_answer_and_where_it_is_in_full() -> None:
    """Nobody should have to look through the folder."""
    sheet = results_sheet(plan_with_zinc(), answers())
    assert "Other analytes of the campaign" in headings_of(sheet)
    text = words_of(sheet)
    assert answers().sentences[0] in text
    assert "In full beside this sheet: results_sheet-zinc." in text
    alone = headings_of(results_sheet(plan_with_zinc(), Answers(answers().main)))
    assert not [heading for heading in alone if "Other analytes" in heading]


def test_the_sheet_of_another_analyte_is_about_nothing_else() -> None:
    """Title, numbers, level and unit are zinc's; lead is named only as what decided n."""
    sheet = results_sheet(plan_with_zinc(), Answers(answers().others[0]))
    assert sheet.title.startswith("Results for Zinc: ")
    text = words_of(sheet).replace(sheet.title, "")
    assert "mg/kg" not in text
    assert "action level of 300 µg/g" in text
    assert "action level of 150" not in text
    assert [line for line in text.splitlines() if "Lead" in line] == [
        "Planned: a standard error of 13.6 µg/g from 7 results, a number chosen for Lead. "
        "Achieved: 10.5 µg/g from 8."
    ]
    (strata,) = [b for b in sheet.blocks if isinstance(b, Table) and b.columns[-1] == "Expected"]
    assert [row[-1] for row in strata.rows] == ["30.0", "40.0"]


def test_the_map_of_another_analyte_has_its_own_level() -> None:
    """Classes break at zinc's level, here 180; lead's 150 means nothing for zinc."""
    plan = plan_with_zinc()
    levelled = ZINC.model_copy(update={"action_level": 180.0})
    analytes = (plan.campaign.analyte[0], levelled)
    plan = replace(plan, campaign=plan.campaign.model_copy(update={"analyte": analytes}))
    content = results_content(plan, answers().others[0])
    assert content.title.startswith("Results for Zinc: ")
    legend = " ".join(entry.words for entry in content.legend)
    assert "180 µg/g (action level)" in legend
    assert "action level of 300 µg/g" in " ".join(content.lines)
    assert "mg/kg" not in legend + " ".join(content.lines)


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The results folder, written once."""
    parent = tmp_path_factory.mktemp("results")
    return write_results(plan_with_zinc(), answers(), parent)


def test_the_folder_holds_a_sheet_and_a_map_of_each_and_one_table_of_all(folder: Path) -> None:
    """The main names stay as they are for one analyte."""
    names = {path.name for path in folder.iterdir()}
    for mark in ("", "-zinc"):
        kinds = {f"results_sheet{mark}.{kind}" for kind in ("html", "pdf")}
        kinds |= {f"results_map{mark}.{kind}" for kind in ("pdf", "png")}
        assert kinds <= names
    assert len(names) == 11
    with (folder / "results.csv").open(encoding="utf-8-sig", newline="") as stream:
        assert {row["analyte"] for row in csv.DictReader(stream)} == {"lead", "zinc"}
    content = json.loads((folder / "results.json").read_text(encoding="utf-8"))
    assert [content["analyte"], *(o["analyte"] for o in content["others"])] == ["lead", "zinc"]
    for mark, word in (("", "Lead"), ("-zinc", "Zinc")):
        page = (folder / f"results_sheet{mark}.html").read_text(encoding="utf-8")
        assert f"The mean of {word} over" in page or f"mean of {word} is" in page
