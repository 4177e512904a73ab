"""The plan is made from files that anybody can check afterwards."""

import hashlib
import shutil
from datetime import date
from pathlib import Path

import pytest

from fieldplan.base.errors import CampaignError
from fieldplan.campaign import read_campaign
from fieldplan.plan.make import make_plan

SITE = Path(__file__).parents[3] / "demo_sites" / "hobbin-ley"
ON = date(2026, 9, 7)


@pytest.fixture
def campaign(tmp_path: Path) -> Path:
    """A copy of the site, under a name of its own."""
    shutil.copytree(SITE, tmp_path / "site")
    return (tmp_path / "site" / "campaign.toml").rename(tmp_path / "site" / "lead-2026.toml")


@pytest.mark.parametrize("mark", [b"", b"\xef\xbb\xbf"])
def test_every_input_is_hashed_byte_by_byte_the_campaign_file_first(campaign, mark):
    """With hashlib over the bytes as they stand, a byte-order mark among them."""
    campaign.write_bytes(mark + campaign.read_bytes())
    plan = make_plan(read_campaign(campaign), made_on=ON)
    assert plan.inputs is not None
    assert next(iter(plan.inputs)) == "lead-2026.toml"
    assert set(plan.inputs) == {
        "lead-2026.toml",
        "boundary.geojson",
        "strata.geojson",
        "building.geojson",
        "service-line.geojson",
        "targeted.csv",
        "pilot.csv",
    }
    for name, digest in plan.inputs.items():
        assert digest == hashlib.sha256((campaign.parent / name).read_bytes()).hexdigest()


def test_a_campaign_file_changed_since_it_was_read_is_refused(campaign):
    """Its hash would vouch for another text than the one that the plan follows."""
    read = read_campaign(campaign)
    campaign.write_text(campaign.read_text("utf-8") + "# later\n", encoding="utf-8")
    with pytest.raises(CampaignError, match=r"lead-2026\.toml was changed while it was being read"):
        make_plan(read, made_on=ON)
