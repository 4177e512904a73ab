"""The answers for every analyte of a campaign: one in full, a sentence for each other."""

from collections.abc import Mapping

from fieldplan.base.errors import DesignError, LabError
from fieldplan.base.units import significant
from fieldplan.estimate.answer import estimate
from fieldplan.estimate.level import OPEN_ENDS, against_level, place_words
from fieldplan.estimate.model import Answers, Estimate, Unanswered
from fieldplan.estimate.sentences import analyte_name
from fieldplan.lab.words import counted
from fieldplan.plan.model import Plan
from fieldplan.returns.model import Returns
from fieldplan.returns.several import Received


def estimate_all(
    plan: Plan,
    received: Received,
    *,
    overrides: Mapping[str, str | float] | None = None,
    received_changed: Received | None = None,
) -> Answers:
    """Estimate the mean of every analyte that came back.

    Parameters
    ----------
    plan : Plan
    received : Received
        Reconciled by the recorded rules.
    overrides : mapping of str to (str or float), optional
        As for ``estimate``; they hold for every analyte.
    received_changed : Received, optional
        Reconciled with the changed rule for duplicates.

    Returns
    -------
    Answers

    Raises
    ------
    LabError, DesignError
        The main analyte has no answer. Another one without an answer is said in a sentence.
    """
    again = {r.analyte: r for r in received_changed.every} if received_changed else {}

    def answer_of(returns: Returns) -> Estimate:
        changed = again.get(returns.analyte)
        return estimate(plan, returns, overrides=overrides, returns_changed=changed)

    main = answer_of(received.main)
    answered: list[Estimate] = []
    without: list[Unanswered] = []
    for returns in received.others:
        try:
            answered.append(answer_of(returns))
        except (DesignError, LabError) as fault:
            without.append(_refused(plan, returns, fault))
    without += [_missing(plan, received.main.lab_file, name) for name in received.missing]
    said = {found.analyte: brief_sentences(plan, found) for found in answered}
    said |= {found.analyte: (found.sentence,) for found in without}
    order = [analyte.id for analyte in plan.campaign.analyte if analyte.id in said]
    lines = tuple(line for name in order for line in said[name])
    return Answers(main, tuple(answered), tuple(without), lines)


def _refused(plan: Plan, returns: Returns, fault: DesignError | LabError) -> Unanswered:
    name = analyte_name(plan, returns.analyte)
    why = " ".join(fault.problems)
    return Unanswered(returns.analyte, f"No mean of {name} is given: {why}", returns)


def _missing(plan: Plan, lab_file: str, name: str) -> Unanswered:
    words = analyte_name(plan, name)
    sentence = f"No mean of {words} is given: {lab_file} has no result of it that counts."
    return Unanswered(name, sentence)


def brief_sentences(plan: Plan, answer: Estimate) -> tuple[str, ...]:
    """Say an answer in one sentence, and in a second what was changed after results.

    Parameters
    ----------
    plan : Plan
    answer : Estimate

    Returns
    -------
    tuple of str
    """
    parts = [answer.sentences[0].removesuffix(".")]
    low = sum(result.used and not result.detected for result in answer.returns.results)
    if low and (answer.as_bounds or not answer.non_detect_sentence):
        parts.append(f"with {counted(low, 'non-detect')} at half the limit")
    elif low:
        parts.append(f"with {counted(low, 'non-detect')}, of which its own sheet tells")
    if answer.rejected_sentence:
        parts.append("without results that the laboratory rejected, of which its own sheet tells")
    level = plan.campaign.analyte_called(answer.analyte).action_level
    if level is not None:
        outer = against_level(answer.interval, answer.bracket, as_bounds=answer.as_bounds)
        which = OPEN_ENDS.get(outer.kind, "interval")
        widest = ", widest over the non-detects," if answer.bracket and answer.as_bounds else ""
        place = place_words(level, outer)
        parts.append(
            f"the {which}{widest} {place} the action level of {significant(level)} {answer.unit}"
        )
    first = "; ".join(parts) + "."
    if not answer.changes:
        return (first,)
    name = analyte_name(plan, answer.analyte)
    return first, answer.sentences[1].replace("RESULTS:", f"RESULTS, {name}:", 1)
