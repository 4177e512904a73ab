"""The mean of the population and its interval, by the recorded design and rules only."""

from collections.abc import Mapping
from typing import get_args

from fieldplan.base.errors import DesignError, LabError
from fieldplan.base.working import Step
from fieldplan.campaign.model import Rules
from fieldplan.campaign.rules_table import DeclaredShape, NonDetects
from fieldplan.estimate.coverage import coverage_sentence
from fieldplan.estimate.coverage_steps import coverage_steps
from fieldplan.estimate.difference import difference_sentences
from fieldplan.estimate.level import level_sentence
from fieldplan.estimate.means import Means, means_by
from fieldplan.estimate.model import Change, Estimate
from fieldplan.estimate.non_detect_words import method_sentence
from fieldplan.estimate.order import standing_sentence
from fieldplan.estimate.planned import Planned, planned_for
from fieldplan.estimate.population import is_census, outside_sentence, population_sentence
from fieldplan.estimate.rejected import rejected_sentence
from fieldplan.estimate.sentences import answer_sentences
from fieldplan.estimate.widened import recorded_reach, widened_sentence
from fieldplan.estimate.working import working
from fieldplan.plan.model import Plan
from fieldplan.returns.model import Returns

CHANGEABLE = (
    "interval",
    "confidence",
    "mean_interval",
    "promised_class",
    "non_detects",
    "declared_shape",
    "single_result",
    "duplicates",
)
"""Rules that may be changed after results, each with both answers printed."""

ACHIEVED_AT_HALF = (
    "Planned and achieved are compared with non-detects at half their limit, as planning has them; "
    "the standard error of the answer is that of its method."
)


def estimate(
    plan: Plan,
    returns: Returns,
    *,
    overrides: Mapping[str, str | float] | None = None,
    returns_changed: Returns | None = None,
) -> Estimate:
    """Estimate the mean by the design and the rules that the plan records.

    Parameters
    ----------
    plan : Plan
    returns : Returns
        Reconciled by the recorded rules.
    overrides : mapping of str to (str or float), optional
        Rules to change after results: ``interval``, ``confidence``, ``mean_interval``,
        ``promised_class``, ``non_detects``, ``declared_shape``, ``single_result``,
        ``duplicates``. The recorded answer is kept beside
        the changed one.
    returns_changed : Returns, optional
        Reconciled with the changed rule for duplicates; needed when that rule is changed.

    Returns
    -------
    Estimate

    Raises
    ------
    LabError
        A match still waits for the user, or no result is in the mean.
    DesignError
        A stratum has too few results for the recorded rule, or an override is none.

    Notes
    -----
    Everything is computed with non-detects at 0, at half and at their limit; the bracket holds
    all three. Where they stand as bounds the mean and interval reported are those at half, and
    the comparison with the action level uses the envelope of the three intervals; where the rules
    fix a method for non-detects they are that method's.
    """
    _refuse_undecided(returns)
    rules, changed = changed_rules(plan.campaign.rules, overrides or {})
    basis = _basis(returns, returns_changed, changed=changed)
    means = means_by(plan, basis, rules)
    changes = _changes(plan, returns, rules, changed)
    level = level_sentence(plan, means)
    said = (population_sentence(plan, basis), outside_sentence(plan, basis, means.half))
    population = " ".join(sentence for sentence in said if sentence)
    rejected = rejected_sentence(plan, basis, means)
    standing = standing_sentence(plan, basis)
    planned = planned_for(plan, basis.analyte)
    return Estimate(
        analyte=basis.analyte,
        unit=planned.unit,
        mean=means.reported,
        interval=means.interval,
        other_interval=means.other_interval,
        bracket=means.bracket,
        planned_standard_error=planned.standard_error,
        achieved_standard_error=means.half.standard_error,
        why_different=_differences(plan, means, planned),
        level_sentence=level,
        population_sentence=population,
        coverage_sentence=coverage_sentence(plan, means),
        steps=_steps(plan, means, planned.unit),
        changes=changes,
        returns=basis,
        rejected_sentence=rejected,
        standing_sentence=standing,
        interval_sentence=widened_sentence(means),
        as_bounds=means.as_bounds,
        upper_bound=means.upper_bound,
        non_detect_sentence=method_sentence(means),
        sentences=answer_sentences(
            plan, means, changes, level=level, population=population, rejected=rejected,
            standing=standing,
        ),
    )  # fmt: skip


def _basis(
    returns: Returns, returns_changed: Returns | None, *, changed: tuple[str, ...]
) -> Returns:
    """Take the results by the rules in force; a changed rule for duplicates has its own."""
    if "duplicates" not in changed:
        return returns
    if returns_changed is None:
        message = "the rule for duplicates was changed; reconcile the results by it first."
        raise DesignError(message)
    return returns_changed


def _differences(plan: Plan, means: Means, planned: Planned) -> tuple[str, ...]:
    reach = recorded_reach(plan, means)
    said = difference_sentences(plan, means.half, planned=planned, reach=reach)
    return said if means.modelled is None else (*said, ACHIEVED_AT_HALF)


def _steps(plan: Plan, means: Means, unit: str) -> tuple[Step, ...]:
    """Show the arithmetic of the answer and of its coverage, which a census does not have."""
    coverage = [] if is_census(plan) else coverage_steps(means, unit)
    return (*working(means, unit), *coverage)


def _refuse_undecided(returns: Returns) -> None:
    if returns.needs_you:
        rows = {match.row for match in returns.needs_you}
        message = (
            f"{returns.lab_file}: {len(rows)} rows wait for your answer in matches.csv; "
            "no mean is computed before."
        )
        raise LabError(message)
    if not any(result.used for result in returns.results):
        message = f"{returns.lab_file}: no result belongs to the mean; check file and packet."
        raise LabError(message)


def changed_rules(
    recorded: Rules, overrides: Mapping[str, str | float]
) -> tuple[Rules, tuple[str, ...]]:
    """Apply rules changed after results.

    Parameters
    ----------
    recorded : Rules
    overrides : mapping of str to (str or float)

    Returns
    -------
    rules : Rules
    changed : tuple of str
        Names of those that differ from the record.

    Raises
    ------
    DesignError
        A name or a value is not known.
    """
    unknown = [name for name in overrides if name not in CHANGEABLE]
    if unknown:
        message = f"'{unknown[0]}' cannot be changed; what can is {', '.join(CHANGEABLE)}."
        raise DesignError(message)
    different = {name: v for name, v in overrides.items() if v != getattr(recorded, name)}
    try:
        rules = Rules.model_validate({**recorded.model_dump(), **different})
    except ValueError as fault:
        given = ", ".join(f"{name} = {value}" for name, value in different.items())
        message = (
            f"{given}: this cannot stand in place of the recorded rule. confidence lies between "
            "0.5 and 1; interval is two-sided, upper-limit or lower-limit; mean_interval is "
            "student-t or skew-widened; promised_class is cv-up-to-1 or cv-up-to-2; non_detects "
            f"is {', '.join(get_args(NonDetects))}; declared_shape is "
            f"{', '.join(get_args(DeclaredShape))}; duplicates is average or first; single_result "
            "is refuse or borrow-spread."
        )
        raise DesignError(message) from fault
    return rules, tuple(different)


def _changes(
    plan: Plan, returns: Returns, rules: Rules, changed: tuple[str, ...]
) -> tuple[Change, ...]:
    """Keep the recorded answer beside every rule that was changed."""
    if not changed:
        return ()
    recorded = plan.campaign.rules
    before: Means | None = None
    refusal = ""
    try:
        before = means_by(plan, returns, recorded)
    except DesignError as fault:
        refusal = " ".join(fault.problems)
    return tuple(
        Change(
            rule=name,
            recorded=str(getattr(recorded, name) or "not set"),
            used=str(getattr(rules, name) or "not set"),
            interval_recorded=before.interval if before else None,
            mean_recorded=before.reported.mean if before else None,
            refusal_recorded=refusal,
        )
        for name in changed
    )
