"""A plan along lines, made without reading a file: two strata, four starts, an alternate each."""

from dataclasses import replace
from functools import cache

import shapely

from fieldplan.campaign.model import DesignTable, Draw, FrameTable, Sigma
from fieldplan.design.locating import locate
from fieldplan.design.model import StratumCount
from fieldplan.frame.model import ExcludedArea
from fieldplan.plan.model import Plan
from fieldplan.samples import assign
from fieldplan.sizing import size
from tests import factories
from tests.unit.design.line_sites import MAIN, line_frame


@cache
def line_plan() -> Plan:
    """Eight locations below, six above, evenly spaced."""
    campaign = factories.make_campaign(
        frame=(
            FrameTable(
                kind="line", line_file="river.geojson", unit_is="one grab sample", inset_m=5.0
            ),
        ),
        design=(DesignTable(layout="even-spacing", starts=3, floor=6, alternates=1, locations=14),),
        sigma=(
            Sigma(analyte="lead", stratum="lower", value=18.0, source="ASSUMED"),
            Sigma(analyte="lead", stratum="upper", value=45.0, source="ASSUMED"),
        ),
        draw=Draw(seed=4),
    )
    whole = line_frame()
    gap = shapely.LineString([(240, 320), (270, 360)])
    assert gap.length == 50.0
    assert MAIN.length == 1100.0
    frame = replace(whole, excluded=(ExcludedArea("weir", "weir.kml", 25.0, 0.0, gap, 50.0),))
    spread = replace(
        factories.make_spread(),
        strata=tuple(
            replace(entry, stratum=name)
            for entry, name in zip(factories.make_spread().strata, ("lower", "upper"), strict=True)
        ),
    )
    many = size(campaign, spread, frame)
    counts = [StratumCount(s.stratum, s.planned, s.alternates) for s in many.strata]
    locations = locate(campaign, frame, counts)
    return factories.make_plan(
        campaign=campaign,
        frame=frame,
        spread=spread,
        size=many,
        locations=locations,
        samples=assign(campaign, locations, many, revision=1),
    )
