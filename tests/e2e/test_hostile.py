"""Slips and mischief around packets: one line, nothing lost, nothing vouched for in error."""

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

from fieldplan.packet.folder import file_hashes
from tests.e2e.conftest import Packed, run


def as_program(
    *words: str | Path, cwd: Path, **environment: str
) -> "subprocess.CompletedProcess[str]":
    """Run the program itself, so that its last resort is tested too."""
    return subprocess.run(
        [sys.executable, "-m", "fieldplan", *map(str, words)],
        cwd=cwd,
        env={**os.environ, **environment},
        capture_output=True,
        text=True,
        timeout=120,
        check=False,
    )


def test_a_renamed_packet_keeps_its_name_and_is_not_issued(packed: Packed, tmp_path: Path) -> None:
    """Issuing it would put a second folder under the recorded name."""
    site = packed.copied_to(tmp_path)
    renamed = site.packet.rename(site.packet.with_name("Ren"))
    outcome = run("issue", renamed, "--by", "L. Fenn")
    assert outcome.exit_code == 1
    assert f"its record says {packed.packet.name}" in str(outcome.exception)
    assert renamed.is_dir()


def test_a_folder_in_the_way_is_named_before_anything_moves(packed: Packed, tmp_path: Path) -> None:
    """The remedy is to move one folder; the message must say which."""
    site = packed.copied_to(tmp_path)
    aside = site.packet.with_name(f"{site.packet.name}-draft")
    aside.mkdir()
    before = file_hashes(site.packet)
    outcome = run("issue", site.packet, "--by", "L. Fenn")
    assert outcome.exit_code == 1
    assert f"{aside} is in the way" in str(outcome.exception)
    assert file_hashes(site.packet) == before


def test_issue_through_a_link_issues_the_packet_itself(packed: Packed, tmp_path: Path) -> None:
    """A link must not leave a draft of the same name on the crew's drive."""
    site = packed.copied_to(tmp_path)
    link = tmp_path / "link"
    link.symlink_to(site.packet, target_is_directory=True)
    assert run("issue", link, "--by", "L. Fenn").exit_code == 0
    assert "ISSUED" in (site.packet / "START_HERE.html").read_text(encoding="utf-8")
    assert not site.packet.with_name(f"{site.packet.name}-draft").exists()


def test_issue_works_from_inside_the_packet(packed: Packed, tmp_path: Path) -> None:
    """People type a dot where they stand."""
    site = packed.copied_to(tmp_path)
    done = as_program("issue", ".", "--by", "L. Fenn", cwd=site.packet)
    assert done.returncode == 0, done.stderr
    assert "ISSUED" in (site.packet / "START_HERE.html").read_text(encoding="utf-8")


def test_a_shortened_manifest_does_not_hide_a_changed_file(packed: Packed, tmp_path: Path) -> None:
    """A file that a packet must have is never one that was added."""
    site = packed.copied_to(tmp_path)
    name = f"crew/{site.packet.name}-points.csv"
    manifest = site.packet / "office" / "manifest.json"
    listed = json.loads(manifest.read_text(encoding="utf-8"))
    del listed[name]
    manifest.write_text(json.dumps(listed), encoding="utf-8")
    outcome = run("issue", site.packet, "--by", "L. Fenn")
    assert outcome.exit_code == 1
    assert f"does not list {name}" in str(outcome.exception)
    assert "DRAFT" in (site.packet / "START_HERE.html").read_text(encoding="utf-8")


def test_no_link_in_a_draft_carries_a_foreign_file_into_the_issued_packet(
    packed: Packed, tmp_path: Path
) -> None:
    """A packet is handed out; what it links to may be private."""
    site = packed.copied_to(tmp_path)
    secret = tmp_path / "secret.txt"
    secret.write_text("private", encoding="utf-8")
    (site.packet / "office" / "inputs" / "link.txt").symlink_to(secret)
    assert run("issue", site.packet, "--by", "L. Fenn").exit_code == 0
    assert not (site.packet / "office" / "inputs" / "link.txt").exists()


def test_locate_replaces_no_file(packed: Packed, tmp_path: Path) -> None:
    """One slip with --csv must not cost a pilot file or an issued point list."""
    site = packed.copied_to(tmp_path)
    before = file_hashes(site.folder)
    for option, target in (("--csv", "pilot.csv"), ("--map", "campaign.toml")):
        outcome = run("locate", site.campaign, option, site.folder / target)
        assert outcome.exit_code == 1
        assert "is there already and is not replaced" in str(outcome.exception)
    assert file_hashes(site.folder) == before


@pytest.mark.parametrize("command", ["pack", "redraw"])
def test_nothing_is_written_into_a_packet(packed: Packed, tmp_path: Path, command: str) -> None:
    """An issued packet never changes again."""
    site = packed.copied_to(tmp_path)
    before = file_hashes(site.packet)
    what = {"pack": site.campaign, "redraw": site.packet}[command]
    outcome = run(command, what, "--out", site.packet / "crew")
    assert outcome.exit_code == 1
    assert f"inside the packet {site.packet.name}" in str(outcome.exception)
    assert file_hashes(site.packet) == before


@pytest.mark.parametrize("words", [("redraw", "PACKET"), ("pack", "CAMPAIGN")])
def test_an_out_folder_that_cannot_be_made_gives_one_line(
    packed: Packed, tmp_path: Path, words: tuple[str, str]
) -> None:
    """A file where a folder should be; no traceback, nothing written."""
    site = packed.copied_to(tmp_path)
    known = {"PACKET": site.packet, "CAMPAIGN": site.campaign}
    done = as_program(words[0], known[words[1]], "--out", site.campaign / "x", cwd=tmp_path)
    assert done.returncode == 1
    assert "Traceback" not in done.stderr
    assert "campaign.toml" in done.stderr.splitlines()[-1]


def test_a_fault_of_our_own_is_one_sentence_unless_asked_for_more(tmp_path: Path) -> None:
    """A traceback frightens; the way to get one stands in the sentence."""
    code = (
        "import sys, fieldplan.cli as c\n"
        "def boom(*a, **k): raise KeyError('x')\n"
        "c.entry.main = boom\n"
        "c.main()\n"
    )
    for trace, expected in (("", "This is a fault of fieldplan"), ("1", "Traceback")):
        done = subprocess.run(
            [sys.executable, "-c", code],
            env={**os.environ, "FIELDPLAN_TRACE": trace},
            capture_output=True,
            text=True,
            check=False,
        )
        assert done.returncode == 1
        assert expected in done.stderr
        assert ("Traceback" in done.stderr) is (trace == "1")


def test_odd_surroundings_do_not_stop_a_pack(packed: Packed, tmp_path: Path) -> None:
    """Variables that other programs set are not ours to fail on."""
    site = packed.copied_to(tmp_path)
    odd = {"MPLBACKEND": "nonsense", "SOURCE_DATE_EPOCH": "abc"}
    done = as_program("pack", site.campaign, "--quiet", cwd=tmp_path, **odd)
    assert done.returncode == 0, done.stderr


@pytest.mark.slow
def test_two_packs_at_once_write_one_packet_each_or_say_so(packed: Packed, tmp_path: Path) -> None:
    """Whoever comes second takes the next number or is told to run again; no half packet."""
    site = packed.copied_to(tmp_path)
    words = [sys.executable, "-m", "fieldplan", "pack", str(site.campaign), "--quiet"]
    pair = [subprocess.Popen(words, stderr=subprocess.PIPE, text=True) for _ in range(2)]
    told = [process.communicate()[1] for process in pair]
    codes = sorted(process.returncode for process in pair)
    assert codes[0] == 0
    assert codes == [0, 0] or any("takes the next number" in text for text in told)
