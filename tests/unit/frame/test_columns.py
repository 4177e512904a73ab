"""Columns under other names than ours: usual ones taken and said, others as told, else refused."""

from pathlib import Path
from typing import Any

import pytest

from fieldplan.base.errors import FrameError
from fieldplan.frame.model import Frame
from tests.unit.frame.sites import frame_of, point, standard_site, write_csv, write_geojson

HEADER = ["Well ID", "Lat", "Long", "Screen top (m)"]
PLACES = [["MW-20", 52.1001, -1.9001, 3.5], ["MW-21", 52.1004, -1.8995, 4.0]]


def wells(folder: Path, header: list[str], *, rows: list[list[Any]] | None = None) -> None:
    """Write ``wells.csv`` under a header."""
    write_csv(folder / "wells.csv", [header, *(rows or PLACES)])


def listed(folder: Path, **table: Any) -> Frame:
    """Read ``wells.csv`` as a list."""
    return frame_of(folder, kind="list", list_file="wells.csv", **table)


def refusal(folder: Path, **table: Any) -> str:
    """The message with which a list is refused."""
    with pytest.raises(FrameError) as caught:
        listed(folder, **table)
    return str(caught.value)


def ids(frame: Frame) -> list[str]:
    """The ids of a list."""
    return [unit.unit_id for stratum in frame.strata for unit in stratum.units]


def test_usual_names_are_taken_and_said(tmp_path: Path) -> None:
    """A list as its owner keeps it should not have to be typed anew."""
    wells(tmp_path, HEADER)
    frame = listed(tmp_path)
    assert ids(frame) == ["MW-20", "MW-21"]
    assert "wells.csv: column 'Lat' is read as latitude, 'Long' as longitude." in frame.notes
    assert "wells.csv: column 'Well ID' is read as location_id." in frame.notes


@pytest.mark.parametrize("header", [["location_id", "latitude", "longitude"],
                                    ["Location ID", "LATITUDE", "Longitude "]])  # fmt: skip
def test_our_own_names_are_taken_without_a_word(tmp_path: Path, header: list[str]) -> None:
    """Capitals and blanks make no other name."""
    wells(tmp_path, [*header, "depth"])
    assert [note for note in listed(tmp_path).notes if "is read as" in note] == []


@pytest.mark.parametrize(
    "header",
    [
        ["Station", "Latitude (WGS 84)", "Longitude [deg]"],
        ["WELL_NO", "LAT_DD", "LON_DD"],
        ["Borehole-ID", "Decimal Latitude", "decimal-longitude"],
    ],
)
def test_units_and_datum_in_a_header_do_not_hide_the_column(
    tmp_path: Path, header: list[str]
) -> None:
    """People write them there."""
    wells(tmp_path, [*header, "depth"])
    frame = listed(tmp_path)
    assert ids(frame) == ["MW-20", "MW-21"]
    assert any(f"'{header[0]}' is read as location_id" in note for note in frame.notes)


def test_columns_are_named_as_they_stand_where_none_will_do(tmp_path: Path) -> None:
    """'screen_top_(m)' is in nobody's file."""
    wells(tmp_path, ["Tag", "Lat", "Long", "Screen top (m)"])
    assert refusal(tmp_path) == (
        "wells.csv has no column 'location_id'; its columns are 'Tag', 'Lat', 'Long', 'Screen top "
        "(m)'. Add one; or, if one of them is that: say which it is in [[frame]]: columns = "
        '{ location_id = "…" }.'
    )


def test_campaign_file_says_which_column_is_which(tmp_path: Path) -> None:
    """The remedy of the messages, followed."""
    wells(tmp_path, ["Tag", "N", "E", "Screen top (m)"])
    columns = {"location_id": "tag", "latitude": "N", "longitude": "E"}
    frame = listed(tmp_path, columns=columns)
    assert ids(frame) == ["MW-20", "MW-21"]
    assert frame.strata[0].units[0].latitude == pytest.approx(52.1001)
    assert "wells.csv: column 'N' is read as latitude, 'E' as longitude." in frame.notes


def test_what_the_campaign_file_says_goes_before_our_own_names(tmp_path: Path) -> None:
    """A running number is often called location_id, and the tag is what stands on the casing."""
    wells(tmp_path, ["Tag", "Lat", "Long", "location_id"])
    assert ids(listed(tmp_path, columns={"location_id": "Tag"})) == ["MW-20", "MW-21"]


@pytest.mark.parametrize(
    ("columns", "words"),
    [
        ({"location_id": "Tagg"}, "wells.csv has no column 'Tagg' for location_id; its columns"),
        ({"latitude": "North"}, "wells.csv has no column 'North' for latitude; its columns are"),
    ],
)
def test_column_that_is_not_there_is_refused(
    tmp_path: Path, columns: dict[str, str], words: str
) -> None:
    """An entry that does nothing would mislead whoever typed it."""
    wells(tmp_path, HEADER)
    assert words in refusal(tmp_path, columns=columns)


@pytest.mark.parametrize(
    ("header", "words"),
    [
        (
            ["Well ID", "Lat", "Long", "Station"],
            "location_id could be 'Well ID' or 'Station'. Say which it is in [[frame]]: columns = "
            '{ location_id = "Well ID" }.',
        ),
        (["Well ID", "Lat", "Long", "Name"], "location_id could be 'Well ID' or 'Name'. Say"),
        (["Well ID", "Lat", "Long", "LAT_DD"], "latitude could be 'Lat' or 'LAT_DD'. Say which"),
    ],
)
def test_two_columns_that_could_be_meant_are_a_question(
    tmp_path: Path, header: list[str], words: str
) -> None:
    """To take the first would be to guess."""
    wells(tmp_path, header)
    assert words in refusal(tmp_path)


def test_x_and_y_are_proposed_and_not_taken(tmp_path: Path) -> None:
    """They may be anything."""
    wells(tmp_path, ["Well ID", "X", "Y", "depth"])
    assert (
        "its columns are 'Well ID', 'X', 'Y', 'depth'. Say which they are in [[frame]]: columns = "
        '{ easting = "X", northing = "Y" }.'
    ) in refusal(tmp_path)


def test_same_words_with_different_units_are_different_columns(tmp_path: Path) -> None:
    """Depth in metres and in feet stand side by side in many lists."""
    rows = [[*row, 11.5] for row in PLACES]
    wells(tmp_path, ["Well ID", "Lat", "Long", "Depth (m)", "Depth (ft)"], rows=rows)
    assert len(ids(listed(tmp_path))) == 2


def test_corners_of_a_boundary_are_taken_and_told_in_the_same_way(tmp_path: Path) -> None:
    """An outline comes from the same kind of table."""
    corners = [[52.1, -1.9], [52.1, -1.899], [52.101, -1.899]]
    write_csv(tmp_path / "corners.csv", [["Lat", "Long"], *corners])
    notes = frame_of(tmp_path, boundary="corners.csv").notes
    assert "corners.csv: column 'Lat' is read as latitude, 'Long' as longitude." in notes
    write_csv(tmp_path / "corners.csv", [["A", "B"], *corners])
    with pytest.raises(
        FrameError, match=r"its columns are 'A', 'B'\. Say which they are in \[\[fr"
    ):
        frame_of(tmp_path, boundary="corners.csv")
    told = {"latitude": "A", "longitude": "B"}
    assert frame_of(tmp_path, boundary="corners.csv", columns=told).boundary.area > 1000


def test_columns_of_a_map_file_are_refused(tmp_path: Path) -> None:
    """Its coordinates stand in no column."""
    standard_site(tmp_path)
    with pytest.raises(FrameError, match=r"boundary\.geojson is no table, .*take latitude out of"):
        frame_of(tmp_path, columns={"latitude": "Lat"})


def test_targeted_places_have_columns_of_their_own(tmp_path: Path) -> None:
    """Their table is another one."""
    standard_site(tmp_path)
    write_csv(tmp_path / "spots.csv", [["Point", "Lat", "Long"], ["TANK", 52.1, -1.9]])
    frame = frame_of(tmp_path, targeted=[("spots.csv", "old tank")])
    assert [place.place_id for place in frame.targeted] == ["TANK"]
    assert "spots.csv: column 'Point' is read as location_id." in frame.notes
    write_csv(tmp_path / "spots.csv", [["Spot", "Lat", "Long"], ["TANK", 52.1, -1.9]])
    with pytest.raises(FrameError, match=r"in \[\[targeted\]\]: columns = "):
        frame_of(tmp_path, targeted=[("spots.csv", "old tank")])
    told = [("spots.csv", "old tank", {"location_id": "Spot"})]
    assert [place.place_id for place in frame_of(tmp_path, targeted=told).targeted] == ["TANK"]


def test_ids_of_a_map_layer_are_found_in_the_same_way(tmp_path: Path) -> None:
    """An attribute table is a table."""
    write_geojson(tmp_path / "wells.geojson", point(-1.9, 52.1, Well_ID="MW-20"))
    frame = frame_of(tmp_path, kind="list", list_file="wells.geojson")
    assert ids(frame) == ["MW-20"]
    assert "wells.geojson: column 'Well_ID' is read as location_id." in frame.notes


def test_stratum_column_is_found_as_it_stands(tmp_path: Path) -> None:
    """As its owner wrote it, blanks and capitals included."""
    wells(tmp_path, ["Well ID", "Lat", "Long", "Screen zone"])
    frame = listed(tmp_path, stratum_column="Screen zone", layout="stratified")
    assert [stratum.name for stratum in frame.strata] == ["3.5", "4.0"]
    assert refusal(tmp_path, stratum_column="Zone") == (
        "wells.csv has no column 'Zone'; its columns are 'Well ID', 'Lat', 'Long', 'Screen zone'. "
        "Correct stratum_column in [[frame]]."
    )


def test_bad_cell_is_named_by_its_column_as_it_stands(tmp_path: Path) -> None:
    """That is where the reader looks for it."""
    wells(tmp_path, HEADER, rows=[["MW-20", "52,1", -1.9, 3]])
    assert "wells.csv row 2: Lat '52,1' has a decimal comma" in refusal(tmp_path)
