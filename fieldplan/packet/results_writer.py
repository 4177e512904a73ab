"""The results: a numbered folder beside the packet, written whole or not at all."""

import json
from collections.abc import Callable, Sequence
from dataclasses import asdict, replace
from functools import partial
from pathlib import Path
from typing import Any

from fieldplan.estimate.model import Answers
from fieldplan.packet.evidence import examine, packet_folder
from fieldplan.packet.folder import build_folder, next_number
from fieldplan.packet.results_origin import ResultsOrigin, earlier_results, keep_files
from fieldplan.plan.model import Plan

Progress = Callable[[str], None]


def _ignore(_stage: str) -> None:
    """Take a stage name and do nothing with it."""


def write_results(
    plan: Plan,
    answers: Answers,
    parent: Path,
    *,
    sources: Sequence[Path] = (),
    report_number: str = "",
    packet: Path | None = None,
    progress: Progress = _ignore,
) -> Path:
    """Write what came of one laboratory file as a new folder, e.g. ``HL-r01-results-01``.

    Parameters
    ----------
    plan : Plan
        Read from the packet.
    answers : Answers
        Sheet and map of the main analyte are ``results_sheet`` and ``results_map``; those of
        another have its id behind: ``results_sheet-zinc``. Table and JSON hold all analytes.
    parent : Path
        Where the folder is made; earlier results there are kept.
    sources : sequence of Path
        Laboratory and field files, copied into ``inputs``.
    report_number : str
        The laboratory's own, as typed.
    packet : Path, optional
        Where the plan was read from: its files are compared with their manifest, and earlier
        results beside it are listed too.
    progress : callable
        Called with the name of each stage.

    Returns
    -------
    Path
        The folder.

    Raises
    ------
    RecordError
        The folder cannot be written, or a source was changed since it was read.
    """
    stem = f"{plan.revision_name}-results-"
    target = parent / f"{stem}{next_number(parent, stem):02d}"
    origin = _origin(plan, parent, stem, packet=packet, report_number=report_number)
    return build_folder(
        target,
        lambda folder: _fill(
            plan, answers, folder, origin=origin, sources=sources, progress=progress
        ),
    )


def _origin(
    plan: Plan, parent: Path, stem: str, *, packet: Path | None, report_number: str
) -> ResultsOrigin:
    """Gather what the sheet says of packet, report and earlier answers."""
    if packet is None:
        return ResultsOrigin((), report_number.strip(), earlier_results([parent], stem))
    evidence = examine(packet, plan)
    beside = packet_folder(packet).absolute().parent
    return ResultsOrigin(
        (),
        report_number.strip(),
        earlier_results([parent, beside], stem),
        packet_fingerprint=evidence.fingerprint,
        packet_differs=evidence.others,
    )


def _fill(
    plan: Plan,
    answers: Answers,
    folder: Path,
    *,
    origin: ResultsOrigin,
    sources: Sequence[Path],
    progress: Progress,
) -> None:
    from fieldplan.estimate.export import answers_csv, answers_json

    kept = folder / "inputs"
    kept.mkdir()
    origin = replace(origin, files=keep_files(sources, kept, answers=answers))
    content = json.dumps(
        {**answers_json(answers), **_said_of(origin)}, indent=2, ensure_ascii=False
    )
    (folder / "results.json").write_text(content + "\n", encoding="utf-8")
    (folder / "results.csv").write_text(
        answers_csv(answers, plan), encoding="utf-8-sig", newline=""
    )
    pages = partial(_set_pages, plan, origin=origin, folder=folder, progress=progress)
    pages(answers, mark="")
    for other in answers.others:
        pages(Answers(other), mark=f"-{other.analyte}")


def _said_of(origin: ResultsOrigin) -> dict[str, Any]:
    """Turn where the results come from into plain JSON values."""
    return {
        "report_number": origin.report_number,
        "packet_fingerprint": origin.packet_fingerprint,
        "packet_differs": list(origin.packet_differs),
        "files": {name: digest for digest, name in origin.files},
        "earlier_results": [asdict(entry) for entry in origin.earlier],
    }


def _set_pages(
    plan: Plan,
    answers: Answers,
    *,
    origin: ResultsOrigin,
    folder: Path,
    mark: str,
    progress: Progress,
) -> None:
    """Draw the map and set the sheet of one analyte."""
    from fieldplan.packet.maps.results import results_map
    from fieldplan.packet.sheets.html import set_html
    from fieldplan.packet.sheets.pdf import set_pdf
    from fieldplan.packet.sheets.results_sheet import results_sheet

    progress(f"results map{mark.replace('-', ' of ', 1)}")
    drawing = results_map(plan, answers.main)
    (folder / f"results_map{mark}.pdf").write_bytes(drawing.pdf)
    (folder / f"results_map{mark}.png").write_bytes(drawing.png)
    progress(f"results sheet{mark.replace('-', ' of ', 1)}")
    sheet, paper = results_sheet(plan, answers, origin=origin), plan.campaign.paper.size
    (folder / f"results_sheet{mark}.html").write_text(set_html(sheet), encoding="utf-8")
    (folder / f"results_sheet{mark}.pdf").write_bytes(set_pdf(sheet, paper=paper))
