"""Which samples are taken where, under ids that tell the laboratory nothing."""

from collections import Counter
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field

from fieldplan.base.draws import Stream
from fieldplan.base.errors import DesignError
from fieldplan.campaign.model import Campaign, FrameTable
from fieldplan.design.model import Location, Locations
from fieldplan.samples.ids import sample_id
from fieldplan.samples.model import Sample, Samples
from fieldplan.sizing.model import Size

FIELD_SAMPLE = "field sample"
FIELD_DUPLICATE = "field duplicate"
NOT_ANALYSED = "temperature blank"


def assign(campaign: Campaign, locations: Locations, size: Size, *, revision: int = 1) -> Samples:
    """Give every location its sample, and place the control samples that were counted apart.

    Parameters
    ----------
    campaign : Campaign
        Prefix, seed, analytes and depth interval.
    locations : Locations
        Alternates and targeted places get samples too, so that bottles are ready.
    size : Size
        Its ``qc`` counts.
    revision : int
        Of the plan. It stands in every id, so that a jar labelled under one revision is never
        taken for a jar of another.

    Returns
    -------
    Samples
        In the order of the locations, a duplicate after the sample it repeats; blanks last.

    Raises
    ------
    DesignError
        More field duplicates than random locations.

    Notes
    -----
    A duplicate's id is drawn like any other, so nothing in it gives the pair away; its last digit
    is a check digit. Ids and the locations of duplicates depend on the seed and on the location's
    own id; one that joins a draft leaves the others as they were, unless two draw one number.
    """
    wanted: Counter[str] = Counter()
    for control in size.qc:
        wanted[control.kind] += control.count
    duplicated = _duplicated(campaign, locations, wanted.pop(FIELD_DUPLICATE, 0))
    total = len(locations.places) + len(duplicated) + sum(wanted.values())
    serials = _Serials(campaign, revision, total)
    first = {p.location_id: serials.next_for(p.location_id, FIELD_SAMPLE) for p in locations.places}
    second = {name: serials.next_for(name, FIELD_DUPLICATE) for name in sorted(duplicated)}
    blanks = [
        (kind, serials.next_for("", f"{kind} {number}"))
        for kind, count in wanted.items()
        for number in range(1, count + 1)
    ]
    samples = tuple(_in_crew_order(campaign, locations.places, first, second))
    samples += tuple(_blank(campaign, kind, name) for kind, name in blanks)
    return Samples(samples, tuple(_notes(duplicated, blanks)))


@dataclass
class _Serials:
    """Numbers without a leading zero, drawn for each sample until one is free."""

    campaign: Campaign
    revision: int
    total: int
    _taken: set[int] = field(default_factory=set)

    def next_for(self, location_id: str, role: str) -> str:
        first = 100
        while 9 * first < 10 * self.total:
            first *= 10
        stream = _stream(self.campaign, f"id of {role} {location_id}".rstrip())
        number = first + stream.below(9 * first)
        while number in self._taken:
            number = first + stream.below(9 * first)
        self._taken.add(number)
        return sample_id(self.campaign.prefix, self.revision, number)


def _stream(campaign: Campaign, purpose: str) -> Stream:
    return Stream(campaign.draw.seed, campaign.design[0].id, "", purpose)


def _duplicated(campaign: Campaign, locations: Locations, count: int) -> frozenset[str]:
    """Choose random locations for duplicates, strata served in proportion to their locations."""
    chosen = locations.of_class("random")
    if count > len(chosen):
        message = (
            f"{count} field duplicates were asked for, but only {len(chosen)} random locations "
            "are planned; ask for fewer."
        )
        raise DesignError(message)
    ranks: dict[str, list[tuple[int, str]]] = {}
    for place in chosen:
        stream = _stream(campaign, f"duplicate at {place.location_id}")
        number = int(stream.raw(1)[0])
        ranks.setdefault(place.stratum, []).append((number, place.location_id))
    given = dict.fromkeys(ranks, 0)
    for _ in range(count):
        given[_next_stratum(ranks, given)] += 1
    return frozenset(
        name for stratum, ranked in ranks.items() for _, name in sorted(ranked)[: given[stratum]]
    )


def _next_stratum(ranks: Mapping[str, Sequence[object]], given: Mapping[str, int]) -> str:
    """Name the stratum that is furthest behind its share (Sainte-Laguë's divisors 1, 3, 5 …)."""
    open_strata = [stratum for stratum in ranks if given[stratum] < len(ranks[stratum])]
    return max(open_strata, key=lambda stratum: len(ranks[stratum]) / (2 * given[stratum] + 1))


def _in_crew_order(
    campaign: Campaign,
    places: Sequence[Location],
    first: Mapping[str, str],
    second: Mapping[str, str],
) -> Iterable[Sample]:
    frame = _frame_table(campaign)
    analytes = tuple(analyte.id for analyte in campaign.analyte)
    depths = frame.depth_top_m, frame.depth_bottom_m
    for place in places:
        name = place.location_id
        yield Sample(first[name], name, FIELD_SAMPLE, "", analytes, *depths)
        if name in second:
            yield Sample(second[name], name, FIELD_DUPLICATE, first[name], analytes, *depths)


def _frame_table(campaign: Campaign) -> FrameTable:
    wanted = campaign.design[0].frame
    return next((f for f in campaign.frame if f.id == wanted), campaign.frame[0])


def _blank(campaign: Campaign, kind: str, name: str) -> Sample:
    analytes = () if kind == NOT_ANALYSED else tuple(a.id for a in campaign.analyte)
    return Sample(name, "", kind, "", analytes)


def _notes(duplicated: frozenset[str], blanks: Sequence[tuple[str, str]]) -> Iterable[str]:
    if duplicated:
        yield (
            f"Field duplicates, at locations drawn by the seed: {', '.join(sorted(duplicated))}. "
            "Their ids look like all others; the key to them stays in the office."
        )
    if blanks:
        kinds = Counter(kind for kind, _ in blanks)
        listed = ", ".join(f"{kind} ({count})" for kind, count in kinds.items())
        yield f"Control samples that belong to no location: {listed}."
