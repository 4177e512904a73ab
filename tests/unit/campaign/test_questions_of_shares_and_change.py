"""Tables about shares, background and change: each broken rule has its line and its remedy."""

import pytest

from tests.unit.campaign.files import bent, inspected, told

MEAN = 'question = "mean"\nstandard_error = 6.0\nassurance = 0.80\nassurance_chosen_by = "L. Fenn"'
LEVEL = ('unit = "mg/kg"', 'unit = "mg/kg"\naction_level = 150.0\naction_level_source = "x"')
NO_SIGMA = ('[[sigma]]\npilot = "pilot.csv"\n', "")
STRATA = ('boundary = "boundary.geojson"', 'boundary = "boundary.geojson"\nstrata = "s.geojson"')
RISKS = "alpha = 0.05\nbeta = 0.2"
WHOLE = {
    "upper-share": "share = 0.95",
    "all-clear": "share = 0.05",
    "share": "margin = 0.08",
    "mean-and-background": f'difference = 25.0\nassume = "at-background"\n{RISKS}',
    "change": f"difference = 8.0\ncorrelation = 0.6\n{RISKS}",
}


def asked(question: str, table: str) -> tuple[str, str]:
    """Change the mean into another question with its table."""
    return MEAN, f'question = "{question}"\n[objective.{question.replace("-", "_")}]\n{table}'


@pytest.mark.parametrize("question", WHOLE)
def test_plain_question_reads(tmp_path, question: str) -> None:
    """The shortest table of each."""
    found = inspected(tmp_path, bent(asked(question, WHOLE[question])))
    assert found.problems == ()


@pytest.mark.parametrize(
    ("question", "table"),
    [
        ("upper-share", "share = 0.95"),
        ("all-clear", "share = 0.05"),
        ("share", "margin = 0.08"),
        ("change", f"difference = 8.0\nsigma_of_differences = 12.0\n{RISKS}"),
    ],
)
def test_counting_and_known_differences_read_without_a_sigma(
    tmp_path, question: str, table: str
) -> None:
    """Nobody needs to know a standard deviation for them."""
    assert inspected(tmp_path, bent(asked(question, table), NO_SIGMA)).problems == ()


BROKEN = [
    ("upper-share", "share = 95", "upper_share.share: "),
    ("upper-share", "share = 0.3", "upper_share.share: "),
    ("upper-share", "share = 0.95\nconfidence = 0.4", "upper_share.confidence: "),
    ("upper-share", 'share = 0.95\nmethod = "lognormal"', "upper_share.method: "),
    ("upper-share", "share = 0.95\nallowed = -1", "upper_share.allowed: "),
    (
        "upper-share",
        "share = 0.95\nexpected_above = 0.01",
        "upper_share.power: is missing: expected_above and power are asked together.",
    ),
    (
        "upper-share",
        "share = 0.95\nallowed = 1\nexpected_above = 0.01\npower = 0.8",
        "upper_share.allowed: follows from expected_above and power. Keep one of the two.",
    ),
    (
        "upper-share",
        "share = 0.95\nexpected_above = 0.05\npower = 0.8",
        "upper_share.expected_above: is 0.05, and 0.95 shall lie below the level;",
    ),
    ("all-clear", "share = 0.05\nunits = 2", "all_clear.share: needs exactly one of share and"),
    ("all-clear", "units = 2", "all_clear.units: an area has no units to count."),
    ("share", "expected = 0.2", "share.margin: needs exactly one of margin and compare_with (got"),
    ("share", "margin = 1.5", "share.margin: "),
    ("share", "margin = 0.1\nalpha = 0.05", "share.alpha: belongs to compare_with;"),
    (
        "share",
        f'compare_with = 0.2\nexpected = 0.1\nmethod = "exact"\n{RISKS}',
        "share.method: belongs to margin; a comparison is always exact.",
    ),
    ("share", f"compare_with = 0.2\n{RISKS}", "share.expected: is missing"),
    (
        "share",
        f"compare_with = 0.2\nexpected = 0.2\n{RISKS}",
        "share.expected: is the same as compare_with: there is nothing to tell apart.",
    ),
    (
        "share",
        "compare_with = 0.2\nexpected = 0.1\nalpha = 0.5\nbeta = 0.6",
        "share.beta: alpha 0.5 and beta 0.6 sum to 1.1;",
    ),
    (
        "mean-and-background",
        f'difference = 0\nassume = "at-background"\n{RISKS}',
        "mean_and_background.difference: ",
    ),
    (
        "mean-and-background",
        f'difference = 5.0\nassume = "below"\n{RISKS}',
        "mean_and_background.assume: ",
    ),
    (
        "mean-and-background",
        WHOLE["mean-and-background"] + "\nbackground_results = 9\nbackground_per_site = 0.5",
        "mean_and_background.background_per_site: says how many background results to take,",
    ),
    (
        "mean-and-background",
        WHOLE["mean-and-background"] + '\ntest = "ranks"\nvariances = "alike"',
        'mean_and_background.variances: belongs to test = "means".',
    ),
    (
        "mean-and-background",
        WHOLE["mean-and-background"] + "\noverage = 0.2",
        'mean_and_background.overage: belongs to test = "ranks";',
    ),
    (
        "mean-and-background",
        WHOLE["mean-and-background"] + '\nvariances = "alike"\nbackground_sigma = 9.0',
        'mean_and_background.background_sigma: contradicts variances = "alike".',
    ),
    (
        "mean-and-background",
        f'difference = 5.0\nassume = "no-difference"\ntest = "ranks"\n{RISKS}',
        "mean_and_background.assume: the rank sum test is sized for one direction.",
    ),
    (
        "mean-and-background",
        WHOLE["mean-and-background"] + '\ntest = "ranks"\nbackground_results = 9\noverage = 0.1',
        "mean_and_background.overage: belongs to the rule for equal numbers;",
    ),
    ("change", "correlation = 0.6", "change.difference: needs exactly one of difference and half"),
    (
        "change",
        f"difference = 8.0\n{RISKS}",
        "change.sigma_of_differences: needs exactly one of sigma_of_differences and correlation",
    ),
    ("change", "half_width = 8.0\ncorrelation = 0.6\nalpha = 0.05", "change.alpha: belongs to"),
    ("change", f"difference = 8.0\ncorrelation = 1.0\n{RISKS}", "change.correlation: "),
    (
        "change",
        f"difference = 8.0\nsigma_of_differences = 3.0\nnext_sigma = 4.0\n{RISKS}",
        "change.next_sigma: stands beside correlation.",
    ),
]


@pytest.mark.parametrize(("question", "table", "said"), BROKEN)
def test_broken_rule_has_its_line(tmp_path, question: str, table: str, said: str) -> None:
    """Each problem names the key, and there is one of it."""
    (line,) = told(tmp_path, bent(asked(question, table)))
    assert f"objective.{said}" in line


def test_missing_risks_are_each_told(tmp_path) -> None:
    """Both chances are somebody's choice; none is filled in."""
    lines = told(tmp_path, bent(asked("change", "difference = 8.0\ncorrelation = 0.6")))
    assert ["alpha" in lines[0], "beta" in lines[1]] == [True, True]
    lines = told(tmp_path, bent(asked("share", "compare_with = 0.2\nexpected = 0.1")))
    assert len(lines) == 2


def test_normal_bound_names_all_that_it_lacks(tmp_path) -> None:
    """Level, spread, power, one population: all at once."""
    table = 'share = 0.95\nmethod = "normal"\nallowed = 1'
    lines = told(tmp_path, bent(asked("upper-share", table), NO_SIGMA, STRATA))
    text = "\n".join(lines)
    for said in ("allowed: belongs to", "power: is missing", "needs the level", "[[sigma]]"):
        assert said in text
    assert "one population, and this frame has strata" in text
    whole = asked("upper-share", 'share = 0.95\nmethod = "normal"\npower = 0.8')
    assert inspected(tmp_path, bent(whole, LEVEL)).problems == ()


def test_correlation_without_a_sigma_is_told(tmp_path) -> None:
    """The spread of a round is what the correlation works on."""
    (line,) = told(tmp_path, bent(asked("change", WHOLE["change"]), NO_SIGMA))
    assert "objective.change.correlation: needs the spread of a round." in line
