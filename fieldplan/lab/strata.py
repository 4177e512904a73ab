"""In which stratum a pilot location lies: by the file's word, by its list, or by position."""

from collections.abc import Sequence
from difflib import get_close_matches
from typing import TYPE_CHECKING

from fieldplan.base.errors import LabError
from fieldplan.lab.pilot import PilotLocation
from fieldplan.lab.words import counted, listed

if TYPE_CHECKING:
    from fieldplan.frame.model import Frame


OFF_LINE_M = 100.0
"""Pilot positions within this distance of a line count as taken on it (house rule)."""


def sort_into_strata(
    locations: Sequence[PilotLocation], frame: "Frame", *, fixed: str = ""
) -> tuple[dict[str, list[PilotLocation]], list[PilotLocation], list[str]]:
    """Sort pilot locations into the frame's strata.

    Parameters
    ----------
    locations : sequence of PilotLocation
    frame : Frame
    fixed : str
        The stratum that the campaign file names for this pilot; empty when it names none.

    Returns
    -------
    by_stratum : dict of str to list of PilotLocation
        Every stratum has a key.
    unplaced : list of PilotLocation
        Nothing says where they lie.
    notes : list of str
        Locations outside the site are left out and said here.

    Raises
    ------
    LabError
        The file names a stratum that the frame does not have, or only some locations can be
        placed.
    """
    by_stratum: dict[str, list[PilotLocation]] = {s.name: [] for s in frame.strata}
    inside, notes = _inside_site(locations, frame)
    if fixed:
        by_stratum[_known_stratum(fixed, frame, inside)].extend(inside)
        return by_stratum, [], notes
    if len(frame.strata) == 1:
        by_stratum[frame.strata[0].name].extend(inside)
        return by_stratum, [], notes
    units = {u.unit_id.casefold(): s.name for s in frame.strata for u in s.units}
    unplaced = []
    for place in inside:
        if place.stratum:
            by_stratum[_known_stratum(place.stratum, frame, [place])].append(place)
        elif place.location_id.casefold() in units:
            by_stratum[units[place.location_id.casefold()]].append(place)
        elif place.latitude is not None and frame.kind in ("area", "line"):
            by_stratum[_stratum_at(place, frame)].append(place)
        else:
            unplaced.append(place)
    if unplaced and len(unplaced) < len(inside):
        names = listed([place.location_id for place in unplaced])
        message = (
            f"{unplaced[0].file_name}: nothing says in which stratum {names} lie. Fill in the "
            "column 'stratum', or latitude and longitude, for all rows."
        )
        raise LabError(message)
    return by_stratum, unplaced, notes


def _known_stratum(name: str, frame: "Frame", places: Sequence[PilotLocation]) -> str:
    names = {stratum.name.casefold(): stratum.name for stratum in frame.strata}
    if name.casefold() in names:
        return names[name.casefold()]
    near = get_close_matches(name.casefold(), names, n=1)
    hint = f"did you mean '{names[near[0]]}'?" if near else "correct it."
    file_name = places[0].file_name if places else "campaign file"
    message = (
        f"{file_name}: stratum '{name}' is none of the site's "
        f"({listed(list(names.values()))}); {hint}"
    )
    raise LabError(message)


def _point(place: PilotLocation, frame: "Frame") -> tuple[float, float]:
    from fieldplan.frame.projection import to_site

    easting, northing = to_site(frame.projection, place.latitude or 0.0, place.longitude or 0.0)
    return float(easting), float(northing)


def _inside_site(
    locations: Sequence[PilotLocation], frame: "Frame"
) -> tuple[list[PilotLocation], list[str]]:
    """Leave out locations whose position lies outside the boundary, or far from all lines."""
    import shapely

    if frame.kind == "list":
        return list(locations), []
    allowed = OFF_LINE_M if frame.kind == "line" else 0.01
    inside: list[PilotLocation] = []
    outside: list[PilotLocation] = []
    for place in locations:
        known = place.latitude is not None and place.longitude is not None
        point = shapely.Point(*_point(place, frame))
        far = known and not shapely.distance(frame.boundary, point) <= allowed
        (outside if far else inside).append(place)
    if not outside:
        return inside, []
    if not inside:
        message = (
            f"{outside[0].file_name}: all pilot positions lie outside the site "
            f"({outside[0].location_id}: {outside[0].latitude}, {outside[0].longitude}). "
            "Check that latitude and longitude are decimal degrees and not swapped."
        )
        raise LabError(message)
    note = (
        f"{outside[0].file_name}: {counted(len(outside), 'pilot location')} outside the site left "
        f"out ({listed([place.location_id for place in outside])})."
    )
    return inside, [note]


def _stratum_at(place: PilotLocation, frame: "Frame") -> str:
    """Name the stratum at a position; in an exclusion or the inset the nearest one."""
    import shapely

    point = shapely.Point(*_point(place, frame))
    return min(frame.strata, key=lambda s: float(shapely.distance(s.geometry, point))).name
