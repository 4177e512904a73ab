"""``[[field_reading]]``: a cheap reading in the field that follows the laboratory's result."""

from collections.abc import Iterator, Mapping
from typing import Annotated, Any

from pydantic import Field

from fieldplan.campaign.table import NonNegativeNumber, Table, Words

MEANING = {
    "": "a cheap reading in the field that follows the laboratory's result",
    "name": "what is read, such as a field meter's reading",
    "analyte": "the analyte whose results it follows; may be left out where there is one",
    "correlation": "how closely it follows them from place to place, between -1 and 1",
    "from_pairs": "how many pairs of reading and result stand behind a typed correlation",
    "source": "where a typed correlation comes from; ASSUMED stamps it",
    "pilot": "file with a reading and a result in every row, to learn the correlation from",
    "columns": "names of its columns reading and result: ours on the left, the file's on the right",
    "per_reading": "money for each reading, the visit apart",
}

COLUMNS = ("reading", "result", "location_id")
"""Columns of ours that a file of pairs may have."""


class FieldReading(Table):
    """A reading, how closely it follows the laboratory, how that is known, and what it costs."""

    name: Words
    analyte: str | None = None
    correlation: Annotated[float, Field(gt=-1, lt=1, allow_inf_nan=False)] | None = None
    from_pairs: Annotated[int, Field(ge=4)] | None = None
    source: str = ""
    pilot: str | None = None
    columns: Mapping[str, str] = {}
    per_reading: NonNegativeNumber = 0.0


def problems(table: dict[str, Any]) -> Iterator[tuple[str, str]]:
    """Give key and sentence for each rule between keys that one table breaks.

    Parameters
    ----------
    table : dict
        As typed; the key is empty where the whole table is meant.
    """
    if ("pilot" in table) == ("correlation" in table):
        got = "both" if "pilot" in table else "neither"
        yield "", f"needs exactly one of pilot and correlation (got {got}). Keep one."
    elif "correlation" in table:
        source = table.get("source", "")
        if table["correlation"] == 0:
            yield "correlation", "a reading that follows nothing is of no use (got 0). Take it out."
        if isinstance(source, str) and not source.strip():
            text = 'missing; a typed correlation needs its source. Give it, or source = "ASSUMED".'
            yield "source", text
    elif "from_pairs" in table:
        yield "from_pairs", "the pairs of the pilot are counted, not typed. Take this key out."
    columns = table.get("columns")
    for key in columns if isinstance(columns, dict) else ():
        if key not in COLUMNS:
            text = f'no column of ours that is read here (got "{key}"). Takes {", ".join(COLUMNS)}.'
            yield f"columns.{key}", text
