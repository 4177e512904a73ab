"""Rules for strata in the campaign file: one clear line each."""

import pytest

from tests.unit.campaign.test_checks import bent, told

STRATIFIED = [
    ('"boundary.geojson"', '"boundary.geojson"\nstrata = "strata.geojson"'),
    ('"simple-random"', '"stratified"'),
    ("[draw]", '[[sigma]]\nstratum = "yard"\nvalue = 3\nsource = "x"\n[draw]'),
]
DESIGN = '"stratified"\n'
SECOND = (
    '[[objective]]\nanalyte = "zinc"\nquestion = "mean"\nstandard_error = 9\n'
    'assurance = "plain"\ndecides_n = true\n'
)
ZINC = [
    ("[[analyte]]\n", '[[analyte]]\nid = "zinc"\nunit = "mg/kg"\n[[analyte]]\n'),
    ("[[analyte]]\nname", '[[analyte]]\nid = "lead"\nname'),
    ("standard_error", 'analyte = "lead"\ndecides_n = true\nstandard_error'),
    ("pilot =", 'analyte = "lead"\npilot ='),
    ("[draw]", '[[sigma]]\nanalyte = "zinc"\nvalue = 3\nsource = "x"\n[draw]'),
]

BROKEN = [
    (
        [('layout = "simple-random"', 'layout = "simple-random"\nallocation = "cost-optimal"')],
        "design.allocation: weighs what results cost. Add [cost] with per_location and "
        "per_analysis.",
    ),
    (
        [('layout = "simple-random"',
          'layout = "simple-random"\nequal_in = "relative-standard-error"')],
        'design.equal_in: belongs to allocation = "equal-precision" (got "proportional"). '
        "Take this key out, or change the allocation.",
    ),
    (
        [('layout = "simple-random"', 'layout = "simple-random"\nmost = { yard = 3 }')],
        "design.most: the frame has no strata. Give frame.strata its file, or take this out.",
    ),
    (
        [*STRATIFIED, (DESIGN, f"{DESIGN}floor = 4\nmost = {{ yard = 3 }}\n")],
        "design.most.yard: at most 3 locations, below the fewest of 4 (got 3). Raise it, or lower "
        "floor or least.",
    ),
    (
        [*STRATIFIED, (DESIGN, f"{DESIGN}least = {{ yard = 6 }}\nmost = {{ yard = 5 }}\n")],
        "design.most.yard: at most 5 locations, below the fewest of 6 (got 5). Raise it, or lower "
        "floor or least.",
    ),
    (
        [*ZINC, ("[draw]", SECOND.replace("standard_error = 9", "budget = 900")
                 .replace('assurance = "plain"\n', "") + "[draw]"),
         ("[draw]", '[cost]\ncurrency = "EUR"\nper_location = 9\n[draw]')],
        "objective[2].decides_n: a budget decides n alone. Take decides_n out here, or out of the "
        "others.",
    ),
    (
        [*ZINC[:4], ("[draw]", f"{SECOND}[draw]")],
        'sigma: no [[sigma]] for "zinc", whose objective decides n. Add one.',
    ),
]  # fmt: skip


@pytest.mark.parametrize(("changes", "message"), BROKEN, ids=[case[1][:50] for case in BROKEN])
def test_broken_rule_is_told_with_its_remedy_and_nothing_else(tmp_path, changes, message):
    """Bounds that cross, shares without prices, several that cannot decide together."""
    lines = told(tmp_path, bent(*changes))
    assert [line.partition(": ")[2] for line in lines] == [message]


KEPT = [
    [*ZINC, ("[draw]", f"{SECOND}[draw]")],
    [*STRATIFIED, (DESIGN, f"{DESIGN}least = {{ yard = 3 }}\nmost = {{ yard = 5 }}\n")],
    [*STRATIFIED, (DESIGN, f'{DESIGN}allocation = "equal-precision"\n')],
    [*STRATIFIED, (DESIGN, f'{DESIGN}allocation = "cost-optimal"\n'),
     ("[draw]", '[cost]\ncurrency = "EUR"\nper_location = 9\n'
      "per_location_by_stratum = { yard = 12 }\n[draw]")],
]  # fmt: skip


@pytest.mark.parametrize("changes", KEPT, ids=range(len(KEPT)))
def test_campaign_that_keeps_the_rules_has_no_problem(tmp_path, changes):
    """A rule that fires on a sound file teaches people to work round it."""
    assert told(tmp_path, bent(*changes)) == []


def test_several_that_decide_are_those_that_are_marked():
    """The first is the one that the plan is about."""
    from tests.several_analytes import campaign_with_zinc, zinc_objective

    alone = campaign_with_zinc(zinc_objective(standard_error=15.0))
    assert alone.also_deciding == ()
    both = campaign_with_zinc(zinc_objective(standard_error=15.0, decides_n=True))
    assert [objective.analyte for objective in both.also_deciding] == ["zinc"]
    assert both.deciding_analyte.id == "lead"
