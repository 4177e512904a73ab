"""Datum shifts: the one that is used is named with its accuracy, a coarse one refused."""

from pathlib import Path
from typing import Any

import geopandas
import pyproj
import pytest
import shapely

from fieldplan.base.errors import FrameError
from tests.unit.frame.sites import frame_of


def site_in(folder: Path, crs: str, centre: tuple[float, float], **table: Any) -> Any:
    """Write a box of about 200 m round a place in ``crs`` and read it."""
    x, y = pyproj.Transformer.from_crs(pyproj.CRS(crs).geodetic_crs, crs, always_xy=True).transform(
        *centre
    )
    half = 100.0 if pyproj.CRS(crs).is_projected else 0.001
    site = shapely.box(x - half, y - half, x + half, y + half)
    geopandas.GeoSeries([site], crs=crs).to_file(folder / "site.gpkg")
    return frame_of(folder, boundary="site.gpkg", **table)


@pytest.mark.parametrize(
    ("crs", "centre", "words"),
    [
        ("EPSG:25833", (14.0, 50.0), "ETRS89 to WGS 84 (1), good to 1 m"),
        ("EPSG:26915", (-93.0, 40.0), "NAD83 to WGS 84 (1), good to 4 m"),
        ("EPSG:6318", (-93.0, 40.0), "NAD83(2011) to WGS 84 (1), good to 2 m"),
        ("EPSG:7856", (152.0, -33.0), "good to 3 m"),
        ("EPSG:27700", (-1.9, 52.1), "OSGB36 to WGS 84 (6), good to 2 m"),
        ("EPSG:2193", (173.0, -41.0), "good to 1 m"),
    ],
)
def test_a_shift_as_good_as_a_receiver_is_taken_and_named(
    tmp_path: Path, crs: str, centre: tuple[float, float], words: str
) -> None:
    """Accuracies are those of the EPSG dataset that PROJ carries, without any grid."""
    assert words in site_in(tmp_path, crs, centre).sources[0]


def test_a_coarse_shift_is_refused_with_its_accuracy_and_the_better_one(tmp_path: Path) -> None:
    """NAD27 without its grid is good to 7 m in this state and would put a crew off the line."""
    with pytest.raises(FrameError) as caught:
        site_in(tmp_path, "EPSG:26715", (-93.0, 40.0))
    message = str(caught.value)
    assert "site.gpkg: the datum shift from EPSG:26715 (NAD27 / UTM zone 15N) to WGS 84" in message
    assert "good to 7 m only (limit 5 m)" in message
    assert "needs a grid that is not installed" in message
    assert "accept_shift_accuracy_m = 7" in message


def test_a_coarse_shift_is_taken_once_accepted_in_the_campaign_file(tmp_path: Path) -> None:
    """Somebody typed that 7 m will do; 6 m would not have been enough."""
    with pytest.raises(FrameError, match="limit 6 m"):
        site_in(tmp_path, "EPSG:26715", (-93.0, 40.0), accept_shift_accuracy_m=6.0)
    frame = site_in(tmp_path, "EPSG:26715", (-93.0, 40.0), accept_shift_accuracy_m=7.0)
    assert "good to 7 m" in frame.sources[0]


def test_a_shift_no_worse_than_the_receiver_is_taken(tmp_path: Path) -> None:
    """With a receiver good to 10 m, 7 m change little."""
    frame = site_in(tmp_path, "EPSG:26715", (-93.0, 40.0), position_accuracy_m=10.0)
    assert "good to 7 m" in frame.sources[0]


def test_a_shift_coarser_than_the_receiver_is_noted(tmp_path: Path) -> None:
    """A survey-grade receiver is wasted on it; somebody should know."""
    frame = site_in(tmp_path, "EPSG:26915", (-93.0, 40.0), position_accuracy_m=0.02)
    assert frame.notes[1:] == (
        "site.gpkg: its datum shift to WGS 84 is good to 4 m, coarser than the receiver's 0.02 m.",
    )


UNKNOWN = "+proj=utm +zone=33 +ellps=bessel +units=m +type=crs"


def test_a_shift_of_unknown_accuracy_is_refused_until_accepted(tmp_path: Path) -> None:
    """An ellipsoid without a datum hides hundreds of metres behind a number of -1."""
    with pytest.raises(FrameError) as caught:
        site_in(tmp_path, UNKNOWN, (14.0, 50.0))
    assert "of unknown accuracy" in str(caught.value)
    frame = site_in(tmp_path, UNKNOWN, (14.0, 50.0), accept_shift_accuracy_m=100.0)
    assert "of unknown accuracy" in frame.sources[0]
    assert any("accepted in the campaign file" in note for note in frame.notes)


def test_the_operation_is_chosen_for_the_place(tmp_path: Path) -> None:
    """Krovak: 6 m over the whole of its area, 1 m with the operation for Bohemia."""
    frame = site_in(tmp_path, "EPSG:5514", (15.0, 50.0))
    assert "good to 1 m" in frame.sources[0]


def test_feet_are_read_as_feet(tmp_path: Path) -> None:
    """A state plane in US survey feet: the box of 200 ft has 0.3716 ha, not 4 ha."""
    frame = site_in(tmp_path, "EPSG:2264", (-80.0, 35.5))
    foot = 1200 / 3937
    assert frame.population.gross == pytest.approx((200 * foot) ** 2, rel=1e-3)
    assert "US survey foot" in frame.sources[0] or "ftUS" in frame.sources[0]


def test_heights_in_a_compound_crs_are_set_aside(tmp_path: Path) -> None:
    """British grid with heights: the horizontal part alone is used."""
    frame = site_in(tmp_path, "EPSG:27700", (-1.9, 52.1))
    x = shapely.box(407000, 244000, 407200, 244200)
    geopandas.GeoSeries([x], crs="EPSG:7405").to_file(tmp_path / "high.gpkg")
    high = frame_of(tmp_path, boundary="high.gpkg")
    assert "OSGB36 to WGS 84 (6), good to 2 m" in high.sources[0]
    assert high.population.gross == pytest.approx(frame.population.gross, rel=1e-3)


def test_no_network_is_asked(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """PROJ may be told by the environment to fetch grids; here it never does."""
    import pyproj.network

    monkeypatch.setenv("PROJ_NETWORK", "ON")
    site_in(tmp_path, "EPSG:27700", (-1.9, 52.1))
    assert not pyproj.network.is_network_enabled()
