"""What a typed target means: as half-width, standard error, n, and the chance that n is enough."""

import os
from dataclasses import replace
from math import sqrt
from pathlib import Path
from typing import TYPE_CHECKING, NamedTuple

from fieldplan.base.errors import FieldplanError
from fieldplan.campaign.new import Answers, campaign_text

if TYPE_CHECKING:
    from fieldplan.lab.model import StratumSpread

CONFIDENCE = 0.95
SHOWN_ASSURANCE = 0.80


class KnownSigma(NamedTuple):
    """A standard deviation, the number of results behind it and their mean, as far as known."""

    value: float
    results: int | None
    mean: float | None
    words: str


def echo_target(answers: Answers, folder: Path) -> list[str]:
    """Say in sentences what a target asks for.

    Parameters
    ----------
    answers : Answers
        With a target; sigma or a pilot as far as known.
    folder : Path
        Where the pilot's path starts.
    """
    if answers.target_kind is None or answers.target is None:
        return []
    unit = answers.unit or "(unit not known yet)"
    if answers.target_kind == "budget":
        return ["'fieldplan size' will say how far off the mean is for that money."]
    try:
        sigma = _known_sigma(answers, folder)
        if sigma is None:
            return _without_sigma(answers, unit)
        return _with_sigma(answers, sigma, unit)
    except FieldplanError as fault:
        return ["The number of results cannot be said yet:", *fault.problems]


def _known_sigma(answers: Answers, folder: Path) -> KnownSigma | None:
    """Take sigma from the pilot or as typed."""
    if answers.pilot is not None:
        pilot = _pilot_spread(answers, folder)
        if pilot is None:
            return None
        words = f"the pilot's standard deviation of {pilot.sigma:.4g}"
        return KnownSigma(pilot.sigma, pilot.results, pilot.mean, words)
    if answers.sigma is None:
        return None
    words = f"a standard deviation of {answers.sigma:g}"
    return KnownSigma(answers.sigma, answers.from_results, answers.expected_mean, words)


def _pilot_spread(answers: Answers, folder: Path) -> "StratumSpread | None":
    """Read the pilot as one site; the frame is not needed for that."""
    from fieldplan.campaign.read import inspect_text
    from fieldplan.lab import read_lab
    from fieldplan.lab.pilot import measured_spread, pilot_locations

    if answers.pilot is None or answers.analyte is None or answers.unit is None:
        return None
    whole = replace(
        answers,
        plan_id="ECHO",
        title="echo",
        boundary="none",
        list_file=None,
        target_kind="standard_error",
        target=1.0,
        assurance="plain",
        chosen_by="nobody",
    )
    read = inspect_text(campaign_text(whole), folder / "campaign.toml").campaign
    if read is None:
        return None
    campaign = read.campaign
    analyte = campaign.deciding_analyte.id
    # The folder may not be there yet, so the system cannot follow ".." out of it.
    place = Path(os.path.normpath(folder.resolve() / answers.pilot))
    table = read_lab(place, campaign)
    places, _ = pilot_locations(table, analyte, duplicates=campaign.rules.duplicates)
    return measured_spread(places, analyte, "site")


def _without_sigma(answers: Answers, unit: str) -> list[str]:
    """Relate half-width and standard error while sigma is not known."""
    target = answers.target or 0.0
    later = "How many results that takes depends on sigma, which is not known yet."
    if answers.target_kind == "relative_half_width":
        return [
            f"The interval shall reach {target * 100:.3g} % of the mean to either side. {later}"
        ]
    if answers.target_kind == "standard_error":
        other = f"a half-width of about {2 * target:.3g} {unit}"
    else:
        other = f"a standard error of about {target / 2:.3g} {unit}"
    return [
        f"From about 30 results on that is {other} ({CONFIDENCE * 100:.0f} % interval). {later}"
    ]


def _with_sigma(answers: Answers, sigma: KnownSigma, unit: str) -> list[str]:
    """Say n, what it yields, and the chance that it is enough."""
    from fieldplan.stats.precision import half_width

    target, is_error = answers.target or 0.0, answers.target_kind == "standard_error"
    if answers.target_kind == "relative_half_width":
        if sigma.mean is None:
            return ["A share of the mean needs a mean; add expected_mean to the file."]
        target *= sigma.mean
    n = _smallest_n(sigma.value, target, is_error)
    width = half_width(sigma.value, n, confidence=CONFIDENCE)
    sentences = [
        f"With {sigma.words} {unit} that asks for {n} results: standard error "
        f"{sigma.value / sqrt(n):.3g} {unit}, half-width {width:.3g} {unit} "
        f"({CONFIDENCE * 100:.0f} % interval)."
    ]
    sentences.append(_chance(answers, sigma, target, n))
    if answers.list_file is not None:
        sentences.append("A short list needs fewer; 'fieldplan size' counts that in.")
    return sentences


def _smallest_n(sigma: float, target: float, is_error: bool) -> int:
    """Count results by the plain formula, at least 2."""
    from fieldplan.stats.precision import n_for_half_width, n_for_standard_error

    if is_error:
        return max(n_for_standard_error(sigma, target), 2)
    return n_for_half_width(sigma, target, confidence=CONFIDENCE)


def _chance(answers: Answers, sigma: KnownSigma, target: float, n: int) -> str:
    """Say the chance that n is enough, and n for an assurance."""
    from fieldplan.stats import assurance as assured

    if sigma.results is None or sigma.results < 2:
        return (
            "The chance that this is enough cannot be said without the number of results behind "
            "sigma; with sigma only estimated it is about one half."
        )
    predicted = sigma.value**2 / n
    wanted = SHOWN_ASSURANCE if answers.assurance in (None, "plain") else float(answers.assurance)
    if answers.target_kind == "standard_error":
        chance = assured.chance_of_variance(predicted, target**2, sigma.results - 1)
        more = assured.n_at_assurance(sigma.value, target, pilot_n=sigma.results, assurance=wanted)
    else:
        chance = assured.chance_of_half_width(
            predicted, target, main=n - 1, pilot=sigma.results - 1, confidence=CONFIDENCE
        )
        more = assured.n_for_half_width_at_assurance(
            sigma.value,
            target,
            assurance=wanted,
            confidence=CONFIDENCE,
            pilot_n=sigma.results,
        )
    return (
        f"The chance that {n} are enough is {chance * 100:.0f} %, since sigma is itself an "
        f"estimate from {sigma.results} results; for a chance of {wanted * 100:.0f} % it takes "
        f"{more}."
    )
