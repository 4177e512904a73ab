"""What the dates on record say of the order of plan and results; none of them can be verified."""

from datetime import date

from fieldplan.lab.words import listed
from fieldplan.plan.model import Plan
from fieldplan.returns.model import Returns


def dated_late(plan: Plan, returns: Returns) -> tuple[str, ...]:
    """Name what is dated later than the first sample.

    Parameters
    ----------
    plan : Plan
    returns : Returns

    Returns
    -------
    tuple of str
        Empty where all is earlier, or no date of collection can be read.
    """
    if not returns.first_collected:
        return ()
    first = date.fromisoformat(returns.first_collected)
    dated = (
        ("the rules", plan.campaign.rules.fixed_on),
        ("the plan", plan.made_on),
        ("its issue", plan.issued_on),
    )
    return tuple(f"{what} ({day})" for what, day in dated if day is not None and day > first)


def standing_sentence(plan: Plan, returns: Returns) -> str:
    """Say what speaks against the plan having stood before the results.

    Parameters
    ----------
    plan : Plan
    returns : Returns

    Returns
    -------
    str
        Empty for a plan that was issued, with no date later than the first sample.
    """
    lines = []
    if not plan.issued_by:
        lines.append(
            f"The plan {plan.revision_name} was never issued: it is a DRAFT, and nothing shows "
            "that this is the plan by which the samples were taken."
        )
    late = dated_late(plan, returns)
    if late:
        lines.append(
            f"Dated after the first sample of {returns.first_collected}: {listed(late)}. The "
            "record does not show that what is dated so was fixed before results."
        )
    return " ".join(lines)
