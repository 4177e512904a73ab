"""Which alternate stands in for which lost location, by the order of the list."""

from collections.abc import Collection, Mapping
from dataclasses import dataclass

from fieldplan.design.model import Location
from fieldplan.lab.words import counted, listed
from fieldplan.plan.model import Plan
from fieldplan.returns.field_facts import FieldFacts


@dataclass(frozen=True)
class Substitution:
    """Alternate to the location that it stands in for, and what the order of the list says."""

    stands_in_for: Mapping[str, str]
    notes: tuple[str, ...]

    def replacement_of(self, location_id: str) -> str:
        """Name the alternate that stands in for a location; empty when there is none."""
        for alternate, lost in self.stands_in_for.items():
            if lost == location_id:
                return alternate
        return ""


def substitute(
    plan: Plan, facts: Mapping[str, FieldFacts], with_result: Collection[str]
) -> Substitution:
    """Set alternates that have a result against lost locations of their own stratum.

    Parameters
    ----------
    plan : Plan
    facts : mapping of str to FieldFacts
    with_result : collection of str
        Locations with a result that may be used.

    Returns
    -------
    Substitution

    Notes
    -----
    What the return says in ``replaced_by`` goes first. An alternate that it does not name stands
    in for the first location of its stratum that was lost and not replaced. No value is looked at.
    """
    pairs: dict[str, str] = {}
    notes: list[str] = []
    for stratum in plan.frame.strata:
        random = [p for p in plan.locations.of_class("random") if p.stratum == stratum.name]
        spare = [p for p in plan.locations.of_class("alternate") if p.stratum == stratum.name]
        lost = [p.location_id for p in random if p.location_id not in with_result]
        used = [p for p in spare if p.location_id in with_result]
        _pair_as_said(lost, used, facts, pairs, notes)
        _pair_in_order(lost, used, pairs, notes)
        notes += _order_notes(spare, pairs, facts)
        waiting = [location for location in lost if location not in pairs.values()]
        notes += _unused_notes(waiting, [p for p in spare if p not in used], facts)
    return Substitution(pairs, tuple(notes))


def _pair_as_said(
    lost: list[str],
    used: list[Location],
    facts: Mapping[str, FieldFacts],
    pairs: dict[str, str],
    notes: list[str],
) -> None:
    names = {place.location_id for place in used}
    for location in lost:
        said = facts.get(location, FieldFacts()).replaced_by
        if said in names:
            pairs[said] = location
        elif said:
            notes.append(f"{location} was to be replaced by {said}, which has no result.")


def _pair_in_order(
    lost: list[str], used: list[Location], pairs: dict[str, str], notes: list[str]
) -> None:
    waiting = [location for location in lost if location not in pairs.values()]
    for place in used:
        if place.location_id in pairs or not waiting:
            continue
        pairs[place.location_id] = waiting.pop(0)
        notes.append(
            f"The field return does not say which location {place.location_id} replaces; it "
            f"stands in for {pairs[place.location_id]}, the first of its stratum without a result."
        )


def _unused_notes(
    waiting: list[str], unused: list[Location], facts: Mapping[str, FieldFacts]
) -> list[str]:
    """Say where a location was lost for good while an alternate of its stratum stood ready."""
    untried = [
        place.location_id
        for place in unused
        if (fact := facts.get(place.location_id, FieldFacts())).taken is None and not fact.reason
    ]
    if not waiting or not untried:
        return []
    return [
        f"Nothing stands in for {listed(waiting)}, and nothing shows that "
        f"{counted(len(untried), 'alternate')} of the stratum ({listed(untried)}) had been tried: "
        "a departure from the plan, which says to take the next one."
    ]


def _order_notes(
    spare: list[Location], pairs: Mapping[str, str], facts: Mapping[str, FieldFacts]
) -> list[str]:
    """Say where an alternate was passed over without a reason in the return."""
    notes = []
    used = [place.list_order for place in spare if place.location_id in pairs]
    for place in spare:
        fact = facts.get(place.location_id, FieldFacts())
        tried = fact.taken is False and fact.reason
        passed = used and place.list_order < max(used) and place.location_id not in pairs
        if passed and not tried:
            notes.append(
                f"Alternate {place.location_id} was passed over for a later one of its stratum, "
                "and the return gives no reason. Alternates are taken in the order of their list."
            )
    return notes
