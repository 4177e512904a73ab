"""One count of samples: the command, page one and section 8 say the same."""

import re
from dataclasses import replace

from fieldplan.cli.pack import plan_sentences
from fieldplan.packet.sheets.answer import extra_lines
from fieldplan.packet.sheets.plan_words import sample_sentence
from fieldplan.packet.sheets.quality_section import quality_blocks
from fieldplan.samples.model import Sample, Samples
from tests.factories import make_plan
from tests.unit.packet.sheet_text import text_of


def test_every_sample_of_the_plan_is_counted_once() -> None:
    """Nine, one duplicate, one targeted and four alternates are all 15 of the hand-made plan."""
    plan = make_plan()
    said = sample_sentence(plan)
    assert said == (
        "11 samples to take: 9 at the locations to visit, 1 control sample and 1 at a targeted "
        "place. 4 more have their ids ready, for alternates."
    )
    total, *parts, spare = (int(count) for count in re.findall(r"\d+", said))
    assert total == sum(parts)
    assert total + spare == len(plan.samples.samples)


def test_a_blank_is_a_control_sample_though_it_has_no_place() -> None:
    """It is filled, carried and paid for."""
    plan = make_plan()
    blank = Sample("QF-111", "", "equipment blank", "", ("lead",))
    plan = replace(plan, samples=Samples((*plan.samples.samples, blank)))
    assert "12 samples to take: 9 at the locations to visit, 2 control samples" in (
        sample_sentence(plan)
    )


def test_command_and_sheet_say_the_same_count() -> None:
    """Three counts of the same jars send a crew out with too few."""
    plan = make_plan()
    assert sample_sentence(plan) in plan_sentences(plan)[0]
    for blocks in (extra_lines(plan), quality_blocks(plan)):
        assert sample_sentence(plan) in "\n".join(text_of(block) for block in blocks)
