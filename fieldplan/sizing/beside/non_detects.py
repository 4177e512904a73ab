"""How many results will be non-detects, and what they leave of the mean."""

import math
from collections.abc import Sequence

from fieldplan.base.working import Quantity, Step
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.beside.near_normal import MEANS
from fieldplan.sizing.model import Amount, Finding, Size
from fieldplan.sizing.non_detects import (
    Forecast,
    forecast,
    pilot_share,
    reporting_limit,
    rough_share,
)
from fieldplan.sizing.question import Question
from fieldplan.sizing.visits import as_single
from fieldplan.sizing.words import percent, typed, typed_percent, with_unit
from fieldplan.stats.censored_choice import choose_method
from fieldplan.stats.censored_fit import FEWEST_DETECTS
from fieldplan.stats.censoring_forecast import (
    MOST_CENSORED,
    chance_of_bounds_only,
    chance_of_few,
    detects_wanted,
    information_kept,
    n_against_bounds_only,
    share_not_ruled_out,
)

MATTERS = 0.10
"""Below this expected share of non-detects nothing is said."""

UNSURE = 0.05
"""Above this chance of bounds only, it is said as a warning."""

COLUMNS = (
    "If the site is",
    "Below the limit",
    "Times as wide",
    "Fewer than 3 detects",
    "Only bounds left",
)
SOURCES = (
    "Cohen 1959, Technometrics 1:217 (from memory)",
    "Clopper & Pearson 1934, Biometrika 26:404 (from memory)",
    "binomial distribution",
)


def finding(asked: Asked, size: Size) -> Finding | None:
    """Forecast non-detects where many are to be expected.

    Parameters
    ----------
    asked : Asked
    size : Size

    Returns
    -------
    Finding or None
        None where no limit or no mean is known, or under every model fewer than a tenth of the
        results are expected below the limit.
    """
    asked = as_single(asked)
    question = asked.question
    counts = [entry.needed for entry in size.strata]
    limit = reporting_limit(asked)
    asks_mean = asked.objective.question in MEANS and asked.sigma_known
    if limit is None or not asks_mean or min(counts) < 2 or question.takes_all(tuple(counts)):
        return None
    if rough_share(asked, limit) < MATTERS:
        return None
    forecasts = forecast(asked, counts, limit)
    if not forecasts or max(one.share for one in forecasts) < MATTERS:
        return None
    seen = pilot_share(asked)
    return Finding(
        topic="non-detects",
        title="Results below the reporting limit",
        answer=_answer(question, counts, limit, forecasts),
        amounts=_amounts(counts, forecasts, seen),
        columns=COLUMNS,
        rows=tuple(_row(counts, one) for one in forecasts),
        steps=_steps(question, counts, limit, forecasts),
        assumptions=(*_assumptions(asked, limit), *_rule(asked, counts, forecasts)),
        warnings=_warnings(counts, forecasts, seen),
        sources=SOURCES,
    )


def _range(values: Sequence[str]) -> str:
    """Write one value, or the two ends of several."""
    low, high = values[0], values[-1]
    return low if low == high else f"{low} to {high}"


def _answer(
    question: Question, counts: Sequence[int], limit: float, forecasts: Sequence[Forecast]
) -> str:
    total = sum(counts)
    shares = sorted(one.share for one in forecasts)
    many = _range([f"{total * share:.0f}" for share in shares])
    widths = _range([f"{width:.2g}" for width in sorted(one.wider for one in forecasts)])
    ends = percent(shares[0]), percent(shares[-1])
    how = _range([ends[0].removesuffix(" %"), ends[1].removesuffix(" %")])
    far = {
        "upper-limit": f"the upper limit lies {widths} times as far above the mean as it would",
        "lower-limit": f"the lower limit lies {widths} times as far below the mean as it would",
    }.get(question.interval, f"the mean's interval is {widths} times as wide as it would be")
    return (
        f"Of {total} results about {many} ({how} %) are expected below the reporting limit of "
        f"{with_unit(typed(limit), question.unit)}. With them anywhere from 0 to that, "
        f"{far} if all were detected."
    )


def _amounts(
    counts: Sequence[int], forecasts: Sequence[Forecast], seen: tuple[int, int] | None
) -> tuple[Amount, ...]:
    total = sum(counts)
    shares = [one.share for one in forecasts]
    amounts = [
        Amount("share_below_low", "Expected share below the limit, least", min(shares)),
        Amount("share_below_high", "Expected share below the limit, most", max(shares)),
    ]
    if seen is not None and seen[0]:
        low, high = share_not_ruled_out(*seen)
        amounts += [
            Amount("pilot_share", "Share of non-detects in the pilot", seen[0] / seen[1]),
            Amount("pilot_share_low", "Share that the pilot does not rule out, least (90 %)", low),
            Amount("pilot_share_high", "The same, most", high),
        ]
    worst = max(shares)
    lognormal = next((one for one in forecasts if one.model == "lognormal"), None)
    if lognormal is not None:
        kept = _kept(counts, lognormal)
        amounts += [
            Amount("worth", "Results that a lognormal fit makes of them", total * kept, "results"),
            Amount("wider_error", "Its standard error, times that without a limit", kept**-0.5),
        ]
    return (
        *amounts,
        Amount("fewer_than_3", "Chance of fewer than 3 detects, at most",
               round(chance_of_few(total, worst), 6)),
        Amount("bounds_only", "Chance that only bounds are left, at most",
               round(chance_of_bounds_only(total, worst), 6)),
        Amount("n_against_bounds", "Results from which on that chance is 5 % or less",
               n_against_bounds_only(worst)),
    )  # fmt: skip


def _kept(counts: Sequence[int], lognormal: Forecast) -> float:
    """Give the information kept over the parts, weighed by their results."""
    total = sum(counts)
    return math.fsum(
        count * information_kept(min(part.below, 0.999), part.cv) / total
        for count, part in zip(counts, lognormal.parts, strict=True)
    )


def _row(counts: Sequence[int], one: Forecast) -> tuple[str, ...]:
    total = sum(counts)
    return (
        one.model,
        percent(one.share),
        f"{one.wider:.2f}",
        percent(chance_of_few(total, one.share)),
        percent(chance_of_bounds_only(total, one.share)),
    )


def _warnings(
    counts: Sequence[int],
    forecasts: Sequence[Forecast],
    seen: tuple[int, int] | None,
) -> tuple[str, ...]:
    """Say when no mean will be left, and whether more results would help."""
    total, worst = sum(counts), max(one.share for one in forecasts)
    chance = chance_of_bounds_only(total, worst)
    lines = []
    if chance > UNSURE:
        enough = n_against_bounds_only(worst)
        help_ = (
            "more results do not change that, a method with a lower limit would."
            if enough is None
            else f"from {enough} results on that chance is {typed_percent(UNSURE)} or less."
        )
        lines.append(
            f"With a chance of up to {percent(chance)} fewer than {detects_wanted(total)} of "
            f"{total} results are detects. Fewer than {FEWEST_DETECTS} detects, or more than "
            f"{typed_percent(MOST_CENSORED)} non-detects, leave only bounds: no mean should be "
            f"claimed then; {help_}"
        )
    if seen is not None and seen[0] and share_not_ruled_out(*seen)[1] > worst + MATTERS:
        low, high = share_not_ruled_out(*seen)
        lines.append(
            f"{seen[0]} non-detects in {seen[1]} pilot results do not rule out a share of "
            f"{percent(low)} to {percent(high)} (90 %)."
        )
    return tuple(lines)


def _steps(
    question: Question, counts: Sequence[int], limit: float, forecasts: Sequence[Forecast]
) -> tuple[Step, ...]:
    """Show share and width for the model that expects most non-detects."""
    one = max(forecasts, key=lambda forecast: forecast.share)
    unit, total = question.unit, sum(counts)
    inputs = [Quantity("L", "reporting limit", limit, unit)]
    for part, found in zip(question.parts, one.parts, strict=True):
        inputs += [
            Quantity(f"mean {part.name}", f"of the {one.model}", found.mean, unit),
            Quantity(f"CV {part.name}", f"of the {one.model}", found.cv),
        ]
    return (
        Step(
            symbol="p",
            meaning=f"Share of results expected below the limit, {one.model}",
            formula="p = Σ n·F(L) / Σ n",
            inputs=tuple(inputs),
            unrounded=one.share,
            rounded=round(one.share, 3),
            source=SOURCES[0],
        ),
        Step(
            symbol="width",
            meaning="Width from non-detects at 0 to the limit, over that without a limit",
            formula="(gap + q·SE at 0 + q·SE at L) / (2·q·SE); a limit alone: its own side",
            inputs=(Quantity("gap", "mean at the limit less mean at 0", one.gap, unit),),
            unrounded=one.wider,
            rounded=round(one.wider, 2),
            source="bounds, derived here",
        ),
        _chance_step(total, one.share),
    )


def _chance_step(total: int, share: float) -> Step:
    """Show the chance that too few results are detects."""
    chance = chance_of_bounds_only(total, share)
    return Step(
        symbol="P",
        meaning="Chance that only bounds of the mean are left",
        formula="P(fewer detects than max(3, 20 % of n)), binomial(n, 1 − p)",
        inputs=(Quantity("n", "results", total), Quantity("p", "share below the limit", share)),
        unrounded=chance,
        rounded=round(chance, 3),
        source=f"{SOURCES[2]}; 3 and 20 % are house rules",
    )


def _rule(asked: Asked, counts: Sequence[int], forecasts: Sequence[Forecast]) -> tuple[str, ...]:
    """Say what the rules of the campaign make of so many non-detects, where not bounds."""
    rules, total = asked.campaign.rules, sum(counts)
    if rules.non_detects == "bounds":
        return ()
    if rules.non_detects != "by-share":
        return (
            f"The rules fix non_detects = {rules.non_detects} for the answer; times as wide is for "
            "the bounds, which stand beside it.",
        )
    together = total if len(counts) > 1 else None
    chosen = {
        choose_method(
            min(counts),
            round(one.share * min(counts)),
            shape=rules.declared_shape,
            together=together,
        ).method: None
        for one in forecasts
    }
    return (
        f"The rules choose by share: with so many results and the expected non-detects that comes "
        f"to {' or '.join(chosen)}; times as wide is for the bounds.",
    )


def _assumptions(asked: Asked, limit: float) -> tuple[str, ...]:
    lines = [
        "Lognormal, gamma and normal populations are fitted to the pilot by maximum likelihood, "
        "each non-detect as a result below its limit; without non-detects in it, or without "
        "results at hand, they take the mean and the standard deviation that sizing uses. A "
        "normal that would reach below 0 is left out.",
        "A fit that uses the shape gains what bounds lose only if that shape is the true one.",
    ]
    if asked.analyte.reporting_limit is None:
        lines.append(
            f"The limit of {with_unit(typed(limit), asked.question.unit)} is the pilot's largest; "
            "the campaign file names none."
        )
    if len(asked.question.parts) > 1:
        lines.append("Chances take the results of all strata as one sample of the common share.")
    return tuple(lines)
