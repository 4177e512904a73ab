"""The vendored map library is what was published, and carries everything it needs."""

import base64
import hashlib
from importlib.resources import files

from fieldplan.packet import assets

FOLDER = files(assets) / assets.LEAFLET


def listed_sums() -> dict[str, str]:
    """Read the list of sums as written by sha256sum."""
    lines = (FOLDER / "SHA256SUMS").read_text(encoding="utf-8").splitlines()
    return {name: digest for digest, name in (line.split("  ") for line in lines)}


def test_the_sums_of_all_vendored_files_hold() -> None:
    """A file changed by an editor or by line-end conversion is not the published one."""
    for name, digest in listed_sums().items():
        content = FOLDER.joinpath(*name.split("/")).read_bytes()
        assert hashlib.sha256(content).hexdigest() == digest, name


def test_every_vendored_file_has_a_sum() -> None:
    """A file without a sum would escape the check above."""
    present = {entry.name for entry in FOLDER.iterdir() if entry.is_file()} - {"SHA256SUMS"}
    present |= {f"images/{entry.name}" for entry in (FOLDER / "images").iterdir()}
    assert present == set(listed_sums())


def test_script_and_styles_are_the_files_that_the_publisher_hashed() -> None:
    """Integrity values that the publisher prints for 1.9.4 beside its links, from memory."""
    published = {
        "leaflet.js": "20nQCchB9co0qIjJZRGuk2/Z9VM+kNiyxNV1lvTlZBo=",
        "leaflet.css": "p4NxAoJBhIIN+hmNHrzRCf9tD/miZyoHS5obTRR9BMY=",
    }
    for name, value in published.items():
        digest = hashlib.sha256((FOLDER / name).read_bytes()).digest()
        assert base64.b64encode(digest).decode() == value


def test_styles_carry_their_images_inside() -> None:
    """With the network off an image that is not inside is a missing button."""
    styles = assets.leaflet_styles()
    assert styles.count("url(data:image/png;base64,") == 3
    assert "url(images/" not in styles


def test_licence_text_stands_where_the_package_metadata_looks_for_it() -> None:
    """The licence asks that its text travels with every copy."""
    beside = (FOLDER / "LICENSE").read_bytes()
    assert (files(assets) / "LICENSE-leaflet").read_bytes() == beside
    assert b"Redistribution and use in source and binary forms" in beside
