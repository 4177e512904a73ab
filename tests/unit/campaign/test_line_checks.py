"""Rules for frames along lines: what they need, what they do not take, and even spacing."""

import pytest

from tests.unit.campaign.files import bent, inspected, told

LINE = ('kind = "area"\nboundary = "boundary.geojson"', 'kind = "line"\nline_file = "r.geojson"')
EVEN = ('layout = "simple-random"', 'layout = "even-spacing"\nstarts = 3')


def test_a_frame_along_lines_with_even_spacing_is_whole(tmp_path):
    """The two belong together and need nothing else."""
    found = inspected(tmp_path, bent(LINE, EVEN))
    assert found.problems == ()
    assert found.campaign is not None
    campaign = found.campaign.campaign
    assert campaign.frame[0].branch_column == "branch"
    assert campaign.design[0].starts == 3


@pytest.mark.parametrize(
    ("changes", "problem"),
    [
        (
            [('kind = "area"\nboundary = "boundary.geojson"', 'kind = "line"')],
            "11: frame.line_file: missing; a line needs the file that it is drawn in. Give it, or "
            '"FILL IN".',
        ),
        (
            [('kind = "area"', 'kind = "line"\nline_file = "r.geojson"')],
            '14: frame.boundary: this key has no meaning for kind = "line". Take it out.',
        ),
        (
            [("[[design]]", 'line_file = "r.geojson"\n[[design]]')],
            '15: frame.line_file: lines belong to kind = "line". Take it out, or change the kind.',
        ),
        (
            [LINE, ('"simple-random"', '"square-grid"')],
            '16: design.layout: this layout does not suit a frame of kind "line" (got '
            '"square-grid"). Takes simple-random, stratified, even-spacing.',
        ),
        (
            [EVEN],
            '16: design.layout: this layout runs along lines, and the frame is of kind "area" (got '
            '"even-spacing"). Write kind = "line" with a line_file, or take another layout.',
        ),
        (
            [LINE, ('layout = "simple-random"', 'layout = "simple-random"\nstarts = 2')],
            '17: design.starts: this key belongs to layout = "even-spacing". Take it out.',
        ),
        (
            [LINE, (EVEN[0], EVEN[1] + "\nminimum_spacing_m = 5.0")],
            "18: design.minimum_spacing_m: several starts are independent, so that their places "
            "may fall close together. Take starts or minimum_spacing_m out.",
        ),
        (
            [LINE, (EVEN[0], EVEN[1] + "\nlocations = 2")],
            "17: design.starts: more starts than the 2 locations (got 3). Lower it.",
        ),
    ],
    ids=["no file", "boundary", "area", "grid", "no line", "starts", "spacing", "few"],
)
def test_what_does_not_go_together_is_told_in_one_line(tmp_path, changes, problem):
    """Line, key, rule and remedy."""
    assert problem in told(tmp_path, bent(*changes))


@pytest.mark.parametrize(
    ("question", "words"),
    [
        ('"all-clear"\n[objective.all_clear]\nunits = 3', "a line has no units to count"),
        ('"smallest-patch"\n[objective.smallest_patch]\nlength_m = 9', "a line has no area"),
        ('"which-exceed"\n[objective.which_exceed]\nshare = 0.1', "a line has no units to tell"),
    ],
)
def test_questions_about_units_and_patches_are_refused_on_lines(tmp_path, question, words):
    """A place on a line is no unit, and no patch lies in it."""
    text = bent(LINE).replace(
        '"mean"\nstandard_error = 6.0\nassurance = 0.80\nassurance_chosen_by = "L. Fenn"', question
    )
    assert any(words in problem for problem in told(tmp_path, text))
