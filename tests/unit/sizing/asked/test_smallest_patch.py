"""The smallest patch that must not be missed: counts, what they find, and what is said."""

import math
from dataclasses import replace

import pytest

from fieldplan.base.errors import CampaignError, DesignError
from fieldplan.campaign.model import DesignTable, FieldTable, Loss, Objective
from fieldplan.campaign.questions.smallest_patch import SmallestPatch
from fieldplan.design.patch_starts import patch_chances
from fieldplan.sizing import size
from fieldplan.sizing.asked.model import Answered, Asked
from fieldplan.sizing.asked.patch_ground import EndlessGround
from fieldplan.sizing.asked.smallest_patch import bought, count
from fieldplan.sizing.asking import asked_of
from fieldplan.sizing.model import Finding
from fieldplan.sizing.question import Part, Question
from fieldplan.stats.patches import (
    SQUARE,
    TRIANGULAR,
    Patch,
    chance_at_random,
    chance_on_grid,
    count_at_random,
    spacing_for_chance,
)
from tests.factories import make_campaign, make_frame, make_list_frame, make_spread
from tests.unit.design.sites import MEADOW_POLYGON, area_frame
from tests.unit.sizing.askings import asked_numbers

AREA = 12_000.0
OVAL = {"length_m": 48.0, "width_m": 20.0, "probability": 0.8}


def campaign_with(layout: str = "stratified", **more):
    """A campaign that asks about a patch; no losses and no word on the receiver unless given."""
    table = {"length_m": 40.0, "probability": 0.9} | {
        key: more.pop(key)
        for key in ("length_m", "width_m", "direction_degrees", "probability")
        if key in more
    }
    objective = Objective(
        analyte="lead", question="smallest-patch", smallest_patch=SmallestPatch(**table)
    )
    tables = {
        "objective": (objective,),
        "design": (DesignTable(layout=layout, **more.pop("design", {})),),
        "loss": Loss(share=more.pop("loss", 0.0)),
        "field": FieldTable(position_accuracy_m=more.pop("accuracy", None)),
    }
    assert not more
    return make_campaign(**tables)


def on_site(layout: str = "stratified", **more) -> Asked:
    """Ask on the site of two strata."""
    return asked_of(campaign_with(layout, **more), make_spread(), make_frame())


def in_field(layout: str, **more) -> Asked:
    """Ask on a bent field with holes, one stratum."""
    whole = Part("site", 1.0, 20.0, loss=more.get("loss", 0.0))
    campaign = campaign_with(layout, **more)
    question = Question((whole,), "standard_error", 1.0, locations=campaign.design[0].locations)
    frame = area_frame(site=MEADOW_POLYGON)
    area = MEADOW_POLYGON.area
    return Asked(campaign, campaign.objective[0], question, frame, None, area, sigma_known=False)


def on_numbers(layout: str = "simple-random", **more) -> Asked:
    """Ask with bare numbers: an area and no frame."""
    asked = in_field(layout, **more)
    return replace(asked, frame=None, area_m2=AREA)


def amount(found: Answered | Finding, name: str) -> float:
    """Read one amount of a finding."""
    finding = found.finding if isinstance(found, Answered) else found
    return next(float(entry.value or 0) for entry in finding.amounts if entry.name == name)


@pytest.mark.parametrize(
    ("layout", "lattice"), [("square-grid", SQUARE), ("triangular-grid", TRIANGULAR)]
)
@pytest.mark.parametrize("width", [40.0, 15.0])
def test_bare_numbers_take_the_textbooks_spacing(layout, lattice, width) -> None:
    """A / (k G²) rounded up, G the widest spacing with the probability (tested in stats)."""
    found = count(on_numbers(layout, width_m=width))
    widest = spacing_for_chance(Patch(40.0, width), 0.9, lattice=lattice)
    assert found.unrounded == pytest.approx(lattice.count(AREA, widest), rel=1e-9)
    assert found.needed == (math.ceil(found.unrounded),)
    spacing = lattice.spacing(AREA, found.needed[0])
    stated = chance_on_grid(Patch(40.0, width), spacing, lattice=lattice)
    assert amount(found, "chance_of_hitting") == pytest.approx(stated, abs=1e-12)


def test_bare_numbers_of_random_places_are_the_geometric_count() -> None:
    """The count is scipy's geometric quantile (tested in stats)."""
    found = count(on_numbers(length_m=40.0, probability=0.95))
    assert found.needed == (count_at_random(Patch(40.0, 40.0), AREA, 0.95),) == (28,)
    assert amount(found, "smallest_length_m") <= 40.0


def test_two_parts_of_bare_numbers_weigh_their_chances() -> None:
    """A patch lies in either part with the part's share of the area."""
    ground = EndlessGround((3000.0, 9000.0), "simple-random", Patch(20.0, 20.0), (0.0, 0.0))
    by_hand = 0.25 * chance_at_random(Patch(20.0, 20.0), 3000.0, 5)
    by_hand += 0.75 * chance_at_random(Patch(20.0, 20.0), 9000.0, 7)
    assert ground.chance([5, 7]).chance == pytest.approx(by_hand, rel=1e-12)


@pytest.mark.parametrize("layout", ["simple-random", "square-grid", "triangular-grid"])
def test_count_keeps_the_probability_and_one_fewer_does_not(layout: str) -> None:
    """By definition, by the chance of the layout on this field; edges ask for more than none."""
    asked = in_field(layout, **OVAL)
    found = count(asked)
    (n,) = found.needed
    chances = patch_chances(layout, area_frame(site=MEADOW_POLYGON), Patch(48.0, 20.0))
    assert chances.chance([n]).chance >= 0.8 - 1e-9
    assert chances.chance([n - 1]).chance < 0.8
    assert n > found.unrounded


def test_grids_find_a_patch_with_fewer_locations_than_random_places() -> None:
    """Even spacing wastes no overlap while copies do not touch."""
    needed = {
        layout: sum(count(in_field(layout, **OVAL)).needed)
        for layout in ("simple-random", "square-grid", "triangular-grid")
    }
    assert needed["triangular-grid"] <= needed["square-grid"] + 1 < needed["simple-random"]


def test_inverse_gives_back_the_patch_that_was_asked_about() -> None:
    """The smallest patch that the counted number finds is the one asked about, or smaller."""
    for layout in ("simple-random", "square-grid"):
        found = count(in_field(layout, **OVAL))
        assert 46.0 < amount(found, "smallest_length_m") <= 48.05
        ratio = amount(found, "smallest_width_m") / amount(found, "smallest_length_m")
        assert ratio == pytest.approx(20 / 48, rel=1e-9)


def test_given_counts_have_the_chance_of_the_layout() -> None:
    """The same code as the count, on two strata."""
    found = bought(on_site(**OVAL), (12, 8))
    stated = patch_chances("stratified", make_frame(), Patch(48.0, 20.0)).chance([12, 8])
    assert amount(found, "chance_of_hitting") == pytest.approx(stated.chance, abs=1e-12)
    assert found.answer.startswith("20 locations at random places in each stratum hit an oval")


def test_position_error_counts_the_inner_ellipse_alone() -> None:
    """A circle of 40 m and an error of 3 m leave 34 m; without it the chance is higher."""
    asked = on_numbers("square-grid", accuracy=3.0)
    found = bought(asked, (12,))
    spacing = SQUARE.spacing(AREA, 12)
    assert amount(found, "chance_of_hitting") == pytest.approx(
        chance_on_grid(Patch(34.0, 34.0), spacing), abs=1e-12
    )
    assert amount(found, "chance_as_planned") == pytest.approx(
        chance_on_grid(Patch(40.0, 40.0), spacing), abs=1e-12
    )
    assert "even with every location up to 3 m off" in found.answer
    assert count(asked).needed > count(on_numbers("square-grid")).needed


def test_smallest_patch_allows_for_the_position_error() -> None:
    """Its inner ellipse has the probability, and it is no smaller than the receiver can tell."""
    found = bought(on_numbers("square-grid", accuracy=3.0), (12,))
    length = amount(found, "smallest_length_m")
    spacing = SQUARE.spacing(AREA, 12)
    inner = chance_on_grid(Patch(length - 6.0, length - 6.0), spacing)
    assert inner == pytest.approx(0.9, abs=1e-3)
    dense = bought(on_numbers("square-grid", accuracy=3.0), (4000,))
    assert amount(dense, "smallest_length_m") == pytest.approx(12.0)


def test_coarse_receiver_is_refused_a_number_and_claims_no_chance() -> None:
    """Above a quarter of the width no chance is claimed; a mean beside it is still sized."""
    with pytest.raises(DesignError, match="position_accuracy_m is 11"):
        count(on_numbers(accuracy=11.0))
    found = bought(on_numbers(accuracy=11.0), (30,))
    assert found.amounts == ()
    assert found.answer.startswith("No chance of hitting a patch 40 m wide is claimed")
    assert "good to 10 m" in found.answer


def test_receiver_coarse_beside_the_spacing_is_warned_of() -> None:
    """More than a quarter of the grid's spacing: tape and offset."""
    found = bought(on_numbers("square-grid", accuracy=9.0), (12,))
    assert "tape and offset" in found.warnings[0]
    assert bought(on_numbers("square-grid", accuracy=5.0), (12,)).warnings == ()
    assert bought(on_numbers("simple-random", accuracy=9.0), (12,)).warnings == ()
    fine = bought(on_numbers("square-grid"), (480,)).warnings  # 5 m apart
    assert "unless it is good to 1.25 m" in fine[0]
    assert bought(on_numbers("square-grid", accuracy=0.05), (480,)).warnings == ()


def test_losses_ask_for_more_locations_on_a_grid_and_are_said() -> None:
    """The grid is laid with all locations planned, and thinned at random."""
    whole, thinned = in_field("square-grid", **OVAL), in_field("square-grid", loss=0.2, **OVAL)
    found = count(thinned)
    planned = math.ceil(found.needed[0] / 0.8)
    assert planned > sum(count(whole).needed)
    assert f"{found.needed[0]} of {planned} locations" in found.finding.answer
    assert any("dropped from the grid at random" in line for line in found.finding.assumptions)
    bare = on_numbers("square-grid", loss=0.2)
    spacing = SQUARE.spacing(AREA, 15)
    assert amount(bought(bare, (12,)), "chance_of_hitting") == pytest.approx(
        0.8 * chance_on_grid(Patch(40.0, 40.0), spacing), abs=1e-9
    )
    with pytest.raises(DesignError, match="With 20 % of the grid's locations lost"):
        count(bare)


def test_typed_locations_are_not_changed_by_the_question() -> None:
    """The question then only says what they buy, and what it would take."""
    campaign = campaign_with("stratified", design={"locations": 20})
    found = size(campaign, make_spread(), make_frame())
    assert found.planned == 20
    assert found.number_from == "locations"
    alone = size(campaign_with("stratified"), make_spread(), make_frame())
    assert f"would take {alone.needed} results" in found.findings[0].answer
    grid = on_numbers("square-grid", design={"locations": 9})
    assert count(grid).needed == count(on_numbers("square-grid")).needed


def test_mean_with_a_patch_beside_it_keeps_its_own_number() -> None:
    """The mean decides n; the finding says with what chance it hits the patch."""
    plain = make_campaign()
    patch = SmallestPatch(length_m=40.0, probability=0.9)
    asked = plain.objective[0].model_copy(update={"smallest_patch": patch})
    beside = size(make_campaign(objective=(asked,)), make_spread(), make_frame())
    assert beside.needed == size(plain, make_spread(), make_frame()).needed
    found = next(f for f in beside.findings if f.topic == "smallest-patch")
    assert 0 < amount(found, "chance_of_hitting") < 0.9


def test_known_direction_is_said_and_counts_at_the_edges() -> None:
    """Words of the answer; the chance is that of the layout with the direction."""
    found = bought(in_field("simple-random", direction_degrees=30.0, **OVAL), (20,))
    assert "that points 30° from north" in found.answer
    stated = patch_chances(
        "simple-random", area_frame(site=MEADOW_POLYGON), Patch(48.0, 20.0), direction=30.0
    )
    assert amount(found, "chance_of_hitting") == stated.chance([20]).chance


def test_what_the_chance_covers_is_said_in_words() -> None:
    """Centres outside, an aligned grid, random starts, and the very places drawn."""
    found = count(in_field("square-grid", **OVAL)).finding
    words = " ".join(found.assumptions)
    for said in ("centred outside", "turns the grid by hand", "starts", "score of their own"):
        assert said in words
    assert "averaged over every start of the grid" in found.answer
    spaced = bought(in_field("simple-random", design={"minimum_spacing_m": 5.0}, **OVAL), (20,))
    assert any("minimum spacing of 5 m" in line for line in spaced.assumptions)


def test_table_and_picture_rise_with_the_size_of_the_patch() -> None:
    """Larger patches are hit more often; sizes that the receiver cannot tell are left out."""
    found = bought(in_field("square-grid", **OVAL), (20,))
    picture = found.picture
    assert picture is not None
    assert list(picture.series[0].y) == sorted(picture.series[0].y)
    assert (len(found.rows), len(picture.series[0].x)) == (7, 10)
    coarse = bought(in_field("square-grid", accuracy=4.0, **OVAL), (20,))
    assert len(coarse.rows) == 5


def test_every_step_shows_its_inputs() -> None:
    """The working is arithmetic that can be followed."""
    steps = count(in_field("triangular-grid", accuracy=2.0, **OVAL)).finding.steps
    assert [step.symbol for step in steps] == ["a", "L'", "n∞", "P"]
    assert all(step.inputs and step.source for step in steps)
    assert steps[1].rounded == pytest.approx(48.0 * (1 - 4 / 20))


@pytest.mark.parametrize(
    ("asked", "said"),
    [
        (lambda: on_site(length_m=300.0), "does not fit into a population of"),
        (lambda: on_site(length_m=250.0, width_m=5.0), "250 m by 5 m"),
        (lambda: on_numbers(length_m=150.0), "does not fit into 12000 m²"),
        (lambda: replace(on_numbers(), area_m2=None), "type --area in m²"),
        (lambda: on_numbers("census"), 'layout "census"'),
        (lambda: replace(on_numbers(), frame=make_list_frame()), "has no area"),
    ],
)
def test_what_has_no_answer_is_refused_with_its_value(asked, said: str) -> None:
    """One line that names the thing and the value, for the count and for given counts."""
    with pytest.raises(DesignError, match=said):
        count(asked())
    with pytest.raises(DesignError, match=said):
        bought(asked(), (10, 10))


def test_objective_without_the_table_is_told_what_to_write() -> None:
    """The wiring reads the table below the objective."""
    asked = on_numbers()
    bare = asked.objective.model_copy(update={"smallest_patch": None})
    with pytest.raises(CampaignError, match="length_m and probability"):
        count(replace(asked, objective=bare))


def test_fixed_locations_open_with_the_smallest_patch_that_they_hit() -> None:
    """Endless square grid: a circle of diameter d covers a share π d²/(4 G²) while d ≤ G."""
    keys = ("length_m=40", "probability=0.5", "design.locations=20")
    asked = asked_numbers(question="smallest-patch", area=12_000.0, layout="square-grid", keys=keys)
    answer = bought(asked, (20,)).answer
    least = math.sqrt(0.5 * 4 / math.pi * 12_000 / 20)
    assert answer.startswith(
        f"20 locations on a square grid hit a round patch {least:.3g} m across or larger with a "
        "chance of 50 %, and a round patch 40 m across with 100 %"
    )
