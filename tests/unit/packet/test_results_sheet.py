"""The results sheet: the answer first, every result accounted for, every change said."""

import re
from dataclasses import replace
from functools import cache

from fieldplan.base.document import Document, PageBreak, Paragraph, Table
from fieldplan.estimate.model import Answers, Change, Interval
from fieldplan.lab.model import LeftOutRow
from fieldplan.packet.sheets.results_sheet import after_figure, answer_words, results_sheet
from fieldplan.packet.sheets.results_tables import change_blocks, stratum_table
from fieldplan.packet.sheets.returned import field_blocks, left_out_blocks, relative_difference
from tests.factories import make_estimate, make_plan, make_returns
from tests.unit.packet.sheet_text import headings_of, text_of, words_of


@cache
def standard() -> Document:
    """The sheet of the hand-made estimate, drawn once."""
    return results_sheet(make_plan(), Answers(make_estimate()))


def sheet_text() -> str:
    """All words of the sheet."""
    return words_of(standard())


def test_the_first_words_are_the_answer():
    """Whoever opens the sheet asks for the mean."""
    first = standard().blocks[0]
    assert isinstance(first, Paragraph)
    assert first.tone == "answer"
    assert first.text == make_estimate().sentences[0]


def page_one(**changes: object) -> str:
    """The words of page one."""
    estimate = make_estimate(**changes)
    blocks = [*answer_words(estimate), *after_figure(estimate, 4)]
    return "\n".join(text_of(block) for block in blocks)


def test_page_one_says_level_and_population_once():
    """A sentence said twice is read as two things."""
    estimate = make_estimate()
    wanted = (estimate.level_sentence, estimate.population_sentence)
    for text in (page_one(), page_one(sentences=(*estimate.sentences, *wanted))):
        for sentence in wanted:
            assert text.count(sentence) == 1


def test_skewness_and_factors_stand_behind_page_one_and_page_one_says_where():
    """A client reads page one; a reviewer finds the rest, each once."""
    factors = "Achieved is 0.99 times planned: 0.95 from the number of results."
    estimate = make_estimate(why_different=("Planned: 9. Achieved: 8.9.", factors))
    sheet = results_sheet(make_plan(), Answers(estimate))
    end = next(n for n, block in enumerate(sheet.blocks) if isinstance(block, PageBreak))
    first = "\n".join(text_of(block) for block in sheet.blocks[:end])
    behind = "\n".join(text_of(block) for block in sheet.blocks[end:])
    for sentence in (estimate.coverage_sentence, factors):
        assert sentence not in first
        assert behind.count(sentence) == 1
    number = headings_of(sheet).index("How far the interval can be trusted") + 1
    assert f"where results are uneven: section {number}." in first


def test_results_outside_the_declared_class_are_said_on_page_one():
    """What changes the answer's worth must not wait for page four."""
    outside = "The results' own skewness, 3.1, lies outside that class."
    assert "more uneven than the class for which the plan declares" in page_one(
        coverage_sentence=outside
    )


def test_changes_made_after_results_has_a_section_even_when_there_were_none():
    """Its absence could hide a change."""
    sheet = standard()
    assert "Changes made after results" in headings_of(sheet)
    assert "None. Every rule is the one on record." in words_of(sheet)


def test_nothing_is_sworn_to_that_the_tool_cannot_know():
    """That rules were fixed before results is what a date says, and a date is only typed."""
    words = sheet_text()
    assert "before results" not in words
    assert "the tool cannot verify them" in words
    assert "lodged with somebody else before the field work" in words
    returns = replace(make_returns(), first_collected="2026-11-09")
    dated = words_of(results_sheet(make_plan(), Answers(make_estimate(returns=returns))))
    assert "2026-11-02 by L. Fenn, as typed" in dated
    assert "2026-11-09" in dated
    assert "no date that can be read in the field return" in words


def test_a_change_is_printed_with_both_answers_and_on_page_one():
    """The reader must see what the recorded rule would have said."""
    change = Change("confidence", "0.95", "0.8", Interval("two-sided", 0.95, 29.15, 95.86), 62.506)
    warning = "CHANGED AFTER RESULTS: confidence was 0.95, is 0.8."
    changes: dict[str, object] = {
        "changes": (change,),
        "interval": Interval("two-sided", 0.8, 43.0, 82.0),
        "sentences": (make_estimate().sentences[0], warning),
    }
    estimate = make_estimate(**changes)
    text = "\n".join(text_of(block) for block in change_blocks(estimate))
    assert text.startswith("CHANGED AFTER RESULTS: confidence\n")
    assert "mean 62.5 mg/kg, 95 % interval 29.1 to 95.9 mg/kg" in text
    assert "mean 62.5 mg/kg, 80 % interval 43.0 to 82.0 mg/kg" in text
    assert Paragraph(warning, tone="answer") in answer_words(estimate)


def test_every_result_stands_as_reported_with_what_became_of_it():
    """A result that is not used needs its reason beside it."""
    tables = [b for b in standard().blocks if isinstance(b, Table)]
    table = next(t for t in tables if "As reported" in t.columns)
    rows = {row[0]: row for row in table.rows}
    assert set(rows) == {r.location_id for r in make_returns().results}
    assert "<5" in rows["QF-B-04"]
    assert rows["TANK"][-1] == "No. Targeted places never enter the mean."
    assert rows["QF-A-05"][-1] == "Yes; stands in for QF-A-04"


def test_lost_and_moved_locations_are_accounted_for():
    """What happened in the field decides for what the mean speaks."""
    text = sheet_text()
    assert "QF-A-04 | meadow | no-access: " in text
    assert re.search(r"QF-B-03 \| 10\.8 \| ", text)


def test_without_a_field_return_the_sheet_says_so():
    """Planned positions are then taken on trust."""
    bare = replace(make_returns(), field_file="", field_sha256="")
    text = "\n".join(text_of(block) for block in field_blocks(make_plan(), bare))
    assert "No field return was given" in text


def test_files_stand_with_their_fingerprints():
    """The laboratory's file and the crew's file are evidence."""
    text = sheet_text()
    assert f"{'1' * 64}  results.csv" in text
    assert f"{'2' * 64}  field_return.csv" in text


def test_relative_difference_is_the_usual_one():
    """RPD = 100·|x1 − x2| / ((x1 + x2)/2), the definition in laboratory guidance: 8.0 % here."""
    assert relative_difference(64.0, 69.0) == "8 %"
    assert relative_difference(None, 5.0) == "–"


def test_borrowed_spread_is_marked():
    """A stratum with one result has no spread of its own."""
    mean = make_estimate().mean
    strata = (replace(mean.strata[0], n=1, variance_borrowed=True), mean.strata[1])
    table = stratum_table(make_plan(), make_estimate(mean=replace(mean, strata=strata)))
    assert "19.7 borrowed" in table.rows[0]


def test_no_word_of_the_sheet_is_a_verdict():
    """The interval lies somewhere; what follows is for people."""
    assert not re.search(
        r"\b(safe|clean|pass(es|ed)?|compliant|approved|certified)\b", sheet_text(), re.IGNORECASE
    )


def test_rows_that_are_in_no_mean_are_set_with_their_values():
    """A reader must be able to see what was left out, not only that something was."""
    left = (
        LeftOutRow(9, "HL-8746", "lead", "640 R", "rejected by the laboratory, qualifier R"),
        LeftOutRow(45, "X118/2", "lead", "45", "belongs to no planned sample"),
    )
    estimate = make_estimate(returns=replace(make_returns(), left_out=left))
    tables = [
        b for b in results_sheet(make_plan(), Answers(estimate)).blocks if isinstance(b, Table)
    ]
    (table,) = [t for t in tables if "Id as written" in t.columns]
    assert [row[1:4] for row in table.rows] == [
        ("HL-8746", "Lead", "640 R"),
        ("X118/2", "Lead", "45"),
    ]
    many = tuple(replace(left[1], row=row) for row in range(100, 200))
    (*_, capped) = left_out_blocks(make_plan(), replace(make_returns(), left_out=many))
    assert isinstance(capped, Table)
    assert len(capped.rows) == 60
    assert "40 more stand in the file" in (capped.caption or "")
    assert left_out_blocks(make_plan(), make_returns()) == []
