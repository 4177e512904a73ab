"""The packet: one folder for crew and office, written whole or not at all."""

import json
import shutil
from collections.abc import Callable, Mapping
from dataclasses import replace
from datetime import date
from pathlib import Path

from fieldplan.base.errors import RecordError
from fieldplan.packet.folder import (
    build_folder,
    changed_files,
    file_hashes,
    listed,
    next_number,
    taken_numbers,
    write_manifest,
)
from fieldplan.plan.model import Plan
from fieldplan.plan.record import RECORD_PLACE, plan_to_record, read_plan

Progress = Callable[[str], None]


def _ignore(_stage: str) -> None:
    """Take a stage name and do nothing with it."""


def next_revision(parent: Path, plan_id: str, *, wanted: int | None = None) -> int:
    """Choose the revision number that a new packet gets.

    Parameters
    ----------
    parent : Path
        Where packets are written.
    plan_id : str
    wanted : int, optional
        ``plan.revision`` of the campaign file, when it is typed there.

    Raises
    ------
    RecordError
        The wanted revision is taken.
    """
    stem = f"{plan_id}-r"
    if wanted is None:
        return next_number(parent, stem)
    if wanted in taken_numbers(parent, stem):
        free = next_number(parent, stem)
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
        parent / plan.revision_name, lambda folder: _fill(plan, folder, inputs, progress)
    )


def _fill(plan: Plan, folder: Path, inputs: Mapping[str, bytes], progress: Progress) -> None:
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

    paper = plan.campaign.paper.size
    (folder / "START_HERE.html").write_text(set_html(start_here(plan)), encoding="utf-8")
    sheet = plan_sheet(plan)
    (folder / "office" / "plan_sheet.html").write_text(set_html(sheet), encoding="utf-8")
    (folder / "office" / "plan_sheet.pdf").write_bytes(set_pdf(sheet, paper=paper))
    form = set_pdf(field_form(plan), paper=paper)
    (folder / "crew" / "field_form.pdf").write_bytes(form)


def issue_packet(
    packet: Path, *, by: str, on: date, progress: Progress = _ignore
) -> tuple[Path, Plan]:
    """Set a DRAFT packet again with its issued mark on every page, and lock it.

    The places, samples and rules are those of the draft; only the status changes. The new
    folder is complete before the draft gives up its name. A draft to which files were added or
    in which files were changed is kept as ``…-draft``; otherwise it goes.

    Parameters
    ----------
    packet : Path
        A DRAFT packet.
    by : str
        Name of the person who issues it.
    on : date
        Date of issue.

    Returns
    -------
    tuple of Path and Plan
        The issued packet.

    Raises
    ------
    RecordError
        It is no packet, it is issued already, its files were changed, or no name was given.
    """
    if not by.strip():
        message = "--by is empty; type the name of the person who issues the packet."
        raise RecordError(message)
    folder = _draft_folder(packet)
    plan = read_plan(folder)
    _must_be_draft(plan, folder)
    _must_be_whole(folder)
    _must_be_in_order(plan, folder, on)
    issued = replace(plan, issued_by=by.strip(), issued_on=on)
    inputs = _packed_inputs(folder)
    final = folder.with_name(plan.revision_name)
    aside = folder.with_name(f"{plan.revision_name}-draft")

    def make_way() -> None:
        if folder != aside:
            folder.rename(aside)

    build_folder(final, lambda staging: _fill(issued, staging, inputs, progress), make_way=make_way)
    _lock(final)
    if not set(file_hashes(aside)) - set(file_hashes(final)):
        shutil.rmtree(aside, ignore_errors=True)
    return final, issued


def _draft_folder(packet: Path) -> Path:
    """Find the draft; after an interrupted issue it stands under its set-aside name."""
    folder = packet.parent.parent if packet.is_file() else packet
    aside = folder.with_name(f"{folder.name}-draft")
    return aside if aside.is_dir() and not folder.exists() else folder


def _must_be_draft(plan: Plan, folder: Path) -> None:
    if plan.issued_by:
        message = (
            f"{folder} was issued by {plan.issued_by} on {plan.issued_on}; an issued packet is "
            "never changed. Change the campaign file and pack the next revision."
        )
        raise RecordError(message)


def _must_be_in_order(plan: Plan, folder: Path, on: date) -> None:
    """Refuse a date before the plan was made, and a revision that another has replaced."""
    if on < plan.made_on:
        message = (
            f"{folder} was made on {plan.made_on}; it cannot be issued on {on}. Leave --date out, "
            "or give the day of issue."
        )
        raise RecordError(message)
    later = [old for old in issued_revisions(folder.parent, plan) if old.revision > plan.revision]
    if later:
        message = (
            f"{later[-1].revision_name} is issued already and replaces {plan.revision_name}; "
            "two issued plans of one site would contradict each other. Pack the campaign again "
            "and issue the new revision."
        )
        raise RecordError(message)


def issued_revisions(parent: Path, plan: Plan) -> list[Plan]:
    """Read the issued plans of the same campaign in a folder, oldest first.

    Parameters
    ----------
    parent : Path
        Where packets lie side by side.
    plan : Plan
        Its id names the packets looked for.
    """
    stem = f"{plan.campaign.plan.id}-r"
    found = []
    for number in sorted(taken_numbers(parent, stem)):
        folder = parent / f"{stem}{number:02d}"
        try:
            old = read_plan(folder)
        except RecordError:
            continue
        if old.issued_by:
            found.append(old)
    return found


def _must_be_whole(folder: Path) -> None:
    known = [name for name in changed_files(folder) if listed(folder, name)]
    if known:
        message = (
            f"{folder}: {known[0]} was changed or removed after packing"
            f"{f' (and {len(known) - 1} more)' if len(known) > 1 else ''}. "
            "Make the change in the campaign file and pack again, so that all pages agree."
        )
        raise RecordError(message)


def _packed_inputs(folder: Path) -> dict[str, bytes]:
    kept = folder / "office" / "inputs"
    return {
        path.relative_to(kept).as_posix(): path.read_bytes()
        for path in sorted(kept.rglob("*"))
        if path.is_file() and path != kept / "campaign.toml"
    }


def _lock(folder: Path) -> None:
    """Take the write permission from every file, so that a slip of the hand changes nothing."""
    for path in folder.rglob("*"):
        if path.is_file():
            path.chmod(0o444)


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
