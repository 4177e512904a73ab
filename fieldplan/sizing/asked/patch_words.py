"""Sentences about a patch: what it is, what the chance covers, and what it does not."""

from fieldplan.design.patch_chance import PatchChance
from fieldplan.sizing.asked.patch_ground import DOUBTFUL_SHARE, PatchQuestion
from fieldplan.sizing.words import figure, percent, typed, typed_percent

SOURCES = (
    "Singer & Wickman 1969, Mineral Industries Experiment Station, special publication 1-69 (from "
    "memory)",
    "Gilbert 1987, Statistical Methods for Environmental Pollution Monitoring, ch. 10 (from "
    "memory)",
)
FINE_M = 10.0
"""A grid finer than this is set out with tape; common practice, no source."""
_PLACES = {
    "square-grid": "on a square grid",
    "triangular-grid": "on a triangular grid",
    "simple-random": "at random places",
    "stratified": "at random places in each stratum",
    "balanced-list": "on a balanced list, counted as random places, which hit no oftener",
    "compact-strata": "in compact cells, counted as random places, which hit no oftener",
}


def patch_words(question: PatchQuestion) -> str:
    """Name the patch with its size and direction."""
    patch = question.patch
    if patch.length == patch.width:
        return f"a round patch {typed(patch.length)} m across"
    size = f"an oval patch of {typed(patch.length)} m by {typed(patch.width)} m"
    if question.direction is None:
        return f"{size}, whichever way it points"
    return f"{size} that points {typed(question.direction)}° from north"


def place_words(question: PatchQuestion) -> str:
    """Say how the locations lie."""
    return _PLACES[question.design.layout]


def off_words(question: PatchQuestion) -> str:
    """Say that the chance allows for the receiver; empty where nobody said how good it is."""
    if not question.error_m:
        return ""
    return f", even with every location up to {typed(question.error_m)} m off"


def ground_words(question: PatchQuestion) -> str:
    """Say over what the chance is averaged."""
    start = "start of the grid" if question.lattice else "draw of the places"
    ground = "the area" if question.asked.frame is None else "the population"
    return f"over every {start} and every place in {ground} where its centre may be"


def refusal(question: PatchQuestion) -> str:
    """Say why no chance is claimed for this receiver."""
    width, error = question.patch.width, question.error_m
    return (
        f"No chance of hitting a patch {typed(width)} m wide is claimed while position_accuracy_m "
        f"is {typed(error)}: that is more than a quarter of its width. Find the places with a "
        f"receiver good to {typed(DOUBTFUL_SHARE * width)} m, or by tape from control points, or "
        "ask about a larger patch."
    )


def too_many_lost(question: PatchQuestion) -> str:
    """Say why losses keep a grid on endless ground below the probability."""
    lost = typed_percent(max(question.losses))
    return (
        f"With {lost} of the grid's locations lost, bare numbers count no more than the share that "
        f"is left, and a probability of {typed(question.table.probability)} is out of reach; name "
        "a campaign file with its boundary, which counts patches that several locations hit."
    )


def beyond(question: PatchQuestion, most: int) -> str:
    """Say that no number of locations is given."""
    return (
        f"{asked_for(question)} for {patch_words(question)} takes more than {most} locations; give "
        "a larger patch or a lower probability."
    )


def warnings(question: PatchQuestion, spacing: float | None) -> tuple[str, ...]:
    """Warn where a grid is finer than a receiver can set out."""
    if spacing is None:
        return ()
    rest = "set the grid out with tape and offset from two control points."
    if question.error_m > spacing / 4:
        return (
            f"The receiver finds a place within {typed(question.error_m)} m, more than a quarter "
            f"of the grid's spacing of {figure(spacing)} m: {rest}",
        )
    if spacing < FINE_M and not question.error_m:
        return (
            f"The grid's spacing is {figure(spacing)} m, and nobody said how well the receiver "
            f"finds a place (position_accuracy_m): unless it is good to {figure(spacing / 4)} m, "
            f"{rest}",
        )
    return ()


def assumptions(question: PatchQuestion, found: PatchChance) -> tuple[str, ...]:
    """Say what the chance rests on and what it does not cover."""
    lines = [_centre(question), _sight(), _start(question, found), _these_places()]
    if question.error_m:
        lines.append(_error(question))
    if question.lattice and any(question.losses):
        lines.append(_loss(question))
    if question.design.minimum_spacing_m:
        lines.append(
            f"The minimum spacing of {typed(question.design.minimum_spacing_m)} m is not counted; "
            "places kept apart hit a little more often."
        )
    return tuple(lines)


def _centre(question: PatchQuestion) -> str:
    if question.asked.frame is None:
        return (
            "Endless ground: no edge cuts the patch. On a true site the edges take some of the "
            "chance; a campaign file with its boundary counts them."
        )
    return (
        "The patch is one whole ellipse whose centre may be anywhere in the population, all places "
        "equally likely. A patch centred outside, or on ground that was taken out, is not covered, "
        "even where part of it reaches in."
    )


def _sight() -> str:
    return (
        "One location inside is taken to show the patch. A crew or a laboratory that may miss it "
        "there lowers the chance; a patch whose rim is fainter is in effect a smaller one."
    )


def _start(question: PatchQuestion, found: PatchChance) -> str:
    if question.lattice is None:
        return "The places are independent of each other and of the patch."
    line = (
        "The grid starts at random and lies in a random direction, so it does not matter where a "
        "patch points. If somebody turns the grid by hand along the site, a long patch that "
        "follows its rows, or runs across them, is hit less or more often than stated."
    )
    if found.starts:
        line += (
            f" Averaged over {found.starts} starts; the chance is good to "
            f"±{percent_points(2 * found.standard_error)}."
        )
    if not found.exact_count:
        line += (
            " Too few starts put exactly this number inside, so starts with any number are "
            "averaged."
        )
    return line


def percent_points(share: float) -> str:
    """Write a small share in percentage points.

    Examples
    --------
    >>> percent_points(0.0042)
    '0.4 percentage points'
    """
    return f"{100 * share:.1g} percentage points"


def _these_places() -> str:
    return (
        "It is the chance before the places are drawn. The very places drawn have a score of their "
        "own, above or below it; choosing the draw with the best score makes it no random draw."
    )


def _error(question: PatchQuestion) -> str:
    error = typed(question.error_m)
    patch = question.patch.scaled(question.reach)
    return (
        f"With each location anywhere within {error} m of its plan, however the errors hang "
        f"together, a hit is certain only where the plan lies in the inner {figure(patch.length)} "
        f"m by {figure(patch.width)} m of the patch; the chance counts those hits alone. The true "
        "chance is higher: an error that all locations share leaves it as it was but for the "
        "edges, and so do errors at random places; on a grid, errors that differ from place to "
        "place loosen the pattern and lower it, but never below the one stated. "
        f"The record is off as well: the patch lies within {error} m of where the record puts a "
        "hit. An error above that breaks the promise."
    )


def _loss(question: PatchQuestion) -> str:
    if question.asked.frame is None:
        return "Of hits on the grid no more than the share that one location keeps is counted."
    return (
        "Locations expected to yield nothing are dropped from the grid at random; losses that "
        "cluster, as under a building, leave a hole that this does not count."
    )


def asked_for(question: PatchQuestion) -> str:
    """Say the probability asked for."""
    return percent(question.table.probability)
