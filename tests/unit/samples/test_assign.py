"""Samples: one a place, duplicates blind, ids ordinary and stable."""

import dataclasses
import math
import re
from collections import Counter
from itertools import combinations, pairwise

import pytest

from fieldplan.base.errors import DesignError
from fieldplan.campaign.model import Draw
from fieldplan.design.model import Locations
from fieldplan.samples import assign
from fieldplan.samples.ids import check_digit, revision_of
from fieldplan.samples.model import Samples
from fieldplan.sizing.model import QualityControlCount, Size
from tests.factories import make_campaign, make_locations, make_size

PLACES = make_locations()


def size_with(**counts: int) -> Size:
    """Return the size with these control samples."""
    kinds = {"duplicates": "field duplicate", "blanks": "field blank", "ice": "temperature blank"}
    qc = tuple(QualityControlCount(kinds[k], n, "campaign choice") for k, n in counts.items())
    return dataclasses.replace(make_size(), qc=qc)


def assigned(
    seed: int = 1, locations: Locations | None = None, *, revision: int = 1, **counts: int
) -> Samples:
    """Assign samples to the nine random places, four alternates and the tank."""
    campaign = make_campaign(draw=Draw(seed=seed))
    return assign(campaign, locations or PLACES, size_with(**counts), revision=revision)


def test_every_place_gets_one_sample_in_the_order_of_the_list() -> None:
    """Alternates and targeted places have theirs ready too."""
    samples = assigned(duplicates=3).samples
    firsts = [s.location_id for s in samples if s.role == "field sample"]
    assert firsts == [place.location_id for place in PLACES.places]


def test_samples_carry_depth_and_analytes_of_the_campaign() -> None:
    """The label says from where down to where."""
    sample = assigned().samples[0]
    assert (sample.depth_top_m, sample.depth_bottom_m) == (0.0, 0.15)
    assert sample.analytes == ("lead",)


def test_duplicates_follow_the_sample_they_repeat_at_random_places_only() -> None:
    """A duplicate of an alternate that is never visited would be lost."""
    samples = assigned(duplicates=4).samples
    chosen = {place.location_id for place in PLACES.of_class("random")}
    pairs = [(a, b) for a, b in pairwise(samples) if b.role != "field sample"]
    assert len(pairs) == 4
    for parent, duplicate in pairs:
        assert duplicate.qc_of == parent.sample_id
        assert duplicate.location_id == parent.location_id
        assert duplicate.location_id in chosen


@pytest.mark.parametrize("count", range(1, 10))
def test_duplicates_are_shared_between_strata_like_locations(count: int) -> None:
    """Four in the meadow, five in the yard: each within 1 of its exact share."""
    samples = assigned(duplicates=count).samples
    found = Counter(s.location_id[3] for s in samples if s.role == "field duplicate")
    assert found.total() == count
    assert abs(found["A"] - count * 4 / 9) < 1
    assert abs(found["B"] - count * 5 / 9) < 1


def test_every_location_is_duplicated_equally_often_over_seeds() -> None:
    """Within a stratum each place within 4 binomial standard errors."""
    seeds = 1500
    found: Counter[str] = Counter()
    for seed in range(seeds):
        found.update(
            s.location_id for s in assigned(seed, duplicates=2).samples if s.role != "field sample"
        )
    for letter, places in (("A", 4), ("B", 5)):
        tolerance = 4 * math.sqrt(seeds * (1 / places) * (1 - 1 / places))
        counts = [n for name, n in found.items() if name[3] == letter]
        assert len(counts) == places
        assert all(abs(n - seeds / places) < tolerance for n in counts)


def test_nothing_in_an_id_gives_a_duplicate_away() -> None:
    """Same form for all; over seeds a duplicate's number is above its parent's half the time."""
    above, seeds = 0, 600
    for seed in range(seeds):
        samples = assigned(seed, duplicates=1, blanks=1).samples
        assert all(re.fullmatch(r"QF1-[1-9]\d{3}", s.sample_id) for s in samples)
        pair = next(s for s in samples if s.role == "field duplicate")
        above += pair.sample_id > pair.qc_of
    assert abs(above - seeds / 2) < 4 * math.sqrt(seeds / 4)


def test_no_two_ids_differ_in_one_digit_only() -> None:
    """One slip of the pen must never turn a sample into another."""
    names = [s.sample_id for s in assigned(duplicates=5, blanks=3).samples]
    assert len(set(names)) == len(names)
    for one, other in combinations(names, 2):
        assert sum(a != b for a, b in zip(one, other, strict=True)) >= 2


def test_check_digits_are_those_of_the_standard() -> None:
    """ISO/IEC 7064 MOD 11,10: 0794 has 5 and 79462 has 3 (both from memory)."""
    assert check_digit("0794") == 5
    assert check_digit("79462") == 3


def test_check_digits_show_every_single_wrong_digit() -> None:
    """Brute force over all numbers of three digits."""
    for number in range(100, 1000):
        digits = str(number)
        for at in range(3):
            for wrong in "0123456789":
                if wrong != digits[at]:
                    other = digits[:at] + wrong + digits[at + 1 :]
                    assert check_digit(other) != check_digit(digits)


def test_ids_stay_when_locations_join_the_plan() -> None:
    """Bottles labelled from a draft must still be right when it grows before its issue."""
    fewer = dataclasses.replace(PLACES, places=PLACES.places[:7])
    before = {s.location_id: s.sample_id for s in assigned(locations=fewer).samples}
    after = {s.location_id: s.sample_id for s in assigned().samples}
    assert before.items() <= after.items()


def test_no_id_is_given_to_another_jar_by_a_later_revision() -> None:
    """A jar labelled under r02 must not count as the place that holds its number in r03."""
    fewer = dataclasses.replace(PLACES, places=PLACES.places[:7])
    grown = [fewer, PLACES, PLACES]
    names: set[str] = set()
    for seed in range(40):
        for revision, locations in enumerate(grown, start=1):
            samples = assigned(seed, locations, revision=revision, duplicates=3, blanks=2).samples
            ids = {s.sample_id for s in samples}
            assert {revision_of(name, "QF") for name in ids} == {revision}
            assert names.isdisjoint(ids)
            names |= ids
        names.clear()


def test_one_wrong_digit_makes_no_id_of_another_revision() -> None:
    """Else a slip in the revision would send a jar to a plan that never held it."""
    for sample in assigned(duplicates=2, blanks=1).samples:
        name = sample.sample_id
        for at in [k for k, letter in enumerate(name) if letter.isdigit()]:
            wrong = [name[:at] + digit + name[at + 1 :] for digit in "0123456789"]
            assert {revision_of(other, "QF") for other in wrong if other != name} == {None}


def test_the_revision_of_an_id_is_read_as_laboratories_write_it() -> None:
    """Case, dash and zeros go astray; another plan's ids and ids of old packets are not ours."""
    name = assigned(revision=12).samples[0].sample_id
    opening, number = name.split("-")
    for written in (
        name.lower(),
        f"{opening} {number}",
        f" {opening}_0{number} ",
        f"QF012-{number}",
    ):
        assert revision_of(written, "QF") == 12
    for written in (number, f"QF-{number}", name.replace("QF", "HL"), f"{opening}{number}", ""):
        assert revision_of(written, "QF") is None


def test_blanks_belong_to_no_location_and_come_last() -> None:
    """A temperature blank is looked at, not analysed."""
    samples = assigned(blanks=2, ice=1)
    last = samples.samples[-3:]
    assert [(s.role, s.location_id, s.analytes) for s in last] == [
        ("field blank", "", ("lead",)),
        ("field blank", "", ("lead",)),
        ("temperature blank", "", ()),
    ]
    assert samples.notes == (
        "Control samples that belong to no location: field blank (2), temperature blank (1).",
    )


def test_more_duplicates_than_locations_are_refused() -> None:
    """Nine random locations cannot hold ten duplicates."""
    with pytest.raises(DesignError, match=r"10 field duplicates .* only 9 random locations"):
        assigned(duplicates=10)


def test_a_large_campaign_gets_longer_ids() -> None:
    """Four digits are too few for 400 samples that must differ in two."""
    place = PLACES.places[0]
    places = tuple(dataclasses.replace(place, location_id=f"W-{k}") for k in range(400))
    samples = assigned(locations=dataclasses.replace(PLACES, places=places)).samples
    assert {len(s.sample_id) for s in samples} == {len("QF1-12345")}
    assert len({s.sample_id for s in samples}) == 400
