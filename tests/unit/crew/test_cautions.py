"""Cautions: what raises them, what closes them, and what they never say."""

import re
from datetime import date

import pytest

from fieldplan.base.document import Caution
from fieldplan.base.errors import CampaignError
from fieldplan.campaign.model import (
    Analyte,
    Campaign,
    Clearance,
    FieldTable,
    FrameTable,
    PlanTable,
)
from fieldplan.crew.cautions import FACTS, cautions
from fieldplan.crew.topics import ALWAYS, TOPICS
from tests.factories import make_campaign

DAY = date(2026, 11, 3)


def raised(campaign: Campaign, on: date = DAY) -> dict[str, Caution]:
    """Cautions by topic."""
    return {caution.topic: caution for caution in cautions(campaign, on=on)}


def clearance(topic: str, given: date, expires: date) -> Clearance:
    """A clearance with an invented ticket number."""
    return Clearance(topic=topic, reference="ticket 77", given_on=given, expires_on=expires)


def wells(**changes: object) -> Campaign:
    """A list of wells without a fact typed."""
    tables: dict[str, object] = {
        "analyte": (Analyte(id="arsenic", unit="µg/L", matrix="groundwater"),),
        "frame": (FrameTable(kind="list", list_file="wells.csv"),),
        "field": FieldTable(),
    }
    return make_campaign(**(tables | changes))


def test_a_hand_auger_alone_holds_work_until_utilities_are_located():
    """A hand auger cuts a cable as well as a rig does."""
    caution = raised(make_campaign(field=FieldTable(facts=("hand-auger",))))[
        "underground utilities"
    ]
    assert caution.is_open
    assert caution.holds_work
    assert caution.status.startswith("OPEN")


def test_soil_without_a_word_about_digging_still_raises_utilities():
    """Silence in the file must not read as "nothing is penetrated"."""
    assert "underground utilities" in raised(make_campaign(field=FieldTable()))


def test_no_ground_penetration_as_typed_raises_no_utilities():
    """Topics print only where the facts call for them."""
    field = FieldTable(ground_penetration=False)
    assert "underground utilities" not in raised(make_campaign(field=field))


def test_a_drill_rig_raises_what_is_below_and_what_is_above():
    """One fact may raise two topics."""
    found = raised(make_campaign(field=FieldTable(facts=("drill-rig",))))
    assert {"underground utilities", "overhead lines"} <= found.keys()


def test_wells_raise_waste_of_purge_water_and_nothing_underground():
    """Sampling a standing well penetrates nothing but leaves water to dispose of."""
    found = raised(wells())
    assert "waste from sampling" in found
    assert "underground utilities" not in found
    assert "work on, in or over water" not in found


@pytest.mark.parametrize("matrix", ["Surface Water", "river water", "lake sediment", "sediment"])
def test_open_water_holds_work(matrix):
    """On-water work is a hold point even where no fact was typed."""
    found = raised(wells(analyte=(Analyte(id="zinc", unit="µg/L", matrix=matrix),)))
    assert found["work on, in or over water"].holds_work


def test_access_stays_open_until_somebody_says_whose_land_it_is():
    """Trespass follows from an assumption; owning the land has to be typed."""
    silent = make_campaign(field=FieldTable(), clearance=())
    assert raised(silent)["access and permission"].is_open
    owned = make_campaign(field=FieldTable(facts=("own-land",)), clearance=())
    assert "access and permission" not in raised(owned)
    both = make_campaign(field=FieldTable(facts=("own-land", "land-owned-by-others")), clearance=())
    assert raised(both)["access and permission"].is_open


def test_pfas_by_name_raises_contamination_by_the_crew():
    """The name of the analyte is a fact."""
    found = raised(wells(analyte=(Analyte(id="sum", name="PFAS, sum", unit="ng/L"),)))
    assert "trace contamination by the crew" in found


def test_every_campaign_names_method_safety_plan_and_licensed_work():
    """These three have no trigger because no campaign is without them."""
    always = {topic.name for topic in TOPICS if ALWAYS in topic.raised_by}
    assert always <= raised(wells()).keys()
    assert len(always) == 3


def test_hold_points_come_first():
    """The crew reads from the top."""
    campaign = make_campaign(field=FieldTable(facts=tuple(FACTS)))
    holds = [caution.holds_work for caution in cautions(campaign, on=DAY)]
    assert holds == sorted(holds, reverse=True)
    assert sum(holds) == 5


def test_every_fact_but_own_land_raises_a_topic():
    """A fact code that switches nothing on would be an option that does nothing."""
    used = {fact for topic in TOPICS for fact in topic.raised_by}
    assert set(FACTS) - used == {"own-land"}
    assert used - set(FACTS) == {ALWAYS}


def test_a_clearance_that_covers_the_field_work_closes_the_point():
    """Reference and both dates are printed as typed."""
    caution = raised(make_campaign())["access and permission"]
    assert not caution.is_open
    assert caution.status == "letter 12/26, given 2026-10-01, expires 2027-03-31"


@pytest.mark.parametrize(
    ("given", "expires", "says"),
    [
        (date(2026, 10, 1), date(2026, 11, 2), "expired on 2026-11-02, before 2026-11-03"),
        (date(2026, 10, 1), date(2026, 11, 9), "before field work ends on 2026-11-12"),
        (date(2026, 11, 4), date(2026, 12, 1), "dated 2026-11-04, which is after 2026-11-03"),
        (date(2026, 11, 3), date(2026, 12, 1), ""),
        (date(2026, 10, 1), date(2026, 11, 12), ""),
    ],
)
def test_a_clearance_that_does_not_last_is_open_again(given, expires, says):
    """A ticket that runs out in the middle of field work clears nothing."""
    plan = PlanTable(
        id="QF", title="t", fieldwork_from=date(2026, 11, 10), fieldwork_to=date(2026, 11, 12)
    )
    campaign = make_campaign(
        plan=plan, clearance=(clearance("Underground  Utilities", given, expires),)
    )
    caution = raised(campaign)["underground utilities"]
    assert caution.is_open is bool(says)
    assert says in caution.status


def test_a_clearance_given_after_work_began_is_open():
    """Work before the paper was given was not covered by it."""
    plan = PlanTable(id="QF", title="t", fieldwork_from=date(2026, 10, 1))
    typed = clearance("underground utilities", date(2026, 10, 2), date(2027, 1, 1))
    caution = raised(make_campaign(plan=plan, clearance=(typed,)))["underground utilities"]
    assert "after field work begins on 2026-10-01" in caution.status


def test_of_two_clearances_the_one_that_covers_counts():
    """A renewed ticket closes what the old one no longer does."""
    old = clearance("underground utilities", date(2026, 9, 1), date(2026, 9, 30))
    new = clearance("underground utilities", date(2026, 11, 1), date(2026, 11, 30))
    assert not raised(make_campaign(clearance=(new, old)))["underground utilities"].is_open


def test_a_clearance_for_a_topic_that_nothing_raised_is_still_printed():
    """What a person typed is never dropped in silence."""
    typed = clearance("munitions", date(2026, 9, 1), date(2027, 9, 30))
    caution = raised(make_campaign(clearance=(typed,)))["munitions"]
    assert caution.because == "a clearance was typed for it"


def test_unknown_facts_topics_and_turned_dates_are_told_at_once():
    """One line each, with the near miss."""
    campaign = make_campaign(
        field=FieldTable(facts=("hand-augur", "zzz")),
        clearance=(
            clearance("utilities", date(2026, 1, 1), date(2027, 1, 1)),
            clearance("munitions", date(2027, 1, 1), date(2026, 1, 1)),
        ),
    )
    with pytest.raises(CampaignError) as caught:
        cautions(campaign, on=DAY)
    first, second, third, fourth = caught.value.problems
    assert first.endswith("'hand-augur', which is no fact code; did you mean 'hand-auger'?")
    assert "'zzz'" in second
    assert "known are: ground-penetration, hand-auger" in second
    assert "did you mean 'underground utilities'" in third
    assert "expires on 2026-01-01, before it is given on 2027-01-01" in fourth


def test_no_caution_gives_a_verdict_or_a_number_to_work_by():
    """Rule numbers may stand; a depth, a dose, a distance or "safe" may not."""
    campaign = make_campaign(field=FieldTable(facts=tuple(FACTS)), clearance=())
    for caution in cautions(campaign, on=DAY):
        words = f"{caution.topic} {caution.because} {caution.defers_to} {caution.status}"
        assert not re.search(
            r"\b(safe|clean|pass|compliant|approved|certified|level [A-D])\b", words, re.IGNORECASE
        )
        assert not re.search(r"\d\s*(m|cm|mm|ft|in|%|ppm|mg|dB|V|°C?|°F)\b", words)


def test_every_topic_names_who_decides():
    """A caution without a deferral would be advice."""
    for topic in TOPICS:
        assert re.search(
            r"authority|employer|owner|utility|laboratory|person|professional|licensed|manager"
            r"|shipper",
            topic.defers_to,
        ), topic.name
