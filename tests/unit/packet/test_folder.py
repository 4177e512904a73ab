"""Folders appear whole or not at all."""

from collections.abc import Callable
from pathlib import Path

import pytest

from fieldplan.base.errors import RecordError
from fieldplan.packet.folder import (
    build_folder,
    changed_files,
    next_number,
    taken_numbers,
    write_manifest,
)
from fieldplan.packet.writer import next_revision, safe_input_name


def fill(folder: Path) -> None:
    """Write two files."""
    (folder / "a.txt").write_text("a", encoding="utf-8")
    (folder / "office").mkdir()
    (folder / "office" / "b.txt").write_text("b", encoding="utf-8")


def test_a_folder_gets_its_name_only_when_complete(tmp_path: Path) -> None:
    """A reader must never see half a packet under its final name."""
    seen = []

    def watching(folder: Path) -> None:
        fill(folder)
        seen.append((tmp_path / "HL-r01").exists())

    assert build_folder(tmp_path / "HL-r01", watching) == tmp_path / "HL-r01"
    assert seen == [False]
    assert sorted(p.name for p in tmp_path.iterdir()) == ["HL-r01"]


def test_an_existing_folder_is_never_replaced(tmp_path: Path) -> None:
    """What was handed to a crew stays as it is."""
    build_folder(tmp_path / "HL-r01", fill)
    with pytest.raises(RecordError, match="is there already and is never replaced"):
        build_folder(tmp_path / "HL-r01", lambda folder: None)
    assert (tmp_path / "HL-r01" / "a.txt").read_text(encoding="utf-8") == "a"


def test_a_failure_while_filling_leaves_nothing(tmp_path: Path) -> None:
    """An error in the last sheet must not leave the first ones behind."""

    def failing(folder: Path) -> None:
        fill(folder)
        raise RecordError("HL-07 does not read back")

    with pytest.raises(RecordError, match="does not read back"):
        build_folder(tmp_path / "HL-r01", failing)
    assert list(tmp_path.iterdir()) == []


def test_what_a_killed_run_left_is_swept_by_the_next(tmp_path: Path) -> None:
    """A kill cannot tidy up after itself, so its successor does."""
    leftover = tmp_path / ".HL-r01.0123abcd.part"
    leftover.mkdir()
    (leftover / "half").write_text("x", encoding="utf-8")
    build_folder(tmp_path / "HL-r01", fill)
    assert sorted(p.name for p in tmp_path.iterdir()) == ["HL-r01"]


def test_a_folder_that_cannot_be_written_gives_one_line(tmp_path: Path) -> None:
    """A file where a folder should be is the plainest case on every system."""
    (tmp_path / "file").write_text("", encoding="utf-8")
    with pytest.raises(RecordError, match=r"cannot be written .*choose another folder"):
        build_folder(tmp_path / "file" / "HL-r01", fill)


def test_numbers_count_drafts_set_aside_and_ignore_strangers(tmp_path: Path) -> None:
    """A number once used is never used again, whatever case the disk keeps."""
    for name in ("HL-r01", "HL-r03-draft", "hl-r04", "HL-r07.zip", "HLX-r09", "HL-rxx"):
        (tmp_path / name).mkdir()
    assert taken_numbers(tmp_path, "HL-r") == {1, 3, 4}
    assert next_number(tmp_path, "HL-r") == 5
    assert next_number(tmp_path / "nowhere", "HL-r") == 1


def test_a_typed_revision_that_is_taken_is_refused_with_the_free_one(tmp_path: Path) -> None:
    """Typing the revision must not become a way to overwrite."""
    (tmp_path / "HL-r02").mkdir()
    assert next_revision(tmp_path, plan_id="HL", wanted=4) == 4
    with pytest.raises(RecordError, match=r"HL-r02 is there already.*plan\.revision to 3"):
        next_revision(tmp_path, plan_id="HL", wanted=2)


def test_the_manifest_names_changed_added_and_removed_files(tmp_path: Path) -> None:
    """Issuing refuses a packet whose pages no longer agree."""
    fill(tmp_path)
    write_manifest(tmp_path)
    assert changed_files(tmp_path) == ()
    (tmp_path / "a.txt").write_text("edited", encoding="utf-8")
    (tmp_path / "office" / "b.txt").unlink()
    (tmp_path / "new.txt").write_text("", encoding="utf-8")
    assert changed_files(tmp_path) == ("a.txt", "new.txt", "office/b.txt")


def test_a_number_taken_beside_the_campaign_is_not_given_elsewhere(tmp_path: Path) -> None:
    """Two packets of one name with different places would both be believed."""
    (tmp_path / "HL-r01").mkdir()
    assert next_revision(tmp_path / "other", tmp_path, plan_id="HL") == 2


def test_a_folder_that_another_run_is_filling_is_left_to_it(tmp_path: Path) -> None:
    """Two people press the button at once; neither may delete the other's work."""

    def filling(folder: Path) -> None:
        fill(folder)
        with pytest.raises(RecordError, match="is there already"):
            build_folder(tmp_path / "HL-r01", lambda inner: rival(folder, inner))

    def rival(first: Path, second: Path) -> None:
        assert (first / "a.txt").is_file()
        fill(second)
        (tmp_path / "HL-r01").mkdir()

    with pytest.raises(RecordError, match="takes the next number"):
        build_folder(tmp_path / "HL-r01", filling)
    assert [p.name for p in tmp_path.iterdir()] == ["HL-r01"]


def test_what_gave_way_is_put_back_when_the_name_cannot_be_given(tmp_path: Path) -> None:
    """A draft must not lose its name to an issue that failed."""
    draft = tmp_path / "HL-r01"
    fill_at(draft)

    def make_way() -> Callable[[], object]:
        draft.rename(tmp_path / "aside")
        fill_at(draft)
        return lambda: (tmp_path / "aside").rename(tmp_path / "back")

    with pytest.raises(RecordError, match="is there already"):
        build_folder(draft, fill, make_way=make_way)
    assert (tmp_path / "back" / "a.txt").is_file()


def fill_at(folder: Path) -> None:
    """Make a folder and fill it."""
    folder.mkdir()
    fill(folder)


def test_nothing_is_written_into_a_packet(tmp_path: Path) -> None:
    """An issued packet never changes, not even by a folder of results in it."""
    (tmp_path / "HL-r01" / "office").mkdir(parents=True)
    (tmp_path / "HL-r01" / "office" / "record.json").write_text("{}", encoding="utf-8")
    with pytest.raises(RecordError, match="inside the packet HL-r01"):
        build_folder(tmp_path / "HL-r01" / "crew" / "results", fill)


@pytest.mark.parametrize(
    ("written", "kept"),
    [
        ("boundary.geojson", "boundary.geojson"),
        ("../../shared/strata.gpkg", "up/up/shared/strata.gpkg"),
        ("/etc/site.csv", "etc/site.csv"),
        ("C:\\sites\\site.shp", "C/sites/site.shp"),
        ("./a/./b.csv", "a/b.csv"),
    ],
)
def test_an_input_never_leaves_the_packet(written: str, kept: str) -> None:
    """A path from a campaign file must not steer where the packet is written."""
    assert safe_input_name(written) == kept
