"""The cells of compact strata as thin lines on paper and on the screen."""

from typing import Any

import folium
import shapely
from shapely.geometry.base import BaseGeometry

from fieldplan.design.area import Ground as Polygon
from fieldplan.design.compact_strata import cut_stratum
from fieldplan.packet.exchange.outlines import in_degrees
from fieldplan.packet.maps.ground import Ground, grounds
from fieldplan.plan.model import Plan

CELL_LINE = "#6a7580"
_STYLE: dict[str, Any] = {
    "facecolor": "none", "edgecolor": CELL_LINE, "linewidth": 0.45, "zorder": 1.5,
}  # fmt: skip
_SCREEN = {"color": CELL_LINE, "weight": 1, "fill": False, "interactive": False,
           "className": "cell-line"}  # fmt: skip


def cells_of(plan: Plan) -> tuple[BaseGeometry, ...]:
    """Give the cells of a plan as polygons in site metres.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    tuple of geometry
        By stratum, then by number; empty where the layout cut none.
    """
    random = [place for place in plan.locations.of_class("random") if place.cell]
    per_cell = plan.campaign.design[0].per_cell
    found: list[BaseGeometry] = []
    for stratum in plan.frame.strata:
        planned = sum(place.stratum == stratum.name for place in random)
        if planned and stratum.geometry is not None:
            ground = Polygon(stratum.name, stratum.geometry)
            found += cut_stratum(ground, planned, per_cell=per_cell).polygons
    return tuple(found)


def cell_words(plan: Plan) -> str:
    """Say what a cell is, for a legend."""
    each = "one location" if plan.campaign.design[0].per_cell == 1 else "two locations"
    return f"cell of nearly equal area, {each} in each"


def plan_grounds(plan: Plan) -> tuple[Ground, ...]:
    """List what is drawn under the marks of a plan, cells among them.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    tuple of Ground
        The outline comes last.
    """
    layers, cells = grounds(plan.frame), cells_of(plan)
    if not cells:
        return layers
    lines = Ground(shapely.GeometryCollection(_parts(cells)), cell_words(plan), "cell", _STYLE)
    return (*layers[:-1], lines, layers[-1])


def cell_layer(plan: Plan, title: str) -> folium.GeoJson:
    """Make the layer of the map for a screen.

    Parameters
    ----------
    plan : Plan
    title : str
        Of the layer, as HTML.

    Returns
    -------
    folium.GeoJson
    """
    features = [
        {
            "type": "Feature",
            "id": f"cell-{number}",
            "geometry": shapely.geometry.mapping(in_degrees(plan.frame.projection, cell)),
            "properties": {"style": _SCREEN},
        }
        for number, cell in enumerate(_parts(cells_of(plan)), start=1)
    ]
    collection = {"type": "FeatureCollection", "features": features}
    return folium.GeoJson(collection, name=title, smooth_factor=0.3)


def _parts(cells: tuple[BaseGeometry, ...]) -> list[BaseGeometry]:
    """Take cells apart that holes and gaps cut in several."""
    return [part for part in shapely.get_parts(list(cells)) if part.geom_type == "Polygon"]
