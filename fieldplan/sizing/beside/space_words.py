"""Sentences, working and picture of what a layout spread over the site would save."""

import math
from typing import TYPE_CHECKING

import numpy as np

from fieldplan.base.working import Quantity, Step
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.model import Picture, Series, Size
from fieldplan.sizing.words import counted, figure, percent, with_unit
from fieldplan.stats.field_integrals import correlation_in_square
from fieldplan.stats.spread_layouts import standard_errors

if TYPE_CHECKING:
    from fieldplan.sizing.beside.space import Predicted

LIKELIHOOD = "Diggle & Ribeiro 2007, Model-based Geostatistics, ch. 5 and 7 (from memory)"
MATERN = "Matérn 1960, Spatial Variation, ch. 5 (from memory)"
MATHERON = "Matheron 1971, The Theory of Regionalized Variables, ch. 3 (from memory)"

LAYOUTS = {
    "compact-strata": "one place in each of n compact parts",
    "local-pivotal": "places that keep apart (local pivotal)",
    "square-grid": "grid with random start (approximate)",
}
ASSUMPTIONS = (
    "The pilot's places were not chosen for what they would show, and its results come from a "
    "field that is alike all over the site, near normal and without a strong slope.",
    "126 curves of likeness with distance are weighed by how likely they make the pilot: two "
    "shapes, nine ranges, seven shares without structure. No single curve is fitted.",
    "A spread layout is compared as one over the whole site; strata of the plan are not used.",
    "A grid is taken half-way between compact parts and cells known at their centre, a measured "
    "rule; its prediction came out 2 to 8 % too large in the middle.",
)


def small_words(places: int) -> str:
    """Say that a pilot is too small to weigh curves."""
    return (
        f"The pilot's {places} places are too few to say what a layout spread over the site would "
        "save; it takes 20, better 30. n is for random places."
    )


def leaning_words(skewness: float, places: int) -> str:
    """Say that a pilot leans too much for the prediction."""
    return (
        f"What a layout spread over the site would save is not said: the pilot's {places} results "
        f"lean (skewness {skewness:.2f}), and on such ground predicted standard errors were too "
        "small by a fifth in the middle, by half in one case of ten. n is for random places."
    )


def saving_words(asked: Asked, size: Size, spread: "Predicted") -> str:
    """Say how many places spread over the site would keep the same standard error."""
    error = with_unit(figure(spread.target), asked.question.unit)
    needed, sure = spread.needed("compact-strata"), spread.needed("compact-strata", sure=True)
    if needed is None or needed >= size.plain_n:
        return (
            f"Spreading places over the site would save nothing: results fade within "
            f"{figure(spread.field.typical_range, 2)} m, less than the distance between places."
        )
    planned = next((a.n for a in size.assured if abs(a.assurance - spread.assurance) < 1e-9), None)
    more = ""
    if planned is not None and sure is not None:
        more = f", and {sure} instead of {planned} with {percent(spread.assurance)} assurance"
    return (
        f"Results resemble each other up to about {figure(spread.field.typical_range, 2)} m. One "
        f"place in each of {counted(needed, 'compact part')} of the site would keep the standard "
        f"error of {error} that takes {size.plain_n} as planned{more}; n takes no credit for it."
    )


def spread_warnings(spread: "Predicted") -> tuple[str, ...]:
    """Say where the prediction is known to be weak."""
    lines = []
    places = spread.field.places
    if places < 30:
        lines.append(
            f"With {places} pilot places the predicted standard error was within 80 and 129 % of "
            "the truth in 8 of 10 simulated pilots; 30 are better."
        )
    if spread.slope > 0.4:
        lines.append(
            f"A straight slope across the site holds {percent(spread.slope)} of the pilot's "
            "variance. Compact parts catch it; what grids would do is not predicted here."
        )
    if not 0.85 <= spread.random_ratio <= 1.18:
        lines.append(
            f"By these curves random places would have {percent(spread.random_ratio)} of the "
            "standard error that the pilot's s gives; where the two differ, trust s."
        )
    return tuple(lines)


def prediction_steps(asked: Asked, spread: "Predicted", n: int) -> tuple[Step, ...]:
    """Show the most likely curve by its numbers, and the average over all."""
    field, unit = spread.field, asked.question.unit
    best = int(field.weights.argmax())
    side = math.sqrt(spread.area / n)
    shape, reach = field.shapes[best], float(field.ranges[best])
    nugget, variance = float(field.nuggets[best]), float(field.variances[best])
    inside = correlation_in_square(side, reach, shape=shape)
    error = math.sqrt(variance * (nugget + (1 - nugget) * (1 - inside)) / n)
    average = spread.standard_error("compact-strata", n)
    return (
        Step(
            symbol="SE1",
            meaning=f"Standard error of one place in each of {n} compact parts by the most likely "
            f"curve ({shape}, practical range {figure(reach)} m)",
            formula="SE1 = √(σ² (ν + (1 − ν)(1 − c)) / n)",
            inputs=(
                Quantity("σ²", "variance over all fields of this kind", variance, f"({unit})²"),
                Quantity("ν", "share of it without structure", nugget),
                Quantity("a", "side of a square of the part's area, √(A/n)", side, "m"),
                Quantity("c", "mean correlation of two places in that square", inside),
                Quantity("n", "places", n, "places"),
            ),
            unrounded=error,
            rounded=error,
            unit=unit,
            source=MATERN,
        ),
        Step(
            symbol="SE",
            meaning="The same averaged over all curves by their weights, on the log scale",
            formula="ln SE² = Σ w · ln SE²(curve)",
            inputs=(
                Quantity("k", "curves", len(field.weights), "curves"),
                Quantity("w", "weight of the most likely one", float(field.weights[best])),
            ),
            unrounded=average,
            rounded=average,
            unit=unit,
            source=LIKELIHOOD,
        ),
    )


def spread_picture(asked: Asked, size: Size, spread: "Predicted") -> Picture:
    """Draw the standard error against n, as planned and spread."""
    least, most = max(2, size.needed // 4), max(8, 2 * size.needed)
    counts = np.unique(np.geomspace(least, most, 14).astype(np.int64))
    strata = standard_errors(spread.field, counts, layout="compact-strata", area=spread.area)
    planned = (size.standard_error or 0.0) * np.sqrt(size.needed / counts)
    x = tuple(float(n) for n in counts)
    return Picture(
        kind="lines",
        caption="Standard error of the mean by the number of places: as planned, and one place in "
        "each of n compact parts.",
        alternative=f"Two falling lines; at {counts[-1]} places {figure(float(planned[-1]))} as "
        f"planned and {figure(float(strata[-1]))} spread.",
        x_label="places",
        y_label=f"standard error, {asked.question.unit}",
        series=(
            Series("as planned", x, tuple(planned.tolist())),
            Series("compact parts", x, tuple(strata.tolist()), style="dashes"),
        ),
        levels=(
            (f"target {with_unit(figure(spread.target), asked.question.unit)}", spread.target),
        ),
    )
