"""Results of the demo sites: verdicts recomputed, and a second estimate tells of the first."""

import csv
import json
from pathlib import Path

import numpy as np
import pytest
from scipy import stats

from tests.e2e.conftest import Packed, run


def estimated(site: Packed, *options: str) -> Path:
    """Estimate a copy of a site from what came back; return the results folder."""
    returned = site.folder / "returned"
    lab_file = next(returned.glob("lab_results.*"))
    outcome = run(
        "estimate", site.packet, lab_file, "--field", returned / "field_return.csv",
        "--matches", returned / "matches.csv", "--json", *options,
    )  # fmt: skip
    assert outcome.exit_code == 0, outcome.output
    return Path(json.loads(outcome.stdout)["results"])


def half_width(results: Path, content: dict[str, object], analyte: str) -> float:
    """Recompute the two-sided half-width from the table of results alone."""
    with (results / "results.csv").open(encoding="utf-8-sig", newline="") as stream:
        rows = [r for r in csv.DictReader(stream) if r["used"] == "yes" and r["analyte"] == analyte]
    strata = content["strata"]
    assert isinstance(strata, list)
    parts, known = [], []
    for stratum in strata:
        values = [float(r["result_half"]) for r in rows if r["stratum"] == stratum["stratum"]]
        left = 1 - len(values) / 22 if analyte == "arsenic" else 1.0
        parts.append(stratum["weight"] ** 2 * float(np.var(values, ddof=1)) / len(values) * left)
        known.append(len(values) - 1)
    freedom = sum(parts) ** 2 / sum(p * p / k for p, k in zip(parts, known, strict=True))
    return float(stats.t.ppf(0.975, freedom)) * sum(parts) ** 0.5


@pytest.mark.parametrize("packed", ["hobbin-ley", "quern-flat"], indirect=True)
def test_the_verdict_on_the_target_is_that_of_an_independent_computation(
    packed: Packed, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """The wells were planned for a half-width of 1.4, the field for a standard error of 10."""
    monkeypatch.chdir(tmp_path)
    results = estimated(packed.copied_to(tmp_path))
    content = json.loads((results / "results.json").read_text(encoding="utf-8"))
    width = half_width(results, content, content["analyte"])
    (said,) = [line for line in content["why_different"] if line.startswith("The target")]
    ends = content["interval"]
    assert (ends["high"] - ends["low"]) / 2 == pytest.approx(width, rel=1e-9)
    if content["analyte"] == "arsenic":
        reached, asked = width, 1.4
        assert "half-width" in said
    else:
        reached, asked = content["standard_error"], 10.0
    assert f"was {'kept' if reached <= asked else 'missed'}: it came to {reached:.2f} " in said


def test_a_second_estimate_tells_of_the_first_and_of_a_plan_never_issued(
    packed: Packed, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Whoever reads the later sheet sees the earlier answer, its file, and that this is a draft."""
    monkeypatch.chdir(tmp_path)
    site = packed.copied_to(tmp_path)
    first = estimated(site)
    second = estimated(site, "--confidence", "0.9", "--report-number", "LR 26/118")
    before = json.loads((first / "results.json").read_text(encoding="utf-8"))
    after = json.loads((second / "results.json").read_text(encoding="utf-8"))
    assert before["earlier_results"] == []
    (earlier,) = after["earlier_results"]
    assert earlier["folder"] == first.name
    assert earlier["lab_sha256"] == before["returns"]["lab_sha256"]
    assert earlier["answers"][before["analyte"]]["mean"] == before["mean"]
    assert set(after["files"]) >= {"field_return.csv", "matches.csv"}
    sheet = (second / "results_sheet.html").read_text(encoding="utf-8")
    for words in (
        first.name,
        "LR 26/118",
        "was never issued",
        before["returns"]["lab_sha256"][:16],
    ):
        assert words in sheet
