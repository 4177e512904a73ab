"""What a plan is called in the sentences of its sheets."""

from collections import Counter

from fieldplan.campaign.model import Campaign
from fieldplan.packet.sheets.amounts import counted, listed, percent
from fieldplan.packet.sheets.wording import number
from fieldplan.plan.model import Plan
from fieldplan.sizing.words import FEW

LAYOUTS = {
    "simple-random": "simple random",
    "stratified": "stratified random",
    "square-grid": "systematic square grid with a random origin and rotation",
    "triangular-grid": "systematic triangular grid with a random origin and rotation",
    "balanced-list": "balanced list, spread by the local pivotal method",
    "compact-strata": "compact cells of nearly equal area with random places in each",
    "even-spacing": "evenly spaced along the lines from a random start",
    "census": "every unit of the list (census)",
}

ALLOCATIONS = {
    "proportional": "proportional to size",
    "neyman": "Neyman allocation, by size and spread",
    "cost-optimal": "by size, spread and cost, for the least cost",
    "equal-precision": "so that the mean of every stratum alone is equally precise",
}

CLASSES = {
    "random": "drawn at random",
    "alternate": "alternate, ranked",
    "targeted": "targeted, never in the mean",
}

REASONS = {
    "no-access": "the way there is barred, or the owner refused",
    "obstructed": "something stands or lies there",
    "unsafe": "the crew judged it unfit to work at; this always outweighs the design",
    "outside": "the place is not part of the population",
    "dry": "no water",
    "frozen": "ground or water is frozen",
    "no-recovery": "refusal, or too little material came up",
    "broken": "the jar broke or leaked",
    "lost": "the jar or the place cannot be found",
    "other": "anything else; write it in the note",
}


def several_strata(plan: Plan) -> bool:
    """Tell whether the population is split into more than one stratum."""
    return len(plan.frame.strata) > 1


def every_unit(plan: Plan) -> bool:
    """Tell whether all units of a list are taken, so that no place is left to chance."""
    return all(entry.needed == entry.population for entry in plan.size.strata)


def mean_of(campaign: Campaign) -> str:
    """Say which mean is estimated.

    Examples
    --------
    >>> from tests.factories import make_campaign
    >>> mean_of(make_campaign())
    'mean of Lead in soil (dry weight)'
    """
    analyte = campaign.deciding_analyte
    matrix = f" in {analyte.matrix}" if analyte.matrix else ""
    kinds = [kind for kind in (analyte.basis, analyte.fraction) if kind]
    return f"mean of {analyte.label}{matrix}" + (f" ({', '.join(kinds)})" if kinds else "")


def aim_sentence(plan: Plan) -> str:
    """Say what the results are for, and who chose how sure the number has to be."""
    size = plan.size
    chooser = size.assurance_chosen_by or "nobody named"
    level = level_words(plan.campaign)
    against = f", to be set against {level}" if level else ""
    chosen = (
        "The plain count, without an assurance,"
        if size.assurance is None
        else f"The assurance of {percent(size.assurance)}"
    )
    aim = f"The aim is the {mean_of(plan.campaign)}{against}."
    if size.number_from == "question":
        answer = size.findings[0].answer
        said = answer in size.sentences
        return f"The aim: {size.target}." if said else f"The aim: {size.target}. {answer}"
    if every_unit(plan):
        return aim
    return {
        "census": aim,
        "budget": f"{aim} The budget decides the number.",
        "locations": f"{aim} The number of locations was fixed beforehand, not by the target.",
        "target": f"{aim} {chosen} was chosen by {chooser}.",
    }[size.number_from]


def level_words(campaign: Campaign) -> str:
    """Name the action level with its source; empty without one."""
    analyte = campaign.deciding_analyte
    if analyte.action_level is None:
        return ""
    source = f" ({analyte.action_level_source})" if analyte.action_level_source else ""
    return f"{number(analyte.action_level)} {analyte.unit}{source}"


def assumed_lines(plan: Plan) -> tuple[str, ...]:
    """List all that was assumed and not measured, one stamped line each."""
    lines = []
    for analyte in plan.campaign.analyte:
        every = (*plan.spread.strata, *plan.spread.others)
        guessed = [entry for entry in every if entry.assumed and entry.analyte == analyte.id]
        decides = analyte == plan.campaign.deciding_analyte
        whose = "ASSUMED" if decides else f"ASSUMED for {analyte.label}"
        if len(guessed) > FEW:
            low, high = (number(f(entry.sigma for entry in guessed)) for f in (min, max))
            span = low if low == high else f"{low} to {high}"
            lines.append(
                f"{whose}: the standard deviations of {span} {analyte.unit} in {len(guessed)} "
                "strata are guesses, not measurements."
            )
            continue
        lines += [
            f"{whose}: the standard deviation of {number(entry.sigma)} {analyte.unit} in "
            f"{entry.stratum} is a guess, not a measurement."
            for entry in guessed
        ]
    if plan.frame.boundary_assumed:
        lines.append("ASSUMED: the boundary is a sketch, not a survey.")
    return tuple(lines)


def sample_sentence(plan: Plan) -> str:
    """Count every sample of the plan once: those to take, and those ready for alternates.

    Examples
    --------
    >>> from tests.factories import make_plan
    >>> sample_sentence(make_plan())
    '11 samples to take: 9 at the locations to visit, 1 control sample and 1 at a targeted place. \
4 more have their ids ready, for alternates.'
    """
    classes = {p.location_id: p.location_class for p in plan.locations.places}
    kinds = Counter(
        "control" if s.qc_of or not s.location_id else classes[s.location_id]
        for s in plan.samples.samples
    )
    parts = [f"{kinds['random']} at the locations to visit"]
    if kinds["control"]:
        parts.append(counted(kinds["control"], "control sample"))
    if kinds["targeted"]:
        place = "a targeted place" if kinds["targeted"] == 1 else "targeted places"
        parts.append(f"{kinds['targeted']} at {place}")
    spare = kinds["alternate"]
    take = counted(kinds.total() - spare, "sample")
    ready = "has its id" if spare == 1 else "have their ids"
    more = f" {spare} more {ready} ready, for alternates." if spare else ""
    return f"{take} to take: {listed(parts)}.{more}"
