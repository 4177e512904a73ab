"""The attachment of a second drawing."""

from dataclasses import replace

from fieldplan.packet.sheets.redraw_sheet import redraw_sheet
from fieldplan.plan.redraw import Comparison
from tests.factories import make_plan
from tests.unit.packet.sheet_text import words_of


def test_agreement_is_said_with_seed_keys_and_libraries():
    """A reviewer must be able to repeat it elsewhere."""
    plan = make_plan()
    text = words_of(redraw_sheet(plan, Comparison(13, 13, 0.0, (), plan.locations)))
    assert "All 13 places were drawn again" in text
    assert "Largest difference: 0.000 m" in text
    assert "20261102|main|meadow|places" in text
    assert "20261102|main|yard|places" in text
    assert "numpy " in text
    assert "shapely " in text


def test_places_that_differ_are_named():
    """A difference without a name cannot be looked into."""
    plan = make_plan()
    text = words_of(redraw_sheet(plan, Comparison(13, 12, 0.02, ("QF-A-01",), plan.locations)))
    assert "Places that differ" in text
    assert "QF-A-01" in text


def test_wells_are_keyed_by_unit():
    """Every unit of a list has a key of its own."""
    from tests.factories import make_list_frame

    plan = replace(make_plan(), frame=make_list_frame())
    text = words_of(redraw_sheet(plan, Comparison(9, 9, 0.0, (), plan.locations)))
    assert "unit MW-1" in text
    assert "for 14 units" in text
