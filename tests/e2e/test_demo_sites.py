"""The demo sites hold together: what is committed is what the tool draws and reads today."""

import csv
import importlib.util
import io
from datetime import date
from functools import cache
from pathlib import Path
from statistics import fmean, stdev
from types import ModuleType

import pytest

from fieldplan.campaign.read import read_campaign
from fieldplan.estimate import estimate, estimate_all
from fieldplan.estimate.model import Estimate
from fieldplan.lab import read_lab
from fieldplan.plan.make import make_plan
from fieldplan.plan.model import Plan
from fieldplan.returns import read_field_return, read_matches, reconcile, reconcile_all
from fieldplan.returns.model import Returns

SITES = Path(__file__).resolve().parents[2] / "demo_sites"
NAMES = sorted(path.parent.name for path in SITES.glob("*/campaign.toml"))


@cache
def script() -> ModuleType:
    """Load the script that makes the returns."""
    spec = importlib.util.spec_from_file_location("make_returns", SITES / "make_returns.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    import sys

    sys.modules[spec.name] = module
    spec.loader.exec_module(module)
    return module


@cache
def plan_of(name: str) -> Plan:
    """Plan the site as the demo does."""
    read = read_campaign(SITES / name / "campaign.toml")
    assert isinstance(read.campaign.plan.prepared_on, date)
    return make_plan(read, made_on=read.campaign.plan.prepared_on)


@cache
def returns_of(name: str) -> Returns:
    """Reconcile the committed returns."""
    plan, returned = plan_of(name), SITES / name / "returned"
    return reconcile(
        plan,
        read_lab(next(returned.glob("lab_results.*")), plan.campaign),
        read_field_return(returned / "field_return.csv", plan),
        confirmed=read_matches(returned / "matches.csv"),
    )


def estimate_of(name: str) -> Estimate:
    """Estimate from the committed returns."""
    return estimate(plan_of(name), returns_of(name))


def cells(path: Path) -> object:
    """Read a file for comparison: a workbook by its cells, since zip levels may differ."""
    if path.suffix != ".xlsx":
        return path.read_bytes()
    from openpyxl import load_workbook

    book = load_workbook(io.BytesIO(path.read_bytes()))
    return [[cell.value for cell in row] for sheet in book for row in sheet.iter_rows()]


@pytest.mark.parametrize("name", NAMES)
def test_committed_returns_are_those_of_todays_draw(name, tmp_path):
    """A change in the draw must not leave returns behind that no longer fit."""
    module = script()
    module.make_returns(SITES / name, module.STORIES[name], tmp_path / "returned")
    made = {path.name: cells(path) for path in (tmp_path / "returned").iterdir()}
    kept = {path.name: cells(path) for path in (SITES / name / "returned").iterdir()}
    assert made == kept


@pytest.mark.parametrize("name", NAMES)
def test_the_returns_have_a_lost_location_an_alternate_and_duplicates(name):
    """The demo shows what real returns bring."""
    returns = returns_of(name)
    assert returns.lost
    assert any(result.stands_in_for for result in returns.results)
    assert len(returns.duplicate_pairs) >= 2
    assert returns.extra == 1
    assert not returns.needs_you
    if name != "yarrel-water":  # nitrate was found everywhere
        assert any(not result.detected for result in returns.results)


def test_the_soil_site_has_a_moved_location_and_targeted_places_out_of_the_mean():
    """Moved within the rule counts; targeted never does."""
    returns = returns_of("hobbin-ley")
    moved = [r for r in returns.results if r.moved_m is not None and r.moved_m > 2.0]
    assert [r.used for r in moved] == [True]
    targeted = [r for r in returns.results if r.location_class == "targeted"]
    assert [r.used for r in targeted] == [False] * 3


def test_the_wells_keep_their_ids_letter_for_letter():
    """Ids such as 07B, 003, 3-5 and 1E5 must survive every file on the way."""
    names = {place.location_id for place in plan_of("quern-flat").locations.places}
    assert names <= {unit.unit_id for unit in plan_of("quern-flat").frame.strata[0].units}
    assert {r.location_id for r in returns_of("quern-flat").results} <= names
    assert {"07B", "003", "3-5", "1E5"} <= names


@pytest.mark.parametrize("name", NAMES)
def test_the_estimate_of_a_demo_meets_its_level_and_says_who_decides(name):
    """A demo that ended in a refusal would teach nothing."""
    answer = estimate_of(name)
    assert answer.mean.standard_error > 0
    assert "decides what follows" in answer.level_sentence


def test_zinc_of_the_soil_site_by_hand():
    """From the laboratory's cells with the standard library alone, retyped ids put right."""
    plan, returned = plan_of("hobbin-ley"), SITES / "hobbin-ley" / "returned"
    received = reconcile_all(
        plan,
        read_lab(returned / "lab_results.csv", plan.campaign),
        read_field_return(returned / "field_return.csv", plan),
        confirmed=read_matches(returned / "matches.csv"),
    )
    (zinc,) = estimate_all(plan, received).others
    place_of = {s.sample_id.replace("-", "").lower(): s.location_id for s in plan.samples.samples}
    values: dict[str, list[float]] = {}
    with (returned / "lab_results.csv").open(encoding="utf-8-sig", newline="") as stream:
        for row in csv.DictReader(stream):
            name = row["Sample ID"].replace(" 0", "").replace("-", "").lower()
            if row["Analyte"].startswith("Zinc") and place_of.get(name):
                values.setdefault(place_of[name], []).append(float(row["As reported"]))
    strata: dict[str, list[float]] = {}
    for place in plan.locations.places:
        if place.location_class != "targeted" and place.location_id in values:
            strata.setdefault(place.stratum, []).append(fmean(values[place.location_id]))
    weights = {stratum.name: stratum.weight for stratum in plan.frame.strata}
    mean = sum(weights[name] * fmean(found) for name, found in strata.items())
    error = sum((weights[n] * stdev(v)) ** 2 / len(v) for n, v in strata.items()) ** 0.5
    assert zinc.mean.mean == pytest.approx(mean, rel=1e-9)
    assert zinc.mean.standard_error == pytest.approx(error, rel=1e-9)
    assert received.needs_you == ()


def test_without_confirmed_matches_the_retyped_ids_wait_for_a_person():
    """Likeness is proposed and never applied."""
    plan, returned = plan_of("hobbin-ley"), SITES / "hobbin-ley" / "returned"
    lab_table = read_lab(returned / "lab_results.csv", plan.campaign)
    bare = reconcile(plan, lab_table, read_field_return(returned / "field_return.csv", plan))
    assert len({match.row for match in bare.needs_you}) == 2
