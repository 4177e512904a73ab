"""What the design can and cannot tell, and a paragraph for the report."""

from itertools import pairwise

from fieldplan.base.document import Block, Bullets, Heading, Paragraph
from fieldplan.campaign.model import Rules
from fieldplan.packet.sheets.amounts import counted, likely, listed, percent, rounded
from fieldplan.packet.sheets.plan_words import (
    ALLOCATIONS,
    LAYOUTS,
    every_unit,
    mean_of,
    several_strata,
)
from fieldplan.packet.sheets.rules import NON_DETECTS, rules_fingerprint, stated
from fieldplan.packet.sheets.told import not_told_of, questions_asked, told_of
from fieldplan.packet.sheets.wording import number
from fieldplan.plan.model import Plan
from fieldplan.sizing.words import FEW, in_strata

OF_SHARES = frozenset({"all-clear", "share", "upper-share"})
"""Questions about the share of the population above a level."""


def limits_blocks(plan: Plan) -> list[Block]:
    """Say what the results will be able to say and what not."""
    return [
        Heading("It will tell", level=2),
        Bullets(can_tell(plan)),
        Heading("It will not tell", level=2),
        Bullets(cannot_tell(plan)),
    ]


def can_tell(plan: Plan) -> tuple[str, ...]:
    """List what the design supports."""
    lines = [
        *told_of(plan),
        f"The {mean_of(plan.campaign)} over the population of section 3, and how far from the "
        "true mean it may lie.",
    ]
    if plan.campaign.deciding_analyte.action_level is not None:
        lines.append(
            "Whether the interval for the mean lies below, spans or lies above the action level. "
            "What follows from that is for "
            f"{plan.campaign.plan.decides or 'whoever decides'} to say."
        )
    names = list(dict.fromkeys(other.analyte for other in plan.size.others))
    if besides := [n for n in names if n != plan.campaign.deciding_analyte.id]:
        words = listed([plan.campaign.analyte_called(name).label for name in besides])
        lines.append(f"The mean of {words} from the same jars, as closely as section 5 says.")
    if _asks_for_a_share(plan):
        lines.append(
            "Of a share, once the results above the level are counted: the results sheet reports "
            "means and does not count."
        )
    if several_strata(plan):
        lines.append("A mean for each stratum, with a wider interval than the site's.")
    return tuple(lines)


def _asks_for_a_share(plan: Plan) -> bool:
    return any(finding.topic in OF_SHARES for finding in plan.size.findings)


def cannot_tell(plan: Plan) -> tuple[str, ...]:
    """List what the design does not support."""
    depth = plan.campaign.frame[0].depth_bottom_m is not None
    share = (
        "that nothing lies above a level"
        if _asks_for_a_share(plan)
        else "the share of the site above a level"
    )
    lines = [
        *not_told_of(plan),
        f"The highest value, or {share}.",
        "Anything outside the population: "
        + listed(
            [
                {"list": "beyond the list", "line": "off the lines"}.get(
                    plan.frame.kind, "beyond the boundary"
                ),
                *(["in the parts left out"] if plan.frame.excluded else []),
                *(["at other depths"] if depth else []),
                "at other times",
            ]
        )
        + ".",
        patch_line(plan),
    ]
    if plan.locations.of_class("targeted"):
        lines.append("The mean from targeted places: they were chosen because they differ.")
    return tuple(lines)


def patch_line(plan: Plan) -> str:
    """Say which patches, or which units, can be missed."""
    if plan.frame.kind == "list":
        missed = round(plan.frame.population.net) - plan.size.planned
        if missed <= 0:
            return "What a unit would give at another time: place error is nil, the others remain."
        return f"Any single unit that was not drawn: {missed} of the list are not visited."
    if plan.frame.kind == "line":
        gap = widest_stretch(plan)
        return (
            f"What a stretch between two locations holds: as drawn, up to {rounded(gap)} m along a "
            "branch have no location."
        )
    gap = widest_gap(plan)
    if "smallest-patch" in questions_asked(plan):
        return (
            "What lies in the widest gap: the chance of section 5 is an average over where a patch "
            f"may lie; as drawn, one spot is {rounded(gap)} m from its nearest location, and a "
            f"round patch up to {rounded(2 * gap)} m across would be missed there."
        )
    return (
        f"Where a small patch lies: as drawn, one spot is {rounded(gap)} m from its nearest "
        f"location, so that a round patch up to {rounded(2 * gap)} m across, or what of it lies in "
        "the population, can be missed altogether."
    )


def widest_gap(plan: Plan) -> float:
    """Measure how far, in metres, the farthest spot of an area lies from its nearest location."""
    import numpy as np

    from fieldplan.design.evenness import largest_gap
    from fieldplan.frame.cutting import joined

    shapes = [stratum.geometry for stratum in plan.frame.strata if stratum.geometry is not None]
    whole = joined(shapes, "the strata")
    drawn = [(place.easting, place.northing) for place in plan.locations.of_class("random")]
    return largest_gap(whole, np.array(drawn))


def widest_stretch(plan: Plan) -> float:
    """Measure the longest stretch of one reach, in metres, that holds no location."""
    widest = 0.0
    for stratum in plan.frame.strata:
        for reach in stratum.reaches:
            inside = sorted(
                place.along_m
                for place in plan.locations.of_class("random")
                if place.along_m is not None
                and place.branch == reach.branch
                and reach.from_m <= place.along_m <= reach.to_m
            )
            stops = [reach.from_m, *inside, reach.to_m]
            widest = max(widest, *(b - a for a, b in pairwise(stops)))
    return widest


def methods_blocks(plan: Plan) -> list[Block]:
    """Set the methods paragraph."""
    return [Paragraph("Ready to paste:"), Paragraph(methods_paragraph(plan))]


def methods_paragraph(plan: Plan) -> str:
    """Write how the campaign was planned as one paragraph in the past tense."""
    sentences = (
        drawn_sentence(plan),
        number_sentence(plan),
        spread_sentence(plan),
        quality_sentence(plan),
        rules_sentence(plan),
        f"The plan is {plan.revision_name}; it was drawn with seed {plan.locations.seed} by "
        f"version {plan.locations.version} of the procedure of fieldplan {plan.fieldplan_version}.",
    )
    return " ".join(sentence for sentence in sentences if sentence)


def drawn_sentence(plan: Plan) -> str:
    """Say how locations were drawn, from what."""
    design = plan.campaign.design[0]
    count = counted(plan.size.planned, "location")
    if plan.frame.kind == "list":
        total = round(plan.frame.population.net)
        if design.layout == "census":
            return f"All {total} units of the list were to be sampled."
        how = "by simple random sampling without replacement"
        if design.layout == "balanced-list":
            how = f"as a {LAYOUTS[design.layout]}"
        return f"{count} were drawn {how} from a list of {total} units."
    each = "one" if design.per_cell == 1 else "two"
    how = {
        "simple-random": "by simple random sampling",
        "stratified": "by stratified random sampling",
        "compact-strata": f"at random, {each} in each compact cell of nearly equal area,",
    }.get(design.layout, f"as a {LAYOUTS[design.layout]}")
    size = f"{plan.frame.population.net / 1e4:.2f} ha"
    whole = "site"
    if plan.frame.kind == "line":
        size, whole = f"{plan.frame.population.net / 1e3:.2f} km of line", "lines"
        if design.layout == "even-spacing":
            starts = counted(design.starts, "random start")
            how = f"evenly spaced along the lines, from {starts} in each stratum,"
    share = percent(plan.frame.population.share)
    line = f"{count} were drawn {how} from {size} ({share} of the {whole}"
    if several_strata(plan):
        strata = plan.size.strata
        shared = ", ".join(f"{entry.stratum} {entry.planned}" for entry in strata)
        if len(strata) > FEW:
            shared = in_strata([e.planned for e in strata], [e.stratum for e in strata])
        return f"{line}; {shared}; {ALLOCATIONS[design.allocation]})."
    return f"{line})."


def number_sentence(plan: Plan) -> str:
    """Say what decided the number, and with what chance that meets the target."""
    size, census = plan.size, plan.size.number_from == "census"
    if census:
        return ""  # the sentence before says that every unit was to be sampled
    if every_unit(plan):
        return f"The target, {size.target}, takes every unit of the list."
    budget = plan.campaign.deciding_objective.budget
    if size.standard_error is None or size.question != "mean":
        return f"The number answers another question than the precision of the mean: {size.target}."
    expected = f"a standard error of {rounded(size.standard_error)} {size.unit} was to be expected"
    if size.number_from == "budget":
        return (
            f"The number was the largest that {money(plan, budget)} buys; no precision was asked "
            f"for, and {expected} if the spread was right."
        )
    if size.number_from == "locations":
        line = f"The number of locations was fixed beforehand; {expected} if the spread was right"
        return f"{line}." if budget is not None else f"{line}. {met_sentence(plan)}"
    plain = ", taking the spread at face value" if size.assurance is None else ""
    return f"The number was chosen for a target of {size.target}{plain}. {met_sentence(plan)}"


def money(plan: Plan, amount: float | None) -> str:
    """Name a budget in its currency."""
    return f"a budget of {number(amount or 0.0)} {plan.size.currency}".rstrip()


def met_sentence(plan: Plan) -> str:
    """Say the chance that the number meets the target, with its condition."""
    size = plan.size
    which = f"The target, {size.target}," if size.number_from == "locations" else "It"
    asked = "" if size.assurance is None else f" ({percent(size.assurance)} was asked for)"
    if size.chance_needed is not None:
        return (
            f"{which} is met with a chance of {likely(size.chance_needed)}{asked} given the "
            "results behind the spread, if single results are near normal; with skewed ones the "
            "chance is lower."
        )
    return (
        "No chance that it is met can be given, since nobody said how many results stand behind "
        f"the spread{asked}."
    )


def spread_sentence(plan: Plan) -> str:
    """Say where the standard deviation came from."""
    entries = plan.spread.strata
    values = listed([f"{rounded(e.sigma)} {plan.size.unit} ({e.stratum})" for e in entries])
    if len(entries) == 1:
        values = f"{rounded(entries[0].sigma)} {plan.size.unit}"
    if all(entry.assumed for entry in entries):
        return f"The standard deviation was assumed, not measured: {values}."
    return f"The standard deviation was taken as {values}, from {sources(plan)}."


def sources(plan: Plan) -> str:
    """Name the sources of the spread once each, with the number of results."""
    total = sum(entry.results or 0 for entry in plan.spread.strata)
    named = listed(list(dict.fromkeys(entry.source for entry in plan.spread.strata)))
    return f"{named} ({total} results)" if total else named


def quality_sentence(plan: Plan) -> str:
    """Say which control samples were planned."""
    if not plan.size.qc:
        return ""
    counts = [counted(entry.count, entry.kind) for entry in plan.size.qc]
    return f"Quality control samples, counted apart: {listed(counts)}."


def _set_how(rules: Rules) -> str:
    """Name the interval that is widened for skewed results; Student's t needs no word."""
    if rules.promised_class is None or rules.mean_interval == "student-t":
        return ""
    return f", {rules.mean_interval} as promised for {rules.promised_class}"


def rules_sentence(plan: Plan) -> str:
    """Say which rules hold for the estimate, and who stated that they were fixed when."""
    rules = plan.campaign.rules
    origin = stated(rules, first_day=plan.campaign.plan.fieldwork_from)
    kind = {
        "two-sided": "two-sided interval",
        "upper-limit": "upper limit",
        "lower-limit": "lower limit",
    }[rules.interval]
    repeated = {
        "average": "duplicates are averaged",
        "first": "the first sample of a location alone counts",
    }[rules.duplicates]
    return (
        f"The rules for the estimate were, {origin}: the "
        f"{percent(rules.confidence)} {kind} for the mean is given{_set_how(rules)}; "
        f"{NON_DETECTS[rules.non_detects].replace('; ', ' and ')}; {repeated} "
        f"(fingerprint {rules_fingerprint(rules)}, by which whoever received it can check them)."
    )
