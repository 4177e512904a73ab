"""Whatever bytes a campaign file holds, the reader answers or refuses; it never breaks."""

import tomllib
from contextlib import suppress

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from fieldplan.base.errors import FieldplanError
from fieldplan.campaign import inspect_campaign, read_campaign
from fieldplan.campaign.lines import line_map
from tests.unit.campaign.files import PLAIN

WHOLE = (
    PLAIN
    + """
[[qc]]
kind = "field duplicate"
share = 0.1
source = "plan"
[loss]
by_stratum = {yard = 0.1}
[[frame.exclusion]]
file = 'pond.geojson'
reason = \"\"\"
water\"\"\"
[[clearance]]
topic = "a"
reference = "b"
given_on = 2026-01-01
expires_on = 2027-01-01
"""
)

fuzzed = settings(
    suppress_health_check=[HealthCheck.function_scoped_fixture],
    max_examples=300,
    deadline=None,
    derandomize=True,
)


def outcome(path, data: bytes) -> None:
    """Inspect and read bytes; only a FieldplanError may come out."""
    path.write_bytes(data)
    for reader in (inspect_campaign, read_campaign):
        with suppress(FieldplanError):
            reader(path)


@fuzzed
@given(
    st.lists(
        st.tuples(st.integers(0, len(WHOLE) - 1), st.binary(max_size=3), st.integers(0, 3)),
        min_size=1,
        max_size=4,
    )
)
def test_changed_bytes_raise_nothing_but_a_fieldplan_error(tmp_path, changes):
    """Files get damaged by mail, by editors and by hand."""
    data = WHOLE.encode()
    for place, new, length in changes:
        data = data[:place] + new + data[place + length :]
    outcome(tmp_path / "campaign.toml", data)


VALUES = ["1", "-1", "0", "true", "inf", "nan", '"FILL IN"', "[]", "{}", "[[1]]", "{a = {b = 1}}",
          "2026-01-01", "08:00:00", '""', '"x"', "[{a = 1}]", "1e400", "9" * 30]  # fmt: skip


@fuzzed
@given(st.integers(0, WHOLE.count("\n") - 1), st.sampled_from(VALUES))
def test_values_of_any_kind_raise_nothing_but_a_fieldplan_error(tmp_path, number, value):
    """Well-formed TOML of the wrong kind reaches deeper than damaged bytes."""
    lines = WHOLE.split("\n")
    key, equals, _ = lines[number].partition(" = ")
    lines[number] = f"{key} = {value}" if equals else value
    outcome(tmp_path / "campaign.toml", "\n".join(lines).encode())


@fuzzed
@given(st.binary(max_size=200))
def test_any_bytes_raise_nothing_but_a_fieldplan_error(tmp_path, data):
    """Somebody will name a picture."""
    outcome(tmp_path / "campaign.toml", data)


def paths(content: object, above: tuple = ()):
    """Yield the path of every value."""
    members = ()
    if isinstance(content, dict):
        members = content.items()
    elif isinstance(content, list):
        members = enumerate(content)
    for key, value in members:
        yield (*above, key)
        yield from paths(value, (*above, key))


def test_every_path_has_a_line_on_which_its_key_stands():
    """The map is made by reading statements alone; the whole file's paths are the oracle."""
    lines = line_map(WHOLE)
    text = WHOLE.split("\n")
    for path in paths(tomllib.loads(WHOLE)):
        key = next(step for step in reversed(path) if isinstance(step, str))
        assert key in text[lines[path] - 1], path


@pytest.mark.parametrize("ends", ["\n", "\r\n"])
def test_line_map_ignores_what_only_looks_like_a_key(ends):
    """Brackets and keys inside long texts and comments are no tables."""
    text = 'a = """\n[b]\nc = 1\n"""\n# [d]\n[[b]]\nx = [\n  1, # ]\n  2,\n]\n[b.c]\ny = 1'
    assert line_map(text.replace("\n", ends)) == {
        ("a",): 1,
        ("b",): 6,
        ("b", 0): 6,
        ("b", 0, "x"): 7,
        ("b", 0, "x", 0): 7,
        ("b", 0, "x", 1): 7,
        ("b", 0, "c"): 11,
        ("b", 0, "c", "y"): 12,
    }


def test_list_of_thousands_of_lines_is_mapped_with_bounded_work(monkeypatch):
    """Each line might close the list; reading it again at each grows with the square."""
    read = []

    def counting(text: str) -> dict:
        read.append(len(text))
        return loads(text)

    loads = tomllib.loads
    monkeypatch.setattr(tomllib, "loads", counting)
    lines = line_map("x = 0\na = [\n" + "[1],\n" * 5_000 + "]\n")
    assert lines[("x",)] == 1
    # 5 000 lines of 5 characters: 62 million characters without the bound of 2 million.
    assert sum(read) < 2_100_000
