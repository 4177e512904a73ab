"""The results: a numbered folder beside the packet, written whole or not at all."""

import json
import shutil
from collections.abc import Callable, Sequence
from pathlib import Path

from fieldplan.estimate.model import Estimate
from fieldplan.packet.folder import build_folder, next_number
from fieldplan.plan.model import Plan

Progress = Callable[[str], None]


def _ignore(_stage: str) -> None:
    """Take a stage name and do nothing with it."""


def write_results(
    plan: Plan,
    estimate: Estimate,
    parent: Path,
    *,
    sources: Sequence[Path] = (),
    progress: Progress = _ignore,
) -> Path:
    """Write an estimate as a new folder, e.g. ``HL-r01-results-01``.

    Parameters
    ----------
    plan : Plan
        Read from the packet.
    estimate : Estimate
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
    return build_folder(target, lambda folder: _fill(plan, estimate, folder, sources, progress))


def _fill(
    plan: Plan, estimate: Estimate, folder: Path, sources: Sequence[Path], progress: Progress
) -> None:
    from fieldplan.estimate.export import estimate_csv, estimate_json
    from fieldplan.packet.maps.results import results_map
    from fieldplan.packet.sheets.html import set_html
    from fieldplan.packet.sheets.pdf import set_pdf
    from fieldplan.packet.sheets.results_sheet import results_sheet

    kept = folder / "inputs"
    kept.mkdir()
    _keep(sources, kept)
    content = json.dumps(estimate_json(estimate), indent=2, ensure_ascii=False)
    (folder / "results.json").write_text(content + "\n", encoding="utf-8")
    (folder / "results.csv").write_text(
        estimate_csv(estimate, plan), encoding="utf-8-sig", newline=""
    )
    progress("results map")
    drawing = results_map(plan, estimate)
    (folder / "results_map.pdf").write_bytes(drawing.pdf)
    (folder / "results_map.png").write_bytes(drawing.png)
    progress("results sheet")
    sheet = results_sheet(plan, estimate)
    (folder / "results_sheet.html").write_text(set_html(sheet), encoding="utf-8")
    (folder / "results_sheet.pdf").write_bytes(set_pdf(sheet, paper=plan.campaign.paper.size))


def _keep(sources: Sequence[Path], folder: Path) -> None:
    """Copy the files behind the results; a second file of the same name gets a number."""
    for number, source in enumerate(sources, start=1):
        target = folder / source.name
        if target.exists():
            target = folder / f"{number}-{source.name}"
        shutil.copyfile(source, target)
