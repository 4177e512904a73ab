"""Whole processes beside a bare interpreter start."""

import shutil
import subprocess
import sys
import tempfile
import time
from dataclasses import dataclass
from pathlib import Path

from fieldplan.cli.demo import demo_folder


@dataclass(frozen=True)
class Timed:
    """Shortest wall seconds of one command, and of a bare interpreter in the same run."""

    name: str
    aim_s: float
    seconds: float
    bare_s: float

    @property
    def ratio(self) -> float:
        """How many interpreter starts the command takes."""
        return self.seconds / self.bare_s


def shortest_seconds(words: list[str], *, runs: int) -> float:
    """Time a command as a whole process, after one run that warms the disk.

    The shortest run is the one that other work on the machine disturbed least.
    """
    taken = []
    for _ in range(runs + 1):
        began = time.perf_counter()
        subprocess.run(words, check=True, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
        taken.append(time.perf_counter() - began)
    return min(taken[1:])


def timed_commands() -> list[Timed]:
    """Time help, import, size with bare numbers, and a whole pack of a demo site."""
    python = sys.executable
    bare = shortest_seconds([python, "-c", "pass"], runs=9)
    with tempfile.TemporaryDirectory() as name:
        site = Path(name) / "hobbin-ley"
        shutil.copytree(demo_folder() / "hobbin-ley", site)
        pack = [python, "-m", "fieldplan", "pack", str(site / "campaign.toml")]
        numbers = ["size", "--sigma", "27.57", "--standard-error", "6", "--pilot-n", "8"]
        commands = [
            ("`fieldplan --help`", 0.15, [python, "-m", "fieldplan", "--help"], 5),
            ("`import fieldplan`", 0.1, [python, "-c", "import fieldplan"], 5),
            ("`fieldplan size` with numbers", 0.35, [python, "-m", "fieldplan", *numbers], 5),
            ("`fieldplan pack` of Hobbin Ley", 4.0, pack, 3),
        ]
        return [
            Timed(label, aim, shortest_seconds(words, runs=runs), bare)
            for label, aim, words, runs in commands
        ]
