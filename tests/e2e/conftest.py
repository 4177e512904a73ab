"""The demo sites, packed once per run and copied where a test changes them."""

import shutil
from dataclasses import dataclass
from pathlib import Path

import pytest
from click.testing import Result

from fieldplan.cli import entry
from fieldplan.cli.demo import demo_folder
from tests.command_runner import command_runner

SITES = ("hobbin-ley", "quern-flat", "yarrel-water")
PLAN_IDS = {"hobbin-ley": "HL", "quern-flat": "QF", "yarrel-water": "YW"}


def run(*words: str | Path) -> Result:
    """Run one command as a user would; errors of ours come back as exit codes."""
    from fieldplan.base.errors import FieldplanError

    outcome = command_runner().invoke(entry, [str(word) for word in words])
    if isinstance(outcome.exception, FieldplanError):
        outcome.exit_code = outcome.exception.exit_code
    elif outcome.exception is not None and not isinstance(outcome.exception, SystemExit):
        raise outcome.exception
    return outcome


@dataclass(frozen=True)
class Packed:
    """A demo site with its campaign file and its DRAFT packet."""

    name: str
    folder: Path
    packet: Path
    said: str

    @property
    def campaign(self) -> Path:
        """The campaign file."""
        return self.folder / "campaign.toml"

    def copied_to(self, place: Path) -> "Packed":
        """Return a copy that a test may change."""
        target = place / self.name
        shutil.copytree(self.folder, target)
        return Packed(self.name, target, target / self.packet.name, self.said)


@pytest.fixture(scope="session", params=SITES)
def packed(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Packed:
    """Return one demo site, packed as revision 1."""
    name = str(request.param)
    folder = tmp_path_factory.mktemp("site") / name
    shutil.copytree(demo_folder() / name, folder)
    outcome = run("pack", folder / "campaign.toml", "--date", "2026-09-21")
    assert outcome.exit_code == 0, outcome.output
    return Packed(name, folder, folder / f"{PLAN_IDS[name]}-r01", outcome.output)
