"""A laboratory table and field rows for the plan of the factories, with changes by location."""

from collections.abc import Mapping, Sequence

from fieldplan.lab.cells import read_cell
from fieldplan.lab.model import LabRow, LabTable
from fieldplan.plan.model import Plan
from fieldplan.returns.model import FieldRow
from tests.factories import make_plan

CELLS = {
    "QF-A-01": "41", "QF-A-02": "64", "QF-A-03": "22", "QF-A-04": "35", "QF-B-01": "120",
    "QF-B-02": "187", "QF-B-03": "95", "QF-B-04": "<5", "QF-B-05": "143", "TANK": "910",
}  # fmt: skip
DUPLICATE = "QF-655"
"""The blind duplicate at QF-A-02."""


def lab_row(number: int, sample_id: str, cell: str, **changes: object) -> LabRow:
    """Make one row as the reader would."""
    reading = read_cell(cell)
    parts: dict[str, object] = {
        "row": number,
        "location_id": "",
        "sample_id": sample_id,
        "analyte": "lead",
        "as_reported": cell,
        "result": None if reading.number is None else float(reading.number),
        "detected": reading.detected,
        "reporting_limit": None if reading.limit is None else float(reading.limit),
        "unit": "mg/kg",
    }
    return LabRow(**{**parts, **changes})  # type: ignore[arg-type]


def lab_rows(plan: Plan, cells: Mapping[str, str] = CELLS) -> list[LabRow]:
    """Give one row a sample of these locations, the duplicate 5 above its parent."""
    rows: list[LabRow] = []
    for sample in plan.samples.samples:
        if sample.location_id in cells:
            cell = "69" if sample.qc_of else cells[sample.location_id]
            rows.append(lab_row(len(rows) + 2, sample.sample_id, cell))
    return rows


def table(rows: Sequence[LabRow]) -> LabTable:
    """Put rows into a table."""
    return LabTable("labs.csv", "a" * 64, tuple(rows))


def field_rows(plan: Plan | None = None, **changes: dict[str, object]) -> list[FieldRow]:
    """Say that all random and targeted places were taken; keywords change one location."""
    plan = plan or make_plan()
    classes = {place.location_id: place.location_class for place in plan.locations.places}
    rows = []
    for number, sample in enumerate(plan.samples.samples, start=2):
        name = sample.location_id
        said: dict[str, object] = {"taken": True if classes[name] != "alternate" else None}
        said |= changes.get(name.replace("-", "_"), {})
        rows.append(FieldRow(number, name, sample.sample_id, **said))  # type: ignore[arg-type]
    return rows
