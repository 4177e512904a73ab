"""START_HERE and the field form: what the crew holds, and what it must not learn."""

from dataclasses import replace
from datetime import date

from fieldplan.base.document import Caution, Table
from fieldplan.packet.sheets.field_form import field_form
from fieldplan.packet.sheets.start_here import start_here
from fieldplan.samples.model import Sample, Samples
from tests.factories import make_campaign, make_plan, make_samples
from tests.unit.packet.sheet_text import words_of


def test_the_form_has_one_line_for_every_sample():
    """A jar without a line comes back without a record."""
    plan = make_plan()
    tables = [b for b in field_form(plan).blocks if isinstance(b, Table) and "Sample" in b.columns]
    ids = [row[1] for table in tables for row in table.rows]
    assert sorted(ids) == sorted(s.sample_id for s in plan.samples.samples)


def test_nothing_on_the_form_tells_a_duplicate_from_its_parent():
    """The two lines differ in their id alone, and the ids stand in their own order."""
    plan = make_plan()
    duplicate = next(s for s in plan.samples.samples if s.qc_of)
    tables = [b for b in field_form(plan).blocks if isinstance(b, Table) and "Sample" in b.columns]
    pair = [row for t in tables for row in t.rows if row[0].startswith(duplicate.location_id)]
    first, second = pair
    assert first[0] == second[0]
    assert first[2:] == second[2:]
    assert first[1] < second[1]
    assert "duplicate" not in words_of(field_form(plan)).lower()


def test_swapping_which_jar_is_the_duplicate_changes_nothing_on_the_form():
    """If the form changed, it would carry the key."""
    swap = {"QF-204": "QF-655", "QF-655": "QF-204"}
    swapped = Samples(
        tuple(
            replace(s, sample_id=swap.get(s.sample_id, s.sample_id), qc_of=swap.get(s.qc_of, ""))
            for s in make_samples().samples
        )
    )
    assert {s.qc_of for s in swapped.samples} == {"", "QF-655"}
    assert field_form(make_plan(samples=swapped)) == field_form(make_plan())


def test_the_form_says_what_to_take_and_has_room_for_a_note():
    """A crew that has only this sheet must know depth, unit, grain size and analyte."""
    plan = make_plan()
    frame = plan.campaign.frame[0].model_copy(update={"unit_is": "one auger core"})
    campaign = plan.campaign.model_copy(update={"frame": (frame,)})
    text = words_of(field_form(replace(plan, campaign=campaign)))
    assert "one auger core, 0 m to 0.15 m below ground surface, grain size < 2 mm" in text
    assert "Lead in soil (dry weight)" in text
    assert "one line below is one sample; where a location has two lines, take two" in text
    tables = [b for b in field_form(plan).blocks if isinstance(b, Table) and b.by_hand]
    assert len(tables) == 3
    for table in tables:
        assert {"Note", "Reason code", "Replaced by"} <= set(table.columns)
        for name, share in table.by_hand:
            assert share > 0
            cells = {row[table.columns.index(name)] for row in table.rows}
            assert cells == {""}
        assert {row[table.columns.index("Taken?")] for row in table.rows} == {"☐"}


def test_the_form_says_that_no_depth_was_typed():
    """Silence would leave the crew to choose one."""
    campaign = make_campaign()
    frame = campaign.frame[0].model_copy(update={"depth_top_m": None, "depth_bottom_m": None})
    plan = make_plan(campaign=campaign.model_copy(update={"frame": (frame,)}))
    assert "depth not typed" in words_of(field_form(plan))


def test_blanks_have_lines_with_their_kind():
    """The crew fills a blank in another way, so its kind cannot be hidden."""
    samples = (*make_samples().samples, Sample("QF-111", "", "equipment blank", "", ("lead",)))
    text = words_of(field_form(make_plan(samples=Samples(samples))))
    assert "QF-111 | equipment blank" in text


def test_the_form_opens_with_open_hold_points():
    """Nobody starts without having seen them."""
    form = field_form(make_plan())
    first = form.blocks[0]
    assert isinstance(first, Caution)
    assert first.topic == "underground utilities"
    assert form.status == "DRAFT"


def test_start_here_names_the_crew_before_the_office_and_three_steps():
    """The crew has the least time to read."""
    text = words_of(start_here(make_plan()))
    assert text.index("For the crew") < text.index("For the office")
    assert "fieldplan issue QF-r01 --by NAME" in text
    assert "HOLD POINT" in text


def test_start_here_of_an_issued_packet_leads_to_the_estimate():
    """After issue the next command is another one."""
    plan = make_plan(issued_by="L. Fenn", issued_on=date(2026, 11, 4))
    text = words_of(start_here(plan))
    assert "fieldplan estimate QF-r01 LAB_FILE" in text
    assert "fieldplan issue" not in text
    assert "No work before the hold points below are settled." in text


def test_start_here_says_when_nothing_is_open():
    """Silence could mean that the list was forgotten."""
    closed = tuple(replace(c, is_open=False) for c in make_plan().cautions)
    text = words_of(start_here(make_plan(cautions=closed)))
    assert "a reference was typed for every topic raised" in text
    assert "Nothing is open" in text
