"""The procedure as told to reviewers, followed by hand, gives the places that were issued."""

import json
from pathlib import Path

import pytest

from fieldplan.base.draws import Stream
from fieldplan.campaign.model import DesignTable, Draw
from fieldplan.design import locate
from fieldplan.design.model import Locations, StratumCount
from fieldplan.design.procedure import procedure_in_words, procedure_pseudocode
from fieldplan.sizing.model import QualityControlCount
from tests.factories import make_campaign, make_list_frame, make_locations, make_size
from tests.unit.design import by_hand
from tests.unit.design.sites import (
    MEADOW,
    MEADOW_POLYGON,
    YARD,
    YARD_POLYGON,
    area_frame,
    list_frame,
)

SEED = 20261102
GOLDEN = Path(__file__).with_name("golden.json")
COUNTS = [StratumCount("meadow", 12, 4), StratumCount("yard", 7, 3)]


def placed(locations: Locations, stratum: str) -> list[tuple[int, int]]:
    """Places of one stratum in list order, in whole centimetres."""
    drawn = [p for p in locations.places if p.stratum == stratum and p.list_order]
    drawn.sort(key=lambda place: place.list_order)
    return [(round(p.easting * 100), round(p.northing * 100)) for p in drawn]


def issued(layout: str, **changes: object) -> Locations:
    """Draw both strata with fieldplan."""
    design = DesignTable(layout=layout, alternates=3, **changes)  # type: ignore[arg-type]
    campaign = make_campaign(design=(design,), draw=Draw(seed=SEED))
    frame = area_frame(meadow=MEADOW_POLYGON, yard=YARD_POLYGON)
    return locate(campaign, frame, COUNTS)


def stratified_by_hand(apart: int) -> dict[str, list[tuple[int, int]]]:
    """Draw random places in both strata by hand."""
    return {
        "meadow": by_hand.area(
            by_hand.Numbers(SEED, "main", "meadow", "places"), MEADOW, 16, apart=apart
        ),
        "yard": by_hand.area(
            by_hand.Numbers(SEED, "main", "yard", "places"), YARD, 10, apart=apart
        ),
    }


def grid_by_hand(*, triangular: bool) -> dict[str, list[tuple[int, int]]]:
    """Draw a grid and its alternates in both strata by hand."""
    found = {}
    for name, rings, geometry, planned, spare in (
        ("meadow", MEADOW, MEADOW_POLYGON, 12, 4),
        ("yard", YARD, YARD_POLYGON, 7, 3),
    ):
        key = (SEED, "main", name)
        nodes = by_hand.grid(key, rings, geometry.area, planned, triangular=triangular)
        rest = by_hand.area(by_hand.Numbers(*key, "alternates"), rings, spare, taken=nodes)
        found[name] = nodes + rest
    return found


def all_by_hand() -> dict[str, dict[str, list[tuple[int, int]]]]:
    """Draw by hand what the golden file holds; run as a module, this file prints it."""
    return {
        "stratified": stratified_by_hand(0),
        "stratified, 15 m apart": stratified_by_hand(1500),
        "square-grid": grid_by_hand(triangular=False),
        "triangular-grid": grid_by_hand(triangular=True),
    }


def all_issued() -> dict[str, dict[str, list[tuple[int, int]]]]:
    """Draw with fieldplan what the golden file holds."""
    drawn = {
        "stratified": issued("stratified"),
        "stratified, 15 m apart": issued("stratified", minimum_spacing_m=15.0),
        "square-grid": issued("square-grid"),
        "triangular-grid": issued("triangular-grid"),
    }
    return places_by_stratum(drawn)


def compact_issued() -> dict[str, dict[str, list[tuple[int, int]]]]:
    """Draw compact strata and balanced lists with fieldplan, for the golden file too."""
    return places_by_stratum(
        {
            "compact-strata": issued("compact-strata"),
            "compact-strata, two a cell": issued("compact-strata", per_cell=2),
            "balanced-list": issued("balanced-list"),
            "balanced-list, 20 m apart": issued("balanced-list", minimum_spacing_m=20.0),
        }
    )


def places_by_stratum(
    drawn: dict[str, Locations],
) -> dict[str, dict[str, list[tuple[int, int]]]]:
    """Set the places of several draws in whole centimetres."""
    return {
        name: {stratum: placed(locations, stratum) for stratum in ("meadow", "yard")}
        for name, locations in drawn.items()
    }


def test_places_followed_by_hand_are_the_places_issued() -> None:
    """A reviewer with the pseudo-code and no geometry library must get the same centimetres."""
    assert all_issued() == all_by_hand()


def compact_by_hand(per_cell: int) -> dict[str, list[tuple[int, int]]]:
    """Cut both strata into cells and fill them by hand."""
    return {
        name: by_hand.compact(
            (SEED, "main", name), rings, geometry.area, planned, spare, per_cell=per_cell
        )
        for name, rings, geometry, planned, spare in (
            ("meadow", MEADOW, MEADOW_POLYGON, 12, 4),
            ("yard", YARD, YARD_POLYGON, 7, 3),
        )
    }


@pytest.mark.slow
@pytest.mark.parametrize("per_cell", [1, 2])
def test_compact_strata_followed_by_hand_are_the_places_issued(per_cell: int) -> None:
    """Whole numbers decide where a cell ends, so a reviewer's cells end at the same centimetre."""
    drawn = issued("compact-strata", per_cell=per_cell)
    found = {stratum: placed(drawn, stratum) for stratum in ("meadow", "yard")}
    assert found == compact_by_hand(per_cell)


def test_balanced_lists_followed_by_hand_are_the_places_issued() -> None:
    """Neighbours found by brute force must be those found in buckets, ties and all."""
    drawn = issued("balanced-list")
    assert {stratum: placed(drawn, stratum) for stratum in ("meadow", "yard")} == {
        name: by_hand.balanced((SEED, "main", name), rings, geometry.area, planned, planned + spare)
        for name, rings, geometry, planned, spare in (
            ("meadow", MEADOW, MEADOW_POLYGON, 12, 4),
            ("yard", YARD, YARD_POLYGON, 7, 3),
        )
    }


@pytest.mark.parametrize("planned", [1, 3, 8, 13, 14])
def test_balanced_order_of_a_list_followed_by_hand_is_the_order_issued(planned: int) -> None:
    """Wells in a zigzag stand at equal distances, which tries the rules for ties."""
    frame = make_list_frame()
    campaign = make_campaign(design=(DesignTable(layout="balanced-list"),), draw=Draw(seed=SEED))
    units = frame.strata[0].units
    wells = {u.unit_id: (round(u.easting * 100), round(u.northing * 100)) for u in units}
    count = StratumCount("site", planned, len(units) - planned)
    locations = locate(campaign, frame, [count])
    by_order = sorted(locations.places, key=lambda place: place.list_order)
    found = by_hand.balanced_units((SEED, "main", "site"), wells, planned)
    assert [p.location_id for p in by_order] == found


def test_places_are_those_committed_with_the_first_release() -> None:
    """Every later release and every supported library must draw these very centimetres."""
    golden = {
        name: {stratum: [tuple(p) for p in places] for stratum, places in strata.items()}
        for name, strata in json.loads(GOLDEN.read_text(encoding="utf-8")).items()
    }
    assert all_issued() | compact_issued() == golden


def test_list_order_followed_by_hand_is_the_order_issued() -> None:
    """Wells are visited in the order of their own random numbers."""
    campaign = make_campaign(design=(DesignTable(layout="simple-random"),), draw=Draw(seed=SEED))
    locations = locate(campaign, make_list_frame(), [StratumCount("site", 8, 6)])
    wells = [f"MW-{i}" for i in range(1, 15)]
    assert [p.location_id for p in locations.places] == by_hand.units((SEED, "main", "site"), wells)


@pytest.mark.parametrize("revision", [1, 3, 12])
def test_sample_ids_followed_by_hand_are_the_ids_issued(revision: int) -> None:
    """Blind ids can be made again from the seed, so a lost key is no loss."""
    from fieldplan.samples import assign

    campaign, locations = make_campaign(draw=Draw(seed=SEED)), make_locations()
    qc = (QualityControlCount("field duplicate", 2, ""), QualityControlCount("field blank", 1, ""))
    size = make_size()
    object.__setattr__(size, "qc", qc)
    samples = assign(campaign, locations, size, revision=revision).samples
    doubled = sorted(s.location_id for s in samples if s.role == "field duplicate")
    wanted = [f"field sample {p.location_id}" for p in locations.places]
    wanted += [f"field duplicate {name}" for name in doubled] + ["field blank 1"]
    by_name = by_hand.sample_ids(SEED, "main", f"QF{revision}", wanted, len(wanted))
    names = [f"{s.role} {s.location_id}" if s.location_id else f"{s.role} 1" for s in samples]
    assert {name: s.sample_id for name, s in zip(names, samples, strict=True)} == by_name


@pytest.mark.parametrize(
    ("counter", "key", "expected"),
    [
        ([0] * 4, [0] * 2, "16554d9eca36314c db20fe9d672d0fdc d7e772cee186176b 7e68b68aec7ba23b"),
        (
            [2**64 - 1] * 4,
            [2**64 - 1] * 2,
            "87b092c3013fe90b 438c3c67be8d0224 9cc7d7c69cd777b6 a09caebf594f0ba0",
        ),
        (
            [0x243F6A8885A308D3, 0x13198A2E03707344, 0xA4093822299F31D0, 0x082EFA98EC4E6C89],
            [0x452821E638D01377, 0xBE5466CF34E90C6C],
            "a528f45403e61d95 38c72dbd566e9788 a5a1610e72fd18b5 57bd43b5e52b7fe6",
        ),
    ],
)
def test_generator_gives_its_published_numbers(
    counter: list[int], key: list[int], expected: str
) -> None:
    """Known-answer values that the authors of Philox publish with it (recalled from memory)."""
    assert " ".join(f"{word:016x}" for word in by_hand.philox(counter, key)) == expected


def test_stream_is_the_generator_written_by_hand() -> None:
    """The raw output of numpy must be the published algorithm, counter starting at 1."""
    for stratum in ("site", "Wiese|Süd\\1", "cafe\u0301"):
        numbers = by_hand.Numbers(7, "main", stratum, "places")
        assert Stream(7, "main", stratum, "places").raw(11).tolist() == [
            numbers.raw() for _ in range(11)
        ]


@pytest.mark.parametrize("layout", ["stratified", "square-grid", "triangular-grid"])
def test_words_quote_the_key_that_was_used(layout: str) -> None:
    """The first key on the sheet must be one that draws the first stratum."""
    campaign = make_campaign(design=(DesignTable(layout=layout),), draw=Draw(seed=SEED))
    frame = area_frame(meadow=MEADOW_POLYGON, yard=YARD_POLYGON)
    words = procedure_in_words(campaign, locate(campaign, frame, COUNTS))
    purpose = "places" if layout == "stratified" else "grid"
    assert f"“fieldplan draw 1|{SEED}|main|meadow|{purpose}”" in words[0]
    assert len(words) >= 5


def test_words_for_a_census_say_that_nothing_is_drawn() -> None:
    """Where all units are visited a key would mislead."""
    campaign = make_campaign(design=(DesignTable(layout="census"),))
    words = procedure_in_words(
        campaign, locate(campaign, list_frame(a=3), [StratumCount("a", 3, 0)])
    )
    assert words == (
        "Every unit of the list is visited, in the order of the file. Nothing is drawn.",
    )


def test_pseudocode_fits_a_page_and_a_terminal() -> None:
    """The working is set in a fixed-width face on A4."""
    assert max(map(len, procedure_pseudocode().splitlines())) <= 88


def test_documentation_holds_the_same_lines() -> None:
    """A reviewer reads docs/drawing.md or the working; both must be what was tested."""
    page = Path(__file__).parents[3] / "docs" / "drawing.md"
    assert f"```text\n{procedure_pseudocode()}```" in page.read_text(encoding="utf-8")


if __name__ == "__main__":
    print(json.dumps(all_by_hand(), indent=1))
