"""None of the results may exceed the level: how many notice a share that does."""

import math

from fieldplan.base.errors import CampaignError
from fieldplan.base.working import Quantity, Step
from fieldplan.campaign.questions.all_clear import AllClear
from fieldplan.sizing.asked.model import Answered, Asked
from fieldplan.sizing.model import Amount, Finding
from fieldplan.sizing.words import counted, typed_percent

SOURCE = "Guttman 1970, Statistical Tolerance Regions (from memory)"


def count(asked: Asked) -> Answered:
    """Count the results of which one at least exceeds the level, with the stated chance.

    Parameters
    ----------
    asked : Asked

    Returns
    -------
    Answered
    """
    table = _table(asked)
    share = table.share or 0.5
    unrounded = math.log1p(-table.confidence) / math.log1p(-share)
    total = math.ceil(unrounded - 1e-9)
    finding = bought(asked, asked.shared(total))
    sentence = (
        f"{counted(total, 'result')}, none of them above the level, would show with "
        f"{typed_percent(table.confidence)} confidence that less than {typed_percent(share)} of "
        "the population lies above it."
    )
    step = Step(
        symbol="n",
        meaning="Results of which at least one exceeds the level with the stated chance",
        formula="n = ln(1 − confidence) / ln(1 − p)",
        inputs=(Quantity("p", "share that must not stay unnoticed", share),),
        unrounded=unrounded,
        rounded=float(total),
        unit="results",
        source=SOURCE,
    )
    return Answered(
        needed=asked.shared(total),
        target="none of the results above the level",
        finding=Finding(
            topic="all-clear",
            title="None may exceed the level",
            answer=sentence,
            amounts=finding.amounts,
            steps=(step,),
            warnings=finding.warnings,
            sources=(SOURCE,),
        ),
        unrounded=unrounded,
    )


def bought(asked: Asked, counts: tuple[int, ...]) -> Finding:
    """Say how likely given counts are to notice the share."""
    table = _table(asked)
    chance = -math.expm1(sum(counts) * math.log1p(-(table.share or 0.5)))
    return Finding(
        topic="all-clear",
        title="None may exceed the level",
        answer=f"{counted(sum(counts), 'result')} notice the share with a chance of {chance:.3g}.",
        amounts=(Amount("chance_to_notice", "Chance to notice", chance),),
        warnings=("It says nothing about the mean.",),
        sources=(SOURCE,),
    )


def _table(asked: Asked) -> AllClear:
    table = asked.objective.all_clear
    if table is None:
        message = (
            "[objective.all_clear] is missing; write share and confidence below [[objective]]."
        )
        raise CampaignError(message)
    return table
