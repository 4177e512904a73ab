"""Locations: named, weighed, in degrees, in print order."""

import dataclasses
import re

import numpy as np
import pytest
import shapely

from fieldplan.base.errors import DesignError
from fieldplan.campaign.model import DesignTable, Draw, PlanTable
from fieldplan.design import locate
from fieldplan.design.model import Locations, StratumCount
from fieldplan.frame.model import TargetedPlace
from tests.factories import degrees, make_campaign, make_frame, make_list_frame
from tests.unit.design.sites import area_frame

COUNTS = [StratumCount("meadow", 4, 2), StratumCount("yard", 5, 2)]


def located(**changes: object) -> Locations:
    """Locate nine random places, four alternates and the tank."""
    return locate(make_campaign(**changes), make_frame(), COUNTS)


def test_places_come_as_random_by_stratum_then_alternates_then_targeted() -> None:
    """The table on the sheet is read in this order."""
    assert [place.location_id for place in located().places] == [
        "QF-A-01", "QF-A-02", "QF-A-03", "QF-A-04",
        "QF-B-01", "QF-B-02", "QF-B-03", "QF-B-04", "QF-B-05",
        "QF-A-05", "QF-A-06", "QF-B-06", "QF-B-07",
        "TANK",
    ]  # fmt: skip


def test_weights_of_random_places_add_up_to_the_whole_population() -> None:
    """Σ weight = 1, so that Σ weight · value is the mean."""
    locations = located()
    assert sum(place.weight for place in locations.places) == pytest.approx(1.0)
    assert all(place.weight == 0 for place in locations.places if place.location_class != "random")


def test_inclusion_probabilities_add_up_to_the_number_planned() -> None:
    """For an area Σ_strata π · A = n; for a list each π is n/N."""
    for place in located().of_class("random"):
        area, planned = (16_800.0, 4) if place.stratum == "meadow" else (6_800.0, 5)
        assert place.inclusion_probability == pytest.approx(planned / area)
    campaign = make_campaign(design=(DesignTable(layout="simple-random"),))
    wells = locate(campaign, make_list_frame(), [StratumCount("site", 8, 2)])
    assert {place.inclusion_probability for place in wells.places} == {8 / 14}


def test_degrees_are_those_of_a_second_opinion() -> None:
    """PROJ called apart, to 7 decimals."""
    for place in located().places:
        expected = degrees(place.easting, place.northing)
        assert (place.latitude, place.longitude) == pytest.approx(expected, abs=1.01e-7)


def test_coordinates_are_whole_centimetres() -> None:
    """What is printed must be what is drawn."""
    for place in located().places:
        assert float(f"{place.easting:.2f}") == place.easting
        assert float(f"{place.northing:.2f}") == place.northing


def test_targeted_places_keep_their_ids_and_never_count() -> None:
    """Weight 0 and probability 0 bar them from the mean; what is painted on the tank stays."""
    tank = located().of_class("targeted")[0]
    assert (tank.location_id, tank.short_name, tank.stratum) == ("TANK", "TANK", "yard")
    assert (tank.weight, tank.inclusion_probability, tank.list_order) == (0.0, 0.0, 0)


def test_a_targeted_place_outside_all_strata_has_no_stratum() -> None:
    """A step-out beyond the fence belongs to no stratum."""
    outside = TargetedPlace("STEP", -50.0, 0.0, 52.1, -1.9007, "beyond the fence")
    frame = dataclasses.replace(make_frame(), targeted=(outside,))
    assert locate(make_campaign(), frame, COUNTS).places[-1].stratum == ""


def test_list_units_keep_the_ids_and_degrees_they_came_with() -> None:
    """Well names are on the well heads, and on the receiver."""
    campaign = make_campaign(design=(DesignTable(layout="simple-random"),))
    frame = make_list_frame()
    units = {unit.unit_id: unit for unit in frame.strata[0].units}
    locations = locate(campaign, frame, [StratumCount("site", 8, 2)])
    assert len({place.location_id for place in locations.places}) == 10
    for place in locations.places:
        unit = units[place.location_id]
        assert (place.latitude, place.longitude) == (unit.latitude, unit.longitude)
        assert place.short_name == place.location_id.replace("-", "")


def wells(*ids: str, targeted: str = "TANK", prefix: str = "QF") -> dict[str, str]:
    """Draw a list of these ids, and give each the short name that it got."""
    stratum = make_list_frame().strata[0]
    units = tuple(
        dataclasses.replace(unit, unit_id=own)
        for unit, own in zip(stratum.units, ids, strict=False)
    )
    place = TargetedPlace(targeted, 10.0, 10.0, 52.1, -1.9, "old shed")
    frame = dataclasses.replace(
        make_list_frame(),
        strata=(dataclasses.replace(stratum, units=units, measure=float(len(ids))),),
        targeted=(place,),
    )
    plan = PlanTable(id="QF", title="Wells", prefix=prefix)
    campaign = make_campaign(design=(DesignTable(layout="simple-random"),), plan=plan)
    places = locate(campaign, frame, [StratumCount("site", len(ids), 0)]).places
    return {place.location_id: place.short_name for place in places}


def test_a_name_is_made_only_where_the_own_id_does_not_survive() -> None:
    """Who stands before the casing reads its tag; only 08, 1E5 and their kin need another name."""
    names = wells(
        "MW-1", "mw-5", "P.6", "08", "1E5", "SEP-3", "OB-1", "OBX-9-1", targeted="TANK-PIT"
    )
    assert {own: names[own] for own in ("MW-1", "mw-5", "P.6", "OB-1")} == {
        "MW-1": "MW1", "mw-5": "MW5", "P.6": "P6", "OB-1": "OB1"
    }  # fmt: skip
    made = {own: name for own, name in names.items() if own in {"08", "1E5", "SEP-3", "OBX-9-1"}}
    assert all(re.fullmatch(r"QFA0\d", name) for name in made.values())
    assert len(set(made.values())) == 4
    assert names["TANK-PIT"] == "QFT01"


def test_the_own_id_is_kept_whatever_else_the_list_draws() -> None:
    """A well that is called one thing in one round and another in the next would be mixed up."""
    few = [StratumCount("site", 3, 0)]
    many = [StratumCount("site", 9, 5)]
    campaign = make_campaign(design=(DesignTable(layout="simple-random"),))
    before, after = (
        {p.location_id: p.short_name for p in locate(campaign, make_list_frame(), counts).places}
        for counts in (few, many)
    )
    assert before.items() <= after.items()


def test_no_made_name_looks_like_an_id_of_the_list() -> None:
    """A list of an earlier round with this prefix, and one id that needs a name: QFA01 is taken."""
    names = wells("QFA01", "QF-B-02", "007", targeted="QFT01")
    assert names == {"QFA01": "QFA01", "QF-B-02": "QFB02", "007": names["007"], "QFT01": "QFT01"}
    assert re.fullmatch(r"QFC0[123]", names["007"])


def test_a_targeted_place_that_reads_like_a_drawn_one_is_refused() -> None:
    """QFA02 on the receiver must be one place."""
    clash = TargetedPlace("qfa02", 10.0, 10.0, 52.1, -1.9, "old shed")
    frame = dataclasses.replace(make_frame(), targeted=(clash,))
    with pytest.raises(DesignError, match=r"'qfa02' reads like the short name QFA02 of random"):
        locate(make_campaign(), frame, COUNTS)
    later = dataclasses.replace(frame, targeted=(dataclasses.replace(clash, place_id="qfa44"),))
    assert locate(make_campaign(), later, COUNTS).places[-1].short_name == "QFT01"


def test_more_locations_keep_every_earlier_one() -> None:
    """A revision that asks for more must not send the crew elsewhere."""
    more = [StratumCount("meadow", 6, 2), StratumCount("yard", 9, 2)]
    before = {p.location_id: (p.easting, p.northing) for p in located().places}
    after = {
        p.location_id: (p.easting, p.northing)
        for p in locate(make_campaign(), make_frame(), more).places
    }
    assert before.items() <= after.items()


def test_another_seed_draws_other_places() -> None:
    """A seed that did nothing would not be a draw."""
    one, other = located(), located(draw=Draw(seed=5))
    same = {(p.easting, p.northing) for p in one.places} & {
        (p.easting, p.northing) for p in other.places
    }
    assert same == {(170.0, 100.0)}


def test_a_free_grid_weighs_what_fell_inside() -> None:
    """Asked 12, realised something else: the weights still add up to 1."""
    design = DesignTable(layout="triangular-grid", exact_count=False)
    frame = area_frame(field=shapely.box(0, 0, 90, 110))
    for seed in range(6):
        campaign = make_campaign(design=(design,), draw=Draw(seed=seed))
        locations = locate(campaign, frame, [StratumCount("field", 12, 0)])
        assert locations.asked == 12
        assert locations.realised == len(locations.places)
        assert sum(place.weight for place in locations.places) == pytest.approx(1.0)
        assert locations.places[0].inclusion_probability == pytest.approx(12 / 9900)


def test_places_closer_than_the_spacing_across_a_stratum_line_are_told() -> None:
    """The spacing holds within strata, so that one stratum's list never moves another's."""
    design = DesignTable(layout="stratified", minimum_spacing_m=25.0)
    frame = area_frame(a=shapely.box(0, 0, 100, 100), b=shapely.box(100, 0, 200, 100))
    counts = [StratumCount("a", 8, 0), StratumCount("b", 8, 0)]
    told = 0
    for seed in range(12):
        campaign = make_campaign(design=(design,), draw=Draw(seed=seed))
        locations = locate(campaign, frame, counts)
        at = {s: np.array([(p.easting, p.northing) for p in locations.places if p.stratum == s])
              for s in "ab"}  # fmt: skip
        apart = np.hypot(*(at["a"][:, None] - at["b"][None]).transpose(2, 0, 1))
        close = int((apart < 25.0).sum())
        notes = [note for note in locations.notes if "either side of a stratum line" in note]
        assert len(notes) == (close > 0)
        if close:
            told += 1
            assert f"{close} pair" in notes[0]
            assert f"{apart.min():.2f} m" in notes[0]
    assert told > 0


def test_two_places_of_one_name_are_refused() -> None:
    """A targeted place called like a drawn one would swap their results."""
    clash = TargetedPlace("qf-a-02", 10.0, 10.0, 52.1, -1.9, "old shed")
    frame = dataclasses.replace(make_frame(), targeted=(clash,))
    with pytest.raises(DesignError, match="'QF-A-02' and targeted location 'qf-a-02' share an id"):
        locate(make_campaign(), frame, COUNTS)


def test_a_plan_id_without_letters_still_gets_a_prefix() -> None:
    """Plan 2026-11 has no letters to take; FP stands in."""
    locations = located(plan=PlanTable(id="2026-11", title="Field"))
    assert locations.places[0].short_name == "FPA01"
