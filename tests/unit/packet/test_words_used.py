"""Terms are explained where they first stand, once, and listed at the end of a sheet."""

import re
from collections.abc import Sequence

from fieldplan.base.document import Block, Bullets, Facts, Heading, Paragraph
from fieldplan.estimate.model import Answers
from fieldplan.packet.sheets.plan_sheet import plan_sheet
from fieldplan.packet.sheets.results_sheet import results_sheet
from fieldplan.packet.sheets.sections import in_working
from fieldplan.packet.sheets.words_used import TERMS, explained, words_used
from fieldplan.packet.sheets.working_sheet import working_sheet
from tests.factories import make_estimate, make_plan
from tests.unit.packet.sheet_text import text_of


def test_a_term_is_explained_at_its_first_mention_alone() -> None:
    """Twice would be noise, later would be late."""
    said = explained([Paragraph("The assurance of 80 %."), Bullets(("An assurance.", "Sigma."))])
    assert said == [
        Paragraph("The assurance (the chance that the number is enough) of 80 %."),
        Bullets(("An assurance.", "Sigma (how far single results scatter).")),
    ]


def test_the_answer_keeps_its_words_and_has_them_explained_below() -> None:
    """The answer is quoted; brackets in it would be quoted too."""
    answer = Paragraph("22 results for a standard error of the mean ≤ 6 mg/kg.", tone="answer")
    first, below, other = explained([answer, Paragraph("A standard error of 5.9.")])
    assert first == answer
    assert below.tone == "note"
    assert below.text.startswith("Standard error: how far a mean of so many results")
    assert other.text == "A standard error of 5.9."


def test_a_number_in_brackets_keeps_one_pair_of_brackets() -> None:
    """Brackets side by side are hard to read."""
    (said,) = explained([Paragraph("the plain formula (16) would do")])
    assert said.text == "the plain formula (16, as if the scatter were exactly known) would do"


def test_words_used_lists_what_the_sheet_uses_and_nothing_else() -> None:
    """A list of everything is read by nobody."""
    heading, facts = words_used([Paragraph("A stratum has a weight."), Bullets(("No sigma.",))])
    assert heading == Heading("Words used")
    assert [word for word, _ in facts.rows] == ["sigma, s", "stratum, strata", "weight"]
    assert words_used([Paragraph("Nothing of that kind.")]) == []


def test_every_term_on_a_results_sheet_is_in_its_list() -> None:
    """Checked over the whole sheet, in its own words."""
    blocks = results_sheet(make_plan(), Answers(make_estimate())).blocks
    must_list_its_terms(blocks, blocks.index(Heading("Words used")))


def test_every_term_on_plan_sheet_and_working_is_in_the_list_of_the_working() -> None:
    """One list serves both; it stands before the drawing procedure."""
    plan = make_plan()
    blocks = (*plan_sheet(plan).blocks, *working_sheet(plan).blocks)
    number = in_working("Words used").rpartition(" ")[2]
    must_list_its_terms(blocks, blocks.index(Heading(f"{number}. Words used")))


def must_list_its_terms(blocks: Sequence[Block], at: int) -> None:
    """Look for every term in the words before the list at ``at``."""
    facts = blocks[at + 1]
    assert isinstance(facts, Facts)
    listed = [word for word, _ in facts.rows]
    assert listed == sorted(listed, key=str.lower)
    text = "\n".join(text_of(block) for block in blocks[:at])
    used = [term.word for term in TERMS if re.search(term.pattern, text)]
    assert used
    assert set(used) <= set(listed)
