"""The crew's list of locations and the office's key to samples, as CSV that spreadsheets keep.

UTF-8 with a byte-order mark (without one, spreadsheets read accents wrongly), commas, CRLF line
ends (RFC 4180), one header row. Texts that a spreadsheet would run or rewrite carry an apostrophe.
"""

import csv
import io
from collections.abc import Iterable, Sequence
from pathlib import Path

from fieldplan.packet.exchange.plain_text import plain, spreadsheet_cell
from fieldplan.packet.exchange.read_points import ReadPoint, degrees_of_angle, degrees_of_grid
from fieldplan.packet.exchange.rows import CREW_COLUMNS, Cell, columns_of, point_rows, text_of
from fieldplan.plan.model import Plan

KEY_COLUMNS = (
    "sample_id", "location_id", "short_name", "role", "qc_of", "analytes",
    "depth_top_m", "depth_bottom_m",
)  # fmt: skip


def write_points_csv(plan: Plan) -> bytes:
    """Write the crew's list: no weights, no roles of samples.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    bytes
    """
    columns = columns_of(plan, CREW_COLUMNS)
    return _csv_bytes(columns, (row.values(columns) for row in point_rows(plan)))


def write_samples_key(plan: Plan) -> bytes:
    """Write which sample repeats which: for the office, until all results are in.

    Parameters
    ----------
    plan : Plan

    Returns
    -------
    bytes
    """
    return _csv_bytes(KEY_COLUMNS, sample_rows(plan))


def sample_rows(plan: Plan) -> list[list[Cell]]:
    """List all samples with their roles, one row each in the order of ``KEY_COLUMNS``."""
    short_names = {place.location_id: place.short_name for place in plan.locations.places}
    return [
        [
            plain(sample.sample_id),
            plain(sample.location_id),
            short_names.get(sample.location_id, ""),
            sample.role,
            plain(sample.qc_of),
            plain(" ".join(sample.analytes)),
            sample.depth_top_m,
            sample.depth_bottom_m,
        ]
        for sample in plan.samples.samples
    ]


def read_points_csv(path: Path) -> list[ReadPoint]:
    """Read the crew's list with pandas: three points a row, one per coordinate form.

    Parameters
    ----------
    path : Path

    Returns
    -------
    list of ReadPoint
    """
    found = []
    for row in _pandas_rows(path):
        name, location = row["short_name"], row["location_id"]
        angle = degrees_of_angle(row["latitude_dms"]), degrees_of_angle(row["longitude_dms"])
        grid = degrees_of_grid(row["utm_zone"], float(row["easting"]), float(row["northing"]))
        degrees = float(row["latitude"]), float(row["longitude"])
        found += [ReadPoint(name, location, *form) for form in (degrees, angle, grid)]
    return found


def read_samples_key(path: Path) -> list[tuple[str, str, str]]:
    """Read the key with pandas as (sample_id, location_id, qc_of) as they stand in the cells."""
    return [(row["sample_id"], row["location_id"], row["qc_of"]) for row in _pandas_rows(path)]


def _csv_bytes(columns: Sequence[str], rows: Iterable[Sequence[Cell]]) -> bytes:
    text = io.StringIO(newline="")
    writer = csv.writer(text)
    writer.writerow(columns)
    for row in rows:
        named = zip(columns, row, strict=True)
        writer.writerow(
            [spreadsheet_cell(v) if isinstance(v, str) else text_of(name, v) for name, v in named]
        )
    return text.getvalue().encode("utf-8-sig")


def _pandas_rows(path: Path) -> list[dict[str, str]]:
    import pandas

    table = pandas.read_csv(path, dtype=str, keep_default_na=False, encoding="utf-8-sig")
    return [
        {str(name): str(value) for name, value in row.items()}
        for row in table.to_dict(orient="records")
    ]
