"""Strata of lines: by a column of their own file, or by polygons that cut them."""

from collections.abc import Sequence
from itertools import combinations

from fieldplan.base.errors import FrameError
from fieldplan.base.units import length_in_words, significant
from fieldplan.frame.cutting import joined
from fieldplan.frame.ground import FrameFiles, Ground
from fieldplan.frame.intervals import Intervals, shared, united, without
from fieldplan.frame.layer import raise_all
from fieldplan.frame.network import Course, spans_within
from fieldplan.frame.tiling import GAP_LIMIT, SLIVER_SHARE, by_name, column_of

Stretches = dict[int, Intervals]
"""Stretches by the number of their branch, from 0."""

SHORT_MM = 100
"""Gaps and overlaps shorter than this are drawing noise."""


def length_of(stretches: Stretches) -> float:
    """Sum stretches over all branches, in metres."""
    return sum(high - low for spans in stretches.values() for low, high in spans) / 1000


def strata_of(
    files: FrameFiles, ground: Ground, found: Sequence[Course]
) -> tuple[dict[str, Stretches], Stretches, Ground]:
    """Share the branches among strata.

    Parameters
    ----------
    files : FrameFiles
        Where ``strata`` stands, if it does.
    ground : Ground
    found : sequence of Course

    Returns
    -------
    strata : dict of str to Stretches
        ``{"site": …}`` where neither file names any.
    gaps : Stretches
        What no stratum covers and therefore leaves the population.
    ground : Ground
        With the notes of what was settled.

    Raises
    ------
    FrameError
        Strata elsewhere, overlaps above 0.01 % of the lines or gaps above 0.5 %.
    """
    if not files.table.strata:
        strata: dict[str, Stretches] = {}
        for at, course in enumerate(found):
            for piece, span in course.pieces:
                own = strata.setdefault(piece.stratum or "site", {})
                own[at] = united([*own.get(at, ()), span])
        parts, gaps = _settled(strata, found, file=str(files.table.line_file))
        return parts, gaps, ground
    overlay = files.open(files.table.strata)
    column = column_of(overlay.layer, files.table.stratum_column)
    features, notes = ground.polygons(overlay, stratum_column=column)
    ground = ground.noting(
        *overlay.layer.notes, *overlay.shift.notes, *notes, source=overlay.shift.source
    )
    drawn = by_name(overlay.layer, features, column)
    ground.check_near(overlay, joined(list(drawn.values()), overlay.layer.name))
    strata = {
        name: {at: united(spans_within(course, shape)) for at, course in enumerate(found)}
        for name, shape in drawn.items()
    }
    raise_all(
        f"{overlay.layer.name}: no line runs through stratum {name!r}; correct it, or leave it out."
        for name, stretches in strata.items()
        if length_of(stretches) == 0
    )
    parts, gaps = _settled(strata, found, file=overlay.layer.name)
    return parts, gaps, ground


def _settled(
    strata: dict[str, Stretches], found: Sequence[Course], *, file: str
) -> tuple[dict[str, Stretches], Stretches]:
    """Refuse overlaps and wide gaps; settle what is shorter than a hand."""
    whole = sum(course.millimetres for course in found) / 1000
    parts = {name: dict(stretches) for name, stretches in strata.items()}
    for first, second in combinations(sorted(parts), 2):
        both = {at: shared(span, parts[second].get(at, ())) for at, span in parts[first].items()}
        over = sum(high - low for spans in both.values() for low, high in spans
                   if high - low > SHORT_MM) / 1000  # fmt: skip
        if over > SLIVER_SHARE * whole:
            message = (
                f"{file}: strata {first!r} and {second!r} overlap on {length_in_words(over)} of "
                "the lines; a place can be in one stratum only. Draw one border between them."
            )
            raise FrameError(message)
        parts[second] = {at: without(span, both.get(at, ())) for at, span in parts[second].items()}
    gaps: Stretches = {}
    for at, course in enumerate(found):
        covered = united(span for part in parts.values() for span in part.get(at, ()))
        for low, high in without(((0, course.millimetres),), covered):
            if high - low > SHORT_MM or not covered:
                gaps[at] = (*gaps.get(at, ()), (low, high))
                continue
            beside = next(
                name
                for name, part in sorted(parts.items())
                if any(low in span or high in span for span in part.get(at, ()))
            )
            parts[beside][at] = united([*parts[beside].get(at, ()), (low, high)])
    missing = length_of(gaps)
    if missing > GAP_LIMIT * whole:
        message = (
            f"{file}: strata leave {length_in_words(missing)} "
            f"({significant(100 * missing / whole, 2)} %) of the lines uncovered, limit 0.5 %. "
            "Draw the strata up to the ends of the lines, or make the gap an exclusion with a "
            "reason."
        )
        raise FrameError(message)
    return parts, gaps
