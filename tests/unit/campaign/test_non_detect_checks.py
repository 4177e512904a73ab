"""The rule for non-detects is fixed only where there is evidence for it."""

import pytest

from fieldplan.campaign.non_detect_checks import MODELLED, non_detect_problems


def said(rules: object, **other: object) -> list[str]:
    """Give the key and the sentence of every problem."""
    data = {"rules": rules, "design": [{"layout": "simple-random"}], **other}
    return [f"{problem.path[-1]}: {problem.text}" for problem in non_detect_problems(data)]


@pytest.mark.parametrize("method", [*MODELLED, "by-share", "bounds", "substitute-half"])
@pytest.mark.parametrize("layout", ["simple-random", "stratified", "square-grid"])
def test_random_places_may_have_any_rule(method: str, layout: str) -> None:
    """Single results of random places are what was simulated; grids are read as such."""
    assert said({"non_detects": method}, design=[{"layout": layout}]) == []


@pytest.mark.parametrize(
    ("other", "why"),
    [
        ({"design": [{"layout": "census"}]}, "a census draws nothing"),
        ({"design": [{"layout": "compact-strata"}]}, "does not draw them so"),
        ({"design": [{"layout": "simple-random", "increments": 30}]}, "takes composites"),
        ({"design": [{"layout": "simple-random", "ranking_set_size": 3}]}, "ranks places"),
        ({"sigma": [{"correlation_between_visits": 0.4}]}, "resemble each other"),
    ],
)
def test_a_design_without_evidence_is_refused_with_its_reason(other: object, why: str) -> None:
    """Bounds and a declared substitution stay open to every design."""
    (line,) = said({"non_detects": "order-statistics"}, **other)  # type: ignore[arg-type]
    assert line.startswith("non_detects: ")
    assert why in line
    assert 'Write "bounds"' in line
    assert said({"non_detects": "bounds"}, **other) == []  # type: ignore[arg-type]


def test_a_shape_is_declared_for_the_choice_by_share_alone() -> None:
    """A likelihood has its shape in its name; beside another rule a shape would do nothing."""
    assert said({"non_detects": "by-share", "declared_shape": "gamma"}) == []
    (line,) = said({"non_detects": "lognormal-likelihood", "declared_shape": "gamma"})
    assert line.startswith('declared_shape: is read by non_detects = "by-share" only')
    assert len(said({"declared_shape": "gamma"})) == 1


def test_two_rules_do_not_both_set_the_interval() -> None:
    """A method brings its own interval, and so does what by-share may choose."""
    (line,) = said({"non_detects": "kaplan-meier", "mean_interval": "skew-widened"})
    assert line.startswith("non_detects: brings an interval of its own")


@pytest.mark.parametrize("value", [None, 3, [], {}, True, "FILL IN", 0.5])
def test_any_value_is_looked_at_without_a_crash(value: object) -> None:
    """A file may hold any TOML value here."""
    said({"non_detects": value, "declared_shape": value, "mean_interval": value})
    said({"non_detects": "by-share"}, design=[{"layout": value, "increments": value}])
