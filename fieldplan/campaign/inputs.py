"""The files that a campaign names, and their fingerprints."""

import hashlib
from collections.abc import Iterator
from pathlib import Path
from typing import Any

from pydantic import BaseModel

from fieldplan.base.errors import CampaignError
from fieldplan.base.files import NOT_ORDINARY
from fieldplan.campaign.lines import KeyPath
from fieldplan.campaign.model import Campaign, ReadCampaign
from fieldplan.campaign.problems import Problem, meaning, render
from fieldplan.campaign.read import Inspection
from fieldplan.campaign.screen import is_fill_in, table_name
from fieldplan.campaign.shape import shapes
from fieldplan.campaign.table import tables
from fieldplan.campaign.text import near_names

_START = "Paths start from the campaign file."
_SHAPEFILE_PARTS = (".shx", ".dbf", ".prj", ".cpg")


def resolve_file(read: ReadCampaign, written: str) -> Path:
    """Return the place of a file as the campaign names it: relative to the campaign file."""
    return read.folder / file_part(read.folder, written)


def file_part(folder: Path, written: str) -> str:
    """Drop the layer behind ``#``; a file that is so named goes first.

    Examples
    --------
    >>> file_part(Path("no-such-folder"), "site.gpkg#parcels")
    'site.gpkg'
    """
    if "#" not in written:
        return written
    try:
        return written if (folder / written).exists() else written.rpartition("#")[0]
    except (OSError, ValueError):
        return written


def input_files(read: ReadCampaign) -> dict[str, Path]:
    """Return every file that a campaign names: as written → where it stands.

    Parameters
    ----------
    read : ReadCampaign
        A campaign with the folder that its paths start from.

    Returns
    -------
    dict
        In the order of the campaign's tables; a layer named behind ``#`` is left out. The side
        files of a shapefile follow it under names of their own, as far as they exist.

    Raises
    ------
    CampaignError
        One line for each file that is missing or is a folder, with names that come near.
    """
    files: dict[str, Path] = {}
    problems: list[Problem] = []
    data = read.campaign.model_dump(mode="json", exclude_none=True)
    for path, written in _named(data):
        problem = _missing(path, written, read.folder)
        if problem is not None:
            problems.append(problem)
            continue
        name = file_part(read.folder, written)
        place = files[name] = read.folder / name
        if place.suffix.lower() == ".shp":
            files.update(_side_files(name, place))
    if problems:
        raise CampaignError(*render(problems, name=str(read.path), text=read.text, data=data))
    return files


def missing_files(inspection: Inspection) -> tuple[str, ...]:
    """Say which files that a campaign names are not there, also while it is incomplete.

    Parameters
    ----------
    inspection : Inspection
        From ``inspect_campaign``; what is still to fill in names no file.

    Returns
    -------
    tuple of str
        One line for each such file that was not told already, in the order of the tables.
    """
    folder = inspection.path.parent
    missing = [_missing(path, written, folder) for path, written in _named(inspection.data)]
    problems = [problem for problem in missing if problem is not None]
    if not problems:
        return ()
    name, data = str(inspection.path), inspection.data
    lines = render(problems, name=name, text=inspection.text, data=data)
    told = {_place(line) for line in inspection.problems}
    return tuple(line for line in lines if _place(line) not in told)


def _place(line: str) -> str:
    """Cut a problem down to file, line and key."""
    return ": ".join(line.split(": ", 2)[:2])


def _missing(path: KeyPath, written: str, folder: Path) -> Problem | None:
    """Word why a file cannot be used; None when it can."""
    place = folder / file_part(folder, written)
    found = file_fault(place)
    if found is None:
        return None
    fault, remedy = found
    what = meaning(table_name(path[:-1]), str(path[-1]))
    return Problem(path, f'{what}; {fault} (got "{written}"). {remedy}')


def fingerprint(path: Path) -> str:
    """Return the SHA-256 of a file as 64 hexadecimal digits.

    Raises
    ------
    CampaignError
        The file cannot be read.
    """
    try:
        with path.open("rb") as stream:
            return hashlib.file_digest(stream, "sha256").hexdigest()
    except OSError as fault:
        message = f"{path}: the file cannot be read ({fault.strerror or fault}). Check its rights."
        raise CampaignError(message) from fault


def _named(
    data: dict[str, Any], model: type[BaseModel] = Campaign, above: KeyPath = ()
) -> Iterator[tuple[KeyPath, str]]:
    """Yield the path and the value of every key that names a file, table by table."""
    for key, shape in shapes(model).items():
        if shape.kind == "file":
            written = data.get(key)
            if isinstance(written, str) and written.strip() and not is_fill_in(written):
                yield (*above, key), written
        elif shape.model is not None:
            for i, member in enumerate(tables(data, key)):
                yield from _named(member, shape.model, (*above, key, i))


def file_fault(place: Path, *, otherwise: str = _START) -> tuple[str, str] | None:
    """Say why a file cannot be used, and the remedy; None when it can.

    Parameters
    ----------
    place : Path
        As a program would open it.
    otherwise : str
        The remedy where no name in its folder comes near.

    Examples
    --------
    >>> file_fault(Path("."))
    ('this is a folder', 'Name a file in it.')
    """
    try:
        if place.is_file():
            return None
        if place.is_dir():
            return "this is a folder", "Name a file in it."
        if place.exists():
            return f"this {NOT_ORDINARY}", "Save it as a file and name that."
        return "there is no such file", _near(place, otherwise)
    except (OSError, ValueError):
        return "the name cannot be looked up", otherwise


def _near(place: Path, otherwise: str) -> str:
    """Suggest names in the same folder."""
    near = near_names(place)
    if near:
        return f"Did you mean {' or '.join(near)}?"
    if not place.parent.is_dir():
        return f"Its folder does not exist either; {otherwise[0].lower()}{otherwise[1:]}"
    return otherwise


def _side_files(written: str, place: Path) -> dict[str, Path]:
    """Find the files that belong to a shapefile, whatever letters their endings have."""
    stem = written[: -len(place.suffix)]
    found = {}
    for entry in sorted(place.parent.iterdir()):
        if entry.stem == place.stem and entry.suffix.lower() in _SHAPEFILE_PARTS:
            found[stem + entry.suffix] = entry
    return found
