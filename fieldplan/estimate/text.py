"""The paragraph of results, ready to paste into a report."""

import math

from fieldplan.base.units import significant
from fieldplan.estimate.model import Estimate
from fieldplan.estimate.population import is_census, places_word
from fieldplan.estimate.sentences import analyte_name, interval_in_words, where
from fieldplan.lab.words import counted
from fieldplan.plan.model import Plan


def results_paragraph(plan: Plan, estimate: Estimate) -> str:
    """Write the results as one paragraph for a report.

    Parameters
    ----------
    plan : Plan
    estimate : Estimate

    Returns
    -------
    str
    """
    unit, mean = estimate.unit, estimate.mean
    planned = len(plan.locations.of_class("random"))
    replaced = sum(bool(entry.replaced_by) for entry in estimate.returns.lost)
    known = mean.degrees_of_freedom
    freedom = f", {known:.3g} degrees of freedom" if math.isfinite(known) else ""
    words = counted(replaced, "of them from an alternate", "of them from alternates")
    stand_ins = "" if is_census(plan) else f", {words}"
    parts = [
        f"By plan {plan.revision_name}, {planned} {places_word(plan)} of {where(plan)} were to be "
        f"sampled for {analyte_name(plan, estimate.analyte)}; {mean.n} results are in the "
        f"mean{stand_ins}.",
        f"The mean is {'at most ' if estimate.upper_bound else ''}{significant(mean.mean)} {unit} "
        "(standard error "
        f"{significant(mean.standard_error)} {unit}{freedom}; "
        f"{interval_in_words(estimate.interval, unit)}).",
        estimate.interval_sentence,
        _strata(estimate),
        _bracket(estimate),
        estimate.rejected_sentence,
        mean.method,
        mean.caution,
        estimate.population_sentence,
        estimate.level_sentence,
        _changes(estimate),
        estimate.standing_sentence,
    ]
    return " ".join(part for part in parts if part)


def _strata(estimate: Estimate) -> str:
    strata = estimate.mean.strata
    if len(strata) < 2:
        return ""
    parts = [
        f"{s.stratum} {significant(s.mean)} {estimate.unit} (n = {s.n}, s = {significant(s.sd)}, "
        f"weight {s.weight:.3f})"
        for s in strata
    ]
    return f"Stratum means: {'; '.join(parts)}."


def _bracket(estimate: Estimate) -> str:
    bracket = estimate.bracket
    if bracket is None:
        return "All results in the mean were detected."
    stand = "Non-detects stand at half their limit; at"
    if estimate.non_detect_sentence:
        half = " Half their limit is put above; at" if estimate.as_bounds else " With them at"
        stand = f"{estimate.non_detect_sentence}{half}"
    return (
        f"{stand} 0 the mean is "
        f"{significant(bracket.mean_low)}, at the limit {significant(bracket.mean_high)} "
        f"{estimate.unit}."
    )


def _changes(estimate: Estimate) -> str:
    if not estimate.changes:
        return "No recorded rule was changed for this estimate."
    rules = "; ".join(f"{c.rule} from {c.recorded} to {c.used}" for c in estimate.changes)
    return f"Changed after results: {rules}."
