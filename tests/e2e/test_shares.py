"""A plan whose locations two analytes decide, with a bound and a price of one stratum."""

import shutil
from pathlib import Path

from fieldplan.campaign import read_campaign
from fieldplan.cli import entry
from fieldplan.frame import read_frame
from fieldplan.lab import read_spread
from fieldplan.plan.record import read_plan
from fieldplan.sizing import size
from tests.command_runner import command_runner

ROOT = Path(__file__).parents[2]


def test_the_record_of_two_deciding_analytes_reads_back_and_draws_again(tmp_path: Path) -> None:
    """What was decided before the field is what the record gives, to the last digit."""
    shutil.copytree(ROOT / "demo_sites", tmp_path / "demo_sites")
    path = tmp_path / "demo_sites" / "sizing" / "shares" / "campaign.toml"
    read = read_campaign(path)
    frame = read_frame(read)
    sized = size(read.campaign, read_spread(read, frame), frame, beside="all")
    packed = command_runner().invoke(entry, ["pack", str(path)])
    assert packed.exit_code == 0, packed.stderr
    packet = next(folder for folder in path.parent.iterdir() if folder.is_dir())
    plan = read_plan(packet)
    assert plan.size.target == sized.target
    assert plan.size.strata == sized.strata
    assert [f.topic for f in plan.size.findings] == [f.topic for f in sized.findings]
    drawn = {entry_.stratum: entry_.planned for entry_ in plan.size.strata}
    placed = [place.stratum for place in plan.locations.of_class("random")]
    assert {name: placed.count(name) for name in drawn} == drawn
    assert drawn["tip"] <= 12
    again = command_runner().invoke(entry, ["redraw", str(packet)])
    assert again.exit_code == 0, again.stderr
    assert "were drawn again, to the centimetre" in again.stdout
