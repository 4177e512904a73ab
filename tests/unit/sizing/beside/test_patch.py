"""A patch declared beside a question of another objective is spoken of with every number."""

from fieldplan.campaign.model import Objective
from fieldplan.campaign.questions.smallest_patch import SmallestPatch
from fieldplan.sizing import size
from fieldplan.sizing.asking import asked_of
from fieldplan.sizing.beside.patch import finding
from tests.factories import make_campaign, make_frame, make_spread

PATCH = SmallestPatch(length_m=40.0, probability=0.9)
DECIDES = Objective(
    analyte="lead", question="mean", standard_error=9.0, assurance="plain", decides_n=True
)
BESIDE = Objective(
    analyte="lead", question="mean", half_width=30.0, assurance="plain", smallest_patch=PATCH
)


def topics(*objectives: Objective) -> list[str]:
    """Size a campaign of these objectives and name its findings."""
    found = size(make_campaign(objective=objectives), make_spread(), make_frame())
    return [entry.topic for entry in found.findings]


def test_patch_of_an_objective_that_does_not_decide_is_spoken_of_once() -> None:
    """Whichever objective declares it; never twice under one topic."""
    assert topics(DECIDES, BESIDE).count("smallest-patch") == 1
    both = DECIDES.model_copy(update={"smallest_patch": PATCH})
    assert topics(both, BESIDE).count("smallest-patch") == 1


def test_nothing_is_said_where_no_objective_declares_a_patch() -> None:
    """A finding that always speaks would flood every screen."""
    campaign = make_campaign(objective=(DECIDES,))
    asked = asked_of(campaign, make_spread(), make_frame())
    assert finding(asked, size(campaign, make_spread(), make_frame())) is None
