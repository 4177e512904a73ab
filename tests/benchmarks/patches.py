"""Time what is asked about patches, beside throwing points and beside draws scored one by one."""

from dataclasses import dataclass

import numpy as np
import shapely
from scipy.spatial import KDTree

from fieldplan.design.layouts import layout_named
from fieldplan.design.model import StratumCount
from fieldplan.design.patch import share_hit
from fieldplan.design.simulate import uniform_points
from fieldplan.frame.model import Frame
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.asked.smallest_patch import count
from fieldplan.sizing.question import Part, Question
from fieldplan.stats.patches import Patch, spacing_for_chance
from tests.benchmarks.placement import blob, seconds
from tests.unit.design.sites import area_frame
from tests.unit.sizing.asked.test_smallest_patch import campaign_with

OVAL = Patch(40.0, 20.0)
CIRCLE = Patch(20.0, 20.0)
LAYOUTS = ("simple-random", "square-grid", "triangular-grid")


@dataclass(frozen=True)
class Row:
    """Shortest seconds of one piece of work, and of the peer that answers the same."""

    name: str
    aim_s: float
    seconds: float
    peer: str
    peer_s: float


def site() -> Frame:
    """A lobed site of 1,000 corners with a hole, about 3 ha."""
    return area_frame(site=blob(1_000).difference(shapely.box(-20, -30, 30, 10)))


def scored() -> Row:
    """Score 200 locations by union; the peer throws a million centres, good to 0.0005 only."""
    ground = site().strata[0].geometry
    rng = np.random.default_rng(20261102)
    places = uniform_points(ground, 200, rng)

    def thrown() -> float:
        centres = uniform_points(ground, 1_000_000, rng)
        near = KDTree(places).query(centres, distance_upper_bound=CIRCLE.length / 2)[0]
        return float(np.isfinite(near).mean())

    return Row(
        "score of 200 given locations, to 0.0001",
        0.030,
        seconds(lambda: share_hit(places, ground, CIRCLE), 5),
        "a million thrown centres",
        seconds(thrown, 2),
    )


def sized(layout: str) -> Row:
    """Find n on the true population; the peer scores 200 draws of the layout for one n alone."""
    frame = site()
    asked = _asked(frame, layout)
    needed = sum(count(asked).needed)

    def drawn() -> float:
        scores = []
        for seed in range(200):
            asks = [StratumCount("site", needed, 0)]
            places = layout_named(layout).draw(frame, asks, seed=seed, design="main").places
            points = np.array([(place.easting, place.northing) for place in places])
            scores.append(share_hit(points, frame.boundary, OVAL, direction=40.0))
        return float(np.mean(scores))

    return Row(
        f"n for 95 %, {layout}, n = {needed}",
        0.5,
        seconds(lambda: count(asked), 3),
        "200 draws scored, one n",
        seconds(drawn, 1),
    )


def _asked(frame: Frame, layout: str) -> Asked:
    campaign = campaign_with(layout, length_m=40.0, width_m=20.0, probability=0.95)
    question = Question((Part("site", 1.0, 20.0),), "standard_error", 1.0)
    area = frame.population.net
    return Asked(campaign, campaign.objective[0], question, frame, None, area, sigma_known=False)


def closed_form() -> Row:
    """Find a grid's spacing on endless ground; the peer throws one million origins at one."""
    rng = np.random.default_rng(20261102)

    def thrown() -> float:
        shift, turn = rng.random((1_000_000, 2)) - 0.5, rng.uniform(0, np.pi, 1_000_000)
        along = shift[:, 0] * np.cos(turn) + shift[:, 1] * np.sin(turn)
        across = shift[:, 1] * np.cos(turn) - shift[:, 0] * np.sin(turn)
        return float((along**2 * 4 + across**2 * 16 <= 1).mean())

    return Row(
        "spacing of a grid for 90 %, endless ground",
        0.020,
        seconds(lambda: spacing_for_chance(OVAL, 0.9), 5),
        "a million thrown origins, one spacing",
        seconds(thrown, 3),
    )


def measured() -> list[Row]:
    """Time all."""
    return [closed_form(), scored(), *(sized(layout) for layout in LAYOUTS)]
