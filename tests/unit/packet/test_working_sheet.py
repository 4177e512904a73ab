"""Plan sheet and working: nothing is lost between them, and each tells of the other."""

import re
from dataclasses import replace
from functools import cache

import pytest

from fieldplan.base.document import Block, Facts, Figure, Heading, Paragraph, Working
from fieldplan.packet.sheets.conditions_section import ROOM, condition_lines, shortened
from fieldplan.packet.sheets.finding_section import finding_blocks
from fieldplan.packet.sheets.number_section import number_blocks, spread_line
from fieldplan.packet.sheets.plan_sheet import plan_sheet
from fieldplan.packet.sheets.rules import rules_fingerprint
from fieldplan.packet.sheets.sections import SHEET, WORKING, in_working, on_sheet
from fieldplan.packet.sheets.start_here import office_files
from fieldplan.packet.sheets.working_sheet import working_sheet
from fieldplan.plan.model import Plan
from fieldplan.sizing.model import Amount, Finding, Picture, Series
from tests.factories import make_plan, make_size
from tests.unit.packet.sheet_text import headings_of, text_of, words_of

PLAIN = Finding(
    topic="strata",
    title="What the strata gain",
    answer="Without strata the same results would be worth less.",
    amounts=(Amount("gain", "Variance without strata over that with them", 6.8),),
    assumptions=("The means of the strata are right.",),
    sources=("Cochran 1977 (from memory)",),
    columns=("shares", "results"),
    rows=(("proportional", "37"),),
)
DRAWN = replace(
    PLAIN,
    topic="band",
    title="Where the mean falls",
    answer="Nine campaigns in ten put the mean between 93 and 117.",
    warnings=("A small part may be missed.",),
    picture=Picture(
        "lines", "The band.", "A band.", "n", "mean", (Series("a line", (1.0, 2.0), (3.0, 4.0)),)
    ),
)
CONDITIONS = tuple(
    f"Condition {k} holds. {'Its figures are long. ' * 12}".strip() for k in range(9)
)


@cache
def found() -> Plan:
    """A plan with a finding in words alone, one with a picture, and nine conditions."""
    return make_plan(size=replace(make_size(), findings=(PLAIN, DRAWN), conditions=CONDITIONS))


def said(blocks: list[Block]) -> str:
    """All words of some blocks."""
    return "\n".join(text_of(block) for block in blocks)


def test_all_that_a_plan_holds_is_printed_on_sheet_or_working() -> None:
    """The split may not lose a word: spread, conditions, findings, places, inputs, notes."""
    plan = found()
    both = words_of(plan_sheet(plan)) + words_of(working_sheet(plan))
    wanted = [*plan.spread.sentences, *plan.spread.notes, *plan.frame.notes, *plan.frame.sources]
    wanted += [*plan.frame.population.sentences, *plan.locations.notes, *plan.samples.notes]
    wanted += [*condition_lines(plan), *plan.inputs, *plan.inputs.values()]
    wanted += [place.location_id for place in plan.locations.places]
    wanted += [step.meaning for step in plan.size.steps]
    for finding in plan.size.findings:
        wanted += [finding.answer, *finding.warnings, *finding.assumptions, *finding.sources]
        wanted += [amount.meaning for amount in finding.amounts]
        wanted += [cell for row in finding.rows for cell in row]
    assert len(wanted) > 40
    assert [words for words in wanted if words not in both] == []


def test_no_sentence_stands_on_both() -> None:
    """A reader of both meets each once; what joins them, and short rows, are left aside."""
    plan = found()
    sheet, working = (
        {text for block in document.blocks for text in text_of(block).split("\n") if len(text) > 45}
        for document in (plan_sheet(plan), working_sheet(plan))
    )
    counts = {line for line in sheet & working if "samples to take" in line}
    assert sheet & working == counts


def test_each_names_the_other_and_bears_the_same_marks() -> None:
    """Two papers on a desk must be seen to belong together."""
    plan = make_plan()
    sheet, working = plan_sheet(plan), working_sheet(plan)
    assert "The working (working.pdf)" in words_of(sheet)
    assert "office/plan_sheet.pdf" in words_of(working)
    for mark in ("title", "plan_id", "revision_name", "status"):
        assert getattr(sheet, mark) == getattr(working, mark)
    for document in (sheet, working):
        assert rules_fingerprint(plan.campaign.rules) in words_of(document)
        assert f"· {plan.revision_name} · plan of {plan.made_on}" in document.subtitle
    assert {"working.pdf", "working.html"} <= {name for name, _ in office_files(plan)}


def test_every_reference_leads_to_the_section_that_it_names() -> None:
    """A number in a sentence does not move with the headings by itself."""
    plan = found()
    assert tuple(headings_of(plan_sheet(plan))) == SHEET
    assert tuple(headings_of(working_sheet(plan))) == WORKING
    assert in_working("Locations") == f"The working, section {1 + WORKING.index('Locations')}"
    assert on_sheet("Rules on record") == "the plan sheet, section 8"
    words = words_of(plan_sheet(plan)) + words_of(working_sheet(plan))
    named = re.findall(r"The working, section (\d+)", words)
    assert len(named) >= 5
    assert all(1 <= int(number) <= len(WORKING) for number in named)
    assert SHEET[2] == "For what the mean speaks"  # "section 3" in what the plan will tell
    assert SHEET[4] == "How many"  # "section 5" there


def test_conditions_take_few_lines_on_the_sheet_and_all_their_room_in_the_working() -> None:
    """Cut they may be, hidden not: the sheet counts them and says where they are."""
    plan = found()
    blocks = number_blocks(plan)
    at = blocks.index(Heading("Under what condition", level=2))
    short = blocks[at + 1]
    assert isinstance(short, Paragraph)
    assert len(short.text) <= ROOM
    assert short.text.startswith("Condition 0 holds. Condition 8 holds. Condition 7 holds.")
    assert "All 9 conditions and every step: The working, section 2." in said(blocks)
    for condition in CONDITIONS:
        assert condition in words_of(working_sheet(plan))


@pytest.mark.parametrize(
    ("conditions", "declared", "expected"),
    [
        ((), (), ""),
        (("One.",), ("Declared.",), "One. Declared."),
        (
            ("Sizes as in Cochran, sec. 5.6. More. " + "x" * ROOM,),
            (),
            "Sizes as in Cochran, sec. 5.6.",
        ),
        (("x" * ROOM + "y.", "Short."), (), "Short."),
    ],
)
def test_short_conditions_are_whole_sentences(
    conditions: tuple[str, ...], declared: tuple[str, ...], expected: str
) -> None:
    """Half a condition is another condition; a section number does not end a sentence."""
    assert shortened(conditions, declared) == expected


def test_what_is_declared_comes_second() -> None:
    """Somebody answers for it, and it is what the confidence hangs on."""
    assert shortened(CONDITIONS, ["The 95 % is declared for soils."]).startswith(
        "Condition 0 holds. The 95 % is declared for soils. Condition 8 holds."
    )


def test_findings_of_words_stand_together_and_pictures_keep_their_warnings() -> None:
    """Eight headings over eight sentences fill a page with nothing."""
    heading, facts, title, answer, figure, warnings = finding_blocks((PLAIN, DRAWN))
    assert heading == Heading("Beside the number", level=2)
    assert facts == Facts(((PLAIN.title, PLAIN.answer),))
    assert (title, answer) == (Heading(DRAWN.title, level=2), Paragraph(DRAWN.answer))
    assert isinstance(figure, Figure)
    assert DRAWN.warnings[0] in text_of(warnings)


def test_an_answer_that_stands_on_page_one_is_not_said_again() -> None:
    """The question's own finding opens the sheet; its picture and warnings stay."""
    assert finding_blocks((PLAIN,), answered=True) == []
    blocks = finding_blocks((DRAWN, PLAIN), answered=True)
    assert DRAWN.answer not in said(blocks)
    assert DRAWN.warnings[0] in said(blocks)
    assert PLAIN.answer in said(blocks)
    assert [block for block in blocks if isinstance(block, Figure)]


def test_the_sheet_holds_no_arithmetic() -> None:
    """Steps are for whoever checks them."""
    assert not [block for block in plan_sheet(found()).blocks if isinstance(block, Working)]
    assert [block for block in working_sheet(found()).blocks if isinstance(block, Working)]


def test_the_sheet_says_in_a_line_where_the_spread_comes_from() -> None:
    """A guess keeps its stamp, a pilot its name; without either the line says so."""
    plan = make_plan()
    assert "ASSUMED" in spread_line(plan)
    measured = tuple(
        replace(entry, assumed=False, source="pilot.csv", results=6) for entry in plan.spread.strata
    )
    plan = replace(plan, spread=replace(plan.spread, strata=measured))
    assert spread_line(plan).startswith(
        "The standard deviations on page one come from pilot.csv (12 results). "
    )
    mixed = (replace(measured[0], assumed=True), measured[1])
    mixed_plan = replace(plan, spread=replace(plan.spread, strata=mixed))
    assert "some are ASSUMED" in spread_line(mixed_plan)
    bare = replace(plan, spread=replace(plan.spread, strata=()))
    assert spread_line(bare).startswith("No standard deviation was typed or found in a pilot.")
