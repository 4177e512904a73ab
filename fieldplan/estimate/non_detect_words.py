"""What is said of non-detects: the method, its reason, what it holds, and the bounds beside it."""

from fieldplan.base.units import significant
from fieldplan.campaign.non_detect_checks import HALF
from fieldplan.estimate.means import Means
from fieldplan.estimate.modelled import METHOD_SENTENCES, Modelled
from fieldplan.lab.words import counted
from fieldplan.stats.censored import CensoredMethod
from fieldplan.stats.censored_choice import (
    FEWEST_IN_STRATUM,
    FEWEST_WITH_SHAPE,
    FEWEST_WITHOUT_SHAPE,
    MOST_RESULTS_WITHOUT_SHAPE,
    MOST_WITH_SHAPE,
    MOST_WITHOUT_SHAPE,
)
from fieldplan.stats.censored_fit import FEWEST_DETECTS
from fieldplan.stats.censoring_forecast import MOST_CENSORED

NAMES: dict[CensoredMethod, str] = {
    "kaplan-meier": "the product limit of Kaplan and Meier",
    "order-statistics": "regression on order statistics",
    "lognormal-likelihood": "maximum likelihood of a lognormal shape",
    "gamma-likelihood": "maximum likelihood of a gamma shape",
    "normal-likelihood": "maximum likelihood of a normal shape",
}

UPPER_HELD: dict[CensoredMethod, str] = {
    "order-statistics": "89 to 96 % from 30 results on, least where results are most skewed",
    "kaplan-meier": "90 % or more from 30 results on",
}


def method_sentence(means: Means) -> str:
    """Say by what the mean was found where non-detects do not simply stand at half.

    Parameters
    ----------
    means : Means

    Returns
    -------
    str
        Empty under bounds, and where nothing was a non-detect.
    """
    if not means.censored:
        return ""
    if means.rules.non_detects == HALF:
        return (
            f"As the rules declare, half the limit stands for {counted(means.censored, 'value')} "
            f"with a non-detect, of {means.half.n}. Nothing measured says that it is half: such a "
            "mean is off by an unknown amount, which its interval does not hold."
        )
    found = means.modelled
    if found is None:
        why = f"Non-detects stand as bounds: {means.reason}." if means.reason else ""
        return why or only_bounds(means)
    parts = [_by(found)]
    if found.whole.upper_bound:
        parts.append(
            "Non-detects lie below all detects, so that this mean is the largest that they "
            "leave open and no estimate; the low end has them at 0."
        )
    mixed = sum(sample.mixed for sample in found.samples)
    if mixed:
        parts.append(
            f"{counted(mixed, 'value')} that averages a detect with a non-detect stands among the "
            "detects, with half the limit in it."
            if mixed == 1
            else f"{mixed} values that average a detect with a non-detect stand among the "
            "detects, with half the limit in them."
        )
    return " ".join(parts)


def only_bounds(means: Means) -> str:
    """Say so where detects are too few for any mean, though the rule is to show bounds.

    Parameters
    ----------
    means : Means
        Under bounds, with non-detects.
    """
    n, detected = means.half.n, means.half.n - means.censored
    if detected >= FEWEST_DETECTS and means.censored <= MOST_CENSORED * n:
        return ""
    return (
        f"Detected without a non-detect behind them: {detected} of {n} values. No mean can be "
        "claimed from so few, only that it lies within the bounds."
    )


def _by(found: Modelled) -> str:
    why = f", chosen by share: {found.reason}" if found.reason else ", as the rules fix it"
    return (
        f"{found.whole.non_detects} of {found.whole.n} values are non-detects; the mean is by "
        f"{NAMES[found.method]}{why}."
    )


def held_sentence(means: Means) -> str:
    """Say what the interval of a method held in simulation, and where these results lie outside.

    Parameters
    ----------
    means : Means
        With a method in force.

    Returns
    -------
    str
    """
    found = means.modelled
    if found is None:
        return ""
    share = max(part.non_detects / part.n for part in found.parts)
    total, several = found.whole.n, len(found.parts) > 1
    fewest = min(part.n for part in found.parts if part.non_detects)
    held, most, least = _held(found.method)
    outside = []
    if share > most:
        outside.append(f"{100 * share:.0f} % of them are non-detects")
    if total < least:
        outside.append(f"there are {total} results")
    if several and fewest < FEWEST_IN_STRATUM:
        outside.append(f"a stratum has {fewest}")
    if found.method == "order-statistics" and total > MOST_RESULTS_WITHOUT_SHAPE:
        outside.append(f"{total} results make the interval narrower than a wrong shape allows")
    where = " in a stratum" if several and share > most else ""
    end = (
        f" NOT KEPT: that is for up to {100 * most:.0f} % non-detects and from {least} results "
        f"on, and here{where} {' and '.join(outside)}."
        if outside
        else ""
    )
    return f"{METHOD_SENTENCES[found.method]} {held}{_other_kinds(means)}{end}"


def _other_kinds(means: Means) -> str:
    """Say what limits on one side held, and what was not simulated."""
    rules, found = means.rules, means.modelled
    said = ""
    if found is not None and rules.interval == "upper-limit":
        said = f" A 95 % upper limit held it in {UPPER_HELD.get(found.method, 'about 94 to 95 %')}."
    elif rules.interval == "lower-limit":
        said = " Lower limits were not simulated by themselves."
    return said if rules.confidence == 0.95 else f"{said} No other confidence was simulated."


def _held(method: CensoredMethod) -> tuple[str, float, int]:
    """Give what was simulated for a method, up to which share and from how many results on."""
    if method == "order-statistics":
        held = (
            "In simulated samples of eight populations, lognormal, gamma, Weibull, mixed and "
            f"normal, a 95 % interval held the true mean in 92 to 98 % up to "
            f"{100 * MOST_WITHOUT_SHAPE:.0f} % non-detects and for {FEWEST_WITHOUT_SHAPE} to "
            f"{MOST_RESULTS_WITHOUT_SHAPE} results."
        )
        return held, MOST_WITHOUT_SHAPE, FEWEST_WITHOUT_SHAPE
    if method == "kaplan-meier":
        held = (
            "It makes no use of a shape. In simulated samples of 30 results a 95 % interval held "
            "the true mean in 91 % or more; with a limit below all detects, because it reaches "
            "from 0 to the limit."
        )
        return held, MOST_WITHOUT_SHAPE, FEWEST_WITHOUT_SHAPE
    shape = method.removesuffix("-likelihood")
    held = (
        f"On simulated {shape} populations a 95 % interval held the true mean in about 95 % up to "
        f"{100 * MOST_WITH_SHAPE:.0f} % non-detects and from {FEWEST_WITH_SHAPE} results on. On "
        "other shapes it can be off by far, and results below a limit cannot show their shape: "
        "what stands behind it is the declaration, not these results."
    )
    return held, MOST_WITH_SHAPE, FEWEST_WITH_SHAPE


def bounds_words(means: Means, unit: str, *, low: str, high: str) -> str:
    """Set the bounds beside the answer of a method.

    Parameters
    ----------
    means : Means
    unit : str
    low, high : str
        Intervals in words, with non-detects at 0 and at their limit.
    """
    return (
        f"Whatever the method, with non-detects at 0 the mean is {significant(means.low.mean)} "
        f"{unit} ({low}), at the limit {significant(means.high.mean)} {unit} ({high})."
    )
