"""Plans that are hard on files and maps: hostile text, far corners of the Earth, many places."""

from dataclasses import replace

from pyproj import Transformer

from fieldplan.campaign.model import PlanTable
from fieldplan.design.model import Location
from fieldplan.frame.model import ExcludedArea, Frame, SiteProjection, Stratum
from fieldplan.plan.model import Plan
from fieldplan.samples.model import Sample, Samples
from tests import factories

SCRIPT = "<script>alert(1)</script>"
FORMULA = '=HYPERLINK("http://example.org","x")'
HOSTILE_TEXTS = (
    SCRIPT,
    FORMULA,
    "]]> & \"quoted\" 'single'",
    "\u202egnp.exe\u2066 right to left",
    "+1+cmd|' /C calc'!A0",
    "-2+3;=1+1",
    "@SUM(1)",
    "\ttab\rreturn\nfeed",
    "bell\x07 null\x00 \ufffe",
    "</textarea></style>{{ 7*7 }}{% raw %}${1+1}`",
    "\u05e9\u05d3\u05d4 \u0645\u0631\u062c Grüne Wiese 草地",
)


def hostile_plan() -> Plan:
    """Give Quarry Field with hostile text wherever a person may type."""
    plan = factories.make_plan()
    first, second = HOSTILE_TEXTS[0], HOSTILE_TEXTS[1]
    rename = {"meadow": first, "yard": second}
    extra = tuple(
        ExcludedArea(text, "x.geojson", 0.0, 400.0, plan.frame.excluded[0].geometry)
        for text in HOSTILE_TEXTS
    )
    frame = replace(
        plan.frame,
        strata=tuple(replace(s, name=rename[s.name]) for s in plan.frame.strata),
        excluded=extra,
        targeted=tuple(
            replace(t, place_id=HOSTILE_TEXTS[2], reason=HOSTILE_TEXTS[4])
            for t in plan.frame.targeted
        ),
        sources=HOSTILE_TEXTS,
        notes=HOSTILE_TEXTS,
    )
    ids = {"TANK": HOSTILE_TEXTS[2], "QF-A-01": FORMULA, "QF-A-02": SCRIPT, "QF-A-03": "1E5"}
    places = tuple(
        replace(
            place,
            location_id=ids.get(place.location_id, place.location_id),
            stratum=rename[place.stratum],
            alternate_for=place.alternate_for and f"any in {rename[place.stratum]}",
        )
        for place in plan.locations.places
    )
    samples = tuple(
        replace(s, location_id=ids.get(s.location_id, s.location_id)) for s in plan.samples.samples
    )
    table = PlanTable(id="QF", title=" ".join(HOSTILE_TEXTS), site=SCRIPT, prepared_by=FORMULA)
    return replace(
        plan,
        campaign=factories.make_campaign(plan=table),
        frame=frame,
        locations=replace(plan.locations, places=places),
        samples=Samples(samples),
        issued_by=SCRIPT,
        issued_on=plan.made_on,
    )


def plan_at(latitude: float, longitude: float) -> Plan:
    """Give Quarry Field moved to another place on Earth, degrees by pyproj."""
    plan = factories.make_plan()
    projection = SiteProjection(latitude, longitude)
    back = Transformer.from_crs(projection.definition, "EPSG:4326", always_xy=True)

    def moved(place: Location) -> Location:
        east, north = back.transform(place.easting, place.northing)
        return replace(place, latitude=round(north, 7), longitude=round(east, 7))

    places = tuple(moved(place) for place in plan.locations.places)
    return replace(
        plan,
        frame=replace(plan.frame, projection=projection),
        locations=replace(plan.locations, places=places),
    )


def list_plan() -> Plan:
    """Give a plan of four wells of a list, ids that spreadsheets would spoil."""
    frame: Frame = factories.make_list_frame()
    ids = ("MAR-01", "007", "1E5", "2-3")
    units = tuple(
        replace(unit, unit_id=name) for unit, name in zip(frame.strata[0].units, ids, strict=False)
    )
    stratum = Stratum("site", 4.0, 1.0, None, units)
    places = tuple(
        Location(
            unit.unit_id, f"QW{number}", "random", "site", unit.easting, unit.northing,
            unit.latitude, unit.longitude, number, 1.0, 0.25,
        )
        for number, unit in enumerate(units, start=1)
    )  # fmt: skip
    samples = tuple(
        Sample(f"QF-{100 + n}", place.location_id, "field sample", "", ("lead",))
        for n, place in enumerate(places)
    )
    return factories.make_plan(
        frame=replace(frame, strata=(stratum,)),
        locations=replace(factories.make_locations(), places=places),
        samples=Samples(samples),
    )


def crowded_plan(count: int) -> Plan:
    """Give Quarry Field with ``count`` random places on a regular spread."""
    plan = factories.make_plan()
    back = Transformer.from_crs(plan.frame.projection.definition, "EPSG:4326", always_xy=True)
    places = []
    for number in range(count):
        easting = round(200 * (0.5 + number * 0.6180339887) % 200, 2)
        northing = round(120 * (number + 0.5) / count, 2)
        longitude, latitude = back.transform(easting, northing)
        places.append(
            Location(
                f"QF-A-{number:04d}", f"Q{number:04d}", "random", "meadow", easting, northing,
                round(latitude, 7), round(longitude, 7), number + 1, 0.001, 0.001,
            )
        )  # fmt: skip
    return replace(plan, locations=replace(plan.locations, places=tuple(places)))
