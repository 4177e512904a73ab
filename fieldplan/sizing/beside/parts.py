"""More places, more increments or a better laboratory: what the parts of sigma say."""

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from fieldplan.base.working import Quantity, Step
from fieldplan.lab.model import PartSpread, SplitSpread
from fieldplan.lab.parts import ANALYSIS, PLACES, SAMPLING, TOGETHER
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.model import Amount, Finding, Size
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.words import counted, figure, listed, percent, with_unit

TOPIC = "parts"
SAID_FROM = 5
"""Duplicated places from which a pilot that happens to have duplicates is spoken of unasked."""
FEW = 8
"""Duplicated places that are usually asked for (common practice, no source)."""

MOST_NAMED = 4
"""Strata named in one sentence; more are counted."""

SEARLE = "Searle 1971, Linear Models, ch. 11 (nested analysis of variance; from memory)"
MLS = (
    "Ting and others 1990, Journal of Statistical Computation and Simulation 35:135 "
    "(intervals; from memory)"
)
WORDS = {
    PLACES: "the differences from place to place",
    SAMPLING: "sampling at a place",
    ANALYSIS: "the laboratory",
    TOGETHER: "sampling and the laboratory together",
}
LIST_NOTE = "The list's own correction is taken for every part, as in the number of results."
PAYS = {
    SAMPLING: "more increments in each jar pay most",
    ANALYSIS: "a better laboratory, or a second analysis, pays most",
    TOGETHER: "a second sample at each place pays most",
    "": "laboratory duplicates would tell whether more increments or a better laboratory pays most",
}
TWICE = {
    SAMPLING: "twice the increments in each jar",
    ANALYSIS: "a second analysis of each jar",
    TOGETHER: "a second sample at each place",
}


@dataclass(frozen=True)
class Change:
    """One way to lower the standard error: what it halves, what is left, what it costs."""

    part: str
    standard_error: float
    cost: float | None


def finding(asked: Asked, size: Size) -> Finding | None:
    """Say which part of sigma is worth an effort.

    Parameters
    ----------
    asked : Asked
    size : Size

    Returns
    -------
    Finding or None
        None where nothing tells the parts, or too few duplicates to speak of unasked.
    """
    splits = _splits(asked)
    error = size.standard_error
    if not splits or not error or size.number_from == "census":
        return None
    duplicated = splits[0].duplicated or 0
    if not splits[0].typed and asked.question.increments == 1 and duplicated < SAID_FROM:
        return None
    shares = _shares(asked, size, splits)
    if not shares:
        return None
    changes = tuple(_changes(asked, size, shares))
    return Finding(
        topic=TOPIC,
        title="More places, more increments or a better laboratory",
        answer=_answer(asked, error, shares, changes),
        amounts=tuple(_amounts(asked, error, shares, changes)),
        columns=("Part of sigma", "SD", "90 % interval"),
        rows=tuple(_rows(splits)),
        steps=tuple(_steps(asked, error, changes)),
        assumptions=(
            _origin(splits),
            *_not_told(shares),
            *((LIST_NOTE,) if asked.population is not None else ()),
            "The parts add as variances: a place differs from its neighbours, a jar from the next "
            "jar of the same place, an analysis from the next of the same jar.",
            "A second analysis averages what differs from analysis to analysis; a bias of the "
            "laboratory is in none of these numbers.",
            "Intervals are those of normal results; where places have unlike numbers of samples "
            "those of the larger parts are approximate.",
        ),
        warnings=tuple(warnings(splits)),
        sources=(SEARLE, MLS),
    )


def _origin(splits: Sequence[SplitSpread]) -> str:
    """Name the sources of the parts."""
    named = {f"{part.part.replace('-', ' ')}: {part.source}" for s in splits for part in s.parts}
    return f"Where the parts come from: {'; '.join(sorted(named))}."


def _not_told(shares: Mapping[str, float]) -> tuple[str, ...]:
    """Say where sampling cannot be seen; it then stands with the differences between places."""
    if SAMPLING in shares or TOGETHER in shares:
        return ()
    return (
        "Nothing tells sampling at a place apart here: it stands within the differences from place "
        "to place.",
    )


def _splits(asked: Asked) -> list[SplitSpread]:
    """Give the parts of every stratum; none where one stratum's are not known."""
    if asked.spread is None:
        return []
    found = [asked.spread.split(entry.analyte, entry.stratum) for entry in asked.entries]
    return [] if None in found else [split for split in found if split is not None]


def _shares(asked: Asked, size: Size, splits: Sequence[SplitSpread]) -> dict[str, float]:
    """Give what each part brings to the variance of the mean, as shares of it."""
    k, one_place = asked.question.increments, asked.question.one_place
    terms: dict[str, float] = {}
    for entry, split in zip(size.strata, splits, strict=True):
        for part in split.parts:
            averaged = part.part == SAMPLING or (part.part == PLACES and not one_place)
            brought = entry.weight**2 * part.sigma**2 / entry.needed / (k if averaged else 1)
            terms[part.part] = terms.get(part.part, 0.0) + brought
    total = math.fsum(terms.values())
    return {part: term / total for part, term in terms.items()} if total > 0 else {}


def _changes(asked: Asked, size: Size, shares: dict[str, float]) -> Iterator[Change]:
    """Halve each part in turn; twice the places, as far as a list has them, halve everything.

    Of composites nobody knows what a second analysis of each jar would average where sampling and
    laboratory stand together, so nothing is said of that.
    """
    prices, k, n = asked.question.prices, asked.question.increments, size.needed
    increment = asked.campaign.cost.per_increment if asked.campaign.cost else 0.0
    error = size.standard_error or 0.0
    spread_out = k > 1 and not asked.question.one_place
    for part, share in shares.items():
        if part == TOGETHER and k > 1:
            continue
        halved = share if part != PLACES else 1.0
        if part == SAMPLING and spread_out:
            halved += shares.get(PLACES, 0.0)  # each further increment lies at a place of its own
        cost = None
        if prices is not None:
            each = {
                PLACES: prices.of_a_visit + prices.of_a_result + (k * increment if k > 1 else 0.0),
                SAMPLING: k * increment,
                ANALYSIS: prices.per_analysis,
                TOGETHER: prices.of_a_result,
            }[part]
            cost = n * each if each > 0 else None
        left = error * math.sqrt(1 - halved / 2)
        if part == PLACES and asked.population is not None:
            left = Precision(asked.question).standard_error(_twice_of_list(asked, size))
        yield Change(part, left, cost)


def _twice_of_list(asked: Asked, size: Size) -> list[int]:
    """Double the units of a list, up to all of them."""
    pairs = zip(size.strata, asked.question.parts, strict=True)
    return [min(2 * entry.needed, part.population or 2 * entry.needed) for entry, part in pairs]


def _best(error: float, shares: dict[str, float], changes: Sequence[Change]) -> tuple[str, bool]:
    """Name the part that pays most: per money where all prices are known, else by its share."""
    priced = [change for change in changes if change.cost is not None]
    if len(priced) == len(shares):
        gains = {c.part: (error**2 - c.standard_error**2) / (c.cost or 1.0) for c in priced}
        return max(gains, key=lambda part: gains[part]), True
    return max(shares, key=lambda part: shares[part]), False


def _answer(asked: Asked, error: float, shares: dict[str, float], changes: Sequence[Change]) -> str:
    best, by_money = _best(error, shares, changes)
    told = listed([f"{percent(share)} from {WORDS[part]}" for part, share in shares.items()])
    for_money = " for the money" if by_money else ""
    ordered = sorted(changes, key=lambda change: change.part != best)
    options = [f"{_twice(asked, c.part)} to {figure(c.standard_error)}" for c in ordered]
    now = with_unit(figure(error), asked.question.unit)
    return (
        f"Of the variance of the mean {told.replace(' from', ' comes from', 1)}: "
        f"{_pays(asked, best)}{for_money}. The standard error of {now} would fall with "
        f"{listed(options)}."
    )


def _pays(asked: Asked, part: str) -> str:
    if part == TOGETHER and asked.question.increments > 1:
        return PAYS[""]
    return f"more {asked.question.taken}s pay most" if part == PLACES else PAYS[part]


def _twice(asked: Asked, part: str) -> str:
    if part == PLACES and asked.population is not None:
        return "twice the units, or all of them"
    if part == PLACES:
        return f"twice the {asked.question.taken}s"
    if part == SAMPLING and asked.question.increments == 1:
        return "a second increment in each jar"
    return TWICE[part]


def _amounts(
    asked: Asked, error: float, shares: dict[str, float], changes: Sequence[Change]
) -> Iterator[Amount]:
    unit = asked.question.unit
    for part, share in shares.items():
        name = part.replace("-", "_").replace(" ", "_")
        yield Amount(f"share_{name}", f"Share of the variance from {WORDS[part]}", share)
    yield Amount("standard_error", "Standard error as planned", error, unit)
    currency = asked.question.prices.currency if asked.question.prices else ""
    for change in changes:
        name = change.part.replace("-", "_").replace(" ", "_")
        words = _twice(asked, change.part)
        yield Amount(f"error_{name}", f"Standard error with {words}", change.standard_error, unit)
        if change.cost is not None:
            yield Amount(f"cost_{name}", f"What {words} costs", change.cost, currency)


def _rows(splits: Sequence[SplitSpread]) -> Iterator[tuple[str, ...]]:
    for split in splits:
        where = f" in {split.stratum}" if len(splits) > 1 else ""
        for part in split.parts:
            name = part.part.replace("-", " ") + where
            yield name, figure(part.sigma), _interval(part)


def _interval(part: PartSpread) -> str:
    if part.low is None or part.high is None:
        return "not known"
    return f"{figure(part.low)} to {figure(part.high)}"


def _steps(asked: Asked, error: float, changes: Sequence[Change]) -> Iterator[Step]:
    unit = asked.question.unit
    for change in changes:
        if change.part == PLACES and asked.population is not None:
            continue  # the list's correction moves with n; the number above shows that formula
        fallen = 2 * (1 - (change.standard_error / error) ** 2)
        yield Step(
            symbol="SE'",
            meaning=f"Standard error with {_twice(asked, change.part)}",
            formula="SE' = SE · √(1 − p / 2)",
            inputs=(
                Quantity("SE", "standard error as planned", error, unit),
                Quantity("p", "share of the variance of the mean that is halved", fallen),
            ),
            unrounded=change.standard_error,
            rounded=change.standard_error,
            unit=unit,
            source="variances of independent parts add",
        )


def warnings(splits: Sequence[SplitSpread]) -> Iterator[str]:
    """Say where few duplicates, or negative estimates, stand behind the parts."""
    duplicated = splits[0].duplicated
    if duplicated is not None and duplicated < FEW:
        yield (
            f"Only {counted(duplicated, 'location')} with a second sample "
            f"{'stands' if duplicated == 1 else 'stand'} behind the parts; {FEW} or more are usual "
            "(common practice, no source), and the intervals are wide."
        )
    cut: dict[str, list[str]] = {}
    for split in splits:
        for part in split.parts:
            if part.cut_at_zero:
                cut.setdefault(part.part, []).append(split.stratum)
    for name, strata in cut.items():
        where = ""
        if name == PLACES and len(splits) > 1:
            where = (
                f" in {listed(strata) if len(strata) <= MOST_NAMED else f'{len(strata)} strata'}"
            )
        yield (
            f"The part {name.replace('-', ' ')}{where} came out negative and is taken as 0: "
            "duplicates differ as much as what they stand for."
        )
