"""The interval of the mean is fixed together with its class, and only where there is evidence."""

import pytest

from fieldplan.campaign.interval_checks import interval_problems

WIDE = {"mean_interval": "skew-widened", "promised_class": "cv-up-to-1"}


def said(rules: object, **other: object) -> list[str]:
    """Give the key and the sentence of every problem."""
    data = {"rules": rules, "design": [{"layout": "simple-random"}], **other}
    return [f"{problem.path[-1]}: {problem.text}" for problem in interval_problems(data)]


def test_random_places_of_one_population_may_be_promised_to_a_class() -> None:
    """Simulations are of independent results of one population; grids are read as such."""
    assert said(WIDE) == []
    for layout in ("square-grid", "triangular-grid"):
        assert said(WIDE, design=[{"layout": layout}], frame=[{"kind": "area"}]) == []


def test_the_class_is_asked_for_since_no_interval_serves_every_population() -> None:
    """Without a class no distribution-free promise exists (Bahadur & Savage 1956)."""
    (line,) = said({"mean_interval": "skew-widened"})
    assert line.startswith("promised_class: missing;")
    assert '"cv-up-to-1" or "cv-up-to-2"' in line


def test_a_class_without_its_interval_is_refused() -> None:
    """A class beside Student's t would be printed as a promise that t does not keep."""
    (line,) = said({"promised_class": "cv-up-to-2"})
    assert line.startswith('promised_class: belongs to mean_interval = "skew-widened"')


@pytest.mark.parametrize(
    ("other", "why"),
    [
        ({"design": [{"layout": "stratified"}]}, "has strata"),
        ({"design": [{"layout": "square-grid"}], "frame": [{"strata": "s.geojson"}]}, "has strata"),
        ({"design": [{"layout": "census"}]}, "a census draws nothing"),
        ({"design": [{"layout": "compact-strata"}]}, "compact-strata"),
        ({"design": [{"layout": "simple-random", "increments": 5}]}, "composites"),
        ({"design": [{"layout": "simple-random", "ranking_set_size": 3}]}, "ranks places"),
        ({"sigma": [{"correlation_between_visits": 0.4}]}, "resemble each other"),
        (
            {"objective": [{"decides_n": True, "half_width": 2.0}, {"decides_n": True}]},
            "decide n together",
        ),
    ],
)
def test_designs_without_evidence_are_refused_with_the_reason(
    other: dict[str, object], why: str
) -> None:
    """A promise outside what was simulated would be a guess."""
    (line,) = said(WIDE, **other)
    assert line.startswith("mean_interval: ")
    assert why in line


def test_a_method_for_non_detects_with_an_interval_of_its_own_is_refused() -> None:
    """Two intervals cannot both be the one that is reported."""
    (line,) = said({**WIDE, "non_detects": "kaplan-meier"})
    assert line.startswith("non_detects: this method brings an interval of its own")
    assert said({**WIDE, "non_detects": "bounds"}) == []


@pytest.mark.parametrize("confidence", [0.8, 0.999])
def test_confidence_outside_the_evidence_is_refused(confidence: float) -> None:
    """Coverage is simulated at 0.90, 0.95 and 0.99."""
    (line,) = said({**WIDE, "confidence": confidence})
    assert line.startswith("confidence: ")


@pytest.mark.parametrize("value", ["FILL IN", 3, True, [], {}, None])
def test_any_value_of_another_type_is_passed_over(value: object) -> None:
    """The model refuses wrong types; these rules must not break on them."""
    keys = {"mean_interval": value, "promised_class": value, "confidence": value}
    assert isinstance(said(keys), list)
    assert isinstance(said({**WIDE, "confidence": value}, design=[{"layout": value}]), list)
    assert isinstance(said(WIDE, design=[{"layout": value}], sigma=[keys]), list)
