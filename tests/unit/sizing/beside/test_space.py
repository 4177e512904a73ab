"""Positions of a pilot: what spreading saves, and what is said where it cannot be told."""

import math
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
import shapely
from numpy.typing import NDArray

from fieldplan.frame.model import Frame, Stratum
from fieldplan.lab.model import Spread, StratumSpread
from fieldplan.sizing import size_asked
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.beside.space import finding
from fieldplan.sizing.model import Finding, Size
from fieldplan.sizing.pilot_ground import cells_of, pilot_ground
from fieldplan.sizing.question import Part
from fieldplan.stats.spatial import weigh_field
from fieldplan.stats.spread_layouts import n_for_layout
from tests.factories import degrees, make_frame, make_list_frame
from tests.unit.sizing.askings import asked_mean

SITE = shapely.box(0, 0, 300, 200)


def one_frame(site: shapely.Geometry = SITE) -> Frame:
    """A site of one stratum."""
    stratum = Stratum("site", site.area, 1.0, site)
    return replace(make_frame(), strata=(stratum,), boundary=site, excluded=(), targeted=())


def random_places(n: int, seed: int = 2) -> NDArray[np.float64]:
    """Places all over the site."""
    return np.random.default_rng(seed).uniform([2, 2], [298, 198], (n, 2))


def field_at(places: NDArray[np.float64], seed: int = 5, nugget: float = 0.1) -> list[float]:
    """Values of one normal field of practical range 120 m."""
    apart = np.hypot(*(places[:, None] - places[None]).transpose(2, 0, 1))
    whole = (1 - nugget) * np.exp(-3 * apart / 120) + nugget * np.eye(len(places))
    root = np.linalg.cholesky(whole)
    return [
        float(80 + 20 * v) for v in root @ np.random.default_rng(seed).standard_normal(len(places))
    ]


def entry(places: NDArray[np.float64], values: list[float], stratum: str = "site") -> StratumSpread:
    """A pilot as the reader gives it."""
    return StratumSpread(
        "analyte",
        stratum,
        float(np.std(values, ddof=1)),
        float(np.mean(values)),
        len(values),
        "pilot.csv",
        values=tuple(values),
        detected=(True,) * len(values),
        positions=tuple(degrees(float(x), float(y)) for x, y in places),
        days=(None,) * len(values),
    )


def asked_with(
    frame: Frame, *entries: StratumSpread, target: float = 3.0, **more: Any
) -> tuple[Asked, Size]:
    """Ask for a standard error with pilots behind it."""
    asked = asked_mean(sigma=1.0, standard_error=target, **more)
    parts = tuple(
        Part(e.stratum, s.weight, e.sigma, results=e.results, mean=e.mean, pilot=e.stratum)
        for e, s in zip(entries, frame.strata, strict=True)
    )
    question = replace(asked.question, parts=parts, unit="mg/kg")
    spread = Spread("analyte", "mg/kg", entries)
    asked = replace(asked, frame=frame, spread=spread, question=question, area_m2=60000.0)
    return asked, size_asked(asked)


def amounts(found: Finding | None) -> dict[str, float | int | None]:
    """Give the numbers by name."""
    assert found is not None
    return {amount.name: amount.value for amount in found.amounts}


def test_forty_places_say_what_compact_parts_would_save() -> None:
    """The number is that of the function, on the site's area and extent."""
    places = random_places(40)
    values = field_at(places)
    asked, size = asked_with(one_frame(), entry(places, values), assurance=0.8, pilot_n=40)
    found = finding(asked, size)
    field = weigh_field(places, np.array(values), extent=300.0)
    expected = n_for_layout(field, 3.0, layout="compact-strata", area=60000.0)
    assert amounts(found)["compact_strata_n"] == pytest.approx(expected, abs=1)
    assert found is not None
    assert f"{size.plain_n} as planned" in found.answer
    assert "n takes no credit for it" in found.answer
    assert expected < size.plain_n
    assert len(found.rows) == 4
    assert found.picture is not None
    assert [series.label for series in found.picture.series] == ["as planned", "compact parts"]


def test_the_working_can_be_done_again_from_its_inputs() -> None:
    """SE1² = σ² (ν + (1 − ν)(1 − c))/n, from the numbers that the step prints."""
    places = random_places(40)
    asked, size = asked_with(one_frame(), entry(places, field_at(places)))
    found = finding(asked, size)
    assert found is not None
    given = {quantity.symbol: quantity.value for quantity in found.steps[0].inputs}
    left = given["ν"] + (1 - given["ν"]) * (1 - given["c"])
    assert found.steps[0].unrounded == pytest.approx(math.sqrt(given["σ²"] * left / given["n"]))
    assert given["a"] == pytest.approx(math.sqrt(60000 / given["n"]), rel=1e-6)


def test_the_number_itself_takes_no_credit() -> None:
    """Positions change what is said, not n."""
    places = random_places(40)
    values = field_at(places)
    asked, size = asked_with(one_frame(), entry(places, values))
    plain = size_asked(replace(asked, frame=None))
    assert finding(replace(asked, frame=None), plain) is None
    assert size.needed == plain.needed


@pytest.mark.parametrize("n", [8, 19])
def test_a_small_pilot_is_refused_in_words(n: int) -> None:
    """Below 20 the curves cannot be told apart."""
    places = random_places(n)
    found = finding(*asked_with(one_frame(), entry(places, field_at(places))))
    assert found is not None
    assert f"The pilot's {n} places are too few" in found.answer
    assert found.rows == ()


def test_a_pilot_of_twenty_to_thirty_says_how_far_off_it_may_be() -> None:
    """Measured on simulated fields: see docs/sizing/correlation.md."""
    places = random_places(24)
    found = finding(*asked_with(one_frame(), entry(places, field_at(places))))
    assert found is not None
    assert "With 24 pilot places" in found.warnings[0]


def test_a_leaning_pilot_is_refused_in_words() -> None:
    """Lognormal ground: the prediction came out a fifth too small there."""
    places = random_places(40)
    values = [math.exp((v - 80) / 20) for v in field_at(places)]
    found = finding(*asked_with(one_frame(), entry(places, values), target=0.3))
    assert found is not None
    assert "lean (skewness" in found.answer
    assert "compact_strata_n" not in amounts(found)


def test_a_strong_slope_is_named_and_grids_left_out() -> None:
    """Under a slope a grid's prediction came out a fifth too small."""
    places = random_places(40)
    values = [v + 0.4 * float(x) for v, x in zip(field_at(places), places[:, 0], strict=True)]
    found = finding(*asked_with(one_frame(), entry(places, values)))
    assert found is not None
    assert any("A straight slope across the site holds" in line for line in found.warnings)
    assert not any("grid" in row[0] for row in found.rows)


def test_lists_and_pilots_without_positions_are_passed_over() -> None:
    """There is no map to speak of."""
    places = random_places(30)
    whole = entry(places, field_at(places))
    asked, size = asked_with(one_frame(), whole)
    assert finding(replace(asked, frame=make_list_frame()), size) is None
    missing = replace(whole, positions=(None, *whole.positions[1:]))
    assert finding(*asked_with(one_frame(), missing)) is None
    few = entry(places[:7], field_at(places[:7]))
    assert finding(*asked_with(one_frame(), few)) is None


def test_results_of_one_spot_are_averaged() -> None:
    """Two values in one place would make every curve without nugget impossible."""
    places = random_places(25)
    places[1] = places[0]
    ground = pilot_ground([entry(places, [float(v) for v in range(25)])], one_frame())
    assert ground is not None
    assert len(ground.values) == 24
    assert ground.values[0] == 0.5


@pytest.mark.parametrize("site", [SITE, shapely.box(0, 0, 3000, 2), shapely.box(0, 0, 1, 1)])
def test_cells_cover_a_site_of_any_shape(site: shapely.Geometry) -> None:
    """Their area adds up, and all lie inside."""
    cells = cells_of(site)
    assert cells.side**2 * len(cells.centres) == pytest.approx(site.area)
    assert 300 <= len(cells.centres) <= 1500
    assert shapely.contains_xy(site, cells.centres[:, 0], cells.centres[:, 1]).all()
