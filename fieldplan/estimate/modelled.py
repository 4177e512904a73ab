"""The mean by the method that the rules fix for non-detects, stratum by stratum."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Literal, cast

from fieldplan.base.errors import DesignError
from fieldplan.campaign.model import Rules
from fieldplan.campaign.non_detect_checks import BOUNDS, BY_SHARE, HALF, MODELLED, SUITED
from fieldplan.design.model import MeanEstimate
from fieldplan.plan.model import Plan
from fieldplan.returns.model import LocationResult, Returns
from fieldplan.stats.censored import CensoredMean, CensoredMethod, censored_mean, weighted_mean
from fieldplan.stats.censored_choice import Choice, choose_method
from fieldplan.stats.censored_fit import FEWEST_DETECTS
from fieldplan.stats.censoring_forecast import MOST_CENSORED
from fieldplan.stats.intervals import IntervalKind

LARGE = 10
"""A list of so many units for each result is taken for a large population (house rule)."""


@dataclass(frozen=True)
class StratumSample:
    """The used results of one stratum: detects, limits of non-detects, and its weight.

    ``mixed`` counts locations whose value averages a detect and a non-detect: it stands among the
    detects, with the non-detect at half its limit.
    """

    stratum: str
    weight: float
    detects: tuple[float, ...]
    limits: tuple[float, ...]
    mixed: int = 0


@dataclass(frozen=True)
class Modelled:
    """The mean by a method for non-detects.

    Parameters
    ----------
    method : str
    reason : str
        Why ``by-share`` chose it; empty where the rules name the method.
    whole : CensoredMean
        Of the population.
    parts : tuple of CensoredMean
        One a stratum.
    samples : tuple of StratumSample
    kind : str
        Of the intervals.
    """

    method: CensoredMethod
    reason: str
    whole: CensoredMean
    parts: tuple[CensoredMean, ...]
    samples: tuple[StratumSample, ...]
    kind: IntervalKind

    def of_kind(self, kind: IntervalKind, confidence: float) -> CensoredMean:
        """Give the mean with another kind of interval."""
        if kind == self.kind:
            return self.whole
        return _whole(_parts(self.samples, self.method, confidence, kind), self.samples, kind)


def rule_in_force(rules: Rules, returns: Returns) -> Choice:
    """Give the method for non-detects that the rules come to, with the reason of a choice.

    Parameters
    ----------
    rules : Rules
    returns : Returns

    Returns
    -------
    Choice
        ``bounds`` where nothing was modelled: by the rule, for want of non-detects, or since the
        evidence speaks for no method. Of strata the worst decides.
    """
    everything = stratum_samples(returns)
    samples = [s for s in everything if s.limits]
    if rules.non_detects in (BOUNDS, HALF) or not samples:
        return Choice("bounds", "")
    if rules.non_detects in MODELLED:
        return Choice(cast(CensoredMethod, rules.non_detects), "")
    several = len(everything) > 1
    together = sum(len(s.detects) + len(s.limits) for s in everything) if several else None
    choices = [
        choose_method(
            len(s.detects) + len(s.limits),
            len(s.limits),
            shape=rules.declared_shape,
            together=together,
        )
        for s in samples
    ]
    pairs = zip(samples, choices, strict=True)
    worst = next(((s, c) for s, c in pairs if c.method == BOUNDS), (samples[0], choices[0]))
    where = f"in {worst[0].stratum} " if several else ""
    return Choice(worst[1].method, f"{where}{worst[1].reason}")


def stratum_samples(returns: Returns) -> tuple[StratumSample, ...]:
    """Part the used results of every stratum into detects and non-detects.

    Parameters
    ----------
    returns : Returns

    Returns
    -------
    tuple of StratumSample
        In the order in which strata come among the results, with weight 1.
    """
    strata: dict[str, list[LocationResult]] = {}
    for result in returns.results:
        if result.used:
            strata.setdefault(result.stratum, []).append(result)
    found = []
    for name, results in strata.items():
        below = [r for r in results if not r.detected and r.low <= 0]
        mixed = sum(not r.detected and r.low > 0 for r in results)
        detects = tuple(r.half for r in results if r.detected or r.low > 0)
        found.append(StratumSample(name, 1.0, detects, tuple(r.high for r in below), mixed))
    return tuple(found)


def modelled(plan: Plan, returns: Returns, rules: Rules) -> Modelled | None:
    """Estimate the mean by the method in force; None where bounds are all that is asked for.

    Parameters
    ----------
    plan : Plan
    returns : Returns
    rules : Rules

    Returns
    -------
    Modelled or None

    Raises
    ------
    DesignError
        The design has no evidence for a method, or a stratum has too few detects.
    """
    if rules.non_detects in (*MODELLED, BY_SHARE):
        _refuse_design(plan, returns, rules)
    _refuse_few(plan, returns, rules)
    choice = rule_in_force(rules, returns)
    if choice.method == BOUNDS:
        return None
    weights = {stratum.name: stratum.weight for stratum in plan.frame.strata}
    known = {sample.stratum: sample for sample in stratum_samples(returns)}
    samples = tuple(
        replace(known[name], weight=weight) for name, weight in weights.items() if name in known
    )
    method = cast(CensoredMethod, choice.method)
    parts = _parts(samples, method, rules.confidence, rules.interval)
    whole = _whole(parts, samples, rules.interval)
    return Modelled(method, choice.reason, whole, parts, samples, rules.interval)


def _parts(
    samples: Sequence[StratumSample],
    method: CensoredMethod,
    confidence: float,
    kind: IntervalKind,
) -> tuple[CensoredMean, ...]:
    found = []
    for sample in samples:
        try:
            one = censored_mean(
                sample.detects, sample.limits, method, confidence=confidence, kind=kind
            )
        except DesignError as fault:
            where = f"stratum {sample.stratum}: " if len(samples) > 1 else ""
            said = f"{where}{' '.join(fault.problems)} To see them run with --non-detects bounds."
            raise DesignError(said) from fault
        found.append(one)
    return tuple(found)


def _whole(
    parts: Sequence[CensoredMean], samples: Sequence[StratumSample], kind: IntervalKind
) -> CensoredMean:
    if len(parts) == 1:
        return parts[0]
    return weighted_mean(parts, [sample.weight for sample in samples], kind=kind)


def _refuse_design(plan: Plan, returns: Returns, rules: Rules) -> None:
    """Refuse what no simulation speaks of; where nothing is a non-detect nothing is asked."""
    if all(result.detected for result in returns.results if result.used):
        return
    design = plan.campaign.design[0]
    why = ""
    if design.layout not in SUITED:
        why = f"layout {design.layout} does not draw independent results of a stratum"
    elif design.takes_composites or design.ranking_set_size is not None:
        why = "its results are not of single random places"
    for stratum in plan.frame.strata:
        n = sum(r.used and r.stratum == stratum.name for r in returns.results)
        if stratum.count is not None and stratum.count < LARGE * n:
            why = (
                f"{n} of {stratum.count} units of {stratum.name} were measured, more than a tenth "
                "of the list"
            )
    if rules.mean_interval != "student-t":
        why = f"it brings its own interval, and {rules.mean_interval} another"
    if why:
        message = (
            f"non_detects = {rules.non_detects} was simulated for independent results of large "
            f"populations: {why}. Use bounds."
        )
        raise DesignError(message)


def _refuse_few(plan: Plan, returns: Returns, rules: Rules) -> None:
    """Refuse a choice by share, or half the limit, where only the bounds of a mean are left."""
    if rules.non_detects not in (BY_SHARE, HALF):
        return
    for sample in stratum_samples(returns):
        total = len(sample.detects) + len(sample.limits)
        few = len(set(sample.detects)) < FEWEST_DETECTS
        if sample.limits and (few or len(sample.limits) > MOST_CENSORED * total):
            where = f" of {sample.stratum}" if len(plan.frame.strata) > 1 else ""
            message = (
                f"{len(sample.limits)} of {total} results{where} are non-detects; a mean needs "
                f"{FEWEST_DETECTS} different detects and no more than {MOST_CENSORED:.0%} "
                "non-detects. What is left are its bounds: run again with --non-detects bounds."
            )
            raise DesignError(message)


def reported_mean(half: MeanEstimate, found: Modelled | None) -> MeanEstimate:
    """Put mean and standard error of the method in place of those at half.

    Parameters
    ----------
    half : MeanEstimate
        By the layout, non-detects at half their limit.
    found : Modelled or None

    Returns
    -------
    MeanEstimate
        Standard deviations of strata stay those at half, as planning has them; degrees of
        freedom are those of Student's quantile in each stratum, summed.
    """
    if found is None:
        return half
    means = {s.stratum: p.mean for s, p in zip(found.samples, found.parts, strict=True)}
    strata = tuple(replace(entry, mean=means[entry.stratum]) for entry in half.strata)
    return replace(
        half,
        mean=found.whole.mean,
        standard_error=found.whole.standard_error,
        degrees_of_freedom=float(sum(part.n - 1 for part in found.parts)),
        strata=strata,
        method=METHOD_SENTENCES[found.method],
    )


METHOD_SENTENCES: dict[CensoredMethod | Literal["substitute-half"], str] = {
    "kaplan-meier": "The mean is that of the product limit (Kaplan and Meier) with its order "
    "reversed for non-detects, its interval Student's.",
    "order-statistics": "Non-detects are filled in from a line through the logarithms of the "
    "ordered detects (regression on order statistics); the interval is Hall's for skewed results, "
    "its low end the lower of two, by that line and by one through the values.",
    "lognormal-likelihood": "A lognormal shape is fitted by maximum likelihood, a non-detect as a "
    "result below its limit; the interval is read from the profile likelihood.",
    "gamma-likelihood": "A gamma shape is fitted by maximum likelihood, a non-detect as a "
    "result below its limit; the interval is read from the profile likelihood.",
    "normal-likelihood": "A normal shape is fitted by maximum likelihood, a non-detect as a "
    "result below its limit; the interval is read from the profile likelihood.",
}
