"""What the plan tells of each question that is asked, and what it does not."""

from fieldplan.campaign.questions import MODULES
from fieldplan.plan.model import Plan

TELLS = {
    "mean-and-level": (
        "On which side of the level the mean lies, with the chances of a wrong call that section 5 "
        "gives."
    ),
    "mean-and-background": (
        "How the site mean stands to that of the background, with the chances of a wrong call that "
        "section 5 gives, once results of both are there."
    ),
    "change": (
        "How much the mean has changed between the two rounds, as surely as section 5 says, once "
        "the second round has been sampled at the same places."
    ),
    "smallest-patch": (
        "Whether a location lies in a patch of the size asked for, with the chance that section 5 "
        "gives; whether its result shows the patch depends on what lies there."
    ),
    "all-clear": (
        "Whether a result exceeds the level; if none does, how much of the population can be "
        "claimed not to, as section 5 says."
    ),
    "upper-share": "Whether the share that shall lie below the level can be claimed to.",
    "share": "The share asked about, as closely or as surely as section 5 says.",
    "which-exceed": (
        "Which of the sampled places or units exceed the level, with the chances of error that "
        "section 5 gives."
    ),
}
"""By question: what results will say."""

TELLS_NOT = {
    "mean-and-level": (
        "The side of a mean that lies in the gray region: there either call is tolerated, and "
        "each may come out often."
    ),
    "mean-and-background": "How site or background stand to any level.",
    "change": "What caused a change, or how the mean ran between the rounds.",
    "smallest-patch": (
        "That there is no patch, how large one is that was hit, or one smaller than asked for with "
        "that chance."
    ),
    "all-clear": "Where the level is exceeded, if no result exceeds it.",
    "upper-share": "Where the rest lies, or by how much it exceeds the level.",
    "share": "Which of the places or units that were not visited have it.",
    "which-exceed": "Whether a place or unit that was not sampled exceeds the level.",
}
"""By question: what they will not."""


def questions_asked(plan: Plan) -> tuple[str, ...]:
    """Name the questions of the plan other than the precision of a mean.

    Returns
    -------
    tuple of str
        The one that decides the number first, each once.
    """
    found = [plan.size.question, *(finding.topic for finding in plan.size.findings)]
    found += [other.question for other in plan.size.others]
    return tuple(question for question in dict.fromkeys(found) if question in MODULES)


def told_of(plan: Plan) -> tuple[str, ...]:
    """Say what results will tell of each question asked."""
    return tuple(TELLS[question] for question in questions_asked(plan))


def not_told_of(plan: Plan) -> tuple[str, ...]:
    """Say what they will not tell of it."""
    return tuple(TELLS_NOT[question] for question in questions_asked(plan))
