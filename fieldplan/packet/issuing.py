"""From DRAFT to ISSUED: the same packet with its mark on every page, and locked."""

import shutil
from collections.abc import Callable
from dataclasses import replace
from datetime import date
from pathlib import Path

from fieldplan.base.errors import RecordError
from fieldplan.packet.evidence import packet_folder
from fieldplan.packet.folder import (
    build_folder,
    changed_files,
    file_hashes,
    listed,
    taken_numbers,
)
from fieldplan.packet.writer import fill_packet
from fieldplan.plan.model import Plan
from fieldplan.plan.record import read_plan

Progress = Callable[[str], None]


def _ignore(_stage: str) -> None:
    """Take a stage name and do nothing with it."""


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
    if not by.strip() or not by.isprintable():
        message = f"--by is {by!r}; type the name of the person who issues the packet."
        raise RecordError(message)
    folder = _draft_folder(packet)
    plan = read_plan(folder)
    _must_be_draft(plan, folder)
    final = folder.with_name(plan.revision_name)
    aside = folder.with_name(f"{plan.revision_name}-draft")
    _must_bear_its_name(folder, final=final, aside=aside)
    _must_be_whole(folder)
    _must_be_in_order(plan, folder, on)
    issued = replace(plan, issued_by=by.strip(), issued_on=on)
    inputs = _packed_inputs(folder)

    def fill(staging: Path) -> None:
        fill_packet(issued, staging, inputs, progress=progress)
        _must_list_all(folder, staging)

    def make_way() -> Callable[[], object]:
        if folder == aside:
            return lambda: None
        folder.rename(aside)
        return lambda: aside.rename(folder)

    build_folder(final, fill, make_way=make_way)
    _lock(final)
    if not set(file_hashes(aside)) - set(file_hashes(final)):
        shutil.rmtree(aside, ignore_errors=True)
    return final, issued


def _draft_folder(packet: Path) -> Path:
    """Find the draft itself, whatever way it was named.

    After an interrupted issue it stands under its set-aside name.
    """
    folder = packet_folder(packet).resolve()
    if folder.name and not folder.exists():
        aside = folder.with_name(f"{folder.name}-draft")
        return aside if aside.is_dir() else folder
    return folder


def _must_bear_its_name(folder: Path, *, final: Path, aside: Path) -> None:
    if folder not in {final, aside}:
        message = (
            f"{folder.name} was renamed: its record says {final.name}. Give it that name back, "
            "then issue it."
        )
        raise RecordError(message)
    other = aside if folder == final else final
    if other.exists():
        message = f"{other} is in the way of issuing {folder.name}; move it elsewhere first."
        raise RecordError(message)


def _must_list_all(folder: Path, staging: Path) -> None:
    """Refuse a draft whose manifest was shortened: a file it must have is not an added one."""
    unlisted = [name for name in file_hashes(staging) if not listed(folder, name)]
    if unlisted:
        message = (
            f"{folder}: the manifest does not list {unlisted[0]}, which belongs to the packet. "
            "Pack the campaign again."
        )
        raise RecordError(message)


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
        if path.is_file() and not path.is_symlink() and path != kept / "campaign.toml"
    }


def _lock(folder: Path) -> None:
    """Take the write permission from every file, so that a slip of the hand changes nothing."""
    for path in folder.rglob("*"):
        if path.is_file():
            path.chmod(0o444)
