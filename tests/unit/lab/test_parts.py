"""The parts of sigma: from duplicates of a pilot, from a file of its own, and as typed."""

import math
from collections.abc import Callable
from pathlib import Path

import pytest

from fieldplan.base.errors import LabError
from fieldplan.campaign.model import ReadCampaign, Sigma
from fieldplan.frame.model import Frame
from fieldplan.lab import read_spread
from fieldplan.lab.model import PartSpread, Spread
from fieldplan.lab.parts import satterthwaite_of
from fieldplan.stats.nested import nested_components
from tests.factories import make_campaign, make_frame, make_list_frame

HEAD = "location_id,sample_id,analyte,as_reported,unit,role,duplicate_of,stratum"
Say = Callable[..., Spread]


@pytest.fixture
def spread_of(tmp_path: Path) -> Say:
    """Write files and say how far results spread, by the ``[[sigma]]`` tables given."""

    def say(*sigmas: Sigma, frame: Frame | None = None, **files: str) -> Spread:
        for name, text in files.items():
            (tmp_path / f"{name}.csv").write_text(text, encoding="utf-8")
        whole = make_campaign().model_copy(update={"sigma": sigmas})
        read = ReadCampaign(campaign=whole, path=tmp_path / "campaign.toml", text="")
        return read_spread(read, frame or make_list_frame())

    return say


def typed(part: str, value: float, **more: object) -> Sigma:
    """Type one part."""
    return Sigma(analyte="lead", part=part, value=value, source="typed", **more)  # type: ignore[arg-type]


WHOLE = Sigma(analyte="lead", pilot="pilot.csv")
PLACES = (((8.0, 8.4), (9.0, 9.2)), ((3.0, 3.6), (4.2, 4.0)), ((6.0, 6.2), (5.0, 5.4)))


def nested_file(places: object = PLACES, stratum: str = "") -> str:
    """Write places, samples and analyses as a laboratory would."""
    lines = [HEAD]
    for i, place in enumerate(places):  # type: ignore[call-overload]
        for j, jar in enumerate(place):
            role, parent = ("field duplicate", f"P{i}") if j else ("", "")
            first, *again = jar
            lines.append(f"P{i},S{i}{j},lead,{first},mg/kg,{role},{parent},{stratum}")
            for x in again:
                lines.append(f",L{i}{j},lead,{x},mg/kg,laboratory duplicate,S{i}{j},")
    return "\n".join(lines) + "\n"


def sigmas(spread: Spread, stratum: int = 0) -> dict[str, float]:
    """Give the parts of one stratum by name."""
    return {part.part: part.sigma for part in spread.splits[stratum].parts}


def test_a_pilot_with_duplicates_is_split_as_arithmetic_splits_it(spread_of: Say) -> None:
    """The rows of the file must arrive as places, samples and analyses."""
    spread = spread_of(WHOLE, pilot=nested_file())
    truth = nested_components(PLACES, confidence=0.90)
    (split,) = spread.splits
    assert split.duplicated == 3
    assert not split.typed
    for part, component in zip(split.parts, truth.components, strict=True):
        assert part.part == component.stage.replace(" l", "-l")
        assert part.sigma == pytest.approx(component.sigma, rel=1e-12)
        assert part.low == pytest.approx(math.sqrt(component.low), rel=1e-12)
        assert part.high == pytest.approx(math.sqrt(component.high), rel=1e-12)
        assert part.degrees_of_freedom == pytest.approx(component.degrees_of_freedom)


def test_field_duplicates_alone_leave_sampling_and_laboratory_together(spread_of: Say) -> None:
    """By hand: duplicates (1, 3), (5, 7), (9, 11): within 2, between 15."""
    places = (((1.0,), (3.0,)), ((5.0,), (7.0,)), ((9.0,), (11.0,)))
    spread = spread_of(WHOLE, pilot=nested_file(places))
    assert sigmas(spread) == pytest.approx(
        {"between-locations": math.sqrt(15), "sampling and analysis": math.sqrt(2)}
    )


def test_a_laboratory_that_is_known_comes_out_of_the_field_duplicates(spread_of: Say) -> None:
    """By hand: 2 of sampling and laboratory together, less 0.5² leaves 1.75 of sampling."""
    places = (((1.0,), (3.0,)), ((5.0,), (7.0,)), ((9.0,), (11.0,)))
    spread = spread_of(WHOLE, typed("analysis", 0.5), pilot=nested_file(places))
    found = sigmas(spread)
    assert found["sampling"] == pytest.approx(math.sqrt(1.75))
    assert found["analysis"] == 0.5
    assert spread.splits[0].typed


def test_a_file_of_duplicates_gives_the_part_that_is_asked_of_it(spread_of: Say) -> None:
    """Duplicates of another site can tell the laboratory's part, and only that is taken."""
    spread = spread_of(
        Sigma(analyte="lead", value=20.0, source="old survey", from_results=21),
        Sigma(analyte="lead", part="analysis", pilot="twice.csv"),
        twice=nested_file(),
    )
    truth = nested_components(PLACES).component("analysis").sigma
    assert sigmas(spread)["analysis"] == pytest.approx(truth, rel=1e-12)
    left = math.sqrt(400 - truth**2)
    assert sigmas(spread)["between-locations"] == pytest.approx(left, rel=1e-12)
    assert spread.strata[0].sigma == 20.0


def test_typed_parts_make_the_whole_where_it_is_not_typed(spread_of: Say) -> None:
    """Variances add; the degrees of freedom by hand: 25² / (9²/9 + 16²/16) = 25."""
    spread = spread_of(
        typed("between-locations", 3.0, from_results=10, expected_mean=12.0),
        typed("analysis", 4.0, from_results=17),
    )
    entry = spread.strata[0]
    assert entry.sigma == pytest.approx(5.0)
    assert entry.results == 26
    assert entry.mean == 12.0
    assert sigmas(spread) == pytest.approx({"between-locations": 3.0, "analysis": 4.0})


def test_strata_keep_their_own_differences_between_places(spread_of: Say) -> None:
    """s² of averaged pairs holds half of what duplicates show: b² = s² − w²/2, by hand.

    meadow pairs (9, 11), (19, 21), (29, 31): means 10, 20, 30, s² = 100, w² = 2, so 99.
    yard pairs (1, 3), (2, 4): means 2, 3, s² = 0.5, w² = 2 (pooled over all five), so cut at 0.
    """
    lines = [HEAD]
    pairs = {"meadow": ((9, 11), (19, 21), (29, 31)), "yard": ((1, 3), (2, 4))}
    for stratum, found in pairs.items():
        for i, (one, two) in enumerate(found):
            name = f"{stratum[0]}{i}"
            lines.append(f"{name},,lead,{one},mg/kg,,,{stratum}")
            lines.append(f"{name},,lead,{two},mg/kg,field duplicate,{name},{stratum}")
    spread = spread_of(WHOLE, frame=make_frame(), pilot="\n".join(lines) + "\n")
    assert sigmas(spread, 0) == pytest.approx(
        {"between-locations": math.sqrt(99), "sampling and analysis": math.sqrt(2)}
    )
    yard = spread.splits[1].part("between-locations")
    assert isinstance(yard, PartSpread)
    assert (yard.sigma, yard.cut_at_zero) == (0.0, True)


def test_a_pilot_without_duplicates_says_nothing_of_parts(spread_of: Say) -> None:
    """And does not stop the campaign."""
    spread = spread_of(WHOLE, pilot=nested_file((((1.0,),), ((3.0,),), ((8.0,),))))
    assert spread.splits == ()


def test_parts_that_cannot_be_had_are_refused_in_one_line(spread_of: Say) -> None:
    """File, value, rule and remedy."""
    single = nested_file((((1.0,),), ((3.0,),)))
    with pytest.raises(LabError, match=r"twice.csv: none of the 2 locations has a second sample"):
        spread_of(
            typed("total", 9.0), Sigma(analyte="lead", part="analysis", pilot="twice.csv"),
            twice=single,
        )  # fmt: skip
    pairs = nested_file((((1.0,), (2.0,)), ((3.0,), (5.0,))))
    with pytest.raises(LabError, match="no sample has a laboratory duplicate, so analysis cannot"):
        spread_of(
            typed("total", 9.0), Sigma(analyte="lead", part="analysis", pilot="twice.csv"),
            twice=pairs,
        )  # fmt: skip
    with pytest.raises(LabError, match=r"\(sampling 9 and analysis 4\) leave nothing of the whole"):
        spread_of(typed("total", 9.0), typed("sampling", 9.0), typed("analysis", 4.0))


def test_a_part_of_nothing_needs_no_degrees_of_freedom() -> None:
    """A variance of 0 cannot make a sum less certain."""
    assert satterthwaite_of([(4.0, 8.0), (0.0, None)]) == 8.0
    assert satterthwaite_of([(4.0, 8.0), (1.0, None)]) is None
    assert satterthwaite_of([(0.0, None)]) is None


def test_a_part_may_be_typed_for_the_site_by_that_word(spread_of: Say) -> None:
    """As the whole sigma may be: "site" is the site where no stratum has that name."""
    spread = spread_of(typed("total", 9.0), typed("analysis", 4.0, stratum="site"))
    assert sigmas(spread)["analysis"] == 4.0
    own = spread_of(
        typed("total", 9.0), typed("analysis", 4.0), typed("analysis", 2.0, stratum="yard"),
        frame=make_frame(),
    )  # fmt: skip
    assert (sigmas(own, 0)["analysis"], sigmas(own, 1)["analysis"]) == (4.0, 2.0)
