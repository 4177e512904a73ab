"""The river from its campaign file to the estimate, by the commands that a person types."""

import csv
import json
import math
import shutil
from pathlib import Path

import pytest
from scipy import stats

from fieldplan.cli.demo import demo_folder
from tests.e2e.conftest import Packed, run
from tests.unit.frame.sites import line, write_geojson


def words(text: str) -> str:
    """Undo the wrapping of lines."""
    return " ".join(text.split())


@pytest.mark.parametrize("packed", ["yarrel-water"], indirect=True)
def test_river_runs_from_check_to_estimate(packed: Packed, tmp_path: Path) -> None:
    """check, size, pack, redraw, issue, estimate; the answer computed again by hand."""
    site = packed.copied_to(tmp_path)
    checked = words(run("check", site.campaign).output)
    assert "The mean speaks for 95.8 % of the lines: 4.07 of 4.25 km" in checked
    sized = run("size", site.campaign, "--json")
    planned = json.loads(sized.stdout)["locations"]
    with next((site.packet / "crew").glob("*points.csv")).open(encoding="utf-8-sig") as stream:
        rows = list(csv.DictReader(stream))
    random = [row for row in rows if row["class"] == "random"]
    assert len(random) == planned
    assert all(row["branch"] in ("Yarrel", "Thripp Beck") for row in rows)
    again = words(run("redraw", site.packet).output)
    assert f"All {len(rows)} places were drawn again, to the centimetre." in again
    assert run("issue", site.packet, "--by", "F. L.", "--date", "2026-09-22").exit_code == 0
    returned = site.folder / "returned"
    outcome = run(
        "estimate", site.packet, returned / "lab_results.csv",
        "--field", returned / "field_return.csv",
        "--matches", returned / "matches.csv",
        "--json",
    )  # fmt: skip
    assert outcome.exit_code == 0, outcome.output
    estimate = json.loads(outcome.stdout)
    by_hand = answer_by_hand(site.packet, estimate)
    assert estimate["mean"] == pytest.approx(by_hand[0], rel=1e-9)
    assert estimate["standard_error"] == pytest.approx(by_hand[1], rel=1e-9)
    ends = estimate["interval"]
    reach = float(stats.t.ppf(0.975, by_hand[2])) * by_hand[1]
    assert (ends["high"] - ends["low"]) / 2 == pytest.approx(reach, rel=1e-9)


def answer_by_hand(packet: Path, estimate: dict) -> tuple[float, float, float]:
    """Mean, standard error and degrees of freedom from the results used and the record's starts."""
    record = json.loads((packet / "office" / "record.json").read_text(encoding="utf-8"))
    start = {p["location_id"]: p["start"] for p in record["locations"]["places"]}
    weight = {s["name"]: s["weight"] for s in record["frame"]["strata"]}
    used = [r for r in estimate["returns"]["results"] if r["used"]]
    mean, parts = 0.0, []
    for name, share in weight.items():
        groups: dict[int, list[float]] = {}
        for r in used:
            if r["stratum"] == name:
                groups.setdefault(start[r["location_id"]], []).append(r["half"])
        values = [v for group in groups.values() for v in group]
        centre = math.fsum(values) / len(values)
        squares = sum(len(g) * (math.fsum(g) / len(g) - centre) ** 2 for g in groups.values())
        mean += share * centre
        k = len(groups)
        parts.append((share**2 * squares / (len(values) * (k - 1)), k - 1))
    variance = sum(part for part, _ in parts)
    return mean, math.sqrt(variance), variance**2 / sum(part**2 / f for part, f in parts)


BAD = {
    "is a loop": [line([-3.1, 54.6], [-3.09, 54.6], [-3.09, 54.61], [-3.1, 54.6])],
    "run along the same": [line([-3.1, 54.6], [-3.09, 54.6]), line([-3.09, 54.6], [-3.1, 54.6])],
    "has no length": [line([-3.1, 54.6], [-3.1, 54.6])],
}


@pytest.mark.parametrize("words_told", list(BAD))
def test_bad_rivers_are_told_in_one_line_and_nothing_is_written(tmp_path, words_told):
    """Exit code 1, file and feature named, no packet."""
    folder = tmp_path / "river"
    shutil.copytree(demo_folder() / "yarrel-water", folder)
    write_geojson(folder / "river.geojson", *BAD[words_told])
    outcome = run("pack", folder / "campaign.toml", "--date", "2026-05-11")
    assert outcome.exit_code == 1
    assert words_told in str(outcome.exception)
    assert not list(folder.glob("YW-*"))
