"""Questions of shares, background and change with any numbers that a table takes."""

from contextlib import suppress
from typing import Any

from hypothesis import given, settings
from hypothesis import strategies as st

from fieldplan.base.errors import FieldplanError
from fieldplan.sizing.asked import bought, count
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.question import Part
from tests.unit.sizing.asked.asked_for import asked_for, listed

CHANCES = st.floats(1e-6, 0.999999)
SPREADS = st.floats(1e-6, 1e6)
RISKS: dict[str, Any] = {"alpha": st.floats(1e-6, 0.49), "beta": st.floats(1e-6, 0.49)}
PARTS = st.one_of(
    st.builds(lambda sigma: (Part("site", 1.0, sigma),), SPREADS),
    st.builds(
        lambda weight, a, b: (Part("a", weight, a), Part("b", 1 - weight, b)),
        st.floats(0.05, 0.95),
        SPREADS,
        SPREADS,
    ),
    st.lists(st.integers(2, 400), min_size=1, max_size=3).map(lambda sizes: listed(*sizes)),
)
TABLES = st.one_of(
    st.fixed_dictionaries({"question": st.just("all-clear"), "share": CHANCES}),
    st.fixed_dictionaries(
        {"question": st.just("upper-share"), "share": st.floats(0.5, 0.999999)},
        optional={"allowed": st.integers(0, 9)},
    ),
    st.fixed_dictionaries(
        {"question": st.just("upper-share"), "share": st.floats(0.5, 0.99), "mean": st.just(90.0),
         "method": st.just("normal"), "power": st.floats(0.05, 0.99)},
    ),
    st.fixed_dictionaries(
        {"question": st.just("share"), "margin": st.floats(0.01, 0.9)},
        optional={"expected": CHANCES, "method": st.sampled_from(["exact", "normal"])},
    ),
    st.fixed_dictionaries(
        {"question": st.just("share"), "compare_with": CHANCES, "expected": CHANCES} | RISKS
    ),
    st.fixed_dictionaries(
        {"question": st.just("mean-and-background"), "difference": SPREADS,
         "assume": st.sampled_from(["at-background", "no-difference"])} | RISKS,
        optional={"background_sigma": SPREADS, "background_results": st.integers(2, 60)},
    ),
    st.fixed_dictionaries(
        {"question": st.just("change"), "difference": SPREADS,
         "correlation": st.floats(-0.99, 0.99)} | RISKS,
    ),
)  # fmt: skip


@settings(deadline=None, max_examples=60)
@given(TABLES, PARTS)
def test_any_numbers_get_a_count_or_a_line(table: dict[str, Any], parts: tuple[Part, ...]) -> None:
    """A count and what it buys, or a line that says why not; never another error."""
    words = dict(table)
    asked: Asked = asked_for(words.pop("question"), parts=parts, **words)
    answered = None
    with suppress(FieldplanError):
        answered = count(asked)
    if answered is None:
        return
    assert all(
        n >= 1 and (part.population is None or n <= part.population)
        for n, part in zip(answered.needed, parts, strict=True)
    )
    for finding in (answered.finding, bought(asked, asked.objective.question, answered.needed)):
        assert finding.answer.endswith(".")
        for entry in finding.amounts:
            assert entry.value is None or entry.value == entry.value
