"""Make the invented returns of the demo sites again: what the laboratory and the crew sent back.

Run ``python demo_sites/make_returns.py`` after anything has changed that the draw depends on: the
campaign files, the boundary, the drawing procedure. It draws each site as ``fieldplan pack`` would,
invents results from a seed, adds the mess that real returns have, and writes ``returned/``.
"""

import csv
import io
import math
import random
import re
import sys
import zipfile
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import date, datetime, timedelta
from pathlib import Path

from fieldplan.campaign.read import read_campaign
from fieldplan.design.model import Location
from fieldplan.plan.make import make_plan
from fieldplan.plan.model import Plan
from fieldplan.returns.form import as_text, field_return_blank
from fieldplan.samples.model import Sample

HERE = Path(__file__).resolve().parent
METRES_A_DEGREE = 111_320.0
HEADER = (
    "Sample ID", "Laboratory no.", "Analyte", "As reported", "Unit", "Reporting limit",
    "Qualifier lab", "Role", "Analysed on",
)  # fmt: skip


@dataclass(frozen=True)
class Measured:
    """One analyte as the laboratory finds and writes it.

    Parameters
    ----------
    analyte : str
        Its id in the campaign file.
    name, unit : str
        As the laboratory writes them.
    values : mapping of stratum to (median, spread of the logarithm)
    traces : tuple of (stratum, place in its list)
        Where the laboratory finds nothing.
    """

    analyte: str
    name: str
    unit: str
    values: dict[str, tuple[float, float]]
    traces: tuple[tuple[str, int], ...] = ()


@dataclass(frozen=True)
class Story:
    """What happens at one site.

    Parameters
    ----------
    seed : int
        Of the invented values.
    measured : tuple of Measured
        The deciding analyte first.
    lost : tuple of (stratum, place in its list, reason, note)
        Replaced by the next alternate of the stratum.
    broken : tuple of (stratum, place in its list)
        Jars that reached the laboratory broken.
    moved : tuple of (stratum, place in its list, metres north, reason, note)
    renamed : tuple of (stratum, place in its list, kind)
        Ids that the laboratory retyped.
    lab_file : str
    started : datetime
        Local time of the first sample.
    initials : tuple of str
    """

    seed: int
    measured: tuple[Measured, ...]
    lost: tuple[tuple[str, int, str, str], ...]
    broken: tuple[tuple[str, int], ...]
    moved: tuple[tuple[str, int, float, str, str], ...]
    renamed: tuple[tuple[str, int, str], ...]
    lab_file: str
    started: datetime
    initials: tuple[str, ...]


STORIES = {
    "hobbin-ley": Story(
        seed=71,
        measured=(
            Measured(
                "lead",
                "Lead, total",
                "mg/Kg",
                {"pasture": (44.0, 0.45), "yard": (125.0, 0.35), "tip": (265.0, 0.32)},
                (("pasture", 11),),
            ),
            Measured(
                "zinc",
                "Zinc, total",
                "mg/Kg",
                {"pasture": (92.0, 0.35), "yard": (205.0, 0.40), "tip": (390.0, 0.30)},
            ),
        ),
        lost=(("tip", 3, "no-recovery", "slag from the turf down, three tries"),),
        broken=(("pasture", 2),),
        moved=(("yard", 2, 2.6, "obstructed", "stack of pallets"),),
        renamed=(("yard", 1, "case"), ("pasture", 4, "dash")),
        lab_file="lab_results.csv",
        started=datetime(2026, 10, 12, 8, 40),
        initials=("jr", "KM"),
    ),
    "quern-flat": Story(
        seed=19,
        measured=(Measured("arsenic", "Arsenic", "ug/L", {"site": (3.9, 0.75)}, (("site", 9),)),),
        lost=(("site", 4, "dry", "no water above the pump"),),
        broken=(),
        moved=(),
        renamed=(("site", 2, "case"),),
        lab_file="lab_results.xlsx",
        started=datetime(2026, 4, 13, 9, 15),
        initials=("TO",),
    ),
    "yarrel-water": Story(
        seed=37,
        measured=(
            Measured(
                "nitrate-n",
                "Nitrate-N",
                "mg/L",
                {
                    "above the arm": (3.1, 0.17),
                    "below the arm": (4.4, 0.13),
                    "Thripp Beck": (6.4, 0.16),
                },
            ),
        ),
        lost=(("Thripp Beck", 3, "no-access", "bull in the field, gate locked"),),
        broken=(),
        moved=(("above the arm", 2, 4.5, "obstructed", "fallen willow"),),
        renamed=(("below the arm", 1, "dash"),),
        lab_file="lab_results.csv",
        started=datetime(2026, 6, 16, 8, 50),
        initials=("IB", "so"),
    ),
}


def main(names: Sequence[str]) -> None:
    """Write the returns of the named sites, or of all."""
    for name in names or sorted(STORIES):
        make_returns(HERE / name, STORIES[name], HERE / name / "returned")
        print(f"{name}: returned/ written")


def make_returns(folder: Path, story: Story, returned: Path) -> None:
    """Draw the site, invent what came back, and write it."""
    from fieldplan.lab import read_lab
    from fieldplan.returns.matches import matches_csv, propose_matches

    read = read_campaign(folder / "campaign.toml")
    plan = make_plan(read, made_on=read.campaign.plan.prepared_on or date(2026, 1, 1))
    returned.mkdir(exist_ok=True)
    field = field_rows(plan, story)
    write_csv(returned / "field_return.csv", field)
    lab_file = returned / story.lab_file
    rows = [HEADER, *lab_rows(plan, story, taken_samples(field))]
    write_xlsx(lab_file, rows) if lab_file.suffix == ".xlsx" else write_csv(lab_file, rows)
    near = propose_matches(plan, read_lab(lab_file, plan.campaign))
    proposed = list(csv.reader(io.StringIO(matches_csv(near))))
    truth = {written: sample for sample, written in retyped(plan, story).items()}
    by = read.campaign.plan.prepared_by
    answered = [
        [*row[:4], "yes" if truth.get(row[1]) == row[2] else "no", by] for row in proposed[1:]
    ]
    write_csv(returned / "matches.csv", [proposed[0], *answered])


def place_of(plan: Plan, stratum: str, order: int) -> Location:
    """Find the location at a place of a stratum's list."""
    return next(p for p in plan.locations.places if p.stratum == stratum and p.list_order == order)


def alternate_of(plan: Plan, stratum: str) -> Location:
    """Find the first alternate of a stratum."""
    return next(p for p in plan.locations.of_class("alternate") if p.stratum == stratum)


def field_rows(plan: Plan, story: Story) -> list[list[str]]:
    """Fill in the crew's form line by line."""
    rows = list(csv.reader(io.StringIO(field_return_blank(plan))))
    header, lines = rows[0], [dict(zip(rows[0], row, strict=True)) for row in rows[1:]]
    lost = {place_of(plan, s, k).location_id: (s, why, note) for s, k, why, note in story.lost}
    standing_in = {alternate_of(plan, s).location_id for s, *_ in story.lost}
    moved = {place_of(plan, s, k).location_id: rest for s, k, *rest in story.moved}
    broken = {place_of(plan, s, k).location_id for s, k in story.broken}
    chance = random.Random(story.seed)
    clock = story.started
    places = {p.location_id: p for p in plan.locations.places}
    for line in lines:
        location = line["location_id"].removeprefix("'")
        if location in lost:
            stratum, line["reason"], line["note"] = lost[location]
            line["taken"] = "no"
            line["replaced_by"] = as_text(alternate_of(plan, stratum).location_id)
        elif line["class"] == "alternate" and location not in standing_in:
            continue
        else:
            line["taken"] = "yes"
            north = float(moved[location][0]) if location in moved else 0.0
            if location in moved:
                line["reason"], line["note"] = moved[location][1:]
            if location in broken:
                line["reason"], line["note"] = "broken", "cracked in the cool box"
            if location:
                fill_position(line, places[location], north, chance)
        line["collected_at"] = clock.strftime("%Y-%m-%d %H:%M")
        line["initials"] = chance.choice(story.initials)
        clock = next_time(clock, chance)
    return [header, *([line[name] for name in header] for line in lines)]


def fill_position(
    line: dict[str, str], place: Location, north_m: float, chance: random.Random
) -> None:
    """Write where the receiver stood: planned place, offset, and a receiver's error."""
    error_north, error_east = chance.uniform(-0.7, 0.7), chance.uniform(-0.7, 0.7)
    narrow = math.cos(math.radians(place.latitude))
    latitude = place.latitude + (north_m + error_north) / METRES_A_DEGREE
    longitude = place.longitude + error_east / (METRES_A_DEGREE * narrow)
    line["actual_latitude"] = f"{latitude:.6f}"
    line["actual_longitude"] = f"{longitude:.6f}"


def next_time(clock: datetime, chance: random.Random) -> datetime:
    """Move the clock on to the next sample, over night when the day is done."""
    later = clock + timedelta(minutes=chance.randrange(14, 38))
    if later.hour < 16:
        return later
    return (later + timedelta(days=1)).replace(hour=8, minute=30)


def taken_samples(field: list[list[str]]) -> set[str]:
    """Name the samples that the crew took and the laboratory could open."""
    column = {name: number for number, name in enumerate(field[0])}
    return {
        row[column["sample_id"]]
        for row in field[1:]
        if row[column["taken"]] == "yes" and row[column["reason"]] != "broken"
    }


def retyped(plan: Plan, story: Story) -> dict[str, str]:
    """Map the sample ids that the laboratory retyped to what it wrote."""
    changed = {}
    for stratum, order, kind in story.renamed:
        sample = plan.samples.at(place_of(plan, stratum, order).location_id)[0]
        written = sample.sample_id
        changed[written] = written.lower() if kind == "case" else written.replace("-", " 0")
    return changed


def lab_rows(plan: Plan, story: Story, taken: set[str]) -> Iterator[list[str]]:
    """Write the laboratory's rows, one analyte after another."""
    for number, measured in enumerate(story.measured, start=1):
        chance = random.Random(story.seed + number)
        yield from rows_of(plan, story, measured, taken, chance)


def rows_of(
    plan: Plan, story: Story, measured: Measured, taken: set[str], chance: random.Random
) -> Iterator[list[str]]:
    """Write the rows of one analyte: samples, the laboratory's own controls, and a stray one."""
    names = retyped(plan, story)
    limit = plan.campaign.analyte_called(measured.analyte).reporting_limit or 1.0
    values: dict[str, float] = {}
    serial = 4100
    truth = {s.sample_id: invented(plan, measured, s, values, chance) for s in plan.samples.samples}
    analysed = {s.sample_id for s in plan.samples.samples if s.analytes}

    def row(name: str, serial: int, text: str, flag: str = "", role: str = "") -> list[str]:
        day = (story.started + timedelta(days=9)).strftime("%Y-%m-%d")
        number = f"{story.started.year}-{serial}"
        written = [measured.name, text, measured.unit, f"{limit:g}"]
        return [name, number, *written, flag, role, day]

    for sample_id in sorted(taken & analysed):
        serial += 1
        text, flag = as_written(truth[sample_id], limit, chance)
        yield row(names.get(sample_id, sample_id), serial, text, flag)
    spiked = f"{20 * limit * chance.uniform(0.93, 1.06):.3g}"
    yield row("LCS-1", serial + 1, spiked, role="laboratory control")
    yield row("MB-1", serial + 2, f"<{limit:g}", "U", "method blank")
    yield row("X118/2", serial + 3, f"{9 * limit:g}")


def invented(
    plan: Plan,
    measured: Measured,
    sample: Sample,
    values: dict[str, float],
    chance: random.Random,
) -> float:
    """Invent a value: lognormal by stratum, a duplicate near its parent, a blank near nothing."""
    wobble = math.exp(0.08 * bell(chance))
    if not sample.location_id:
        return 0.0
    if sample.qc_of:
        return values[sample.qc_of] * wobble
    place = next(p for p in plan.locations.places if p.location_id == sample.location_id)
    if (place.stratum, place.list_order) in measured.traces:
        values[sample.sample_id] = 0.0
        return 0.0
    median, spread = measured.values[place.stratum]
    if place.location_class == "targeted":
        median *= 3.0
    values[sample.sample_id] = median * math.exp(spread * bell(chance))
    return values[sample.sample_id] * wobble


def bell(chance: random.Random) -> float:
    """Return a near-normal deviate from twelve uniforms, whose stream Python keeps stable."""
    return sum(chance.random() for _ in range(12)) - 6.0


def as_written(value: float, limit: float, chance: random.Random) -> tuple[str, str]:
    """Write a value as laboratories do, with its qualifier."""
    if value < limit:
        return (f"<{limit:g}", "U") if chance.random() < 0.7 else ("ND", "")
    text = f"{value:.3g}" if value < 1000 else f"{value:.0f}"
    draw = chance.random()
    if value < 3 * limit:
        return f"{text} J", ""
    return (f" {text} ", "J") if draw < 0.15 else (text, "")


def write_csv(path: Path, rows: Sequence[Sequence[str]]) -> None:
    """Write rows as CSV with a byte-order mark, as spreadsheets save it."""
    text = io.StringIO(newline="")
    csv.writer(text).writerows(rows)
    path.write_bytes(text.getvalue().encode("utf-8-sig"))


def write_xlsx(path: Path, rows: Sequence[Sequence[str]]) -> None:
    """Write rows as a workbook whose bytes depend on nothing but the rows."""
    from openpyxl import Workbook

    book = Workbook()
    sheet = book.active
    assert sheet is not None
    sheet.title = "Results"
    for row in rows:
        sheet.append([float(cell) if is_number(cell) else cell for cell in row])
    book.properties.created = book.properties.modified = datetime(2026, 4, 24)
    loose = io.BytesIO()
    book.save(loose)
    with (
        zipfile.ZipFile(loose) as source,
        zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as goal,
    ):
        for name in sorted(source.namelist()):
            content = source.read(name)
            if name == "docProps/core.xml":
                content = dated(content)
            goal.writestr(zipfile.ZipInfo(name, (2026, 4, 24, 0, 0, 0)), content)


def dated(content: bytes) -> bytes:
    """Put a fixed moment where the workbook says when it was saved."""
    pattern = rb"(<dcterms:modified[^>]*>)[^<]*"
    return re.sub(pattern, rb"\g<1>2026-04-24T00:00:00Z", content)


def is_number(cell: str) -> bool:
    """Tell whether a spreadsheet would store the cell as a number."""
    try:
        float(cell)
    except ValueError:
        return False
    return cell == cell.strip()


if __name__ == "__main__":
    main(sys.argv[1:])
