"""Sigma for every stratum, from pilots and typed values, as the campaign file says."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

from fieldplan.base.errors import FieldplanError, LabError
from fieldplan.base.units import significant
from fieldplan.campaign.inputs import resolve_file
from fieldplan.campaign.model import Campaign, ReadCampaign, Sigma
from fieldplan.campaign.questions import WITHOUT_SIGMA
from fieldplan.lab.model import LabTable, SplitSpread, Spread, StratumSpread
from fieldplan.lab.parts import (
    PLACES,
    Parts,
    gather_parts,
    of_analyte,
    split_of,
    whole_from_parts,
)
from fieldplan.lab.pilot import (
    FEW,
    PilotLocation,
    many_strata_sentence,
    measured_spread,
    pilot_locations,
    spread_sentences,
)
from fieldplan.lab.reader import read_lab
from fieldplan.lab.reading_pairs import read_reading_pairs
from fieldplan.lab.strata import sort_into_strata
from fieldplan.lab.visits import declared_visits
from fieldplan.lab.words import listed

if TYPE_CHECKING:
    from fieldplan.frame.model import Frame


def read_spread(read: ReadCampaign, frame: "Frame") -> Spread:
    """Read the pilot files that a campaign names and say how far its results spread.

    Parameters
    ----------
    read : ReadCampaign
    frame : Frame

    Returns
    -------
    Spread
        One sigma for each stratum of the frame, for the deciding analyte.

    Raises
    ------
    LabError
        A pilot cannot be read, or a stratum has no sigma; all such strata at once.
    """
    tables: list[LabTable | None] = []
    problems: list[str] = []
    for sigma in read.campaign.sigma:
        if sigma.pilot is None:
            tables.append(None)
            continue
        try:
            place = resolve_file(read, sigma.pilot)
            tables.append(read_lab(place, read.campaign, columns=sigma.columns, of_pilot=True))
        except LabError as fault:
            problems += [line for line in fault.problems if line not in problems]
    if problems:
        raise LabError(*problems)
    found = spread(tables, read.campaign, frame)
    return replace(found, pairs=read_reading_pairs(read))


def spread(tables: Sequence[LabTable | None], campaign: Campaign, frame: "Frame") -> Spread:
    """Say how far results spread in each stratum.

    Parameters
    ----------
    tables : sequence of (LabTable or None)
        One for each ``[[sigma]]`` table of the campaign, None where its value is typed.
    campaign : Campaign
    frame : Frame

    Returns
    -------
    Spread

    Raises
    ------
    LabError
        A stratum has no sigma: fewer than 2 pilot results, too many non-detects, no spread, and
        no typed value; all such strata at once.

    Notes
    -----
    Where the deciding question needs no sigma and none is given, ``strata`` stays empty. A value
    typed for a stratum comes before its pilot, its pilot before a value typed for the
    site, and that before one sigma pooled from a pilot that does not tell strata apart. Pooling
    needs a reason, typed as the ``source`` of its ``[[sigma]]`` table.
    """
    analyte = campaign.deciding_analyte
    gathered = _gather(tables, campaign, frame, analyte.id)
    entries: list[StratumSpread] = []
    splits: list[SplitSpread] = []
    problems: list[str] = []
    asked = campaign.deciding_objective.question
    known = asked not in WITHOUT_SIGMA or any(s.analyte == analyte.id for s in campaign.sigma)
    for stratum in frame.strata if known else ():
        try:
            entries.append(_declared(gathered.choose(stratum.name), campaign, analyte.id))
            splits += filter(None, [gathered.split(entries[-1], campaign.rules.duplicates)])
        except LabError as fault:
            problems += fault.problems
    if problems:
        raise LabError(*problems)
    site = gathered.site()
    shown = entries if len(frame.strata) > 1 else entries[:1]
    count = {"strata": len(frame.strata)}
    sentences: list[str] = []
    if len(shown) > FEW:
        sentences.append(many_strata_sentence(shown, analyte.unit))
    else:
        for entry in shown:
            sentences += spread_sentences(entry, analyte.unit, count)
    others, other_splits, more = _others(tables, campaign, frame, analyte.id)
    file_notes = [note for table in tables if table for note in table.notes]
    notes = [*file_notes, *gathered.notes, *more]
    return Spread(
        analyte=analyte.id,
        unit=analyte.unit,
        strata=tuple(entries),
        site=site,
        others=tuple(others),
        sentences=tuple(sentences),
        notes=tuple(dict.fromkeys(notes)),
        splits=(*splits, *other_splits),
    )


@dataclass
class _Gathered:
    """All that the campaign file says of one analyte's sigma, before a stratum chooses."""

    analyte: str
    unit: str
    strata: tuple[str, ...]
    typed: dict[str, Sigma] = field(default_factory=dict)
    typed_site: Sigma | None = None
    measured: dict[str, list[PilotLocation]] = field(default_factory=dict)
    unplaced: list[PilotLocation] = field(default_factory=list)
    reason: str = ""
    notes: list[str] = field(default_factory=list)
    parts: Parts = field(default_factory=lambda: Parts(""))

    def choose(self, name: str) -> StratumSpread:
        """Give one stratum its sigma."""
        places = self.measured.get(name, [])
        sigma = self.typed.get(name)
        if sigma is None and len(self.strata) == 1:
            sigma = self.typed_site
        if sigma is not None:
            self._compare(name, places, sigma)
            return _typed_entry(self.analyte, name, sigma)
        fault: LabError | None = None
        if places or not self.unplaced:
            try:
                return measured_spread(places, self.analyte, name)
            except LabError as found:
                fault = found
        if self.typed_site is not None:
            self.notes.append(f"{name}: the sigma typed for the whole site is used.")
            return _typed_entry(self.analyte, name, self.typed_site)
        if fault is not None:
            raise fault
        return self._pooled(name)

    def _pooled(self, name: str) -> StratumSpread:
        file_name = self.unplaced[0].file_name
        if not self.reason:
            message = (
                f"{file_name} does not say in which stratum its locations lie, so stratum "
                f"'{name}' has no sigma. Fill in the column 'stratum' or the positions; or say "
                'why one pooled sigma is fair, as source = "…" in its [[sigma]] table.'
            )
            raise LabError(message)
        self.notes.append(
            f"One sigma pooled from {file_name} is used in every stratum; reason given: "
            f"{self.reason}. It holds the differences between strata too, so it is usually "
            "larger than the sigma inside one."
        )
        return measured_spread(self.unplaced, self.analyte, name)

    def _compare(self, name: str, places: Sequence[PilotLocation], sigma: Sigma) -> None:
        if len(places) < 2 or sigma.value is None:
            return
        pilot = measured_spread(places, self.analyte, name, refuse=False)
        typed, found = significant(sigma.value), significant(pilot.sigma)
        self.notes.append(
            f"{name}: the typed sigma of {typed} {self.unit} is used; the pilot "
            f"({pilot.source}, {pilot.results} results) has s = {found} {self.unit}."
        )

    def split(self, entry: StratumSpread, duplicates: str) -> SplitSpread | None:
        """Split one stratum's sigma into its parts; None where nothing tells them."""
        pilot = self.parts.pilot
        places = self.measured.get(entry.stratum) or self.unplaced if entry.values else []
        counts = []
        if pilot is not None:
            first = duplicates == "first"
            counts = [1 if first else pilot.counts.get(place.location_id, 1) for place in places]
        return split_of(self.parts, entry, counts)

    def site(self) -> StratumSpread | None:
        """Give the whole site's sigma: typed for it, or pooled over every pilot location."""
        if self.typed_site is not None:
            return _typed_entry(self.analyte, "site", self.typed_site)
        places = [place for name in self.strata for place in self.measured.get(name, [])]
        places += self.unplaced
        if len(places) < 2:
            return None
        return measured_spread(places, self.analyte, "site", refuse=False)


def _gather(
    tables: Sequence[LabTable | None], campaign: Campaign, frame: "Frame", analyte: str
) -> _Gathered:
    unit = next(a.unit for a in campaign.analyte if a.id == analyte)
    known = {s.name.casefold(): s.name for s in frame.strata}
    gathered = _Gathered(analyte, unit, tuple(s.name for s in frame.strata))
    own_tables, written = of_analyte(tables, campaign, analyte)
    own = [s.model_copy(update={"stratum": _named_stratum(s, known) or None}) for s in written]
    gathered.parts = gather_parts(own_tables, own, analyte)
    for entry, read in zip(own, own_tables, strict=True):
        sigma, table, named = entry, read, entry.stratum or ""
        if sigma.part == PLACES:
            sigma, table = whole_from_parts(gathered.parts, named, sigma), None
        if sigma.part != "total":
            continue
        if table is not None:
            _add_pilot(gathered, sigma, table, frame, named, campaign.rules.duplicates)
        elif named:
            gathered.typed[named] = sigma
        else:
            gathered.typed_site = sigma
    return gathered


def _named_stratum(sigma: Sigma, known: Mapping[str, str]) -> str:
    written = (sigma.stratum or "").casefold()
    if not written or (written == "site" and "site" not in known):
        return ""
    if written not in known:
        message = (
            f"campaign file: [[sigma]] names the stratum '{sigma.stratum}'; the site has "
            f"{listed(list(known.values()))}. Correct it, or leave it out for the whole site."
        )
        raise LabError(message)
    return known[written]


def _add_pilot(
    gathered: _Gathered,
    sigma: Sigma,
    table: LabTable,
    frame: "Frame",
    named: str,
    duplicates: str,
) -> None:
    locations, notes = pilot_locations(table, gathered.analyte, duplicates=duplicates)
    by_stratum, unplaced, more = sort_into_strata(locations, frame, fixed=named)
    for name, places in by_stratum.items():
        gathered.measured.setdefault(name, []).extend(places)
    gathered.unplaced += unplaced
    gathered.reason = gathered.reason or sigma.source.strip()
    gathered.notes += [*notes, *more]


def _typed_entry(analyte: str, stratum: str, sigma: Sigma) -> StratumSpread:
    source = sigma.source.strip()
    return StratumSpread(
        analyte=analyte,
        stratum=stratum,
        sigma=float(sigma.value or 0.0),
        mean=sigma.expected_mean,
        results=sigma.from_results,
        source=source,
        assumed=source.casefold() == "assumed",
        skewness=sigma.skewness,
        excess_kurtosis=sigma.excess_kurtosis,
    )


def _declared(entry: StratumSpread, campaign: Campaign, analyte: str) -> StratumSpread:
    """Put the shape that the campaign declares in place of what a pilot shows of it."""
    deciding = campaign.deciding_analyte.id
    of_analyte = [s for s in campaign.sigma if (s.analyte or deciding) == analyte]
    own = [s for s in of_analyte if (s.stratum or "").casefold() == entry.stratum.casefold()]
    found = entry
    for sigma in [*(s for s in of_analyte if s.stratum is None), *own]:
        if sigma.skewness is not None:
            found = replace(found, skewness=sigma.skewness)
        if sigma.excess_kurtosis is not None:
            found = replace(found, excess_kurtosis=sigma.excess_kurtosis)
    return replace(found, visits=declared_visits(entry, campaign, analyte))


def _others(
    tables: Sequence[LabTable | None], campaign: Campaign, frame: "Frame", deciding: str
) -> tuple[list[StratumSpread], list[SplitSpread], list[str]]:
    """Give what is known of analytes that do not decide n; what is not known is only noted."""
    entries: list[StratumSpread] = []
    splits: list[SplitSpread] = []
    notes: list[str] = []
    for analyte in {s.analyte: None for s in campaign.sigma if s.analyte not in {None, deciding}}:
        try:
            gathered = _gather(tables, campaign, frame, analyte or deciding)
            notes += gathered.notes
            for stratum in frame.strata:
                entry = _declared(gathered.choose(stratum.name), campaign, analyte or deciding)
                entries.append(replace(entry, stratum=stratum.name))
                splits += filter(None, [gathered.split(entry, campaign.rules.duplicates)])
        except FieldplanError as fault:
            name = campaign.analyte_called(analyte or deciding).label
            notes += [f"{name}: {line}" for line in fault.problems]
    return entries, splits, notes
