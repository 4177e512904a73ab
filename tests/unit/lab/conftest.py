"""A folder to write laboratory files into, and a campaign that reads them."""

from collections.abc import Callable
from pathlib import Path

import pytest

from fieldplan.lab import read_lab
from fieldplan.lab.model import LabTable
from tests.factories import make_campaign

Reader = Callable[..., LabTable]


@pytest.fixture
def lab_file(tmp_path: Path) -> Callable[[str | bytes], Path]:
    """Write text or bytes as labs.csv."""

    def write(content: str | bytes, name: str = "labs.csv") -> Path:
        path = tmp_path / name
        path.write_bytes(content.encode() if isinstance(content, str) else content)
        return path

    return write


@pytest.fixture
def read(lab_file: Callable[[str | bytes], Path]) -> Reader:
    """Write a file and read it with the campaign of two strata, lead in mg/kg of no basis."""
    whole = make_campaign()
    lead = whole.analyte[0].model_copy(update={"basis": ""})
    campaign = whole.model_copy(update={"analyte": (lead,)})

    def reader(content: str | bytes, *, columns: dict[str, str] | None = None) -> LabTable:
        return read_lab(lab_file(content), campaign, columns=columns)

    return reader
