"""The packet: one folder for crew and office, written whole or not at all."""

import json
from collections.abc import Callable, Mapping
from pathlib import Path

from fieldplan.base.errors import RecordError
from fieldplan.packet.folder import (
    build_folder,
    next_number,
    taken_numbers,
    write_manifest,
)
from fieldplan.plan.model import Plan
from fieldplan.plan.record import RECORD_PLACE, plan_to_record

Progress = Callable[[str], None]


def _ignore(_stage: str) -> None:
    """Take a stage name and do nothing with it."""


def next_revision(*parents: Path, plan_id: str, wanted: int | None = None) -> int:
    """Choose the revision number that a new packet gets.

    Parameters
    ----------
    *parents : Path
        Where packets are written, and where others of the campaign may lie: one number must
        never name two packets.
    plan_id : str
    wanted : int, optional
        ``plan.revision`` of the campaign file, when it is typed there.

    Raises
    ------
    RecordError
        The wanted revision is taken.
    """
    stem = f"{plan_id}-r"
    free = max(next_number(parent, stem) for parent in parents)
    if wanted is None:
        return free
    for parent in (p for p in parents if wanted in taken_numbers(p, stem)):
        message = (
            f"{parent / f'{stem}{wanted:02d}'} is there already and is never replaced. Set "
            f"plan.revision to {free}, or leave it out and the next free number is taken."
        )
        raise RecordError(message)
    return wanted


def write_packet(
    plan: Plan, parent: Path, inputs: Mapping[str, bytes], *, progress: Progress = _ignore
) -> Path:
    """Write a plan's packet as a new folder.

    Parameters
    ----------
    plan : Plan
        Its ``revision_name`` becomes the folder's name.
    parent : Path
        Where the folder is made.
    inputs : mapping of str to bytes
        Files that the campaign names, kept in ``office/inputs``; keys as written there.
    progress : callable
        Called with the name of each stage.

    Returns
    -------
    Path
        The packet.

    Raises
    ------
    RecordError
        The folder exists or cannot be written, or a point file does not read back.
    """
    return build_folder(
        parent / plan.revision_name,
        lambda folder: fill_packet(plan, folder, inputs, progress=progress),
    )


def fill_packet(
    plan: Plan, folder: Path, inputs: Mapping[str, bytes], *, progress: Progress
) -> None:
    """Write all files of a packet into an empty folder.

    Parameters
    ----------
    plan, inputs, progress
        As for ``write_packet``.
    folder : Path
        Exists and is empty.
    """
    crew, office = folder / "crew", folder / "office"
    crew.mkdir()
    office.mkdir()
    _write_inputs(plan, office, inputs)
    progress("point files, each read back")
    _write_points(plan, crew, office)
    progress("maps")
    _write_maps(plan, crew)
    progress("sheets")
    _write_sheets(plan, folder)
    record = json.dumps(plan_to_record(plan), indent=1, ensure_ascii=False)
    (folder / RECORD_PLACE).write_text(record + "\n", encoding="utf-8")
    write_manifest(folder)


def _write_inputs(plan: Plan, office: Path, inputs: Mapping[str, bytes]) -> None:
    kept = office / "inputs"
    kept.mkdir()
    (kept / "campaign.toml").write_text(plan.campaign_text, encoding="utf-8")
    for name, content in inputs.items():
        path = kept / safe_input_name(name)
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_bytes(content)


def safe_input_name(name: str) -> str:
    """Turn a path as written in a campaign file into one that stays inside a folder.

    Parameters
    ----------
    name : str
        e.g. ``../shared/boundary.geojson``.

    Examples
    --------
    >>> safe_input_name("../shared/boundary.geojson")
    'up/shared/boundary.geojson'
    """
    parts = []
    for part in name.replace("\\", "/").split("/"):
        if part in {"", "."}:
            continue
        parts.append("up" if part == ".." else part.replace(":", ""))
    return "/".join(parts)


def _write_points(plan: Plan, crew: Path, office: Path) -> None:
    from fieldplan.packet.exchange import write_point_files
    from fieldplan.returns.form import field_return_blank

    write_point_files(plan, crew, office)
    content = field_return_blank(plan)
    (crew / "field_return.csv").write_text(content, encoding="utf-8-sig", newline="")


def _write_maps(plan: Plan, crew: Path) -> None:
    from fieldplan.packet.maps.printed import printed_map
    from fieldplan.packet.maps.screen import screen_map

    on_paper = printed_map(plan)
    (crew / f"{plan.revision_name}-map.pdf").write_bytes(on_paper.pdf)
    (crew / f"{plan.revision_name}-map.png").write_bytes(on_paper.png)
    page = screen_map(plan)
    (crew / f"{plan.revision_name}-map.html").write_text(page, encoding="utf-8")


def _write_sheets(plan: Plan, folder: Path) -> None:
    from fieldplan.packet.sheets.field_form import field_form
    from fieldplan.packet.sheets.html import set_html
    from fieldplan.packet.sheets.pdf import set_pdf
    from fieldplan.packet.sheets.plan_sheet import plan_sheet
    from fieldplan.packet.sheets.start_here import start_here
    from fieldplan.packet.sheets.working_sheet import working_sheet

    paper = plan.campaign.paper.size
    (folder / "START_HERE.html").write_text(set_html(start_here(plan)), encoding="utf-8")
    sheet = plan_sheet(plan)
    for name, document in (("plan_sheet", sheet), ("working", working_sheet(plan, sheet))):
        page = folder / "office" / f"{name}.html"
        page.write_text(set_html(document), encoding="utf-8")
        page.with_suffix(".pdf").write_bytes(set_pdf(document, paper=paper))
    form = set_pdf(field_form(plan), paper=paper)
    (folder / "crew" / "field_form.pdf").write_bytes(form)


def read_inputs(paths: Mapping[str, Path]) -> dict[str, bytes]:
    """Read the files that a campaign names.

    Parameters
    ----------
    paths : mapping of str to Path
        As from ``campaign.inputs.input_files``.

    Raises
    ------
    RecordError
        A file can no longer be read.
    """
    content = {}
    for name, path in paths.items():
        try:
            content[name] = path.read_bytes()
        except OSError as fault:
            message = f"{path} cannot be read ({fault.strerror or fault})."
            raise RecordError(message) from fault
    return content
