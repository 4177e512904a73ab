"""Taking the results in two stages: what to do after the first, and what that costs."""

from dataclasses import dataclass

from fieldplan.base.working import Quantity, Step
from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.counting import plain_counts
from fieldplan.sizing.model import Amount, Finding, Size
from fieldplan.sizing.words import counted, figure, percent, with_unit
from fieldplan.stats.intervals import IntervalKind, t_quantile
from fieldplan.stats.two_stage import Outlook, resize_outlook, stein_outlook, stein_total

TOPIC = "two-stages"
STEIN = "Stein 1945, Annals of Mathematical Statistics 16:243 (from memory)"
FIRST_SHARE = 0.6
"""Of the plain number: where the campaign names no first stage."""

SKEWED = (
    "After a look on the way a Student t interval holds less often than stated where results are "
    "skewed: in simulated campaigns 82 to 92 % for a nominal 95 % at a coefficient of variation "
    "of 1 (gamma), against 90 to 95 % with a number fixed beforehand. Decide for two stages, and "
    "where to look, before the first result is seen."
)

HEAVY = (
    "The averages of two stages take single results as normal, not with the heavy tails declared; "
    "with those they keep the half-width less often."
)


@dataclass(frozen=True)
class _Target:
    sigma: float
    half_width: float
    confidence: float
    kind: IntervalKind
    assurance: float


def finding(asked: Asked, size: Size) -> Finding | None:
    """Say what two stages would cost and keep, for a half-width without strata.

    Parameters
    ----------
    asked : Asked
    size : Size

    Returns
    -------
    Finding or None
        None without a half-width target, with strata, for a list, for a typed number, and where
        the rules fix another interval than Student's t.
    """
    question = asked.question
    width = question.target_half_width
    if asked.objective.question != "mean" or width is None or size.number_from != "target":
        return None
    if question.widened or len(question.parts) > 1 or question.total_population is not None:
        return None
    part = question.parts[0]
    target = _Target(
        part.sigma, width, question.confidence, question.interval, question.assurance or 0.8
    )
    plain = sum(plain_counts(question))
    first = asked.objective.first_stage or max(2, round(FIRST_SHARE * plain))
    resized = resize_outlook(
        target.sigma, width, first=first, assurance=target.assurance,
        confidence=target.confidence, kind=target.kind,
    )  # fmt: skip
    stein = stein_outlook(
        target.sigma, width, first=first, confidence=target.confidence, kind=target.kind
    )
    return _finding(asked, size, target, plain=plain, looks=(first, resized, stein))


def _finding(
    asked: Asked, size: Size, target: _Target, *, plain: int, looks: tuple[int, Outlook, Outlook]
) -> Finding:
    first, resized, stein = looks
    steps, more = _pilot_as_first(asked, target)
    return Finding(
        topic=TOPIC,
        title="Two stages instead of one",
        answer=_answer(size, first, resized, stein) + more,
        amounts=(
            Amount("first_stage", "Results of the first stage", first, "results"),
            Amount("resized_results", "Results on average, one re-size", resized.results),
            Amount("resized_chance", "Chance that one re-size keeps the target", resized.chance),
            Amount("stein_results", "Results on average, Stein's two stages", stein.results),
        ),
        columns=("How the number is found", "Results", "Keeps the half-width", "Sigma taken as"),
        rows=_rows(size, plain, resized, stein),
        steps=steps,
        assumptions=(
            "Averages and chances take single results as normal and sigma as exactly right; the "
            "first stage tells how right it is, and that is what the second stage follows.",
            "After a re-size the t interval takes all results. After Stein's rule it takes the "
            "first stage's standard deviation and degrees of freedom, with the mean of all.",
        ),
        warnings=(SKEWED, *((HEAVY,) if asked.question.heavy_tails else ())),
        sources=(STEIN, "re-size by predictive F, derived here; see docs/sizing/mean.md"),
    )


def _answer(size: Size, first: int, resized: Outlook, stein: Outlook) -> str:
    fixed = f"{size.needed} fixed beforehand"
    return (
        f"If {counted(first, 'result')} came back before the rest is taken and the number was then "
        f"set anew once, {resized.results:.0f} results on average would keep the half-width in "
        f"{percent(resized.chance)} of campaigns, in place of {fixed}; Stein's two stages keep it "
        f"in every one with {stein.results:.0f} on average."
    )


def _rows(size: Size, plain: int, resized: Outlook, stein: Outlook) -> tuple[tuple[str, ...], ...]:
    def kept(chance: float | None) -> str:
        return "not known" if chance is None else percent(chance)

    known, right = "known from a pilot", "exactly right"
    rows = [("plain formula, fixed", f"{plain}", kept(size.chance_plain), known)]
    if size.needed != plain:
        rows.append(("at the assurance, fixed", f"{size.needed}", kept(size.chance_needed), known))
    rows.append(("one re-size", f"{resized.results:.0f} on average", kept(resized.chance), right))
    rows.append(("Stein's two stages", f"{stein.results:.0f} on average", "100 %", right))
    return tuple(rows)


def _pilot_as_first(asked: Asked, target: _Target) -> tuple[tuple[Step, ...], str]:
    """Count Stein's total where the pilot itself is the first stage."""
    part, unit = asked.question.parts[0], asked.question.unit
    if part.results is None:
        return (), ""
    total = stein_total(
        part.sigma, target.half_width, first=part.results, confidence=target.confidence,
        kind=target.kind,
    )  # fmt: skip
    t = t_quantile(part.results - 1, confidence=target.confidence, kind=target.kind)
    step = Step(
        symbol="N",
        meaning="Results in all by Stein's rule, the pilot counted as the first stage",
        formula="N = the larger of n0 and (t · s / h)², t at n0 − 1 degrees of freedom",
        inputs=(
            Quantity("n0", "results of the pilot", part.results, "results"),
            Quantity("t", f"Student quantile at {part.results - 1}", t),
            Quantity("s", "standard deviation of the pilot", part.sigma, unit),
            Quantity("h", "target half-width", target.half_width, unit),
        ),
        unrounded=(t * part.sigma / target.half_width) ** 2,
        rounded=float(total),
        unit="results",
        source=STEIN,
    )
    more = total - part.results
    reach = with_unit(figure(target.half_width), unit)
    words = (
        f" Were the {part.results} pilot results drawn at random from this population, they could "
        f"be the first stage: {more} more, and the mean of all {total} ± {reach}."
    )
    return (step,), words
