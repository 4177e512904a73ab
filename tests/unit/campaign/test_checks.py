"""Rules between keys and tables: each broken rule has its line, its remedy, and no false alarm."""

import pytest

from fieldplan.campaign import alarms
from tests.several_analytes import campaign_with_zinc
from tests.unit.campaign.files import bent, inspected, told

SIGMA = ('pilot = "pilot.csv"', 'value = 27.57\nsource = "ASSUMED"')
LIST = ('kind = "area"\nboundary = "boundary.geojson"', 'kind = "list"\nlist_file = "wells.csv"')
SURE = ('assurance = 0.80\nassurance_chosen_by = "L. Fenn"\n', "")
PRICED = [
    ("standard_error = 6.0", "budget = 900"),
    ("[draw]", '[cost]\ncurrency = "EUR"\nper_analysis = 9\n[draw]'),
]
LEVEL = 'unit = "mg/kg"\naction_level = 150\n'

BROKEN = [
    (
        [("standard_error = 6.0\n", "")],
        "18: objective: needs exactly one of standard_error, half_width, relative_half_width, "
        "budget (got none). Keep one.",
    ),
    (
        [("= 6.0", "= 6.0\nhalf_width = 12")],
        "21: objective.half_width: needs exactly one of standard_error, half_width, "
        "relative_half_width, budget (got standard_error, half_width). Keep one.",
    ),
    (
        [("standard_error", "budget"), SURE],
        "20: objective.budget: a budget needs [cost] with currency, per_location and "
        "per_analysis. Add it.",
    ),
    (
        [*PRICED, (SURE[0], "assurance = 0.80\n")],
        "21: objective.assurance: a budget sets no precision that n could miss, so there is "
        "nothing to be sure of (got 0.8). Take this key out.",
    ),
    (
        [*PRICED, (SURE[0], 'assurance = "plain"\n')],
        "21: objective.assurance: a budget sets no precision that n could miss, so there is "
        'nothing to be sure of (got "plain"). Take this key out.',
    ),
    (
        [*PRICED, (SURE[0], 'assurance_chosen_by = "L. Fenn"\n')],
        "21: objective.assurance_chosen_by: a budget sets no precision that n could miss, so there "
        'is nothing to be sure of (got "L. Fenn"). Take this key out.',
    ),
    (
        [("standard_error", "budget"), SURE, ("[draw]", '[cost]\ncurrency = "EUR"\n[draw]')],
        "25: cost: a budget needs the cost of a location. Give per_location or per_analysis.",
    ),
    (
        [
            ("standard_error = 6.0", "budget = 500"),
            SURE,
            ("[draw]", '[cost]\ncurrency = "EUR"\nmobilisation = 500\nper_location = 9\n[draw]'),
        ],
        "20: objective.budget: not above the mobilisation of 500 (got 500). Raise it.",
    ),
    (
        [("standard_error = 6.0", "relative_half_width = 0.2"), SIGMA, ("0.80", '"plain"')],
        "20: objective.relative_half_width: a share of the mean needs a mean: a pilot, or "
        "expected_mean beside the typed sigma. Add expected_mean to [[sigma]].",
    ),
    (
        [SIGMA],
        "21: objective.assurance: the chance that n is enough can be had only from a pilot or "
        "from_results beside the typed sigma (got 0.8). Add from_results to [[sigma]], or write "
        'assurance = "plain".',
    ),
    (
        [("[[sigma]]", "[[sigma]]\nvalue = 27.57")],
        "24: sigma: needs exactly one of pilot and value (got both). Keep one.",
    ),
    (
        [('pilot = "pilot.csv"', 'source = "x"')],
        "24: sigma: needs exactly one of pilot and value (got neither). Keep one.",
    ),
    (
        [('pilot = "pilot.csv"', "value = 27.57\nfrom_results = 8")],
        "24: sigma.source: missing; a typed value needs its source. Give it, or "
        'source = "ASSUMED".',
    ),
    (
        [('"pilot.csv"', '"pilot.csv"\nfrom_results = 8')],
        "26: sigma.from_results: the pilot is counted, not typed. Take this key out.",
    ),
    (
        [("[draw]", '[[sigma]]\npilot = "b.csv"\n[draw]')],
        "27: sigma[2]: sigma of lead for the whole site stands twice. Keep one.",
    ),
    (
        [("pilot =", 'stratum = "yard"\npilot =')],
        "25: sigma.stratum: the frame has no strata. Give frame.strata its file, or take this "
        "key out.",
    ),
    (
        [("[draw]", "[loss]\nby_stratum = {yard = 0.1}\n[draw]")],
        "28: loss.by_stratum: the frame has no strata. Give frame.strata its file, or take this "
        "key out.",
    ),
    (
        [('unit = "mg/kg"', LEVEL)],
        "7: analyte.action_level_source: missing; an action level needs its source. "
        "Give document and date.",
    ),
    (
        [('"boundary.geojson"', '"boundary.geojson"\ndepth_top_m = 0.15\ndepth_bottom_m = 0.15')],
        "15: frame.depth_bottom_m: the bottom must lie below the top of 0.15 m (got 0.15). "
        "Depths grow downwards.",
    ),
    (
        [('"boundary.geojson"', '"boundary.geojson"\ndepth_top_m = 0')],
        "11: frame.depth_bottom_m: missing; a depth interval has a top and a bottom. "
        "Give both or neither.",
    ),
    (
        [('boundary = "boundary.geojson"\n', "")],
        "11: frame.boundary: missing; an area needs the file of its outline. "
        'Give it, or "FILL IN".',
    ),
    (
        [('kind = "area"', 'kind = "area"\nlist_file = "wells.csv"')],
        '13: frame.list_file: a list belongs to kind = "list". Take it out, or change the kind.',
    ),
    (
        [LIST, ('list_file = "wells.csv"\n', "")],
        "11: frame.list_file: missing; a list needs the CSV of its members. "
        'Give it, or "FILL IN".',
    ),
    (
        [LIST, ('"wells.csv"', '"wells.csv"\ninset_m = 3')],
        '14: frame.inset_m: this key belongs to kind = "area", not to a list. Take it out.',
    ),
    (
        [LIST, ('"simple-random"', '"square-grid"')],
        '16: design.layout: this layout does not suit a frame of kind "list" (got "square-grid"). '
        "Takes simple-random, stratified, balanced-list, census.",
    ),
    (
        [('"simple-random"', '"census"')],
        '16: design.layout: this layout does not suit a frame of kind "area" (got "census"). '
        "Takes simple-random, stratified, square-grid, triangular-grid, compact-strata, "
        "balanced-list.",
    ),
    (
        [('"simple-random"', '"square-grid"\nper_cell = 2')],
        '17: design.per_cell: this key belongs to layout = "compact-strata". Take it out.',
    ),
    (
        [('"simple-random"', '"simple-random"\nvariance = "covariance"')],
        "17: design.variance: this key belongs to compact-strata and balanced-list; the places of "
        "this layout have a formula of their own. Take it out.",
    ),
    (
        [('"simple-random"', '"balanced-list"\nvariance = "pairs"')],
        '17: design.variance: balanced-list takes "neighbours" or "covariance" (got "pairs").',
    ),
    (
        [('"simple-random"', '"compact-strata"\nvariance = "neighbours"')],
        '17: design.variance: compact-strata takes "pairs" or "covariance" (got "neighbours").',
    ),
    (
        [('"simple-random"', '"stratified"')],
        "16: design.layout: stratified, but the frame has no strata. Give frame.strata its file.",
    ),
    (
        [('"boundary.geojson"', '"b.csv"\ncolumns = { location_id = "Corner" }')],
        '14: frame.columns.location_id: no column of ours that is read here (got "location_id"). '
        "Takes latitude, longitude, easting, northing.",
    ),
    (
        [(LIST[0], LIST[1] + '\ncolumns = { location = "Well ID" }')],
        '14: frame.columns.location: no column of ours that is read here (got "location"). Did '
        'you mean "location_id"?',
    ),
    (
        [(LIST[0], LIST[1] + '\ncolumns = { stratum = "Zone" }')],
        "14: frame.columns.stratum: a stratum has a key of its own. Write stratum_column = "
        '"Zone".',
    ),
    (
        [("[draw]", '[[targeted]]\nfile = "t.csv"\nreason = "x"\ncolumns = { x = "E" }\n[draw]')],
        '30: targeted.columns.x: no column of ours that is read here (got "x"). Takes '
        "location_id, latitude, longitude, easting, northing.",
    ),
    (
        [('"boundary.geojson"', '"boundary.geojson"\nstrata = "strata.geojson"')],
        "17: design.layout: draws from one population, but the frame has strata (got "
        '"simple-random"). Write layout = "stratified", or take frame.strata out.',
    ),
    (
        [LIST, ('"simple-random"', '"census"\nalternates = 2')],
        "17: design.alternates: a census visits every member of the list. Take this key out.",
    ),
    (
        [LIST, ('"simple-random"', '"simple-random"\nminimum_spacing_m = 2')],
        "17: design.minimum_spacing_m: members of a list stand where they stand. "
        "Take this key out.",
    ),
    (
        [("[draw]", '[[qc]]\nkind = "field blank"\nsource = "x"\nshare = 0.1\ncount = 1\n[draw]')],
        "27: qc: needs exactly one of share and count (got both). Keep one.",
    ),
    (
        [("[draw]", '[[qc]]\nkind = "field blank"\nsource = "x"\n[draw]')],
        "27: qc: needs exactly one of share and count (got neither). Keep one.",
    ),
    (
        [
            (
                "[draw]",
                '[[clearance]]\ntopic = "a"\nreference = "b"\ngiven_on = 2026-10-02\n'
                "expires_on = 2026-10-01\n[draw]",
            )
        ],
        "31: clearance.expires_on: expires before it was given on 2026-10-02 (got 2026-10-01). "
        "Check both dates.",
    ),
    (
        [('id = "QF"', 'id = "QF"\nfieldwork_from = 2026-10-02\nfieldwork_to = 2026-10-01')],
        "6: plan.fieldwork_to: field work ends before it begins on 2026-10-02 (got 2026-10-01). "
        "Swap the two.",
    ),
    (
        [("[draw]", '[field]\nfacts = ["hand-augur"]\n[draw]')],
        '28: field.facts: no fact code (got "hand-augur"). Did you mean "hand-auger"?',
    ),
    (
        [("[[frame]]", '[[analyte]]\nid = "LEAD"\nunit = "mg/kg"\n[[frame]]'),
         ("[[analyte]]\nname", '[[analyte]]\nid = "lead"\nname'),
         ("standard_error", 'analyte = "lead"\nstandard_error'),
         ("pilot =", 'analyte = "lead"\npilot =')],
        '13: analyte[2].id: the id "LEAD" stands twice, capital letters aside. Rename one.',
    ),
    (
        [("[[frame]]", '[[analyte]]\nid = "zinc"\nunit = "mg/kg"\n[[frame]]'),
         ("[[analyte]]\nname", '[[analyte]]\nid = "lead"\nname'),
         ("pilot =", 'analyte = "lead"\npilot =')],
        "22: objective.analyte: missing; with several [[analyte]] say which one is meant: "
        "lead, zinc.",
    ),
    (
        [('layout = "simple-random"', 'frame = "sight"\nlayout = "simple-random"')],
        '16: design.frame: no [[frame]] has the id "sight"; there is site. Did you mean "site"?',
    ),
    (
        [("[draw]", '[[objective]]\nquestion = "mean"\nhalf_width = 9\nassurance = "plain"\n'
          "[draw]")],
        "18: objective[1].decides_n: with several [[objective]] at least one has decides_n = true "
        "(got none). Mark the one that decides n, or all that do so together.",
    ),
    (
        [("[[frame]]", '[[analyte]]\nid = "zinc"\nunit = "mg/kg"\n[[frame]]'),
         ("[[analyte]]\nname", '[[analyte]]\nid = "lead"\nname'),
         ("standard_error", 'analyte = "zinc"\nstandard_error'),
         ("pilot =", 'analyte = "lead"\npilot =')],
        '29: sigma: no [[sigma]] for "zinc", whose objective decides n. Add one.',
    ),
]  # fmt: skip


@pytest.mark.parametrize(("changes", "message"), BROKEN, ids=[case[1][:60] for case in BROKEN])
def test_broken_rule_is_told_with_its_remedy_and_nothing_else(tmp_path, changes, message):
    """A rule that fires must not drag other messages behind it."""
    assert told(tmp_path, bent(*changes)) == [message]


KEPT = [
    [SIGMA, ("0.80", '"plain"')],
    [(SIGMA[0], SIGMA[1] + "\nfrom_results = 8")],
    [("standard_error = 6.0", "relative_half_width = 0.2")],
    [*PRICED, SURE],
    [*PRICED, SURE, SIGMA],
    [LIST],
    [LIST, ('"simple-random"', '"census"')],
    [LIST, ('"simple-random"', '"stratified"'), ("pilot =", 'stratum = "deep"\npilot =')],
    [('"boundary.geojson"', '"boundary.geojson"\nstrata = "strata.geojson"'),
     ('"simple-random"', '"stratified"'),
     ("[draw]", '[[sigma]]\nstratum = "yard"\nvalue = 3\nsource = "x"\n[draw]')],
    [('unit = "mg/kg"', LEVEL + 'action_level_source = "note 3, 2024"')],
    [("[draw]", '[[objective]]\nquestion = "mean"\nhalf_width = 9\nassurance = "plain"\n'
      "decides_n = true\n[draw]")],
    [("6.0", '"FILL IN"'), ('"area"', '"FILL IN"'), ('"simple-random"', '"FILL IN"')],
]  # fmt: skip


@pytest.mark.parametrize("changes", KEPT, ids=range(len(KEPT)))
def test_campaign_that_keeps_the_rules_has_no_problem(tmp_path, changes):
    """A rule that fires on a sound file teaches people to work round it."""
    assert told(tmp_path, bent(*changes)) == []


def test_reporting_limit_above_the_action_level_is_an_alarm_and_no_error(tmp_path):
    """Such results cannot tell on which side of the level they lie; the author may know that."""
    level = LEVEL + 'action_level_source = "note 3, 2024"\nreporting_limit = 200\n'
    found = inspected(tmp_path, bent(('unit = "mg/kg"', level)))
    assert found.campaign is not None
    (sentence,) = alarms(found.campaign.campaign)
    assert sentence.startswith(
        "Lead: the reporting limit of 200 mg/kg lies above the action level of 150 mg/kg, so a "
        "result below the limit does not tell on which side of the level it lies."
    )


def test_every_analyte_is_looked_at_for_the_alarm():
    """One that does not decide n is compared with its level all the same."""
    campaign = campaign_with_zinc()
    lead, zinc = campaign.analyte
    high = zinc.model_copy(update={"reporting_limit": 400.0})
    (sentence,) = alarms(campaign.model_copy(update={"analyte": (lead, high)}))
    assert sentence.startswith("Zinc: the reporting limit of 400 µg/g lies above the action level")


def test_limit_at_the_level_raises_no_alarm(tmp_path):
    """A result below the limit is then below the level."""
    level = LEVEL + 'action_level_source = "note 3, 2024"\nreporting_limit = 150\n'
    found = inspected(tmp_path, bent(('unit = "mg/kg"', level)))
    assert found.campaign is not None
    assert alarms(found.campaign.campaign) == ()
