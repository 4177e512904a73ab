"""What a pilot says of the spread between locations, one value a location."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import date

from fieldplan.base.errors import LabError
from fieldplan.base.units import significant
from fieldplan.lab.duplicates import bounds, merge_results
from fieldplan.lab.model import LabRow, LabTable, StratumSpread
from fieldplan.lab.roles import IN_THE_MEAN
from fieldplan.lab.visits import told_apart_by_day
from fieldplan.lab.words import counted, listed
from fieldplan.stats.summary import sample_mean, sample_sd, sample_skewness, skewness_ceiling

MOST_NON_DETECTS = 0.40
"""Above this share of non-detects s says more of the limit than of the site (house rule)."""


@dataclass(frozen=True)
class PilotLocation:
    """One pilot location: its value at the three bounds and what the file says of its place."""

    file_name: str
    location_id: str
    stratum: str
    latitude: float | None
    longitude: float | None
    low: float
    half: float
    high: float
    detected: bool
    collected_on: date | None = None


def pilot_locations(
    table: LabTable, analyte: str, *, duplicates: str
) -> tuple[tuple[PilotLocation, ...], tuple[str, ...]]:
    """Bring the rows of one analyte down to one value a location.

    Parameters
    ----------
    table : LabTable
    analyte : str
        The campaign's id.
    duplicates : str
        ``average`` or ``first``.

    Returns
    -------
    locations : tuple of PilotLocation
        In file order.
    notes : tuple of str

    Raises
    ------
    LabError
        One sample or one location has two different results and no row is called a duplicate, a
        duplicate names no location of the file, or one location stands in two strata.
    """
    rows = [row for row in table.rows if row.analyte == analyte and row.role in IN_THE_MEAN]
    left_out = sum(row.analyte == analyte for row in table.rows) - len(rows)
    groups, repeats = rows_by_location(table, analyte)
    notes = []
    if repeats:
        numbers = listed([str(row.row) for row in repeats])
        notes.append(f"{table.file_name}: rows that repeat a result were read once: row {numbers}.")
    extra = sum(len(group) - 1 for group in groups.values())
    if extra:
        done = "averaged with their location" if duplicates == "average" else "left out"
        notes.append(f"{table.file_name}: {counted(extra, 'duplicate')} {done}; n does not grow.")
    if left_out:
        notes.append(f"{table.file_name}: {counted(left_out, 'control sample')} left out.")
    locations = tuple(
        _location(table.file_name, name, group, duplicates) for name, group in groups.items()
    )
    return locations, tuple(notes)


def rows_by_location(table: LabTable, analyte: str) -> tuple[dict[str, list[LabRow]], list[LabRow]]:
    """Sort the rows of one analyte by location, the field sample before its duplicates.

    Parameters
    ----------
    table : LabTable
    analyte : str
        The campaign's id.

    Returns
    -------
    groups : dict of str to list of LabRow
        In file order.
    repeats : list of LabRow
        Rows that only say again what another says; in no group.

    Raises
    ------
    LabError
        As in ``pilot_locations``.
    """
    rows = [row for row in table.rows if row.analyte == analyte and row.role in IN_THE_MEAN]
    rows, problems = _without_copies(table.file_name, told_apart_by_day(rows))
    groups, lost = _by_location(table.file_name, rows)
    problems += lost
    groups, second, repeats = _one_field_sample(table.file_name, groups)
    problems += second
    for name, group in groups.items():
        if len({row.stratum.casefold() for row in group if row.stratum}) > 1:
            problems.append(f"{table.file_name}: location '{name}' stands in two strata; keep one.")
    if problems:
        raise LabError(*problems)
    return groups, repeats


def _without_copies(name: str, rows: Sequence[LabRow]) -> tuple[list[LabRow], list[str]]:
    """Keep one of rows that repeat the same sample; two different results are a question."""
    kept: dict[tuple[str, str], LabRow] = {}
    unnamed: list[LabRow] = []
    problems = []
    for row in rows:
        key = (row.sample_id.casefold(), row.role)
        if not row.sample_id:
            unnamed.append(row)
        elif key not in kept:
            kept[key] = row
        elif bounds(kept[key]) != bounds(row):
            problems.append(
                f"{name} row {row.row}: sample '{row.sample_id}' has a second result "
                f"'{row.as_reported.strip()}' beside '{kept[key].as_reported.strip()}' in row "
                f"{kept[key].row}. Keep the one that counts."
            )
    return sorted([*kept.values(), *unnamed], key=lambda row: row.row), problems


def _by_location(name: str, rows: Sequence[LabRow]) -> tuple[dict[str, list[LabRow]], list[str]]:
    places = {row.location_id.casefold(): row.location_id for row in rows if row.location_id}
    samples = {row.sample_id.casefold(): row for row in rows if row.sample_id}
    groups: dict[str, list[LabRow]] = {}
    problems = []
    for row in sorted(rows, key=lambda row: row.role == "field duplicate"):
        parent = row.duplicate_of.casefold()
        if parent in samples and samples[parent] is not row:
            place = samples[parent].location_id or samples[parent].sample_id
        elif parent and parent not in places:
            problems.append(
                f"{name} row {row.row}: duplicate_of '{row.duplicate_of}' names no location or "
                "sample of this file. Correct it."
            )
            continue
        else:
            place = places.get(parent) or row.location_id or row.sample_id
        groups.setdefault(places.get(place.casefold(), place), []).append(row)
    return groups, problems


def _one_field_sample(
    name: str, groups: Mapping[str, Sequence[LabRow]]
) -> tuple[dict[str, list[LabRow]], list[str], list[LabRow]]:
    """Let one row a location be its field sample; the others must be called its duplicates.

    Two unlike results under one id are as likely two places, a revised result or a slip of the
    pen as two jars of one place; averaging them in silence would shrink the spread.
    """
    kept: dict[str, list[LabRow]] = {}
    problems, repeats = [], []
    for place, rows in groups.items():
        first = rows[0]
        for row in rows:
            if row is first or row.role == "field duplicate":
                kept.setdefault(place, []).append(row)
            elif bounds(first) == bounds(row):
                repeats.append(row)
            else:
                spelled = [r.location_id or r.sample_id for r in (row, first)]
                other = f" of '{spelled[1]}'" if spelled[0] != spelled[1] else ""
                problems.append(
                    f"{name} row {row.row}: location '{spelled[0]}' has a second result "
                    f"'{row.as_reported.strip()}' beside '{first.as_reported.strip()}'{other} in "
                    f"row {first.row}, and neither is called a duplicate. Write field duplicate "
                    "into the role of the one that is, or keep the row that counts."
                )
    return kept, problems, repeats


def _location(name: str, place: str, rows: Sequence[LabRow], duplicates: str) -> PilotLocation:
    merged = merge_results(rows, duplicates)
    placed = next((r for r in rows if r.latitude is not None and r.longitude is not None), rows[0])
    return PilotLocation(
        file_name=name,
        location_id=place,
        stratum=next((row.stratum for row in rows if row.stratum), ""),
        latitude=placed.latitude,
        longitude=placed.longitude,
        low=merged.low,
        half=merged.half,
        high=merged.high,
        detected=merged.detected,
        collected_on=next((row.collected_on for row in rows if row.collected_on), None),
    )


def measured_spread(
    locations: Sequence[PilotLocation], analyte: str, stratum: str, *, refuse: bool = True
) -> StratumSpread:
    """Give sigma from pilot locations: the largest s over non-detects at 0, half and the limit.

    Parameters
    ----------
    locations : sequence of PilotLocation
    analyte, stratum : str
    refuse : bool
        Whether many non-detects and nil spread are errors; False for a value that is only shown.

    Returns
    -------
    StratumSpread

    Raises
    ------
    LabError
        Fewer than 2 locations, more than 40 % non-detects, or no spread at all.
    """
    files = listed(sorted({place.file_name for place in locations}))
    if len(locations) < 2:
        message = (
            f"{files or 'the pilot'}: stratum '{stratum}' has "
            f"{counted(len(locations), 'result')}; a sigma needs 2. {_REMEDY.format(stratum)}"
        )
        raise LabError(message)
    ends = {at: [getattr(place, at) for place in locations] for at in ("low", "half", "high")}
    sigmas = {at: sample_sd(values) for at, values in ends.items()}
    missing = sum(not place.detected for place in locations)
    largest = max(sigmas, key=lambda at: sigmas[at])
    if refuse and missing > MOST_NON_DETECTS * len(locations):
        message = (
            f"{files}: {missing} of {len(locations)} results in stratum '{stratum}' are "
            "non-detects; above 40 % their s says more of the limit than of the site. "
            f"{_REMEDY.format(stratum)}"
        )
        raise LabError(message)
    if refuse and sigmas[largest] <= 1e-12 * max(map(abs, ends[largest])):
        raise _all_the_same(files, stratum, ends[largest])
    return StratumSpread(
        analyte=analyte,
        stratum=stratum,
        sigma=sigmas[largest],
        mean=sample_mean(ends["half"]),
        results=len(locations),
        source=files,
        values=tuple(ends["half"]),
        detected=tuple(place.detected for place in locations),
        sigma_at_zero=sigmas["low"],
        sigma_at_half=sigmas["half"],
        sigma_at_limit=sigmas["high"],
        skewness=sample_skewness(ends["half"]),
        skewness_ceiling=skewness_ceiling(len(locations)),
        positions=tuple(_position(place) for place in locations),
        days=tuple(place.collected_on for place in locations),
    )


def _all_the_same(files: str, stratum: str, values: Sequence[float]) -> LabError:
    return LabError(
        f"{files}: all {len(values)} results in stratum '{stratum}' are "
        f"{significant(values[0])}; a spread of 0 cannot size a campaign. "
        f"{_REMEDY.format(stratum)}"
    )


def _position(place: PilotLocation) -> tuple[float, float] | None:
    if place.latitude is None or place.longitude is None:
        return None
    return place.latitude, place.longitude


_REMEDY = 'Type one in the campaign file: a [[sigma]] table with stratum = "{}", value, source.'


FEW = 8
"""Up to so many strata each has sentences of its own."""


def many_strata_sentence(entries: Sequence[StratumSpread], unit: str) -> str:
    """Say in one sentence what is known of the spread in many strata.

    Parameters
    ----------
    entries : sequence of StratumSpread
    unit : str

    Examples
    --------
    >>> entries = [StratumSpread("lead", f"S{k}", 9.0 + k, None, 4 + k, "p.csv") for k in (1, 2)]
    >>> many_strata_sentence(entries, "mg/kg")
    'In 2 strata s lies between 10.0 mg/kg (S1) and 11.0 mg/kg (S2), each from 5 to 6 results.'
    """
    low, high = (choose(entries, key=lambda entry: entry.sigma) for choose in (min, max))
    line = (
        f"In {len(entries)} strata s lies between {significant(low.sigma)} {unit} ({low.stratum}) "
        f"and {significant(high.sigma)} {unit} ({high.stratum})"
    )
    behind = [entry.results for entry in entries if entry.results is not None]
    if len(behind) == len(entries):
        fewest, most = min(behind), max(behind)
        span = counted(most, "result") if fewest == most else f"{fewest} to {most} results"
        line += f", each from {span}"
    missing = sum(entry.detected.count(False) for entry in entries)
    guessed = sum(entry.assumed for entry in entries)
    line += f"; {counted(missing, 'non-detect')}" if missing else ""
    return line + (f"; ASSUMED in {guessed} of them." if guessed else ".")


def spread_sentences(entry: StratumSpread, unit: str, counts: Mapping[str, int]) -> list[str]:
    """Say in sentences what is known of one stratum's spread.

    Parameters
    ----------
    entry : StratumSpread
    unit : str
    counts : mapping of str to int
        Unused names are ignored; ``strata`` is how many strata the frame has.

    Returns
    -------
    list of str
    """
    head = "" if counts.get("strata", 1) == 1 else f"{entry.stratum}: "
    if not entry.values:
        return [head + _typed_sentence(entry, unit)]
    missing = entry.detected.count(False)
    mean, low, high = sample_mean(entry.values), min(entry.values), max(entry.values)
    half = entry.sigma if entry.sigma_at_half is None else entry.sigma_at_half
    ratio = half / mean if mean else 0.0
    put = ", at half of the limit here" if missing else ""
    lines = [
        f"{head}{entry.results} pilot locations ({entry.source}) have a mean of "
        f"{significant(mean)} {unit} and s = {significant(half)} {unit} (CV {ratio:.2f}), "
        f"from {significant(low)} to {significant(high)} {unit}; "
        f"{counted(missing, 'non-detect')}{put}."
    ]
    if missing:
        at_zero, at_limit = entry.sigma_at_zero or 0.0, entry.sigma_at_limit or 0.0
        lines.append(
            f"{head}with non-detects at 0 s would be {significant(at_zero)}, at the limit "
            f"{significant(at_limit)} {unit}; the larger, {significant(entry.sigma)} {unit}, sizes "
            "the campaign. A mean to expect is taken with them at half."
        )
    lines.append(
        f"{head}the skewness of these results is {entry.skewness or 0.0:.2f}; {entry.results} "
        f"results can show no more than {entry.skewness_ceiling or 0.0:.2f}, so they do not "
        "prove that the population is symmetric."
    )
    return lines


def _typed_sentence(entry: StratumSpread, unit: str) -> str:
    value = f"sigma = {significant(entry.sigma)} {unit}"
    if entry.assumed:
        return f"{value} is ASSUMED, not measured."
    known = f", from {entry.results} results" if entry.results else ""
    return f"{value} was typed in the campaign file (source: {entry.source}{known})."
