"""The results: a numbered folder beside the packet, written whole or not at all."""

import json
import shutil
from collections.abc import Callable, Sequence
from pathlib import Path

from fieldplan.estimate.model import Answers
from fieldplan.packet.folder import build_folder, next_number
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
    progress : callable
        Called with the name of each stage.

    Returns
    -------
    Path
        The folder.

    Raises
    ------
    RecordError
        The folder cannot be written.
    """
    stem = f"{plan.revision_name}-results-"
    target = parent / f"{stem}{next_number(parent, stem):02d}"
    return build_folder(
        target, lambda folder: _fill(plan, answers, folder, sources=sources, progress=progress)
    )


def _fill(
    plan: Plan,
    answers: Answers,
    folder: Path,
    *,
    sources: Sequence[Path],
    progress: Progress,
) -> None:
    from fieldplan.estimate.export import answers_csv, answers_json

    kept = folder / "inputs"
    kept.mkdir()
    _keep(sources, kept)
    content = json.dumps(answers_json(answers), indent=2, ensure_ascii=False)
    (folder / "results.json").write_text(content + "\n", encoding="utf-8")
    (folder / "results.csv").write_text(
        answers_csv(answers, plan), encoding="utf-8-sig", newline=""
    )
    _set_pages(plan, answers, folder, mark="", progress=progress)
    for other in answers.others:
        _set_pages(plan, Answers(other), folder, mark=f"-{other.analyte}", progress=progress)


def _set_pages(
    plan: Plan, answers: Answers, folder: Path, *, mark: str, progress: Progress
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
    sheet, paper = results_sheet(plan, answers), plan.campaign.paper.size
    (folder / f"results_sheet{mark}.html").write_text(set_html(sheet), encoding="utf-8")
    (folder / f"results_sheet{mark}.pdf").write_bytes(set_pdf(sheet, paper=paper))


def _keep(sources: Sequence[Path], folder: Path) -> None:
    """Copy the files behind the results; a second file of the same name gets a number."""
    for number, source in enumerate(sources, start=1):
        target = folder / source.name
        if target.exists():
            target = folder / f"{number}-{source.name}"
        shutil.copyfile(source, target)
