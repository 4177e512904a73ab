"""Cautions and hold points, raised by the facts of a campaign and closed by a typed reference."""

import re
from collections.abc import Sequence
from datetime import date
from difflib import get_close_matches

from fieldplan.base.document import Caution
from fieldplan.base.errors import CampaignError
from fieldplan.campaign.facts import FACTS
from fieldplan.campaign.model import Campaign, Clearance
from fieldplan.crew.topics import ALWAYS, TOPICS, Topic

__all__ = ["FACTS", "cautions"]

NOT_TYPED = "OPEN: no reference, date and expiry typed"

WATERS = r"\b(surface water|river|stream|lake|reservoir|pond|estuary|sea|sediment)"
GROUNDS = r"\b(soil|sediment|fill|peat)"


def cautions(campaign: Campaign, *, on: date) -> tuple[Caution, ...]:
    """Raise the topics that the campaign's facts call for; hold points come first.

    Parameters
    ----------
    campaign : Campaign
        Its ``[field]`` table, matrix, depth and ``[[clearance]]`` tables are read.
    on : date
        The day for which the answer holds; a clearance that has run out by then is open again.

    Returns
    -------
    tuple of Caution
        ``is_open`` until a clearance covers the day and the whole of the field work.

    Raises
    ------
    CampaignError
        A fact or a clearance topic is unknown, or a clearance ends before it begins.
    """
    refuse_unknown(campaign)
    raised = facts_of(campaign)
    found = [
        raised_caution(topic, because, campaign, on=on)
        for topic in TOPICS
        if (because := reason(topic, raised, campaign))
    ]
    return tuple(sorted(found, key=lambda caution: not caution.holds_work))


def refuse_unknown(campaign: Campaign) -> None:
    """Refuse facts, clearance topics and dates that mean nothing, all at once."""
    topics = {topic.name: topic for topic in TOPICS}
    problems = [
        f"[field] facts holds {fact!r}, which is no fact code{near_miss(fact, tuple(FACTS))}"
        for fact in campaign.field.facts
        if fact not in FACTS
    ]
    for clearance in campaign.clearance:
        if plain(clearance.topic) not in topics:
            hint = near_miss(plain(clearance.topic), tuple(topics))
            problems.append(f"[[clearance]] topic is {clearance.topic!r}, unknown here{hint}")
        if clearance.expires_on < clearance.given_on:
            problems.append(
                f"[[clearance]] {clearance.topic!r} expires on {clearance.expires_on}, before it "
                f"is given on {clearance.given_on}; type both dates as they stand on the paper."
            )
    if problems:
        raise CampaignError(*problems)


def near_miss(word: str, known: Sequence[str]) -> str:
    """Suggest the known words that look most like ``word``, or list them all.

    Examples
    --------
    >>> near_miss("hand-augur", ("hand-auger", "boat"))
    "; did you mean 'hand-auger'?"
    """
    close = get_close_matches(plain(word), known, n=3, cutoff=0.6)
    if close:
        return "; did you mean " + " or ".join(repr(name) for name in close) + "?"
    return "; known are: " + ", ".join(known) + "."


def plain(words: str) -> str:
    """Fold case and spacing, so that ``Access  and permission`` names the topic."""
    return " ".join(words.casefold().split())


def facts_of(campaign: Campaign) -> dict[str, str]:
    """Map every fact that holds, typed or read from other tables, to its words."""
    found = {fact: FACTS[fact] for fact in FACTS if fact in campaign.field.facts}
    found.update({fact: why for fact, why in facts_read(campaign).items() if fact not in found})
    if found.keys() & {"land-owned-by-others", "own-land"}:
        return found
    return found | {"land-owned-by-others": "nothing in the campaign says whose land it is"}


def facts_read(campaign: Campaign) -> dict[str, str]:
    """Read facts from tables other than the list of facts."""
    found: dict[str, str] = {}
    words = plain(", ".join(dict.fromkeys(analyte.matrix for analyte in campaign.analyte)))
    words = words.replace("ground water", "groundwater")
    if campaign.field.ground_penetration:
        found["ground-penetration"] = FACTS["ground-penetration"]
    elif campaign.field.ground_penetration is None and digs(campaign, words):
        found["ground-penetration"] = "material is taken from below the surface of the ground"
    if re.search(WATERS, words):
        found["near-water"] = f"the matrix is {words}"
    if "groundwater" in words:
        found["purge-water"] = "groundwater is sampled, so purge water is likely"
    if any("pfas" in plain(analyte.id + analyte.name) for analyte in campaign.analyte):
        found["trace-analytes"] = FACTS["trace-analytes"]
    return found


def digs(campaign: Campaign, matrices: str) -> bool:
    """Tell whether matrix or depth says that the ground is penetrated."""
    deep = any(frame.kind == "area" and frame.depth_bottom_m for frame in campaign.frame)
    return deep or re.search(GROUNDS, matrices) is not None


def reason(topic: Topic, raised: dict[str, str], campaign: Campaign) -> str:
    """Say why the topic is raised; empty when it is not."""
    reasons = [raised[fact] for fact in topic.raised_by if fact in raised]
    if reasons:
        return "; ".join(reasons)
    if ALWAYS in topic.raised_by:
        return "every campaign needs it"
    if clearances_for(topic, campaign):
        return "a clearance was typed for it"
    return ""


def clearances_for(topic: Topic, campaign: Campaign) -> tuple[Clearance, ...]:
    """Return the clearances typed for the topic, the one that lasts longest at the end."""
    found = [c for c in campaign.clearance if plain(c.topic) == topic.name]
    return tuple(sorted(found, key=lambda clearance: clearance.expires_on))


def raised_caution(topic: Topic, because: str, campaign: Campaign, *, on: date) -> Caution:
    """Make the caution, open until one clearance covers everything."""
    typed = clearances_for(topic, campaign)
    faults = [(clearance, fault_of(clearance, campaign, on=on)) for clearance in typed]
    covering = [clearance for clearance, fault in faults if not fault]
    if covering:
        last = covering[-1]
        status = f"{last.reference}, given {last.given_on}, expires {last.expires_on}"
    elif faults:
        status = f"OPEN again: {faults[-1][1]}"
    else:
        status = NOT_TYPED
    return Caution(
        topic=topic.name,
        because=because,
        defers_to=topic.defers_to,
        status=status,
        is_open=not covering,
        holds_work=topic.holds_work,
    )


def fault_of(clearance: Clearance, campaign: Campaign, *, on: date) -> str:
    """Say why a clearance does not cover the field work; empty when it does."""
    begin = campaign.plan.fieldwork_from
    end = campaign.plan.fieldwork_to or begin
    named = f"{clearance.reference!r}"
    if clearance.expires_on < on:
        return f"{named} expired on {clearance.expires_on}, before {on}"
    if end and clearance.expires_on < end:
        return f"{named} expires on {clearance.expires_on}, before field work ends on {end}"
    if clearance.given_on > on:
        return f"{named} is dated {clearance.given_on}, which is after {on}"
    if begin and clearance.given_on > begin:
        return f"{named} is dated {clearance.given_on}, after field work begins on {begin}"
    return ""
