"""All files of a plan: complete, within 0.2 m, repeatable, and silent about duplicates."""

import dataclasses
import re
from pathlib import Path

import pytest

from fieldplan.base.errors import RecordError
from fieldplan.packet import exchange
from fieldplan.packet.exchange import geojson, read_back, write_point_files
from fieldplan.packet.exchange.reading import READERS
from fieldplan.plan.model import Plan
from tests import factories
from tests.unit.packet import plans

EVERYWHERE = {
    "England": (52.10, -1.90),
    "southern hemisphere": (-33.45, -70.67),
    "edge of two zones": (48.0, 6.0),
    "zone 32 widened for Norway": (60.39, 4.5),
    "equator": (0.0, 9.45),
    "across 180 degrees": (-16.8, 180.0),
    "north pole": (89.99, 25.0),
    "Antarctica": (-84.0, -150.0),
}


def written(plan: Plan, folder: Path) -> dict[str, Path]:
    """Write all files below a folder and list them by suffix."""
    crew, office = folder / "crew", folder / "office"
    crew.mkdir(parents=True)
    office.mkdir()
    return {path.name: path for path in write_point_files(plan, crew, office)}


@pytest.fixture(scope="module")
def quarry(tmp_path_factory: pytest.TempPathFactory) -> dict[str, Path]:
    """Write the files of Quarry Field once."""
    return written(factories.make_plan(), tmp_path_factory.mktemp("quarry"))


def copy_of(quarry: dict[str, Path], suffix: str, folder: Path) -> Path:
    """Copy one point file to a folder where a test may spoil it."""
    source = next(p for n, p in quarry.items() if n.endswith(suffix) and n != "samples_key.csv")
    path = folder / source.name
    path.write_bytes(source.read_bytes())
    return path


def test_the_files_are_where_crew_and_office_expect_them(quarry: dict[str, Path]) -> None:
    """Names carry the revision, so that two packets on one receiver are told apart."""
    places = {f"{path.parent.name}/{path.name}" for path in quarry.values()}
    assert places == {
        "crew/QF-r01-points.csv",
        "crew/QF-r01-points.gpx",
        "crew/QF-r01-points.kml",
        "office/QF-r01-locations.gpkg",
        "office/QF-r01-locations.geojson",
        "office/QF-r01-locations.xlsx",
        "office/samples_key.csv",
    }


@pytest.mark.parametrize("where", EVERYWHERE)
def test_files_read_back_everywhere_on_earth(where: str, tmp_path: Path) -> None:
    """Zone edges, both hemispheres, the date line and the poles are ordinary places."""
    files = written(plans.plan_at(*EVERYWHERE[where]), tmp_path)
    assert len(files) == 7


def test_the_same_plan_gives_the_same_bytes(quarry: dict[str, Path], tmp_path: Path) -> None:
    """No clock and no random name gets into a file, so that packets can be compared."""
    again = written(factories.make_plan(), tmp_path)
    for name, path in again.items():
        assert path.read_bytes() == quarry[name].read_bytes(), name


def test_a_list_has_files_too(tmp_path: Path) -> None:
    """Wells have no strata polygons; the layer is there and empty."""
    from pyogrio import read_dataframe

    files = written(plans.list_plan(), tmp_path)
    strata = read_dataframe(files["QF-r01-locations.gpkg"], layer="strata")
    assert len(strata) == 0


@pytest.mark.parametrize("suffix", list(READERS))
def test_a_location_moved_in_any_file_is_caught(
    suffix: str, quarry: dict[str, Path], tmp_path: Path
) -> None:
    """The plan is moved by 0.3 m under the files: each reader must notice by itself."""
    plan = factories.make_plan()
    path = copy_of(quarry, suffix, tmp_path)
    first, *others = plan.locations.places
    aside = dataclasses.replace(first, latitude=first.latitude + 0.3 / 111_000)
    moved = dataclasses.replace(plan.locations, places=(aside, *others))
    with pytest.raises(
        RecordError, match=rf"{re.escape(path.name)}: location 'QF-A-01'.* 0\.3"
    ) as r:
        read_back(dataclasses.replace(plan, locations=moved), [path])
    assert len(r.value.problems) in (1, 2, 3)


@pytest.mark.parametrize("suffix", list(READERS))
def test_a_missing_an_extra_and_a_renamed_location_are_caught(
    suffix: str, quarry: dict[str, Path], tmp_path: Path
) -> None:
    """A crew sent with 13 of 14 places finds out in the field; the reader finds out here."""
    plan = factories.make_plan()
    path = copy_of(quarry, suffix, tmp_path)
    first, *others = plan.locations.places
    renamed = dataclasses.replace(first, location_id="QF-A-99")
    extra = dataclasses.replace(first, short_name="QFA99")
    for places, said in (
        (tuple(others), "'QFA01' is no location of QF-r01"),
        ((first, extra, *others), "'QF-A-01' (QFA99) is missing"),
        ((renamed, *others), "reads back as 'QF-A-01'"),
    ):
        changed = dataclasses.replace(plan.locations, places=places)
        with pytest.raises(RecordError, match=re.escape(said)):
            read_back(dataclasses.replace(plan, locations=changed), [path])


@pytest.mark.parametrize("suffix", list(READERS))
def test_a_file_cut_short_is_caught(suffix: str, quarry: dict[str, Path], tmp_path: Path) -> None:
    """A full disk or a torn copy must not become a packet."""
    plan = factories.make_plan()
    path = copy_of(quarry, suffix, tmp_path)
    path.write_bytes(path.read_bytes()[:1500])
    with pytest.raises(RecordError, match=re.escape(path.name)):
        read_back(plan, [path])


def test_a_changed_key_to_samples_is_caught(quarry: dict[str, Path], tmp_path: Path) -> None:
    """The key is the only place that tells a duplicate from its parent."""
    plan = factories.make_plan()
    path = written(plan, tmp_path)["samples_key.csv"]
    path.write_bytes(path.read_bytes().replace(b"QF-204,QFA", b"QF-205,QFA"))
    path.write_bytes(
        path.read_bytes().replace(b"field duplicate,QF-204", b"field duplicate,QF-731")
    )
    with pytest.raises(RecordError, match="sample 'QF-655' does not read back"):
        read_back(plan, [path])


def test_writing_itself_reads_back(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """The check is part of writing, not something a caller may forget."""
    swapped = geojson.write_geojson

    def swap(plan: Plan) -> bytes:
        return re.sub(rb"\[(-?[\d.]+), (-?[\d.]+)\]", rb"[\2, \1]", swapped(plan))

    monkeypatch.setattr(exchange, "write_geojson", swap)
    with pytest.raises(RecordError, match=r"QF-r01-locations\.geojson: location 'QF-A-01'"):
        written(factories.make_plan(), tmp_path)


def test_nothing_in_the_crews_files_tells_a_duplicate_from_its_parent(
    quarry: dict[str, Path], tmp_path: Path
) -> None:
    """Blind means blind: no role, no pairing, and an order that says nothing."""
    plan = factories.make_plan()
    swapped = plan.samples.samples
    at = [n for n, sample in enumerate(swapped) if sample.location_id == "QF-A-02"]
    parent, copy = swapped[at[0]], swapped[at[1]]
    names = {parent.sample_id: copy.sample_id, copy.sample_id: parent.sample_id}
    exchanged = tuple(
        dataclasses.replace(sample, sample_id=names.get(sample.sample_id, sample.sample_id))
        for sample in swapped
    )
    other = dataclasses.replace(plan, samples=dataclasses.replace(plan.samples, samples=exchanged))
    here, there = quarry, written(other, tmp_path)
    for name in ("QF-r01-points.csv", "QF-r01-points.gpx", "QF-r01-points.kml"):
        assert here[name].read_bytes() == there[name].read_bytes()
        assert b"duplicate" not in here[name].read_bytes().lower()
        assert b"qc_of" not in here[name].read_bytes()
    assert here["samples_key.csv"].read_bytes() != there["samples_key.csv"].read_bytes()
