"""The table about a patch: each broken rule has its line and its remedy."""

import pytest

from tests.unit.campaign.files import bent, inspected, told

ASKED = (
    'question = "mean"\nstandard_error = 6.0\nassurance = 0.80\nassurance_chosen_by = "L. Fenn"',
    'question = "smallest-patch"\n[objective.smallest_patch]\nlength_m = 40.0\nprobability = 0.95',
)
LIST = ('kind = "area"\nboundary = "boundary.geojson"', 'kind = "list"\nlist_file = "wells.csv"')


def test_plain_question_reads_without_a_sigma(tmp_path) -> None:
    """Nobody needs to know a standard deviation to look for a patch."""
    found = inspected(tmp_path, bent(ASKED, ('[[sigma]]\npilot = "pilot.csv"\n', "")))
    assert found.problems == ()


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        ([("length_m = 40.0", "length_m = 0")], "objective.smallest_patch.length_m: "),
        ([("length_m = 40.0", "length_m = -3.0")], "objective.smallest_patch.length_m: "),
        ([("length_m = 40.0\n", "")], "objective.smallest_patch.length_m: "),
        ([("probability = 0.95", "probability = 95")], "objective.smallest_patch.probability: "),
        (
            [("probability = 0.95", "probability = 0.9999")],
            "objective.smallest_patch.probability: ",
        ),
        ([("probability = 0.95", "probability = 0.0")], "objective.smallest_patch.probability: "),
        (
            [("= 0.95", "= 0.95\nwidth_m = 50.0")],
            "objective.smallest_patch.width_m: is more than length_m = 40. Exchange the two.",
        ),
        (
            [("= 0.95", '= 0.95\ndirection_degrees = "north"')],
            "objective.smallest_patch.direction_degrees: ",
        ),
        (
            [("= 0.95", "= 0.95\ndirection_degrees = 360")],
            "objective.smallest_patch.direction_degrees: ",
        ),
        (
            [LIST],
            "objective.smallest_patch.length_m: a list has no area that a patch could lie in.",
        ),
    ],
)
def test_broken_rule_has_its_line(tmp_path, changes, said: str) -> None:
    """Each problem names the key, and there is one of it."""
    text = bent(ASKED)
    for old, new in changes:
        assert text.count(old) == 1
        text = text.replace(old, new)
    (line,) = told(tmp_path, text)
    assert said in line
