"""Small whole objects for tests, built by hand and not by the code under test."""

from datetime import date
from functools import cache
from typing import Any

import shapely

from fieldplan.base.document import Caution
from fieldplan.base.working import Quantity, Step
from fieldplan.campaign.model import (
    Analyte,
    Campaign,
    Clearance,
    Cost,
    DesignTable,
    Draw,
    FieldTable,
    FrameTable,
    Loss,
    Objective,
    PlanTable,
    QualityControl,
    Rules,
    Sigma,
)
from fieldplan.design.model import Location, Locations, MeanEstimate, StratumEstimate
from fieldplan.estimate.model import Bracket, Estimate, Interval
from fieldplan.frame.model import (
    ExcludedArea,
    Frame,
    ListUnit,
    Population,
    SiteProjection,
    Stratum,
    TargetedPlace,
)
from fieldplan.lab.model import Spread, StratumSpread
from fieldplan.plan.model import Plan
from fieldplan.returns.model import LocationResult, LostLocation, Returns
from fieldplan.samples.model import Sample, Samples
from fieldplan.sizing.model import (
    AssuredSize,
    CurvePoint,
    QualityControlCount,
    Size,
    StratumSize,
)

PROJECTION = SiteProjection(latitude=52.10, longitude=-1.90)


@cache
def _transformer() -> Any:
    from pyproj import Transformer

    return Transformer.from_crs(PROJECTION.definition, "EPSG:4326", always_xy=True)


def degrees(easting: float, northing: float) -> tuple[float, float]:
    """Turn site metres into (latitude, longitude) with pyproj, as a second opinion."""
    longitude, latitude = _transformer().transform(easting, northing)
    return round(latitude, 7), round(longitude, 7)


def make_campaign(**changes: object) -> Campaign:
    """A stratified soil campaign of two strata; keyword arguments replace whole tables."""
    tables: dict[str, object] = {
        "format": 1,
        "plan": PlanTable(
            id="QF",
            title="Quarry Field, lead in topsoil",
            site="Quarry Field",
            prepared_by="R. Amadi",
            decides="L. Fenn",
            prepared_on=date(2026, 11, 2),
        ),
        "analyte": (
            Analyte(
                id="lead",
                name="Lead",
                unit="mg/kg",
                matrix="soil",
                basis="dry weight",
                reporting_limit=5.0,
                action_level=150.0,
                action_level_source="invented local guideline, 2024",
            ),
        ),
        "frame": (
            FrameTable(
                kind="area",
                boundary="boundary.geojson",
                strata="strata.geojson",
                inset_m=3.0,
                depth_top_m=0.0,
                depth_bottom_m=0.15,
                depth_datum="ground surface",
                size_fraction="< 2 mm",
                why_this_area="One tenancy under one use.",
            ),
        ),
        "design": (DesignTable(layout="stratified", allocation="neyman", floor=3, alternates=2),),
        "objective": (
            Objective(
                design="main",
                analyte="lead",
                question="mean",
                standard_error=9.0,
                assurance="plain",
                assurance_chosen_by="L. Fenn",
            ),
        ),
        "sigma": (
            Sigma(analyte="lead", stratum="meadow", value=18.0, source="ASSUMED"),
            Sigma(analyte="lead", stratum="yard", value=45.0, source="ASSUMED"),
        ),
        "cost": Cost(currency="EUR", mobilisation=400.0, per_location=30.0, per_analysis=45.0),
        "qc": (QualityControl(kind="field duplicate", share=0.1, source="campaign choice"),),
        "loss": Loss(share=0.1),
        "rules": Rules(fixed_by="L. Fenn", fixed_on=date(2026, 11, 2)),
        "field": FieldTable(
            method="SOP-07 hand auger",
            position_accuracy_m=3.0,
            offset_within_m=5.0,
            ground_penetration=True,
            facts=("ground-penetration",),
        ),
        "clearance": (
            Clearance(
                topic="access and permission",
                reference="letter 12/26",
                given_on=date(2026, 10, 1),
                expires_on=date(2027, 3, 31),
            ),
        ),
        "draw": Draw(seed=20261102),
    }
    tables.update(changes)
    return Campaign.model_construct(**tables)  # type: ignore[arg-type]


def make_frame() -> Frame:
    """A site of 200 m × 120 m: a meadow of 140 m and a yard of 60 m with a pond cut out."""
    meadow = shapely.box(0, 0, 140, 120)
    pond = shapely.box(160, 40, 180, 60)
    yard = shapely.difference(shapely.box(140, 0, 200, 120), pond)
    net = meadow.area + yard.area
    latitude, longitude = degrees(170, 100)
    return Frame(
        kind="area",
        projection=PROJECTION,
        strata=(
            Stratum("meadow", meadow.area, meadow.area / net, meadow),
            Stratum("yard", yard.area, yard.area / net, yard),
        ),
        boundary=shapely.box(0, 0, 200, 120),
        excluded=(ExcludedArea("open water", "exclusions.geojson", 0.0, 400.0, pond),),
        targeted=(TargetedPlace("TANK", 170.0, 100.0, latitude, longitude, "old tank"),),
        population=Population(
            unit="m²",
            gross=24000.0,
            inset_loss=0.0,
            net=net,
            share=net / 24000.0,
            sentences=(
                "The mean speaks for 98.3 % of the site: 2.36 of 2.40 ha.",
                "One n is: one location.",
            ),
        ),
        sources=("boundary.geojson: EPSG:4326, no datum shift needed",),
    )


def make_list_frame() -> Frame:
    """Fourteen wells in a row, no strata."""
    units = []
    for number in range(14):
        easting, northing = 20.0 * number, 10.0 * (number % 3)
        latitude, longitude = degrees(easting, northing)
        units.append(ListUnit(f"MW-{number + 1}", "site", easting, northing, latitude, longitude))
    return Frame(
        kind="list",
        projection=PROJECTION,
        strata=(Stratum("site", 14.0, 1.0, None, tuple(units)),),
        boundary=shapely.box(-10, -10, 280, 40),
        population=Population(
            unit="units",
            gross=14.0,
            inset_loss=0.0,
            net=14.0,
            share=1.0,
            sentences=("The mean speaks for all 14 units of the list.", "One n is: one location."),
        ),
    )


def make_spread() -> Spread:
    """Typed sigmas of 18 and 45, as in the campaign."""
    entries = tuple(
        StratumSpread("lead", name, sigma, 80.0, None, "ASSUMED", assumed=True)
        for name, sigma in (("meadow", 18.0), ("yard", 45.0))
    )
    return Spread(
        analyte="lead",
        unit="mg/kg",
        strata=entries,
        sentences=("Sigma was ASSUMED, not measured.",),
    )


def make_size() -> Size:
    """Four locations in the meadow and five in the yard, with two alternates each."""
    return Size(
        design="main",
        analyte="lead",
        unit="mg/kg",
        target="standard error of the mean ≤ 9 mg/kg",
        target_standard_error=9.0,
        target_half_width=None,
        strata=(
            StratumSize("meadow", 16800 / 23600, 18.0, 3, 4, 2),
            StratumSize("yard", 6800 / 23600, 45.0, 4, 5, 2),
        ),
        plain_n=7,
        needed=7,
        planned=9,
        standard_error=8.8,
        half_width=21.0,
        confidence=0.95,
        interval="two-sided",
        assurance=None,
        assurance_chosen_by="L. Fenn",
        chance_plain=None,
        chance_needed=None,
        assured=(AssuredSize(0.80, 11),),
        steps=(
            Step(
                symbol="n",
                meaning="Results needed for the target standard error",
                formula="n = (Σ w·s)² / SE²",
                inputs=(Quantity("SE", "target standard error", 9.0, "mg/kg"),),
                unrounded=6.2,
                rounded=7,
                unit="results",
                source="Cochran 1977, Sampling Techniques, ch. 5",
            ),
        ),
        curve=tuple(
            CurvePoint(n, 24 / n**0.5, 18 / n**0.5, 30 / n**0.5, 50 / n**0.5, 400 + 75 * n, None)
            for n in range(4, 15)
        ),
        qc=(QualityControlCount("field duplicate", 1, "campaign choice"),),
        cost=1150.0,
        currency="EUR",
        sentences=("7 results are needed; visit 9 locations.",),
        conditions=("A t interval from 7 results assumes a mean near normal.",),
    )


def make_locations() -> Locations:
    """Nine random places, four alternates and one targeted place."""
    spots = {
        "meadow": [(20, 20), (60, 90), (100, 40), (130, 100), (30, 70), (90, 15)],
        "yard": [(150, 20), (190, 30), (150, 80), (190, 90), (170, 110), (145, 50), (195, 70)],
    }
    weights = {"meadow": (16800 / 23600, 4), "yard": (6800 / 23600, 5)}
    places = []
    for letter, (name, points) in zip("AB", spots.items(), strict=True):
        share, planned = weights[name]
        for order, (easting, northing) in enumerate(points, start=1):
            latitude, longitude = degrees(easting, northing)
            chosen = order <= planned
            places.append(
                Location(
                    location_id=f"QF-{letter}-{order:02d}",
                    short_name=f"QF{letter}{order:02d}",
                    location_class="random" if chosen else "alternate",
                    stratum=name,
                    easting=float(easting),
                    northing=float(northing),
                    latitude=latitude,
                    longitude=longitude,
                    list_order=order,
                    inclusion_probability=planned / (share * 23600),
                    weight=share / planned if chosen else 0.0,
                    alternate_for="" if chosen else f"any in {name}",
                )
            )
    places.sort(key=lambda place: place.location_class == "alternate")
    latitude, longitude = degrees(170, 100)
    places.append(
        Location(
            "TANK", "QFT01", "targeted", "yard", 170.0, 100.0, latitude, longitude, 0, 0.0, 0.0
        )
    )
    return Locations(
        layout="stratified", seed=20261102, version=1, places=tuple(places), asked=9, realised=9
    )


def make_samples() -> Samples:
    """One sample a place and one blind duplicate at QF-A-02."""
    samples = []
    serials = iter([731, 204, 655, 418, 990, 127, 583, 346, 872, 259, 614, 705, 163, 428, 537])
    for place in make_locations().places:
        parent = f"QF-{next(serials)}"
        samples.append(Sample(parent, place.location_id, "field sample", "", ("lead",), 0.0, 0.15))
        if place.location_id == "QF-A-02":
            samples.append(
                Sample(
                    f"QF-{next(serials)}",
                    place.location_id,
                    "field duplicate",
                    parent,
                    ("lead",),
                    0.0,
                    0.15,
                )
            )
    return Samples(tuple(samples))


def make_cautions() -> tuple[Caution, ...]:
    """One open hold point and one caution with its reference typed."""
    return (
        Caution(
            topic="underground utilities",
            because="the ground is penetrated by hand auger",
            defers_to="the local utility location service and the site owner's records",
            status="OPEN: no reference, date and expiry typed",
            is_open=True,
            holds_work=True,
        ),
        Caution(
            topic="access and permission",
            because="somebody else owns the land",
            defers_to="the owner's written consent",
            status="letter 12/26, given 2026-10-01, expires 2027-03-31",
            is_open=False,
            holds_work=True,
        ),
    )


def make_plan(**changes: object) -> Plan:
    """The whole plan of Quarry Field, DRAFT, revision 1."""
    parts: dict[str, object] = {
        "campaign": make_campaign(),
        "campaign_text": "format = 1\n",
        "frame": make_frame(),
        "spread": make_spread(),
        "size": make_size(),
        "locations": make_locations(),
        "samples": make_samples(),
        "cautions": make_cautions(),
        "revision": 1,
        "made_on": date(2026, 11, 3),
        "inputs": {"boundary.geojson": "0" * 64},
        "fieldplan_version": "0.1.0",
    }
    parts.update(changes)
    return Plan(**parts)  # type: ignore[arg-type]


def make_returns() -> Returns:
    """Nine planned results back: one lost, one moved, one non-detect, one not used, a tank."""
    values = {
        "QF-A-01": 41.0, "QF-A-02": 66.5, "QF-A-03": 22.0, "QF-A-05": 58.0, "QF-B-01": 120.0,
        "QF-B-02": 187.0, "QF-B-03": 95.0, "QF-B-04": 2.5, "QF-B-05": 143.0, "TANK": 910.0,
    }  # fmt: skip
    sample_ids = {s.location_id: s.sample_id for s in make_samples().samples if not s.qc_of}
    results = []
    for place in make_locations().places:
        name = place.location_id
        if name not in values:
            continue
        detected, moved = name != "QF-B-04", name == "QF-B-03"
        why_not = {
            "TANK": "Targeted places never enter the mean.",
            "QF-B-05": "The jar arrived broken; the laboratory reported it all the same.",
        }.get(name, "")
        latitude, longitude = degrees(place.easting + 9, place.northing - 6)
        results.append(
            LocationResult(
                location_id=name,
                stratum=place.stratum,
                location_class=place.location_class,
                sample_ids=(sample_ids[name],),
                as_reported=(f"{values[name]:g}" if detected else "<5",),
                low=values[name] if detected else 0.0,
                half=values[name],
                high=values[name] if detected else 5.0,
                detected=detected,
                used=not why_not,
                why_not=why_not,
                latitude=place.latitude,
                longitude=place.longitude,
                actual_latitude=latitude if moved else None,
                actual_longitude=longitude if moved else None,
                moved_m=10.8 if moved else None,
                stands_in_for="QF-A-04" if name == "QF-A-05" else "",
            )
        )
    return Returns(
        analyte="lead",
        results=tuple(results),
        lost=(LostLocation("QF-A-04", "meadow", "no-access", "QF-A-05"),),
        matched=11,
        planned_samples=11,
        extra=0,
        needs_you=(),
        lab_file="results.csv",
        lab_sha256="1" * 64,
        field_file="field_return.csv",
        field_sha256="2" * 64,
        duplicate_pairs=(("QF-A-02", 64.0, 69.0),),
        notes=("QF-B-03 was taken 10.8 m from its planned place.",),
    )


def make_estimate(**changes: object) -> Estimate:
    """The estimate that goes with ``make_returns``, worked by hand in the comments.

    meadow (41, 66.5, 22, 58): mean 46.875, s² 387.396; yard (120, 187, 95, 2.5): mean 101.125,
    s² 5831.729; weights 0.711864 and 0.288136. SE² = Σ w² s²/n = 49.0783 + 121.0406.
    """
    strata = (
        StratumEstimate("meadow", 4, 46.875, 19.6824, 16800 / 23600, 49.0783),
        StratumEstimate("yard", 4, 101.125, 76.3658, 6800 / 23600, 121.0406),
    )
    parts: dict[str, object] = {
        "analyte": "lead",
        "unit": "mg/kg",
        "mean": MeanEstimate(
            n=8,
            mean=62.506,
            standard_error=13.043,
            degrees_of_freedom=5.089,
            strata=strata,
            method="Weighted mean of the strata; Satterthwaite degrees of freedom.",
        ),
        "interval": Interval("two-sided", 0.95, 29.15, 95.86),
        "other_interval": Interval("upper-limit", 0.95, None, 88.69),
        "bracket": Bracket(
            mean_low=62.326,
            mean_half=62.506,
            mean_high=62.686,
            interval_low=Interval("two-sided", 0.95, 28.56, 96.10),
            interval_half=Interval("two-sided", 0.95, 29.15, 95.86),
            interval_high=Interval("two-sided", 0.95, 29.75, 95.63),
        ),
        "planned_standard_error": 8.8,
        "achieved_standard_error": 13.043,
        "why_different": ("The yard spread more than was assumed: s 76 instead of 45.",),
        "level_sentence": "The interval lies below the action level of 150 mg/kg.",
        "population_sentence": "The mean speaks for 98.3 % of the site.",
        "coverage_sentence": "At this n a t interval assumes a mean near normal.",
        "steps": (
            Step(
                symbol="SE",
                meaning="Standard error of the weighted mean",
                formula="SE = √(Σ w²·s²/n)",
                inputs=(
                    Quantity("s meadow", "standard deviation in the meadow", 19.6824, "mg/kg"),
                    Quantity("s yard", "standard deviation in the yard", 76.3658, "mg/kg"),
                ),
                unrounded=13.043,
                rounded=13.0,
                unit="mg/kg",
                source="Cochran 1977, Sampling Techniques, ch. 5",
            ),
        ),
        "changes": (),
        "returns": make_returns(),
        "sentences": ("The site mean of lead is 62.5 mg/kg; 95 % interval 29.15 to 95.86.",),
    }
    parts.update(changes)
    return Estimate(**parts)  # type: ignore[arg-type]
