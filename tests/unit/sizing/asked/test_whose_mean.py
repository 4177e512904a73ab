"""A precision of the mean beside a question with an interval of its own says whose it is."""

import pytest

from fieldplan.sizing.asked import count
from fieldplan.sizing.asked.building import size_of
from tests.unit.sizing.askings import asked_numbers

KEYS = {
    "change": ("correlation=0.6", "half_width=4"),
    "share": ("expected=0.2", "margin=0.1"),
    "all-clear": ("share=0.05",),
}


@pytest.mark.parametrize(
    ("question", "whose"),
    [("change", "one round"), ("share", "the site"), ("all-clear", "the site")],
)
def test_the_interval_of_the_mean_names_its_mean(question: str, whose: str) -> None:
    """Two intervals side by side would otherwise read as two answers to one question."""
    asked = asked_numbers(question=question, sigma=6.0, level=10.0, keys=KEYS[question])
    lines = size_of(asked, count(asked)).sentences
    of_mean = [line for line in lines if "if sigma is right" in line.lower()]
    assert len(of_mean) == 1
    assert of_mean[0].startswith(f"For the mean of {whose}: if sigma is right, expect")


def test_a_question_about_the_mean_needs_no_such_words() -> None:
    """There the mean is what was asked about."""
    keys = ("assume=above-level", "gray_edge=8", "alpha=0.05", "beta=0.2")
    asked = asked_numbers(
        question="mean-and-level", sigma=6.0, level=10.0, one_sided=True, keys=keys
    )
    lines = size_of(asked, count(asked)).sentences
    assert any(line.startswith("If sigma is right, expect") for line in lines)
