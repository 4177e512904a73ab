"""What is taken at a location, in the words that form, map and popup share."""

from fieldplan.packet.sheets.amounts import BLANK, listed
from fieldplan.packet.sheets.question_section import depth
from fieldplan.plan.model import Plan

BY_METHOD = "as the method says"


def take_words(plan: Plan) -> str:
    """Say what one sample is: the unit, the depth and the grain size.

    Examples
    --------
    >>> from tests.factories import make_plan
    >>> take_words(make_plan())
    'as the method says, 0 m to 0.15 m below ground surface, grain size < 2 mm'
    """
    asked = plan.campaign.frame[0]
    parts = [asked.unit_is or BY_METHOD]
    if plan.frame.kind == "area" or depth(plan):
        parts.append(depth(plan) or f"depth {BLANK}")
    return ", ".join(
        [*parts, *([f"grain size {asked.size_fraction}"] if asked.size_fraction else [])]
    )


def analysed_words(plan: Plan) -> str:
    """Say for which analytes the samples go to the laboratory.

    Examples
    --------
    >>> from tests.factories import make_plan
    >>> analysed_words(make_plan())
    'Lead in soil (dry weight)'
    """
    groups: dict[str, list[str]] = {}
    for analyte in plan.campaign.analyte:
        kinds = ", ".join(kind for kind in (analyte.basis, analyte.fraction) if kind)
        where = f" in {analyte.matrix}" if analyte.matrix else ""
        groups.setdefault(where + (f" ({kinds})" if kinds else ""), []).append(analyte.label)
    return "; ".join(listed(names) + where for where, names in groups.items())
