"""Earlier estimates leave a trace on the next sheet; files are hashed as they were handed in."""

import hashlib
import json
from dataclasses import replace
from pathlib import Path

import pytest

from fieldplan.base.document import Table, Verbatim
from fieldplan.base.errors import RecordError
from fieldplan.estimate.export import answers_json
from fieldplan.estimate.model import Answers, Change, Interval
from fieldplan.packet.results_origin import (
    EarlierResults,
    ResultsOrigin,
    earlier_results,
    keep_files,
)
from fieldplan.packet.sheets.results_sheet import results_sheet
from fieldplan.returns.model import ConfirmedId
from tests.factories import make_estimate, make_plan, make_returns
from tests.unit.packet.sheet_text import text_of, words_of

STEM = "QF-r01-results-"


def folder_with(parent: Path, number: int, **changes: object) -> None:
    """Write what an earlier estimate leaves of its answer."""
    folder = parent / f"{STEM}{number:02d}"
    folder.mkdir(parents=True)
    content = json.dumps(answers_json(Answers(make_estimate(**changes))))
    (folder / "results.json").write_text(content, encoding="utf-8")


def sheet_words(origin: ResultsOrigin) -> str:
    """All words of the sheet of the hand-made estimate."""
    return words_of(results_sheet(make_plan(), Answers(make_estimate()), origin=origin))


def test_every_earlier_estimate_is_listed_with_its_file_and_its_answer(tmp_path: Path) -> None:
    """Who tries several files or rules must not be able to show the best one alone."""
    folder_with(tmp_path, 1)
    change = Change("confidence", "0.95", "0.8", Interval("two-sided", 0.95, 29.2, 95.9), 62.5)
    other = replace(make_returns(), lab_file="trimmed.csv", lab_sha256="9" * 64)
    narrow = Interval("two-sided", 0.8, 43.0, 82.0)
    folder_with(tmp_path, 2, returns=other, changes=(change,), interval=narrow)
    words = sheet_words(ResultsOrigin(earlier=earlier_results([tmp_path], STEM)))
    assert "QF-r01-results-01" in words
    assert "62.5 mg/kg, 95 % interval 29.1 to 95.9 mg/kg" in words
    assert "trimmed.csv" in words
    assert "9999999999999999" in words
    assert "80 % interval 43.0 to 82.0 mg/kg; changed after results: confidence" in words
    assert "2 earlier estimates from this plan lie beside this one" in words


def test_a_missing_or_damaged_estimate_is_listed_as_such(tmp_path: Path) -> None:
    """Numbers are never used twice, so a gap in them is a deleted folder."""
    folder_with(tmp_path, 3)
    (tmp_path / f"{STEM}02").mkdir()
    (tmp_path / f"{STEM}02" / "results.json").write_text("[]", encoding="utf-8")
    found = earlier_results([tmp_path], STEM)
    assert [entry.folder[-2:] for entry in found] == ["01", "02", "03"]
    assert [bool(entry.answers) for entry in found] == [False, False, True]
    words = sheet_words(ResultsOrigin(earlier=found))
    assert words.count("gone, or its results.json cannot be read") == 2


def test_results_beside_the_packet_are_seen_from_another_folder(tmp_path: Path) -> None:
    """--out would otherwise hide every earlier estimate."""
    folder_with(tmp_path / "site", 1)
    found = earlier_results([tmp_path / "elsewhere", tmp_path / "site"], STEM)
    assert [entry.folder for entry in found] == [f"site/{STEM}01"]
    assert earlier_results([tmp_path / "site", tmp_path / "site"], STEM) == earlier_results(
        [tmp_path / "site"], STEM
    )


def test_without_earlier_estimates_it_is_said_how_far_one_can_see() -> None:
    """None seen is not none made."""
    words = sheet_words(ResultsOrigin())
    assert "None is seen. Only folders beside this one, or beside the packet, can be" in words
    assert "earlier estimates from this plan" not in words.replace("Earlier estimates", "")


def test_an_analyte_without_an_earlier_mean_is_told_from_a_folder_that_is_gone() -> None:
    """Zinc may have been left out before."""
    past = EarlierResults(f"{STEM}01", "labs.csv", "1" * 64, {"zinc": None})  # type: ignore[dict-item]
    assert "no mean of this analyte" in sheet_words(ResultsOrigin(earlier=(past,)))


def test_every_file_is_hashed_as_it_was_handed_in(tmp_path: Path) -> None:
    """SHA-256 over the bytes by hashlib; the answers in matches.csv decide who is who."""
    places = [tmp_path / name for name in ("results.csv", "field_return.csv", "matches.csv")]
    for place in places:
        place.write_bytes(place.name.encode())
    digests = {p.name: hashlib.sha256(p.name.encode()).hexdigest() for p in places}
    returns = replace(
        make_returns(),
        lab_sha256=digests["results.csv"],
        field_sha256=digests["field_return.csv"],
    )
    answers = Answers(make_estimate(returns=returns))
    (tmp_path / "inputs").mkdir()
    kept = keep_files(places, tmp_path / "inputs", answers=answers)
    assert {name: digest for digest, name in kept} == digests
    sheet = results_sheet(make_plan(), answers, origin=ResultsOrigin(files=kept))
    (hashes,) = [block for block in sheet.blocks if isinstance(block, Verbatim)]
    assert f"{digests['matches.csv']}  matches.csv" in text_of(hashes)
    places[0].write_bytes(b"another")
    (tmp_path / "again").mkdir()
    with pytest.raises(RecordError, match=r"results\.csv was changed while"):
        keep_files(places[:1], tmp_path / "again", answers=answers)


def test_the_laboratory_s_report_number_has_a_place_and_hashes_are_not_oversold() -> None:
    """A hash is of what was handed in; only the laboratory's report shows what it sent."""
    assert "LR-2026/118" in sheet_words(ResultsOrigin(report_number="LR-2026/118"))
    words = sheet_words(ResultsOrigin())
    assert "not given" in words
    assert "Compare it with the report that the laboratory itself issued" in words


def test_ids_that_a_person_confirmed_stand_on_the_sheet() -> None:
    """Which, to what, by whom; nobody named is said as well."""
    confirmed = (
        ConfirmedId(11, "qf 00731", "QF-731", "M. Rey"),
        ConfirmedId(17, "qf-204", "QF-204", ""),
    )
    answers = Answers(make_estimate(returns=replace(make_returns(), confirmed=confirmed)))
    tables = [b for b in results_sheet(make_plan(), answers).blocks if isinstance(b, Table)]
    (table,) = [t for t in tables if "Confirmed by" in t.columns]
    assert table.rows == (
        ("11", "qf 00731", "QF-731", "QF-A-01", "M. Rey"),
        ("17", "qf-204", "QF-204", "QF-A-02", "nobody named"),
    )
