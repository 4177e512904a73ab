"""A pack that is killed at any moment leaves nothing half-written under a packet's name."""

import random
import shutil
import subprocess
import sys
import time
from pathlib import Path

import pytest

from fieldplan.cli.demo import demo_folder
from fieldplan.packet.folder import changed_files


def start_pack(folder: Path) -> "subprocess.Popen[bytes]":
    """Start ``fieldplan pack`` in a process of its own."""
    return subprocess.Popen(
        [sys.executable, "-m", "fieldplan", "pack", str(folder / "campaign.toml"), "--quiet"],
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
    )


@pytest.mark.slow
def test_a_pack_killed_at_fifty_random_moments_leaves_whole_packets_only(tmp_path: Path) -> None:
    """A laptop that dies in a car park must not leave a packet that looks finished."""
    folder = tmp_path / "quern-flat"
    shutil.copytree(demo_folder() / "quern-flat", folder)
    began = time.perf_counter()
    assert start_pack(folder).wait() == 0
    whole = time.perf_counter() - began
    chance = random.Random(20260907)
    for _ in range(50):
        process = start_pack(folder)
        time.sleep(chance.uniform(0.3, 1.1) * whole)
        process.kill()
        process.wait()
        visible = [p for p in folder.glob("QF-r*") if p.is_dir()]
        assert visible
        for packet in visible:
            assert changed_files(packet) == (), packet
    assert start_pack(folder).wait() == 0
    assert not list(folder.glob(".QF-r*"))
