"""Pilot places beside a line: sorted to the nearest stratum, those far off left out."""

from fieldplan.frame.projection import to_degrees
from fieldplan.lab.pilot import PilotLocation
from fieldplan.lab.strata import sort_into_strata
from tests.factories import PROJECTION
from tests.unit.design.line_sites import line_frame


def pilot(name, easting, northing):
    """A pilot place at a spot of the plane."""
    latitude, longitude = to_degrees(PROJECTION, easting, northing)
    return PilotLocation(
        "pilot.csv", name, "", float(latitude), float(longitude), 1.0, 1.0, 1.0, True
    )


def test_pilot_places_go_to_the_nearest_stratum_and_far_ones_are_left_out():
    """Bank and receiver put a place some metres off the mapped line."""
    places = [pilot("near", 110.0, 160.0), pilot("north", 310.0, 700.0), pilot("far", 900.0, 200.0)]
    found, unplaced, notes = sort_into_strata(places, line_frame())
    assert [p.location_id for p in found["upper"]] == ["near"]
    assert [p.location_id for p in found["lower"]] == ["north"]
    assert unplaced == []
    assert "1 pilot location outside the site left out (far)" in notes[0]
