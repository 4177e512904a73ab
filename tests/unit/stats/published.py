"""Rows of tests/reference/values.csv by id: inputs, and the exact value recomputed there."""

import csv
import json
from functools import cache
from pathlib import Path
from typing import Any, NamedTuple

VALUES = Path(__file__).parents[2] / "reference" / "values.csv"


class Row(NamedTuple):
    """One published value: ``exact`` is the full-precision number, ``source`` where it stands."""

    id: str
    inputs: dict[str, Any]
    exact: float
    source: str


@cache
def rows() -> dict[str, Row]:
    """Read all rows."""
    with VALUES.open(encoding="utf-8", newline="") as stream:
        return {
            r["id"]: Row(
                r["id"],
                json.loads(r["inputs"]),
                float(r["exact"] or "nan"),
                f"{r['source']}, {r['locator']}",
            )
            for r in csv.DictReader(stream)
        }


def row(row_id: str) -> Row:
    """Return one row; KeyError when there is none."""
    return rows()[row_id]


def area(number: str) -> list[Row]:
    """Return the rows of one area, such as ``A02``."""
    found = [r for r in rows().values() if r.id.startswith(f"{number}-")]
    assert found, f"values.csv has no rows of area {number}"
    return found
