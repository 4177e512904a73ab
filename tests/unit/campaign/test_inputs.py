"""Every file that a campaign names is found, fingerprinted, or missed by name."""

import hashlib
import os

import pytest

from fieldplan.base.errors import CampaignError
from fieldplan.campaign import fingerprint, input_files, read_campaign
from tests.unit.campaign.files import bent

NAMES = ("boundary.shp", "strata.gpkg", "pond.geojson", "tank.csv", "pilot.csv")
TEXT = bent(
    (
        '"boundary.geojson"',
        '"boundary.shp"\nstrata = "strata.gpkg#soils"\n'
        '[[frame.exclusion]]\nfile = "pond.geojson"\nreason = "water"',
    ),
    ('"simple-random"', '"stratified"'),
    ("[draw]", '[[targeted]]\nfile = "tank.csv"\nreason = "tank"\n[draw]'),
)


def campaign(folder):
    """Read the campaign that names five files."""
    path = folder / "campaign.toml"
    path.write_text(TEXT, encoding="utf-8")
    return read_campaign(path)


def test_all_files_are_listed_as_written_with_the_parts_of_a_shapefile(tmp_path):
    """What is not listed is not copied into the packet, and a .shp alone cannot be read."""
    for name in (*NAMES, "boundary.dbf", "boundary.PRJ", "boundary.shx", "boundary.txt"):
        (tmp_path / name).write_text(name)
    found = input_files(campaign(tmp_path))
    assert list(found) == [
        "boundary.shp",
        "boundary.PRJ",
        "boundary.dbf",
        "boundary.shx",
        "strata.gpkg",
        "pond.geojson",
        "tank.csv",
        "pilot.csv",
    ]
    assert all(path.read_text() == name for name, path in found.items())


def test_missing_files_are_told_at_once_with_names_that_come_near(tmp_path):
    """The line is that of the key which names the file."""
    for name in ("boundary.shp", "strata.gpkg", "pilot.csv", "pound.geojson"):
        (tmp_path / name).write_text(name)
    (tmp_path / "tank.csv").mkdir()
    with pytest.raises(CampaignError) as raised:
        input_files(campaign(tmp_path))
    assert [line.split("campaign.toml:")[1] for line in raised.value.problems] == [
        "16: frame.exclusion.file: file with the polygons, lines or points that are left out; "
        'there is no such file (got "pond.geojson"). Did you mean pound.geojson?',
        '32: targeted.file: file with the places; this is a folder (got "tank.csv"). '
        "Name a file in it.",
    ]


def test_device_is_said_to_be_no_ordinary_file(tmp_path):
    """It is there, so 'no such file' would send its author looking for a typing slip."""
    path = tmp_path / "campaign.toml"
    path.write_text(bent(("boundary.geojson", os.devnull), ("pilot.csv", "campaign.toml")))
    with pytest.raises(CampaignError) as raised:
        input_files(read_campaign(path))
    assert [line.split("campaign.toml:")[1] for line in raised.value.problems] == [
        "13: frame.boundary: file with the outline of the site; this is no ordinary file (a pipe "
        f'or a device) (got "{os.devnull}"). Save it as a file and name that.'
    ]


def test_missing_folder_is_told_as_such(tmp_path):
    """Paths start from the campaign file, not from where the command is run."""
    path = tmp_path / "campaign.toml"
    path.write_text(bent(("boundary.geojson", "maps/b.geojson"), ("pilot.csv", "campaign.toml")))
    with pytest.raises(CampaignError, match=r"Its folder does not exist either; paths start from"):
        input_files(read_campaign(path))


def test_file_whose_name_holds_a_hash_mark_goes_before_a_layer(tmp_path):
    """The mark parts file and layer only where no file has it in its name."""
    (tmp_path / "b#1.geojson").write_text("x")
    (tmp_path / "pilot.csv").write_text("x")
    path = tmp_path / "campaign.toml"
    path.write_text(bent(("boundary.geojson", "b#1.geojson")))
    assert list(input_files(read_campaign(path))) == ["b#1.geojson", "pilot.csv"]


def test_fingerprint_is_the_sha_256_of_the_bytes(tmp_path):
    """FIPS 180-4 example: the digest of "abc"."""
    path = tmp_path / "abc.txt"
    path.write_bytes(b"abc")
    expected = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"
    assert fingerprint(path) == expected == hashlib.sha256(b"abc").hexdigest()
    with pytest.raises(CampaignError, match="cannot be read"):
        fingerprint(tmp_path / "none.txt")
