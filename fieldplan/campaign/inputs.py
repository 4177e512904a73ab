"""The files that a campaign names, and their fingerprints."""

import hashlib
from collections.abc import Iterator
from pathlib import Path

from fieldplan.base.errors import CampaignError
from fieldplan.campaign.lines import KeyPath
from fieldplan.campaign.model import Campaign, ReadCampaign
from fieldplan.campaign.problems import Problem, meaning, render
from fieldplan.campaign.screen import table_name
from fieldplan.campaign.text import near_names

_FOLDER = "this is a folder"
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
    for path, written in _named(read.campaign):
        place = resolve_file(read, written)
        fault = _fault(place)
        if fault:
            what = meaning(table_name(path[:-1]), str(path[-1]))
            remedy = " Name a file in it." if fault == _FOLDER else _near(place)
            problems.append(Problem(path, f'{what}; {fault} (got "{written}").{remedy}'))
            continue
        name = file_part(read.folder, written)
        files[name] = place
        if place.suffix.lower() == ".shp":
            files.update(_side_files(name, place))
    if problems:
        data = read.campaign.model_dump(mode="json", exclude_unset=True)
        raise CampaignError(*render(problems, name=str(read.path), text=read.text, data=data))
    return files


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


def _named(campaign: Campaign) -> Iterator[tuple[KeyPath, str]]:
    """Yield the path and the value of every key that names a file."""
    for i, frame in enumerate(campaign.frame):
        for key in ("boundary", "strata", "list_file"):
            written = getattr(frame, key)
            if written is not None:
                yield ("frame", i, key), written
        for j, exclusion in enumerate(frame.exclusion):
            yield ("frame", i, "exclusion", j, "file"), exclusion.file
    for i, targeted in enumerate(campaign.targeted):
        yield ("targeted", i, "file"), targeted.file
    for i, sigma in enumerate(campaign.sigma):
        if sigma.pilot is not None:
            yield ("sigma", i, "pilot"), sigma.pilot


def _fault(place: Path) -> str | None:
    """Say why a file cannot be used, or nothing."""
    try:
        if place.is_file():
            return None
        return _FOLDER if place.is_dir() else "there is no such file"
    except (OSError, ValueError):
        return "the name cannot be looked up"


def _near(place: Path) -> str:
    """Suggest names in the same folder."""
    near = near_names(place)
    if near:
        return f" Did you mean {' or '.join(near)}?"
    if not place.parent.is_dir():
        return " Its folder does not exist either; paths start from the campaign file."
    return " Paths start from the campaign file."


def _side_files(written: str, place: Path) -> dict[str, Path]:
    """Find the files that belong to a shapefile, whatever letters their endings have."""
    stem = written[: -len(place.suffix)]
    found = {}
    for entry in sorted(place.parent.iterdir()):
        if entry.stem == place.stem and entry.suffix.lower() in _SHAPEFILE_PARTS:
            found[stem + entry.suffix] = entry
    return found
