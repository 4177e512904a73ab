"""What a pilot says of the spread: one value a location, every stratum, nothing invented."""

import math
import statistics
from collections.abc import Callable
from pathlib import Path

import pytest

from fieldplan.base.errors import LabError
from fieldplan.campaign.model import Campaign, ReadCampaign, Sigma
from fieldplan.frame.model import Frame
from fieldplan.lab import read_spread
from fieldplan.lab.model import Spread
from tests.factories import degrees, make_campaign, make_frame, make_list_frame

HEAD = "location_id,analyte,as_reported,unit"
Say = Callable[..., Spread]


@pytest.fixture
def spread_of(tmp_path: Path) -> Say:
    """Write a pilot and say how far it spreads; further ``[[sigma]]`` tables may be given."""

    def say(
        pilot: str,
        *more: Sigma,
        frame: Frame | None = None,
        source: str = "",
        campaign: Campaign | None = None,
    ) -> Spread:
        (tmp_path / "pilot.csv").write_text(pilot, encoding="utf-8")
        first = Sigma(analyte="lead", pilot="pilot.csv", source=source)
        whole = (campaign or make_campaign()).model_copy(update={"sigma": (first, *more)})
        read = ReadCampaign(campaign=whole, path=tmp_path / "campaign.toml", text="")
        return read_spread(read, frame or make_frame())

    return say


def rows(stratum: str, *cells: str) -> str:
    """Write rows of one stratum, one location each."""
    return "".join(f"{stratum[0]}{i},lead,{c},mg/kg,{stratum}\n" for i, c in enumerate(cells))


def test_sigma_of_each_stratum_is_that_of_its_locations(spread_of: Say) -> None:
    """Cochran's four results 86, 90, 98, 104 have s² = 65 by hand: Σ(x − 94.5)² = 195, over 3."""
    pilot = f"{HEAD},stratum\n" + rows("meadow", "86", "90", "98", "104") + rows("yard", "1", "3")
    spread = spread_of(pilot)
    meadow, yard = spread.strata
    assert (meadow.stratum, meadow.results, meadow.mean) == ("meadow", 4, 94.5)
    assert meadow.sigma == pytest.approx(math.sqrt(65), rel=1e-14)
    assert yard.sigma == pytest.approx(math.sqrt(2), rel=1e-14)
    assert meadow.degrees_of_freedom == 3
    assert spread.site is not None
    assert spread.site.results == 6


def test_duplicates_are_averaged_and_never_add_n(spread_of: Say) -> None:
    """Two jars of one place say nothing of the distance between places."""
    pilot = (
        f"{HEAD},stratum,role,duplicate_of,sample_id\n"
        "M1,lead,10,mg/kg,meadow,,,S1\nM1,lead,14,mg/kg,meadow,FD,,S2\n"
        "M2,lead,20,mg/kg,meadow,,,S3\n,lead,30,mg/kg,meadow,duplicate,S3,S4\n"
        "Y1,lead,5,mg/kg,yard,,,S5\nY2,lead,8,mg/kg,yard,,,S6\n"
        "QC,lead,<5,mg/kg,,equipment blank,,S7\n"
    )
    spread = spread_of(pilot)
    assert spread.strata[0].values == (12.0, 25.0)
    assert "2 duplicates averaged with their location" in " ".join(spread.notes)
    assert "1 control sample left out" in " ".join(spread.notes)


def test_two_unlike_results_of_one_location_are_a_question(spread_of: Say) -> None:
    """Only a row that says so is a duplicate; an average of 5 and 50 would hide the spread."""
    pilot = f"{HEAD},stratum\n" + "".join(
        f"{name},lead,{cell},mg/kg,meadow\n"
        for name, cell in (("A", "5"), ("A", "50"), ("B", "9"), ("b", "29"), ("C", "7"))
    )
    with pytest.raises(LabError) as caught:
        spread_of(pilot + rows("yard", "1", "3"))
    assert caught.value.problems == (
        "pilot.csv row 3: location 'A' has a second result '50' beside '5' in row 2, and neither "
        "is called a duplicate. Write field duplicate into the role of the one that is, or keep "
        "the row that counts.",
        "pilot.csv row 5: location 'b' has a second result '29' beside '9' of 'B' in row 4, and "
        "neither is called a duplicate. Write field duplicate into the role of the one that is, "
        "or keep the row that counts.",
    )


def test_two_jars_of_one_location_are_a_question_until_one_is_the_duplicate(spread_of: Say) -> None:
    """Two depths of one place have ids of their own, and their mean is that of neither."""
    head = f"{HEAD},stratum,sample_id,role\n"
    lines = "M1,lead,5,mg/kg,meadow,S1,\nM1,lead,50,mg/kg,meadow,S2,{}\nM2,lead,7,mg/kg,meadow,,\n"
    yard = "Y1,lead,5,mg/kg,yard,S5,\nY2,lead,8,mg/kg,yard,S6,\n"
    with pytest.raises(LabError, match="location 'M1' has a second result '50'"):
        spread_of(head + lines.format("") + yard)
    assert spread_of(head + lines.format("dup") + yard).strata[0].values == (27.5, 7.0)


def test_a_row_that_stands_there_twice_is_read_once(spread_of: Say) -> None:
    """A repeat says nothing new, whatever the spelling of its id; it is no duplicate either."""
    pilot = f"{HEAD},stratum\nX,lead,<5,mg/kg,meadow\nx,lead,<5.0,mg/kg,meadow\n"
    spread = spread_of(pilot + rows("meadow", "8", "9") + rows("yard", "1", "3"))
    assert spread.strata[0].results == 3
    assert "rows that repeat a result were read once: row 3." in " ".join(spread.notes)
    assert "duplicate" not in " ".join(spread.notes)


def test_the_first_result_counts_where_the_rule_says_so(spread_of: Say) -> None:
    """Under the rule 'first' the duplicate is for quality control only, wherever it stands."""
    campaign = make_campaign()
    rules = campaign.rules.model_copy(update={"duplicates": "first"})
    pilot = (
        f"{HEAD},stratum,role\nM1,lead,14,mg/kg,meadow,duplicate\nM1,lead,10,mg/kg,meadow,\n"
        "M2,lead,20,mg/kg,meadow,\nY1,lead,5,mg/kg,yard,\nY2,lead,8,mg/kg,yard,\n"
    )
    spread = spread_of(pilot, campaign=campaign.model_copy(update={"rules": rules}))
    assert spread.strata[0].values == (10.0, 20.0)


def test_non_detects_are_bounded_and_the_largest_s_sizes(spread_of: Say) -> None:
    """<8 beside 10 and 12: at 0 s = √41.33, at half (4) √17.33, at the limit 2; by hand."""
    pilot = f"{HEAD},stratum\n" + rows("meadow", "<8", "10", "12") + rows("yard", "1", "3")
    meadow = spread_of(pilot).strata[0]
    assert meadow.sigma_at_zero == pytest.approx(math.sqrt(124 / 3))
    assert meadow.sigma_at_half == pytest.approx(math.sqrt(52 / 3))
    assert meadow.sigma_at_limit == pytest.approx(2.0)
    assert meadow.sigma == meadow.sigma_at_zero
    assert meadow.mean == pytest.approx(26 / 3)  # of the values below, whatever end sized
    assert (meadow.values, meadow.detected) == ((4.0, 10.0, 12.0), (False, True, True))


def test_more_than_two_fifths_non_detects_ask_for_a_typed_sigma(spread_of: Say) -> None:
    """2 of 5 is the most; 3 of 5 says more of the limit than of the site."""
    yard = rows("yard", "1", "3")
    spread_of(f"{HEAD},stratum\n" + rows("meadow", "<8", "<8", "9", "12", "15") + yard)
    pilot = f"{HEAD},stratum\n" + rows("meadow", "<8", "<8", "<8", "12", "15") + yard
    with pytest.raises(LabError, match="3 of 5 results in stratum 'meadow' are non-detects"):
        spread_of(pilot)
    typed = Sigma(analyte="lead", stratum="meadow", value=18.0, source="survey of 2019")
    spread = spread_of(pilot, typed)
    assert spread.strata[0].sigma == 18.0
    assert "typed sigma of 18.0 mg/kg is used; the pilot" in " ".join(spread.notes)


def test_every_stratum_without_a_sigma_is_named_at_once(spread_of: Say) -> None:
    """One result, and equal results, give no spread; each stratum gets its own line."""
    pilot = f"{HEAD},stratum\n" + rows("meadow", "7") + rows("yard", "5", "5", "5")
    with pytest.raises(LabError) as caught:
        spread_of(pilot)
    first, second = caught.value.problems
    assert "stratum 'meadow' has 1 result; a sigma needs 2" in first
    assert "all 3 results in stratum 'yard' are 5.00" in second
    assert 'stratum = "yard"' in second


def test_a_sigma_typed_for_the_site_serves_strata_without_one(spread_of: Say) -> None:
    """Partly pilot, partly typed: the stratum's own results come first."""
    typed = Sigma(analyte="lead", value=30.0, source="ASSUMED")
    spread = spread_of(f"{HEAD},stratum\n" + rows("meadow", "7", "9"), typed)
    meadow, yard = spread.strata
    assert (meadow.source, meadow.assumed) == ("pilot.csv", False)
    assert (yard.sigma, yard.assumed) == (30.0, True)
    assert "yard: sigma = 30.0 mg/kg is ASSUMED, not measured." in spread.sentences


def test_positions_place_pilot_locations_into_strata(spread_of: Say) -> None:
    """The meadow ends at 140 m; a place in the pond goes to the yard that surrounds it."""
    spots = {"A": (20, 20), "B": (130, 60), "C": (150, 20), "D": (170, 50), "Z": (900, 900)}
    lines = [f"{HEAD},latitude,longitude"]
    for number, (name, spot) in enumerate(spots.items()):
        latitude, longitude = degrees(*spot)
        lines.append(f"{name},lead,{10 + number * number},mg/kg,{latitude},{longitude}")
    spread = spread_of("\n".join(lines))
    assert spread.strata[0].values == (10.0, 11.0)
    assert spread.strata[1].values == (14.0, 19.0)
    assert "1 pilot location outside the site left out (Z)" in " ".join(spread.notes)


def test_swapped_positions_are_suspected(spread_of: Say) -> None:
    """All positions outside is a slip, not a pilot of another place."""
    latitude, longitude = degrees(20, 20)
    pilot = f"{HEAD},latitude,longitude\nA,lead,1,mg/kg,{longitude},{latitude}\n"
    with pytest.raises(LabError, match="all pilot positions lie outside the site"):
        spread_of(pilot)


def test_a_pilot_without_strata_is_pooled_only_with_a_reason(spread_of: Say) -> None:
    """One sigma for all strata hides their differences; somebody must say why it is fair."""
    pilot = f"{HEAD}\nA,lead,1,mg/kg\nB,lead,3,mg/kg\n"
    with pytest.raises(LabError, match="say why one pooled sigma is fair"):
        spread_of(pilot)
    spread = spread_of(pilot, source="same soil and use in both")
    assert [entry.sigma for entry in spread.strata] == [pytest.approx(math.sqrt(2))] * 2
    assert "reason given: same soil and use in both" in " ".join(spread.notes)


def test_a_pilot_that_places_only_some_locations_is_refused(spread_of: Say) -> None:
    """Leaving the rest out would be a choice nobody made."""
    pilot = f"{HEAD},stratum\nA,lead,1,mg/kg,meadow\nB,lead,3,mg/kg,\n"
    with pytest.raises(LabError, match="nothing says in which stratum B lie"):
        spread_of(pilot)


def test_an_unknown_stratum_gets_a_near_name(spread_of: Say) -> None:
    """A slip of the pen in one row must not make a new stratum."""
    with pytest.raises(LabError, match="did you mean 'meadow'"):
        spread_of(f"{HEAD},stratum\n" + rows("medow", "1", "2"))


def test_two_results_of_one_sample_are_a_question(spread_of: Say) -> None:
    """A revised report beside the first one: only the user knows which counts."""
    pilot = (
        f"{HEAD},stratum,sample_id\nA,lead,1,mg/kg,meadow,S1\nA,lead,2,mg/kg,meadow,S1\n"
        "B,lead,3,mg/kg,yard,S2\nB,lead,3,mg/kg,yard,S2\n"
    )
    with pytest.raises(LabError) as caught:
        spread_of(pilot)
    (line,) = caught.value.problems
    assert "row 3: sample 'S1' has a second result '2' beside '1' in row 2" in line


def test_wells_of_a_list_need_no_strata(spread_of: Say) -> None:
    """Eight wells by hand: Σx = 43.9, Σx² = 279.25, so s² = (279.25 − 43.9²/8) / 7 = 5.4784."""
    values = (4.1, 6.8, 2.2, 9.5, 5.0, 3.3, 7.1, 5.9)
    pilot = HEAD + "\n" + "".join(f"MW-{i},lead,{v},mg/kg\n" for i, v in enumerate(values, 1))
    spread = spread_of(pilot, frame=make_list_frame())
    (site,) = spread.strata
    assert site.stratum == "site"
    assert site.mean == pytest.approx(5.4875)
    assert site.sigma == pytest.approx(math.sqrt(5.4784), rel=1e-5)
    assert site.skewness_ceiling == pytest.approx(6 / math.sqrt(7))


def test_mean_s_and_cv_of_a_sentence_belong_together(spread_of: Say) -> None:
    """A reader divides what is printed: 5.57 / 15 = 0.37, non-detects at half; by statistics.

    The larger s, which sizes, is said apart, and the mean to expect is the mean printed.
    """
    spread = spread_of(
        f"{HEAD},stratum\n" + rows("meadow", "<20", "14", "21") + rows("yard", "1", "3")
    )
    first, second = spread.sentences[:2]
    values = (10.0, 14.0, 21.0)
    mean, s = statistics.mean(values), statistics.stdev(values)
    assert f"a mean of {mean:.3g}" in first
    assert f"s = {s:.3g} mg/kg (CV {s / mean:.2f})" in first
    assert "1 non-detect, at half of the limit here." in first
    assert spread.strata[0].mean == pytest.approx(mean)
    ends = statistics.stdev((0, 14, 21)), statistics.stdev((20, 14, 21))
    assert f"at 0 s would be {ends[0]:.3g}, at the limit {ends[1]:.3g} mg/kg; " in second
    assert f"the larger, {ends[0]:.3g} mg/kg, sizes the campaign." in second
    assert spread.strata[0].sigma == pytest.approx(ends[0])


def test_sentences_say_how_little_a_small_pilot_can_show(spread_of: Say) -> None:
    """Five results cannot show a skewness above (5 − 2)/√4 = 1.5, so they prove no symmetry."""
    pilot = f"{HEAD},stratum\n" + rows("meadow", "1", "1", "1", "1", "9") + rows("yard", "1", "3")
    spread = spread_of(pilot)
    text = " ".join(spread.sentences)
    assert (
        "meadow: the skewness of these results is 1.50; 5 results can show no more than 1.50"
        in text
    )
    assert "do not prove that the population is symmetric" in text
    assert "5 pilot locations (pilot.csv) have a mean of 2.60 mg/kg and s = 3.58 mg/kg" in text


def test_faults_of_several_pilots_are_said_together(tmp_path: Path) -> None:
    """Two files, one run."""
    sigmas = tuple(Sigma(analyte="lead", pilot=f"{name}.csv") for name in ("one", "two"))
    for name in ("one", "two"):
        (tmp_path / f"{name}.csv").write_text(f"{HEAD}\nA,lead,0,mg/kg\n", encoding="utf-8")
    read = ReadCampaign(
        campaign=make_campaign(sigma=sigmas), path=tmp_path / "campaign.toml", text=""
    )
    with pytest.raises(LabError) as caught:
        read_spread(read, make_frame())
    assert [line.split()[0] for line in caught.value.problems] == ["one.csv", "two.csv"]


def test_other_analytes_are_told_and_never_stop_the_campaign(spread_of: Say) -> None:
    """Zinc does not decide n; what is missing of it is a note."""
    zinc = make_campaign().analyte[0].model_copy(update={"id": "zinc", "name": "Zinc"})
    campaign = make_campaign(analyte=(make_campaign().analyte[0], zinc))
    pilot = f"{HEAD},stratum\n" + rows("meadow", "1", "2") + rows("yard", "1", "3")
    typed = Sigma(analyte="zinc", stratum="meadow", value=9.0, source="ASSUMED")
    spread = spread_of(pilot, typed, campaign=campaign)
    assert [(o.analyte, o.stratum, o.sigma) for o in spread.others] == [("zinc", "meadow", 9.0)]
    assert any(note.startswith("Zinc: ") for note in spread.notes)
