"""Where the mean falls at each number of results, and how often its interval misses it."""

import math
from collections.abc import Sequence
from typing import Literal

from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.beside.near_normal import (
    SOURCES,
    TEXTBOOK,
    Judged,
    held_sentence,
    interval_name,
    judge,
    worst,
)
from fieldplan.sizing.model import Amount, Finding, Picture, Series, Size
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Question
from fieldplan.sizing.shapes import (
    Misses,
    SiteShape,
    equivalent,
    misses,
    part_mean,
    pilot_values,
    places,
    sampled,
    scaled,
    short_list,
    within_lists,
)
from fieldplan.sizing.words import counted, figure, percent, typed_percent, with_unit
from fieldplan.stats.distributions import normal_quantile
from fieldplan.stats.mean_expansion import expanded_quantile
from fieldplan.stats.mean_limits import largest_cv, n_within_a_point
from fieldplan.stats.mean_shape import POINT, Shape
from fieldplan.stats.mean_simulation import BAND, TOO_MANY, simulate_coverage
from fieldplan.stats.rare_part import missed_altogether, share_met, units_missed
from fieldplan.stats.shape import Family

Style = Literal["line", "dashes", "points", "hollow", "band-low", "band-high"]
Row = tuple[float, tuple[float, float], Misses, float]

RARE = (0.01, 0.02, 0.05, 0.10, 0.20)
"""Shares of a site for which the chance to miss them altogether is shown."""

RARE_UNITS = (1, 2, 3, 5)
"""The same for units of a list."""

FEWEST, MOST, DRAWS = 2_000, 20_000, 400_000
"""Campaigns drawn for each point of the band, and values: its ends are good to about 2 %."""

SHOWS_ALL = 500
"""A pilot of more results is taken to show its tail."""

WIDEST = 3.0
"""A longer tail than so many times the coefficient of variation seen is not spelled out."""

HALL = "Hall 1992, Journal of the Royal Statistical Society B 54:221 (from memory)"

HALL_MOST = 500
"""Results up to which the corrected interval is simulated beside Student's."""

STEPS = (0.25, 0.4, 0.6, 1.0, 1.6, 2.5, 4.0)
"""Numbers of results on the picture, as multiples of the planned one."""


def finding(asked: Asked, size: Size) -> Finding | None:
    """Draw the band of the mean against n, with the misses of its interval in numbers.

    Parameters
    ----------
    asked : Asked
    size : Size

    Returns
    -------
    Finding or None
        None where ``near_normal`` can judge no shape, and where the rules fix another interval
        than Student's t, which the band's numbers are of.
    """
    if asked.question.widened:
        return None
    counts = [entry.needed for entry in size.strata]
    judged = judge(asked, counts)
    if not judged:
        return None
    picture = _picture(asked, counts, worst(judged)[0])
    band = _band_sentence(asked, picture, sum(counts))
    kept = worst(judged)[1].held >= asked.question.confidence - POINT
    hidden = _hidden(asked, counts)
    return Finding(
        topic="mean-band",
        title="Where the mean falls at this number of results",
        answer=f"{held_sentence(asked, counts, judged)} {band}" if kept else band,
        amounts=_amounts(asked, counts, judged),
        columns=("A rare part", "missed by all results, per 100 campaigns"),
        rows=_rare_rows(asked.question, counts),
        assumptions=(
            f"The band is that of {worst(judged)[0].name}, the shape that serves the interval "
            f"worst of those that fit; {FEWEST} to {MOST} simulated campaigns a number.",
            places(asked.question, counts),
        ),
        warnings=(*hidden, *_rare_sentences(asked.question, sum(counts))),
        sources=(*SOURCES, HALL),
        picture=picture,
    )


def _amounts(asked: Asked, counts: Sequence[int], judged: Sequence[Judged]) -> tuple[Amount, ...]:
    """Simulate the corrected interval, and n for shapes with zeros, which no table holds."""
    question, amounts = asked.question, []
    if sum(counts) <= HALL_MOST:
        amounts += _corrected(question, counts, judged)
    if question.total_population is None:
        met = "Smallest part of the site that is met at least once in 95 of 100 campaigns"
        amounts.append(Amount("share_met", met, share_met(sum(counts))))
    if len(counts) == 1 and not short_list(question, counts):
        amounts += [
            Amount(
                f"n_within_a_point_{shape.parts[0].family}_with_zeros",
                f"Results for one point short at most, {shape.name}",
                n_within_a_point(
                    shape.parts[0], confidence=question.confidence, kind=question.interval
                ),
            )
            for shape, _ in judged
            if shape.zeros
        ]
    return tuple(amounts)


def _corrected(question: Question, counts: Sequence[int], judged: Sequence[Judged]) -> list[Amount]:
    """Simulate what an interval corrected for skewness would hold, under the worst shape."""
    found = [
        simulate_coverage(
            sampled(question, shape, counts),
            confidence=question.confidence,
            kind=question.interval,
            campaigns=max(FEWEST, min(10_000, DRAWS // sum(counts))),
        )
        for shape, _ in judged
    ]
    low = min(found, key=lambda one: one.held_by_hall)
    error = math.sqrt(low.held_by_hall * (1 - low.held_by_hall) / low.campaigns)
    return [
        Amount("held_by_hall", "Held by the closed form corrected for skewness, worst shape",
               low.held_by_hall),
        Amount("simulation_error", "Standard error of that share, from simulating", error),
    ]  # fmt: skip


def _hidden(asked: Asked, counts: Sequence[int]) -> tuple[str, ...]:
    """Say what the interval is worth if the pilot hid as long a tail as one in ten would."""
    question = asked.question
    if len(question.parts) > 1:
        return ()
    wider = _wider(asked)
    if not wider:
        return ()
    seen = question.parts[0].sigma / part_mean(question, question.parts[0])
    found = []
    for family, largest in wider:
        cv = min(largest, WIDEST * seen)
        held = misses(question, SiteShape(family, (Shape(family, cv),)), counts).held
        found.append((held, cv, largest > cv, family))
    held, cv, capped, family = min(found)
    how = "which they do not rule out" if capped else "which about one such pilot in ten would hide"
    return (
        f"{question.parts[0].results} results cannot show a long tail: with a CV of "
        f"{figure(cv, 2)} ({family}) instead of {figure(seen, 2)}, {how}, the "
        f"{interval_name(question)} would hold the mean in about {100 * held:.0f} of 100 "
        "campaigns.",
    )


def _wider(asked: Asked) -> list[tuple[Family, float]]:
    """Give the largest CV that the pilot does not rule out, by family.

    From the likelihood of its results where they are at hand, else from the CV alone.
    """
    from fieldplan.stats.censored_fit import FEWEST_DETECTS, fit_censored

    part = asked.question.parts[0]
    mean = part_mean(asked.question, part)
    if part.results is None or not 2 <= part.results <= SHOWS_ALL or not mean > 0:
        return []
    families: tuple[Family, ...] = ("gamma", "lognormal")
    entry = asked.entries[0] if asked.entries else None
    if entry is None or not entry.values:
        seen = part.sigma / mean
        return [(name, largest_cv(name, seen, results=part.results)) for name in families]
    detects, limits = pilot_values(entry)
    if len(set(detects)) < FEWEST_DETECTS or min(detects) <= 0:
        return []
    return [(name, fit_censored(detects, limits, name).cv_high) for name in families]


def _band(question: Question, counts: Sequence[int], shape: SiteShape) -> list[Row]:
    """Simulate the band, and judge the misses, from a quarter to four times the planned n."""
    total, least = sum(counts), 2 * len(counts)
    numbers = {max(least, round(total * step)) for step in STEPS}
    numbers |= {TEXTBOOK} if least <= TEXTBOOK and min(numbers) < TEXTBOOK < max(numbers) else set()
    rows: list[Row] = []
    for number in sorted(numbers):
        at = within_lists(question, list(counts) if number == total else scaled(counts, number))
        if at is None:
            continue
        reach, band = _normal_reach(question, at, BAND), _expanded_band(question, shape, at)
        if number <= TOO_MANY:
            band = simulate_coverage(
                sampled(question, shape, at),
                confidence=question.confidence,
                kind=question.interval,
                campaigns=max(FEWEST, min(MOST, DRAWS // number)),
            ).band
        rows.append((float(sum(at)), band, misses(question, shape, at), reach))
    return rows


def _expanded_band(
    question: Question, shape: SiteShape, counts: Sequence[int]
) -> tuple[float, float]:
    """Give the band by the first term of the expansion of a mean."""
    n, lean = equivalent(question, shape, counts)
    error = Precision(question).standard_error(counts)
    low, high = (expanded_quantile(level, lean / math.sqrt(n)) for level in (0.05, 0.95))
    return low * error, high * error


def _picture(asked: Asked, counts: Sequence[int], shape: SiteShape) -> Picture:
    """Set the band and the misses as data of one picture."""
    question, total = asked.question, sum(counts)
    centre, rows = _centre(question), _band(question, counts, shape)
    return Picture(
        kind="mean-band",
        caption=(
            f"Nine campaigns in ten put the mean inside the band ({shape.name}, the worst of the "
            "shapes that fit); dashes show the band of a normal mean. Below it: in how many of "
            f"100 campaigns the {interval_name(question)} misses the true mean."
        ),
        alternative=_alternative(rows, question),
        x_label="number of results, n",
        y_label=_label(question, centre),
        series=_series(rows, centre),
        marks=((f"{total} planned", float(total)),),
        levels=(("true mean", centre),),
    )


def _series(rows: Sequence[Row], centre: float) -> tuple[Series, ...]:
    """Set band, normal band and misses; a side that cannot miss is left out."""
    n = tuple(row[0] for row in rows)

    def series(label: str, style: Style, values: Sequence[float]) -> Series:
        return Series(label, n, tuple(values), style)

    sides = (
        ("above", [100 * row[2].too_low for row in rows]),
        ("below", [100 * row[2].too_high for row in rows]),
    )
    return (
        series("5 %", "band-low", [centre + row[1][0] for row in rows]),
        series("95 %", "band-high", [centre + row[1][1] for row in rows]),
        series("normal, low", "dashes", [centre - row[3] for row in rows]),
        series("normal, high", "dashes", [centre + row[3] for row in rows]),
        *(series(f"true mean {side}", "points", values) for side, values in sides if any(values)),
    )


def _centre(question: Question) -> float:
    """Give the mean to expect over the parts; 0 where one is unknown, and errors are drawn."""
    means = [part_mean(question, part) for part in question.parts]
    if not all(mean > 0 for mean in means):
        return 0.0
    return math.fsum(part.weight * m for part, m in zip(question.parts, means, strict=True))


def _label(question: Question, centre: float) -> str:
    what = "mean" if centre else "error of the mean"
    name = f"{what} of {question.analyte}" if question.analyte else what
    return f"{name} ({question.unit})" if question.unit else name


def _normal_reach(question: Question, counts: Sequence[int], share: float) -> float:
    return normal_quantile((1 + share) / 2) * Precision(question).standard_error(counts)


def _alternative(rows: Sequence[Row], question: Question) -> str:
    told = "; ".join(
        f"{n:.0f} results: {100 * missed.too_low:.1f} above and {100 * missed.too_high:.1f} below"
        for n, _, missed, _ in rows
    )
    return (
        f"Misses of the {interval_name(question)} per 100 campaigns, true mean above it and below "
        f"it, against the number of results. {told}."
    )


def _band_sentence(asked: Asked, picture: Picture, total: int) -> str:
    """Say between what ends nine campaigns in ten put the mean."""
    low, high = picture.series[0], picture.series[1]
    place = low.x.index(float(total))
    centre = picture.levels[0][1]
    dust = 1e-6 * (high.y[place] - low.y[place])
    reached = (line.y[place] for line in (low, high))
    ends = [figure(0.0 if abs(end) < dust else end).replace("-", "−") for end in reached]
    where = f"the truth is {with_unit(figure(centre), asked.question.unit)}"
    if not centre:
        return (
            f"Nine campaigns in ten come out with an error of "
            f"{with_unit(f'{ends[0]} to {ends[1]}', asked.question.unit)}."
        )
    return f"Nine campaigns in ten put the mean between {ends[0]} and {ends[1]} where {where}."


def _rare_sentences(question: Question, total: int) -> tuple[str, ...]:
    """Say how large a part may be missed altogether; of a list another sentence says it."""
    if question.total_population is not None:
        return ()
    rare = share_met(total)
    return (
        f"A part of the site smaller than {percent(rare)} of it is missed by all {total} results "
        f"in more than {typed_percent(0.05)} of campaigns, (1 − p)^{total}: if it is much higher "
        "than the rest, no interval from these results knows of it.",
    )


def _rare_rows(question: Question, counts: Sequence[int]) -> tuple[tuple[str, ...], ...]:
    """Set the chance to miss parts of a site, or units of a list, altogether."""
    total, population = sum(counts), question.total_population
    if population is None:
        return tuple(
            (f"{typed_percent(share)} of the site", f"{100 * missed_altogether(total, share):.1f}")
            for share in RARE
        )
    return tuple(
        (
            f"{counted(units, 'unit')} of {population}",
            f"{100 * units_missed(total, units, population=population):.1f}",
        )
        for units in RARE_UNITS
        if units < population
    )
