"""The returned campaign against its plan: what came, what is missing, what stands in for what."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

from fieldplan.base.errors import LabError
from fieldplan.design.model import Location
from fieldplan.lab.model import REJECTED, LabRow, LabTable, LeftOutRow
from fieldplan.lab.roles import IN_THE_MEAN
from fieldplan.lab.tables import capped
from fieldplan.lab.words import counted, listed
from fieldplan.plan.model import Plan
from fieldplan.returns.contradictions import contradictions
from fieldplan.returns.field import FieldReturn
from fieldplan.returns.field_facts import FieldFacts, field_facts, first_collected
from fieldplan.returns.laboratory import (
    claimed_jars,
    id_as_written,
    left_out,
    not_read,
    own_controls,
    rows_of,
    with_rejected,
)
from fieldplan.returns.location_values import LocationValue, location_values, one_row_a_sample
from fieldplan.returns.matching import ConfirmedMatch, Matching, match_rows
from fieldplan.returns.model import FieldRow, LocationResult, LostLocation, Returns
from fieldplan.returns.substitutes import Substitution, substitute

TARGETED = "Targeted places were chosen by judgement and never enter the mean."
OUTSIDE = "The crew found that the place lies outside the population."
OF_A_MOVE = frozenset({"no-access", "obstructed", "unsafe", "dry", "frozen"})
"""Reasons that, beside taken = yes, say why a place was moved and not why its result is missing."""
BY_THE_LABORATORY = "the laboratory rejected its result"
OF_NO_SAMPLE = "belongs to no planned sample"
NOT_NEEDED = "Alternate that stands in for no lost location of its stratum."


def reconcile(
    plan: Plan,
    lab_table: LabTable,
    field_rows: FieldReturn | Sequence[FieldRow] = (),
    *,
    confirmed: Sequence[ConfirmedMatch] = (),
    analyte: str | None = None,
) -> Returns:
    """Meet laboratory results and the crew's return with the plan.

    Parameters
    ----------
    plan : Plan
    lab_table : LabTable
    field_rows : FieldReturn or sequence of FieldRow
        Empty when the crew returned nothing.
    confirmed : sequence of ConfirmedMatch
        From ``read_matches``.
    analyte : str, optional
        Whose results are met; the deciding one's unless given.

    Returns
    -------
    what_came_back : Returns
        With ``needs_you`` not empty while a laboratory id is only like a planned one.

    Raises
    ------
    LabError
        No row of the analyte, or none that belongs to the plan; a sample has two different
        results; the return says that a jar was not taken, broke or was lost and the laboratory
        reports it; a row of the laboratory's own bears the id of an issued jar; a confirmed match
        does not fit.

    Notes
    -----
    A location that moved keeps the stratum and weight with which it was drawn, since its chance
    of being drawn was that of its planned place. Results that the laboratory rejected do not
    count; ``with_rejected`` holds what would come of it if they did.
    """
    asked = analyte or plan.campaign.deciding_analyte.id
    found = _meet(plan, lab_table, field_rows, confirmed=confirmed, analyte=asked)
    table = with_rejected(lab_table, asked)
    if table is None:
        return found
    try:
        again = _meet(plan, table, field_rows, confirmed=confirmed, analyte=asked)
    except LabError:
        return found
    back = {result.location_id for result in again.results}
    lost = tuple(
        replace(entry, reason=BY_THE_LABORATORY) if entry.location_id in back else entry
        for entry in found.lost
    )
    return replace(found, lost=lost, with_rejected=again)


def _meet(
    plan: Plan,
    lab_table: LabTable,
    field_rows: FieldReturn | Sequence[FieldRow],
    *,
    confirmed: Sequence[ConfirmedMatch],
    analyte: str,
) -> Returns:
    """Meet the results that count with the plan."""
    name = lab_table.file_name
    matching = _matched(plan, lab_table, confirmed=confirmed, analyte=analyte)
    given = _as_return(field_rows)
    by_sample, problems, notes = one_row_a_sample(name, matching.by_sample)
    facts, moves = field_facts(plan, given.rows, given.file_name)
    values = location_values(plan, by_sample)
    problems += contradictions(plan, given, by_sample, file_name=name)
    problems += claimed_jars(plan, [r for r in lab_table.rows if r.analyte == analyte], name)
    if problems:
        raise LabError(*capped(problems))
    usable = {n for n in values if not facts.get(n, FieldFacts()).outside}
    met = _Met(plan, facts, values, substitute(plan, facts, usable))
    expected = met.expected_samples(analyte)
    own_or_unread = [*own_controls(lab_table, analyte), *not_read(plan, lab_table, analyte)]
    unused = _left_out(matching, own_or_unread)
    counts = _counts([s for s in expected if s not in by_sample], unused)
    said = [*lab_table.notes, *notes, *counts, *met.pairs.notes, *moves]
    said += [*met.control_notes(by_sample), *met.silence_notes(bool(given.rows))]
    return Returns(
        analyte=analyte,
        results=met.results(),
        lost=met.lost(),
        matched=matching.matched,
        planned_samples=len(expected),
        extra=len(matching.extra),
        needs_you=tuple(matching.near),
        lab_file=name,
        lab_sha256=lab_table.sha256,
        field_file=given.file_name if given.sha256 else "",
        field_sha256=given.sha256,
        duplicate_pairs=met.duplicate_pairs(),
        notes=tuple(said),
        left_out=tuple(unused),
        confirmed=tuple(matching.confirmed),
        first_collected=first_collected(given.rows),
    )


def _matched(
    plan: Plan, lab_table: LabTable, *, confirmed: Sequence[ConfirmedMatch], analyte: str
) -> Matching:
    """Match the rows of one analyte; refuse a file that has none, or none of this plan."""
    own = rows_of(lab_table, analyte)
    if not own:
        raise LabError(_none_of(plan, lab_table, analyte))
    others = [row for row in lab_table.rows if row.analyte != analyte]
    matching = match_rows(plan, own, analyte=analyte, confirmed=confirmed, elsewhere=others)
    if not matching.by_sample and not matching.near:
        raise LabError(_nothing_matched(plan, lab_table.file_name, own))
    return matching


def _as_return(rows: FieldReturn | Sequence[FieldRow]) -> FieldReturn:
    return rows if isinstance(rows, FieldReturn) else FieldReturn("field return", "", tuple(rows))


def _none_of(plan: Plan, lab_table: LabTable, analyte: str) -> str:
    """Say that an analyte has no result, and which of the campaign's have one."""
    present = [a.id for a in plan.campaign.analyte if rows_of(lab_table, a.id)]
    line = f"{lab_table.file_name} has no result of {analyte} that counts"
    if not present:
        return f"{line}, only controls of the laboratory. Ask for the samples' results."
    return (
        f"{line}; it has {listed(present)}. Ask the laboratory for it, or estimate another "
        f"analyte with --analyte {present[0]}."
    )


def _nothing_matched(plan: Plan, file_name: str, rows: Sequence[LabRow]) -> str:
    seen = listed([f"'{id_as_written(row)}'" for row in rows], limit=4)
    planned = listed([f"'{s.sample_id}'" for s in plan.samples.samples], limit=3)
    return (
        f"{file_name}: none of its ids ({seen}) belongs to {plan.revision_name}, whose samples are "
        f"{planned}. Check that the file and the packet belong together, and which column holds "
        "the sample ids."
    )


def _left_out(matching: Matching, others: Sequence[LeftOutRow]) -> list[LeftOutRow]:
    """List the rows that are in no mean, in the order of the file."""
    extra = [left_out(row, OF_NO_SAMPLE) for row in matching.extra]
    return sorted([*extra, *others], key=lambda entry: entry.row)


def _counts(missing: Sequence[str], unused: Sequence[LeftOutRow]) -> list[str]:
    notes = []
    if missing:
        notes.append(f"No result came for {counted(len(missing), 'sample')}: {listed(missing)}.")
    for why in dict.fromkeys(entry.why for entry in unused if entry.why != REJECTED):
        group = [entry.in_words for entry in unused if entry.why == why]
        notes.append(f"Not used ({why}): {listed(group)}.")
    return notes


@dataclass(frozen=True)
class _Met:
    """Plan, field and laboratory side by side."""

    plan: Plan
    facts: Mapping[str, FieldFacts]
    values: Mapping[str, LocationValue]
    pairs: Substitution

    def results(self) -> tuple[LocationResult, ...]:
        """Give every location that has a value, in the plan's order."""
        return tuple(
            self._result(place, self.values[place.location_id])
            for place in self.plan.locations.places
            if place.location_id in self.values
        )

    def _result(self, place: Location, value: LocationValue) -> LocationResult:
        fact = self.facts.get(place.location_id, FieldFacts())
        why_not = self._why_not(place, fact)
        return LocationResult(
            location_id=place.location_id,
            stratum=place.stratum,
            location_class=place.location_class,
            sample_ids=value.sample_ids,
            as_reported=tuple(row.as_reported.strip() for row in value.rows),
            low=value.merged.low,
            half=value.merged.half,
            high=value.merged.high,
            detected=value.merged.detected,
            used=not why_not,
            why_not=why_not,
            latitude=place.latitude,
            longitude=place.longitude,
            actual_latitude=fact.latitude,
            actual_longitude=fact.longitude,
            moved_m=fact.moved_m,
            stands_in_for=self.pairs.stands_in_for.get(place.location_id, ""),
        )

    def _why_not(self, place: Location, fact: FieldFacts) -> str:
        if place.location_class == "targeted":
            return TARGETED
        if fact.outside:
            return OUTSIDE
        if place.location_class == "alternate":
            return "" if place.location_id in self.pairs.stands_in_for else NOT_NEEDED
        return ""

    def lost(self) -> tuple[LostLocation, ...]:
        """Give the random locations without a value in the mean."""
        lost = []
        for place in self.plan.locations.of_class("random"):
            fact = self.facts.get(place.location_id, FieldFacts())
            if place.location_id in self.values and not fact.outside:
                continue
            replaced_by = self.pairs.replacement_of(place.location_id)
            lost.append(
                LostLocation(place.location_id, place.stratum, _why_lost(fact), replaced_by)
            )
        return tuple(lost)

    def expected_samples(self, analyte: str) -> list[str]:
        """Name the samples a result is expected for; alternates only where one was taken."""
        unused = {
            place.location_id
            for place in self.plan.locations.of_class("alternate")
            if place.location_id not in self.values
            and not self.facts.get(place.location_id, FieldFacts()).taken
        }
        return [
            sample.sample_id
            for sample in self.plan.samples.samples
            if analyte in sample.analytes and sample.location_id not in unused
        ]

    def duplicate_pairs(self) -> tuple[tuple[str, float | None, float | None], ...]:
        """Give both results of every location that has two."""
        return tuple(
            (name, value.rows[0].result, value.rows[1].result)
            for name, value in self.values.items()
            if len(value.rows) > 1
        )

    def control_notes(self, by_sample: Mapping[str, Sequence[LabRow]]) -> list[str]:
        """Say what the blanks showed; they never enter the mean."""
        return [
            f"{sample.role} {sample.sample_id}, not in the mean, was reported as "
            f"'{by_sample[sample.sample_id][0].as_reported.strip()}'."
            for sample in self.plan.samples.samples
            if sample.role not in IN_THE_MEAN and sample.sample_id in by_sample
        ]

    def silence_notes(self, has_return: bool) -> list[str]:
        """Say which locations have a result but no word of the crew."""
        if not has_return:
            return ["No field return was given: moved and replaced locations could not be checked."]
        silent = [name for name in self.values if self.facts.get(name, FieldFacts()).taken is None]
        if not silent:
            return []
        return [f"The field return does not say whether {listed(silent)} was taken; used."]


def _why_lost(fact: FieldFacts) -> str:
    if fact.outside:
        return "outside"
    if fact.taken:
        if fact.reason and fact.reason not in OF_A_MOVE:
            return fact.reason
        why = f" ({fact.reason})" if fact.reason else ""
        return f"taken{why}, but no result came from the laboratory"
    if fact.taken is False:
        return fact.reason or "not taken, no reason given"
    return fact.reason or "no result, and the field return does not say why"
