"""The plan sheet says everything a reviewer asks for, and no verdict."""

import hashlib
import re
from dataclasses import replace
from datetime import date
from functools import cache

import numpy as np
import pytest
from scipy.spatial import cKDTree

from fieldplan.base.document import Caution, Document, Figure, PageBreak, SignOff, Table
from fieldplan.campaign.model import Analyte, DesignTable, FieldTable, FrameTable, Objective, Rules
from fieldplan.packet.sheets.answer import answer_words
from fieldplan.packet.sheets.field_section import caution_blocks
from fieldplan.packet.sheets.methods import methods_paragraph, patch_line
from fieldplan.packet.sheets.number_section import spread_blocks
from fieldplan.packet.sheets.plan_sheet import plan_sheet
from fieldplan.packet.sheets.rules import rule_lines, rules_fingerprint
from fieldplan.packet.sheets.words_used import explained
from fieldplan.packet.sheets.working_sheet import working_sheet
from fieldplan.plan.model import Plan
from tests.factories import (
    make_campaign,
    make_cautions,
    make_frame,
    make_list_frame,
    make_locations,
    make_plan,
    make_size,
    make_spread,
)
from tests.unit.packet.sheet_text import headings_of, text_of, words_of

VERDICTS = re.compile(r"\b(safe|clean|pass(es|ed)?|compliant|approved|certified)\b", re.IGNORECASE)


@cache
def standard() -> Document:
    """The sheet of the hand-made plan, drawn once."""
    return plan_sheet(make_plan())


@cache
def behind() -> Document:
    """The working of the hand-made plan, composed once."""
    return working_sheet(make_plan(), standard())


@cache
def wells_sheet() -> Document:
    """The sheet of the wells, drawn once."""
    return plan_sheet(make_list_plan())


def page_one(plan: Plan | None = None) -> str:
    """The words of page one."""
    return "\n".join(text_of(block) for block in answer_words(plan or make_plan()))


def make_list_plan() -> Plan:
    """A plan over fourteen wells."""
    frame = make_list_frame()
    size = make_size()
    only = replace(size.strata[0], stratum="site", weight=1.0, needed=7, planned=9, population=14)
    spread = make_spread()
    return make_plan(
        frame=frame,
        size=replace(size, strata=(only,)),
        spread=replace(spread, strata=(replace(spread.strata[0], stratum="site"),)),
        campaign=make_campaign(
            frame=(FrameTable(kind="list", list_file="wells.csv"),),
            design=(DesignTable(layout="simple-random"),),
            field=FieldTable(offset_within_m=5.0),
        ),
        locations=replace(make_locations(), layout="simple-random"),
    )


def test_page_one_says_how_many_where_how_precise_and_what_is_open():
    """A reader who stops after page one has the answer."""
    text = page_one()
    assert text.startswith("7 results are needed; visit 9 locations.")
    assert "The aim is the mean of Lead in soil (dry weight), to be set against 150 mg/kg" in text
    assert "yard | 28.8 % | 45.0 ASSUMED | 4 | 5 | 2" in text
    assert "The mean speaks for 98.3 % of the site" in text
    assert "HOLD POINT, no work before it is settled: underground utilities." in text


def test_page_one_ends_with_the_site_and_what_the_sheet_is_not():
    """The answer must not run on into the rest."""
    blocks = list(standard().blocks)
    answer = explained(answer_words(make_plan()))
    assert blocks[: len(answer)] == answer
    figure, summary, end = blocks[len(answer) : len(answer) + 3]
    assert isinstance(figure, Figure)
    assert "no substitute for the documents that a regulator requires" in text_of(summary)
    assert isinstance(end, PageBreak)


@pytest.mark.parametrize(
    ("assurance", "chooser", "says"),
    [
        (None, "L. Fenn", "The plain count, without an assurance, was chosen by L. Fenn."),
        (0.8, "L. Fenn", "The assurance of 80 % was chosen by L. Fenn."),
        (0.8, "", "The assurance of 80 % was chosen by nobody named."),
    ],
)
def test_page_one_names_who_chose_how_sure_the_number_is(assurance, chooser, says):
    """An assurance is somebody's choice; nobody's must not look like somebody's."""
    size = replace(make_size(), assurance=assurance, assurance_chosen_by=chooser)
    assert says in page_one(make_plan(size=size))


def test_page_one_holds_every_sentence_of_the_answer():
    """What sizing has to say about its number must not be lost on the way."""
    sentences = ("Visit 9 locations.", "The chance is 46 %.", "Expected cost: 1150 EUR.")
    text = page_one(make_plan(size=replace(make_size(), sentences=sentences)))
    for sentence in sentences:
        assert text.count(sentence) == 1


def test_assumed_sigma_and_boundary_are_stamped_on_page_one():
    """A guess keeps its stamp wherever its number is used."""
    text = page_one(make_plan(frame=replace(make_frame(), boundary_assumed=True)))
    assert "ASSUMED: the standard deviation of 18 mg/kg in meadow" in text
    assert "45.0 ASSUMED" in text
    assert "ASSUMED: the boundary" in text


def test_a_measured_sigma_has_no_stamp():
    """The stamp would mean nothing if all had it."""
    spread = make_spread()
    measured = tuple(replace(s, assumed=False, source="pilot.csv") for s in spread.strata)
    plan = make_plan(spread=replace(spread, strata=measured, sentences=()))
    assert "ASSUMED" not in page_one(plan) + methods_paragraph(plan)


def test_a_reporting_limit_above_the_level_is_an_alarm_on_page_one():
    """Results below such a limit could not be set against the level."""
    lead = Analyte(
        id="lead", unit="mg/kg", reporting_limit=200.0, action_level=150.0, action_level_source="x"
    )
    text = page_one(make_plan(campaign=make_campaign(analyte=(lead,))))
    assert re.search(r"200.*150", text)


def test_every_location_stands_in_the_table_with_its_coordinates():
    """The table is the plan; a location left out would not be reviewed."""
    plan = make_plan()
    tables = [b for b in behind().blocks if isinstance(b, Table)]
    table = next(t for t in tables if "Latitude" in t.columns)
    rows = {row[0]: row for row in table.rows}
    assert len(rows) == len(plan.locations.places) == 14
    for place in plan.locations.places:
        row = rows[place.location_id]
        assert {place.short_name, place.location_class, place.stratum} <= set(row)
        assert f"{place.latitude:.7f}" in row
        assert f"{place.longitude:.7f}" in row
    assert rows["QF-A-02"][-1] == "2"


def test_a_site_without_strata_has_no_column_for_them():
    """A column that says the same in every row is noise."""
    tables = [b for b in working_sheet(make_list_plan()).blocks if isinstance(b, Table)]
    assert "Stratum" not in next(t for t in tables if "Latitude" in t.columns).columns


def test_every_section_of_the_checklist_is_there_in_order():
    """The order is the one in which a reviewer asks; what is looked up stands in the working."""
    assert headings_of(standard()) == [
        "What is asked",
        "What the plan will and will not tell",
        "For what the mean speaks",
        "How uneven the site is",
        "How many",
        "How the locations are drawn",
        "When a location cannot be sampled as planned",
        "Rules on record",
        "Cautions and hold points",
        "Sign-off",
    ]
    assert headings_of(behind()) == [
        "The spread in full",
        "The number in full",
        "Beside the number",
        "The population in parts",
        "Locations",
        "Samples and quality control",
        "In the field",
        "For the report",
        "What this plan was made from",
        "Words used",
        "The drawing procedure, line by line",
    ]


def test_the_sheet_is_a_draft_until_somebody_issues_it():
    """The status stands on the document, so the setters print it on every page."""
    assert standard().status == behind().status == "DRAFT"
    issued = make_plan(issued_by="L. Fenn", issued_on=date(2026, 11, 4))
    for sheet in (plan_sheet(issued), working_sheet(issued)):
        assert sheet.status == "ISSUED by L. Fenn on 2026-11-04"


def test_no_word_of_the_sheet_is_a_verdict():
    """The tool estimates; people decide."""
    for sheet in (standard(), behind(), wells_sheet()):
        assert not VERDICTS.findall(re.sub("pass(ed)? over", "", words_of(sheet)))


def test_every_caution_is_printed_once_with_its_deferral():
    """A caution that is lost between rooms warns nobody."""
    lone = Caution("lone work", "one person works alone", "the employer", "OPEN: none", True)
    blocks = caution_blocks(make_plan(cautions=(*make_cautions(), lone)))
    assert [b for b in blocks if isinstance(b, Caution)] == list(make_cautions())
    table = next(b for b in blocks if isinstance(b, Table))
    assert table.rows == (("lone work: one person works alone", "the employer", "OPEN: none"),)


def test_sign_off_has_a_line_for_everyone_named():
    """Blanks for those who prepare, review, accept and lead."""
    blocks = standard().blocks
    roles = next(block for block in blocks if isinstance(block, SignOff)).roles
    assert roles == (
        "Prepared by (R. Amadi)",
        "Reviewed by",
        "Accepted by (L. Fenn)",
        "Field lead",
        "Distribution",
    )


def test_a_pilot_is_drawn_where_there_is_one():
    """No figure without data behind it."""
    assert not [b for b in spread_blocks(make_plan()) if isinstance(b, Figure)]
    spread = make_spread()
    values = (12.0, 30.0, 48.0)
    piloted = tuple(
        replace(s, values=values, detected=(True,) * 3, assumed=False, results=3)
        for s in spread.strata
    )
    plan = make_plan(spread=replace(spread, strata=piloted))
    assert len([b for b in spread_blocks(plan) if isinstance(b, Figure)]) == 1


def test_wells_are_never_moved_whatever_the_offset_says():
    """A list unit sampled elsewhere is another unit."""
    text = words_of(wells_sheet())
    assert "A unit of the list is never moved." in text
    assert "may move a location" not in text


def test_the_offset_rule_and_the_codes_are_printed():
    """The crew's freedom ends where the rule says."""
    text = words_of(standard())
    assert "The field lead may move a location by up to 5 m." in text
    assert "no-access | " in words_of(behind())
    assert "never the nearest convenient spot" in text


def test_the_patch_that_can_be_missed_is_as_wide_as_the_widest_gap_drawn():
    """Brute force: distances from a grid of 0.5 m over the site to the nine drawn locations."""
    plan = make_plan()
    east, north = np.meshgrid(np.arange(0, 200.1, 0.5), np.arange(0, 120.1, 0.5))
    spots = np.column_stack([east.ravel(), north.ravel()])
    pond = ((spots > (160, 40)) & (spots < (180, 60))).all(axis=1)
    drawn = np.array([(p.easting, p.northing) for p in plan.locations.of_class("random")])
    gap = cKDTree(drawn).query(spots[~pond])[0].max()
    shown, across = (float(n) for n in re.findall(r"([\d.]+) m ", patch_line(plan)))
    assert gap - 0.05 <= shown <= gap + 0.5 * 2**0.5 / 2 + 0.05
    assert across == pytest.approx(2 * shown, abs=0.6)
    assert across > 2 * (23600 / 9) ** 0.5  # an average distance would promise too much


def test_a_list_says_how_many_units_are_not_visited():
    """14 wells less 9 drawn."""
    assert "5 of the list are not visited" in patch_line(make_list_plan())


def test_the_methods_paragraph_says_layout_number_spread_rules_and_seed():
    """A report needs no more to be drawn again."""
    text = methods_paragraph(make_plan())
    assert text.startswith("9 locations were drawn by stratified random sampling from 2.36 ha")
    assert "meadow 4, yard 5" in text
    assert "was assumed, not measured" in text
    assert "1 field duplicate" in text
    assert "seed 20261102" in text
    assert rules_fingerprint(make_plan().campaign.rules) in text
    assert "  " not in text


def test_the_fingerprint_is_what_its_note_says():
    """A reviewer recomputes it with any SHA-256 program from the lines alone."""
    rules = Rules(fixed_by="L. Fenn", fixed_on=date(2026, 11, 2))
    found = rule_lines(rules)
    assert list(found) == sorted(found)
    assert [line.split(" = ")[0] for line in found] == sorted(Rules.model_fields)
    assert {"confidence = 0.95", "fixed_by = L. Fenn", "fixed_on = 2026-11-02"} < set(found)
    assert {"mean_interval = student-t", "promised_class = ", "promised_for = "} < set(found)
    lines = "\n".join(found)
    assert rules_fingerprint(rules) == hashlib.sha256(lines.encode()).hexdigest()[:16]


@pytest.mark.parametrize(
    "change",
    [
        {"duplicates": "first"},
        {"interval": "upper-limit"},
        {"confidence": 0.90},
        {"promised_for": "skewness up to 2"},
        {"single_result": "borrow-spread"},
        {"fixed_on": date(2026, 11, 3)},
    ],
)
def test_the_fingerprint_changes_with_every_rule(change):
    """Otherwise a rule could be changed after results without anybody noticing."""
    assert rules_fingerprint(Rules(**change)) != rules_fingerprint(Rules())


def test_inputs_stand_with_their_whole_fingerprints():
    """A shortened one cannot be checked by a program."""
    assert f"{'0' * 64}  boundary.geojson" in words_of(behind())


def test_typed_text_is_printed_as_typed():
    """Markup is for the setters to keep inert; the sheet must not alter it."""
    campaign = make_campaign(
        objective=(
            Objective(question="mean", standard_error=9.0, assurance="plain", design="main"),
        ),
        field=FieldTable(method="<b>=SUM(A1)</b>", contact="#let x"),
    )
    plan = make_plan(campaign=campaign)
    text = words_of(plan_sheet(plan)) + words_of(working_sheet(plan))
    assert "<b>=SUM(A1)</b>" in text
    assert "#let x" in text


def test_the_working_says_that_sections_are_cited_from_memory():
    """A reviewer who quotes a section must read it first; nobody did so here."""
    text = words_of(behind())
    assert text.count("Sections, pages and equations of sources are cited from memory") == 1
