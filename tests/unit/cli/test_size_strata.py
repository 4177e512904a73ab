"""``fieldplan size`` for strata: shares, bounds, prices, several analytes; and each fault."""

import json
import random
import shutil
from pathlib import Path
from typing import Any, get_args

import pytest
from click.testing import Result

from fieldplan.base.errors import FieldplanError
from fieldplan.cli import entry
from fieldplan.stats.allocation import Allocation
from tests.command_runner import command_runner

ROOT = Path(__file__).parents[3]
SHARES = ROOT / "demo_sites" / "sizing" / "shares" / "campaign.toml"
SITE = ("--stratum", "0.64,18", "--stratum", "0.22,45", "--stratum", "0.14,90",
        "--standard-error", "9")  # fmt: skip
PRICES = ("--with", "cost.currency=EUR", "--with", "cost.per_location=30",
          "--with", "cost.per_analysis=45",
          "--with", "cost.per_location_by_stratum.stratum 3=255")  # fmt: skip


def run(*words: str) -> Result:
    """Run the command as typed."""
    return command_runner().invoke(entry, ["size", *words])


def found(*words: str) -> dict[str, Any]:
    """Read what ``--json`` prints."""
    outcome = run(*words, "--json")
    assert outcome.exit_code == 0, outcome.stderr
    answer: dict[str, Any] = json.loads(outcome.stdout)
    return answer


def counts(answer: dict[str, Any]) -> list[int]:
    """Take the results by stratum."""
    return [entry_["n"] for entry_ in answer["strata"]]


@pytest.mark.parametrize(
    ("allocation", "expected"),
    [("proportional", [14, 4, 4]), ("neyman", [5, 4, 6]), ("equal-precision", [2, 10, 36])],
)
def test_bare_numbers_are_shared_in_every_way(allocation: str, expected: list[int]) -> None:
    """Brute force stands behind each in tests/unit/stats/test_allocation.py."""
    assert counts(found(*SITE, "--allocation", allocation)) == expected


def test_dear_strata_get_fewer_for_less_money() -> None:
    """By hand: 12·75 + 4·300 = 2100, against 9·75 + 6·300 = 2475 for Neyman's counts."""
    cheap = found(*SITE, "--allocation", "cost-optimal", *PRICES)
    neyman = found(*SITE, "--allocation", "neyman", *PRICES)
    assert (counts(cheap), cheap["cost"]) == ([6, 6, 4], 2100.0)
    assert (counts(neyman), neyman["cost"]) == ([5, 4, 6], 2475.0)
    assert cheap["findings"]["strata"]["rows"][2][0] == "cost-optimal (chosen)"


def test_bounds_of_single_strata_hold() -> None:
    """Keys of a campaign file, typed as such."""
    tight = found(*SITE, "--allocation", "neyman", "--with", "design.most={'stratum 3'=4}")
    assert counts(tight) == [6, 6, 4]
    wide = found(*SITE, "--allocation", "neyman", "--with", "design.least={'stratum 2'=6}")
    assert counts(wide)[1] == 6


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (("--allocation", "cost-optimal"), "add --with cost.currency=EUR"),
        (("--allocation", "best"), "proportional, neyman, cost-optimal or equal-precision"),
        (("--with", "design.most={'stratum 3'=1}"), "below the fewest of 2 (got 1)"),
        (("--stratum", "0.2,5"), "the weights of --stratum sum to 1.2"),
    ],
)
def test_what_is_typed_wrong_is_one_line_with_its_remedy(words: tuple[str, ...], said: str) -> None:
    """Nothing is printed to standard output."""
    outcome = run(*SITE, *words)
    assert outcome.exit_code == 2
    assert said in outcome.stderr
    assert len(outcome.stderr.strip().splitlines()) == 1
    assert outcome.stdout == ""


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (("--with", "design.most={'stratum 9'=4}"), "is no stratum of the frame"),
        (
            ("--allocation", "neyman", "--with", "design.most={'stratum 3'=2}"),
            "with any number elsewhere it stays at 8.91",
        ),
    ],
)
def test_what_cannot_be_done_is_said_with_its_remedy(words: tuple[str, ...], said: str) -> None:
    """A name that no stratum has; by hand 0.14·90/√2 = 8.91 above a target of 8.5."""
    outcome = run(*SITE[:-1], "8.5", *words)
    assert outcome.exit_code == 1
    assert isinstance(outcome.exception, FieldplanError)
    assert said in str(outcome.exception)
    assert outcome.stdout == ""


def test_two_analytes_decide_together() -> None:
    """The file of the docs: both targets kept, the deciding ones named, both in the target."""
    answer = found(str(SHARES))
    assert sum(counts(answer)) == 50
    assert counts(answer)[1] <= 12
    zinc = answer["others"][0]
    assert zinc["meets"] is True
    assert zinc["chance"] >= 0.8
    assert answer["chance_enough"] >= 0.8
    decided = answer["findings"]["deciding-analytes"]
    shares = {a["name"]: a["value"] for a in decided["amounts"] if a["name"].startswith("share_")}
    assert sum(shares.values()) == pytest.approx(1.0)
    assert "frontier" not in answer["findings"]


def test_check_says_that_both_decide(tmp_path: Path) -> None:
    """What is asked is said before anything is counted."""
    shutil.copytree(ROOT / "demo_sites", tmp_path / "demo_sites")
    path = tmp_path / "demo_sites" / "sizing" / "shares" / "campaign.toml"
    outcome = command_runner().invoke(entry, ["check", str(path)])
    words = " ".join(outcome.stdout.split())
    asked = "Also asked: the mean of Zinc with a standard error of at most 6 mg/kg"
    assert f"{asked}; it decides n as well." in words


def test_a_hundred_strata_are_said_in_a_sentence(tmp_path: Path) -> None:
    """The largest three are named and the rest summed up; no line names them all."""
    rng = random.Random(2)
    rows = ["location_id,latitude,longitude,stratum"]
    sigmas = []
    for k in range(100):
        rows += [
            f"W{k:02d}-{i},{52 + k / 1000:.4f},{-1 - i / 1000:.4f},zone {k:02d}" for i in range(30)
        ]
        sigmas.append(
            f'[[sigma]]\nstratum = "zone {k:02d}"\nvalue = {rng.uniform(4, 40):.1f}\n'
            'source = "survey"\nfrom_results = 8\n'
        )
    (tmp_path / "wells.csv").write_text("\n".join(rows), encoding="utf-8")
    (tmp_path / "campaign.toml").write_text(
        'format = 1\n[plan]\nid = "HZ"\ntitle = "Zones"\n[[analyte]]\nid = "lead"\nunit = "mg/kg"\n'
        '[[frame]]\nkind = "list"\nlist_file = "wells.csv"\n[[design]]\nlayout = "stratified"\n'
        'allocation = "neyman"\n[[objective]]\nquestion = "mean"\nstandard_error = 1.0\n'
        "assurance = 0.8\n" + "".join(sigmas) + "[draw]\nseed = 7\n",
        encoding="utf-8",
    )
    outcome = run(str(tmp_path / "campaign.toml"))
    assert outcome.exit_code == 0, outcome.stderr
    words = " ".join(outcome.stdout.split())
    assert "in 97 others." in words
    assert outcome.stdout.count("zone") == 3
    assert len(outcome.stdout) < 2000
    answer = found(str(tmp_path / "campaign.toml"))
    named = sorted(counts(answer), reverse=True)[:3]
    assert f"{sum(counts(answer)) - sum(named)} in 97 others" in words


def test_sheets_know_every_way_of_sharing() -> None:
    """A plan of each can be printed."""
    from fieldplan.packet.sheets.plan_words import ALLOCATIONS

    assert set(ALLOCATIONS) == set(get_args(Allocation))
