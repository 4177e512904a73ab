"""A packet is complete, numbered, and once issued never changes."""

import json
import re
from pathlib import Path
from urllib.parse import unquote

import pytest

from fieldplan.packet.folder import changed_files, file_hashes
from tests.e2e.conftest import PLAN_IDS, Packed, run


def test_a_packet_holds_what_crew_and_office_need(packed: Packed) -> None:
    """The list is the issue's: a missing form stops a field day."""
    name = packed.packet.name
    names = set(file_hashes(packed.packet))
    crew = {f"crew/{name}-points.{kind}" for kind in ("csv", "gpx", "kml")}
    crew |= {f"crew/{name}-map.{kind}" for kind in ("pdf", "png", "html")}
    crew |= {"crew/field_return.csv", "crew/field_form.pdf"}
    office = {f"office/{name}-locations.{kind}" for kind in ("gpkg", "geojson", "xlsx")}
    office |= {
        "office/plan_sheet.html",
        "office/plan_sheet.pdf",
        "office/working.html",
        "office/working.pdf",
        "office/inputs/campaign.toml",
        "office/record.json",
    }
    assert {"START_HERE.html"} | crew | office <= names
    assert changed_files(packed.packet) == ()


def test_pack_ends_with_what_matters(packed: Packed) -> None:
    """How many locations, what to open, what is still open."""
    said = packed.said
    assert re.search(r"\d+ locations to visit for\s+\d+ results", said)
    assert "START_HERE.html" in said
    assert "DRAFT" in said
    lines = [line for line in said.splitlines() if not line.startswith("Open first")]
    assert max(map(len, lines)) <= 79


def test_every_page_of_a_draft_says_so(packed: Packed) -> None:
    """A draft must not be taken to the field by mistake."""
    pages = [*packed.packet.rglob("*.html"), *packed.packet.rglob("*.csv")]
    for page in [p for p in pages if p.suffix == ".html"]:
        assert "DRAFT" in page.read_text(encoding="utf-8"), page.name


def test_no_crew_file_tells_which_jar_is_the_duplicate(packed: Packed) -> None:
    """A laboratory that knows the duplicate can treat it differently."""
    for path in (packed.packet / "crew").iterdir():
        if path.suffix in {".csv", ".gpx", ".kml", ".html"}:
            text = path.read_text(encoding="utf-8-sig").lower()
            assert "field duplicate" not in text, path.name
            assert "qc_of" not in text, path.name


def test_the_next_pack_takes_the_next_number_and_leaves_the_first_alone(
    packed: Packed, tmp_path: Path
) -> None:
    """Nothing that was written is written again."""
    site = packed.copied_to(tmp_path)
    before = file_hashes(site.packet)
    outcome = run("pack", site.campaign, "--json")
    assert outcome.exit_code == 0, outcome.output
    answer = json.loads(outcome.stdout)
    assert answer["revision"] == f"{PLAN_IDS[site.name]}-r02"
    assert file_hashes(site.packet) == before


def test_an_issued_packet_says_who_and_when_and_is_never_changed(
    packed: Packed, tmp_path: Path
) -> None:
    """What a crew holds must equal what the office holds, for ever."""
    site = packed.copied_to(tmp_path)
    drawn = site.packet / "office" / f"{site.packet.name}-locations.geojson"
    places = json.loads(drawn.read_text(encoding="utf-8"))
    outcome = run("issue", site.packet, "--by", "L. Fenn", "--date", "2026-09-22")
    assert outcome.exit_code == 0, outcome.output
    assert "ISSUED by L. Fenn on 2026-09-22" in outcome.stdout
    for page in site.packet.rglob("*.html"):
        text = page.read_text(encoding="utf-8")
        assert "ISSUED by L. Fenn on 2026-09-22" in text, page.name
    again = json.loads(drawn.read_text(encoding="utf-8"))
    assert [f["geometry"] for f in again["features"]] == [f["geometry"] for f in places["features"]]
    before = file_hashes(site.packet)
    second = run("issue", site.packet, "--by", "Somebody")
    assert second.exit_code == 1
    assert "never changed" in str(second.exception)
    assert run("pack", site.campaign).exit_code == 0
    assert file_hashes(site.packet) == before
    assert not [p for p in site.folder.iterdir() if "draft" in p.name or p.name.startswith(".")]


def test_issuing_names_what_it_replaces_and_never_goes_back(packed: Packed, tmp_path: Path) -> None:
    """A crew with two issued plans of one site has none."""
    site = packed.copied_to(tmp_path)
    name = site.packet.name
    assert run("issue", site.packet, "--by", "L. Fenn").exit_code == 0
    assert run("pack", site.campaign).exit_code == 0
    assert run("pack", site.campaign).exit_code == 0
    third = site.packet.with_name(name.replace("r01", "r03"))
    outcome = run("issue", third, "--by", "L. Fenn")
    assert outcome.exit_code == 0, outcome.output
    assert f"replaces {name}, issued before" in outcome.stdout
    second = run("issue", site.packet.with_name(name.replace("r01", "r02")), "--by", "L. Fenn")
    assert second.exit_code == 1
    assert f"{third.name} is issued already" in str(second.exception)


def test_a_packet_is_not_issued_before_it_was_made(packed: Packed, tmp_path: Path) -> None:
    """A date of issue before the plan's own date is a slip or worse."""
    site = packed.copied_to(tmp_path)
    outcome = run("issue", site.packet, "--by", "L. Fenn", "--date", "2026-09-20")
    assert outcome.exit_code == 1
    assert "was made on 2026-09-21; it cannot be issued on 2026-09-20" in str(outcome.exception)
    assert "DRAFT" in (site.packet / "START_HERE.html").read_text(encoding="utf-8")


def test_a_packet_edited_by_hand_is_not_issued(packed: Packed, tmp_path: Path) -> None:
    """A point list that was edited no longer agrees with the record."""
    site = packed.copied_to(tmp_path)
    points = site.packet / "crew" / f"{site.packet.name}-points.csv"
    points.write_text(points.read_text(encoding="utf-8-sig") + "x\n", encoding="utf-8")
    outcome = run("issue", site.packet, "--by", "L. Fenn")
    assert outcome.exit_code == 1
    assert "was changed or removed after packing" in str(outcome.exception)
    assert "DRAFT" in (site.packet / "START_HERE.html").read_text(encoding="utf-8")


def test_files_added_to_a_draft_are_kept_when_it_is_issued(packed: Packed, tmp_path: Path) -> None:
    """Notes that somebody left in the folder are theirs."""
    site = packed.copied_to(tmp_path)
    (site.packet / "note.txt").write_text("gate code at the office", encoding="utf-8")
    assert run("issue", site.packet, "--by", "L. Fenn").exit_code == 0
    kept = site.packet.with_name(f"{site.packet.name}-draft") / "note.txt"
    assert kept.read_text(encoding="utf-8") == "gate code at the office"


def test_an_interrupted_issue_is_taken_up_again(packed: Packed, tmp_path: Path) -> None:
    """Between two renames only the set-aside draft exists; the same command must finish."""
    site = packed.copied_to(tmp_path)
    site.packet.rename(site.packet.with_name(f"{site.packet.name}-draft"))
    outcome = run("issue", site.packet, "--by", "L. Fenn")
    assert outcome.exit_code == 0, outcome.output
    assert "ISSUED" in (site.packet / "START_HERE.html").read_text(encoding="utf-8")


def test_a_packet_is_drawn_again_from_its_record_alone(packed: Packed, tmp_path: Path) -> None:
    """A reviewer years later has the packet and nothing else."""
    site = packed.copied_to(tmp_path)
    for path in site.folder.iterdir():
        if path.is_file():
            path.unlink()
    outcome = run("redraw", site.packet, "--json")
    assert outcome.exit_code == 0, outcome.output
    answer = json.loads(outcome.stdout)
    assert answer["same"] == answer["places"] > 0
    assert answer["largest_m"] == 0
    attachment = Path(answer["attachment"])
    assert attachment.read_bytes().startswith(b"%PDF")
    assert changed_files(site.packet) == ()


def test_the_inputs_kept_in_a_packet_give_the_same_packet_again(
    packed: Packed, tmp_path: Path
) -> None:
    """A packet that can be packed again from itself needs no archive beside it."""
    kept = packed.packet / "office" / "inputs" / "campaign.toml"
    outcome = run("pack", kept, "--out", tmp_path, "--date", "2026-09-21")
    assert outcome.exit_code == 0, outcome.output
    assert file_hashes(tmp_path / packed.packet.name) == file_hashes(packed.packet)


@pytest.mark.parametrize("command", ["issue", "redraw", "estimate"])
def test_a_folder_that_is_no_packet_gets_one_line(command: str, tmp_path: Path) -> None:
    """The wrong folder is the commonest slip of all."""
    (tmp_path / "empty").mkdir()
    lab = tmp_path / "lab.csv"
    lab.write_text("sample_id,analyte,as_reported,unit\n", encoding="utf-8")
    words: list[str | Path] = [command, tmp_path / "empty"]
    words += {"issue": ["--by", "A"], "redraw": [], "estimate": [lab]}[command]
    outcome = run(*words)
    assert outcome.exit_code == 1
    assert "is not a packet" in str(outcome.exception)
    assert sorted(p.name for p in tmp_path.iterdir()) == ["empty", "lab.csv"]


def test_every_file_of_a_packet_is_named_on_its_first_page(packed: Packed) -> None:
    """A file that nobody is told of is not opened; a link that leads nowhere is worse."""
    page = (packed.packet / "START_HERE.html").read_text(encoding="utf-8")
    linked = {unquote(target) for target in re.findall(r'<a href="([^"]+)"', page)}
    present = set(file_hashes(packed.packet)) | {"office/manifest.json"}
    inputs = {name for name in present if name.startswith("office/inputs/")}
    assert linked == present - inputs - {"START_HERE.html"} | {"office/inputs/campaign.toml"}
