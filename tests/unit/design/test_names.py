"""Names: short, apart, and nothing that a spreadsheet or a receiver would change."""

import re

import hypothesis.strategies as st
import pytest
from hypothesis import given, settings

from fieldplan.base.errors import DesignError
from fieldplan.design.names import (
    LONGEST,
    Naming,
    check_prefix,
    is_date_like,
    is_number_like,
    naming,
    own_names,
    plain_form,
)

MONTHS = ("JAN", "FEB", "MAR", "APR", "MAY", "JUN", "JUL", "AUG", "SEP", "OCT", "NOV", "DEC")
prefixes = st.from_regex(r"[A-Z][A-Z0-9]?", fullmatch=True)


def every_name(names: Naming, strata: list[str], longest: int) -> list[str]:
    """Short names of the first, some middle and the last places of every stratum, and targeted."""
    orders = sorted({1, 2, 9, 10, 11, longest // 2 + 1, longest} & set(range(1, longest + 1)))
    made = [names.short_name(stratum, order) for stratum in strata for order in orders]
    return made + [names.targeted_name(order) for order in orders]


@settings(max_examples=300)
@given(prefix=prefixes, count=st.integers(1, 17), longest=st.integers(1, 999))
def test_short_names_keep_all_receiver_rules(prefix: str, count: int, longest: int) -> None:
    """At most 6 of A–Z 0–9, a letter first, one width, unique, no date, no number with an E."""
    strata = [f"stratum {k}" for k in range(count)]
    names = naming(prefix, strata, longest)
    made = every_name(names, strata, longest)
    assert all(re.fullmatch(r"[A-Z][A-Z0-9]{2,5}", name) for name in made)
    assert len({len(name) for name in made}) == 1
    assert len({name.casefold() for name in made}) == len(made)
    assert not any(re.fullmatch(rf"({'|'.join(MONTHS)})[A-Z]*\d+", name) for name in made)
    assert not any(re.search(r"\dE\d", name) for name in made)
    assert not any(set(name[len(prefix) :]) & set("IO") for name in made)


@settings(max_examples=60)
@given(prefix=st.from_regex(r"[A-Z]", fullmatch=True), count=st.integers(23, 300))
def test_many_strata_get_two_letters(prefix: str, count: int) -> None:
    """A farm survey may have a stratum a field; one prefix letter leaves room for them."""
    strata = [str(k) for k in range(count)]
    made = every_name(naming(prefix, strata, 40), strata, 40)
    assert max(map(len, made)) <= LONGEST
    assert len(set(made)) == len(made)
    assert not any(map(is_date_like, made))


def test_a_name_depends_on_stratum_and_order_alone() -> None:
    """More places, or more strata behind it, must not rename what a crew has flagged."""
    before, after = naming("HL", ["a", "b"], 12), naming("HL", ["a", "b", "c"], 99)
    assert [before.short_name(s, 7) for s in "ab"] == [after.short_name(s, 7) for s in "ab"]
    assert before.location_id("b", 7) == after.location_id("b", 7) == "HL-B-07"


@pytest.mark.parametrize("prefix", ["MA", "JU", "DE", "SE", "AP", "NO", "FE", "AU", "OC", "JA"])
def test_prefixes_that_begin_a_month_lose_the_letters_that_would_end_it(prefix: str) -> None:
    """MA with stratum R would read as the first of March."""
    strata = [str(k) for k in range(17)]
    assert not any(
        is_date_like(name) for name in every_name(naming(prefix, strata, 31), strata, 31)
    )
    assert is_date_like("MAR01")


def test_targeted_places_have_a_letter_of_their_own() -> None:
    """A targeted place must never look like one that counts for the mean."""
    names = naming("QF", [str(k) for k in range(22)], 9)
    assert names.targeted_name(3) == "QFT03"
    assert "T" not in names.codes.values()


@settings(max_examples=300)
@given(
    ids=st.lists(
        st.text(st.sampled_from("AMWEOI-. _/0159äß"), min_size=1, max_size=8),
        max_size=12,
        unique=True,
    )
)
def test_own_names_keep_all_receiver_rules(ids: list[str]) -> None:
    """Whatever owners call their wells: 1 to 6 of A–Z 0–9, a letter first, apart, no E number."""
    names = own_names(ids)
    assert len({name.casefold() for name in names.values()}) == len(names)
    for own, name in names.items():
        assert re.fullmatch(r"[A-Z][A-Z0-9]{0,5}", name)
        assert re.sub(r"[-. _/]", "", own).upper() == name
        assert not re.search(r"\dE\d", name)
        assert not is_date_like(name)
        assert [other for other in ids if plain_form(other) == name] == [own]


@pytest.mark.parametrize(
    "own",
    [
        "MONITOR-1",
        "07B",
        "1E5",
        "M1E5",
        "SEP-3",
        "MW-3.5",
        "MW 1/2",
        "TRUE",
        "na",
        "Größe",
        "-",
        "٣",
    ],
)
def test_ids_that_receivers_or_spreadsheets_would_change_get_another_name(own: str) -> None:
    """Too long, a digit first, a number, a date, two numbers closed up, a word, other letters."""
    assert own_names([own, "MW-7"]) == {"MW-7": "MW7"}


@pytest.mark.parametrize(
    "pair", [("MW-1", "MW1"), ("MW-01", "mw1"), ("OB-1", "0B1"), ("MWI", "MW1")]
)
def test_ids_that_would_be_mistaken_for_each_other_both_get_another_name(
    pair: tuple[str, str],
) -> None:
    """Which of the two is meant cannot be told on a receiver."""
    assert own_names([*pair, "P.6"]) == {"P.6": "P6"}


def test_longer_lists_get_three_digits_everywhere() -> None:
    """One width in the whole plan, so that lists sort."""
    names = naming("QF", ["a", "b"], 100)
    assert (names.short_name("a", 1), names.short_name("b", 100)) == ("QFA001", "QFB100")


@pytest.mark.parametrize(
    ("prefix", "strata", "longest", "remedy"),
    [
        ("QF", 2, 1000, 'Shorten it to one letter, e.g. prefix = "Q".'),
        ("Q", 30, 1000, "merge strata"),
        ("QF", 40, 120, 'Shorten it to one letter, e.g. prefix = "Q".'),
        ("Q", 2, 12_000, "Ask for fewer places"),
    ],
)
def test_what_six_characters_cannot_hold_is_refused(
    prefix: str, strata: int, longest: int, remedy: str
) -> None:
    """A cut name would collide on the receiver."""
    with pytest.raises(DesignError, match="cannot be named in 6 characters") as caught:
        naming(prefix, [str(k) for k in range(strata)], longest)
    assert remedy in str(caught.value)


@pytest.mark.parametrize("prefix", ["", "q", "QFX", "1A", "Q-", "Ä", "QF\n"])
def test_prefixes_that_receivers_would_change_are_refused(prefix: str) -> None:
    """The value and the rule are in the message."""
    with pytest.raises(DesignError, match="one or two characters"):
        check_prefix(prefix)


@pytest.mark.parametrize("name", ["MAR01", "dec2", "SEP-3", "Mar 2027", "JUNE12", "MAI05", "OKT1"])
def test_names_that_spreadsheets_turn_into_dates_are_known(name: str) -> None:
    """Common practice, no source: what spreadsheets in several languages convert."""
    assert is_date_like(name)


@pytest.mark.parametrize("name", ["12E5", "1e10", "007", "3A"])
def test_names_that_spreadsheets_turn_into_numbers_are_known(name: str) -> None:
    """Exponents and leading digits do not survive a spreadsheet."""
    assert is_number_like(name)
