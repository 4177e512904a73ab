"""An area as population: boundary, strata, exclusions and inset put together and measured."""

from shapely.geometry.base import BaseGeometry

from fieldplan.base.errors import FrameError
from fieldplan.base.units import area_in_words
from fieldplan.campaign.model import FrameTable, Targeted
from fieldplan.frame.cutting import allowed_m2, check_sum, joined, parted
from fieldplan.frame.exclusions import read_exclusions
from fieldplan.frame.ground import FrameFiles, read_ground
from fieldplan.frame.model import Frame, Stratum
from fieldplan.frame.places import read_targeted
from fieldplan.frame.plane import merged, widened
from fieldplan.frame.population import area_population
from fieldplan.frame.tiling import Pieces, read_strata

SMALLEST_STRATUM_M2 = 1.0


def read_area(files: FrameFiles, targeted: tuple[Targeted, ...]) -> Frame:
    """Read an area frame and measure it.

    Parameters
    ----------
    files : FrameFiles
        The frame table and where its files are.
    targeted : tuple of Targeted
        Files of places chosen by judgement.

    Returns
    -------
    Frame
        ``gross - exclusions - inset == net`` to the rounding of a float.

    Raises
    ------
    FrameError
        A file cannot serve, or nothing is left of the site or of a stratum.
    """
    ground = read_ground(files)
    pieces, gaps, ground = read_strata(files, ground)
    excluded, ground = read_exclusions(files, ground, gaps)
    out = joined([area.geometry for area in excluded], "the exclusions")
    inner, strip_m2 = _inset(ground.boundary, out, files.table.inset_m)
    net = _net(pieces, inner, out, files.table)
    places, ground = read_targeted(files, ground, targeted)
    total = sum(float(piece.area) for piece in net.values())
    # The parts are the whole; the millimetre grid moves it by a hair.
    gross = total + strip_m2 + sum(area.area_m2 for area in excluded)
    check_sum(
        float(ground.boundary.area),
        gross,
        allowed=allowed_m2(ground.boundary, out, *pieces.values(), *net.values()),
        label="strata, exclusions and inset of the site",
    )
    population = area_population(files.table, gross=gross, excluded=excluded, net=total)
    strata = tuple(
        Stratum(name, float(piece.area), float(piece.area) / total, piece)
        for name, piece in net.items()
    )
    return Frame(
        kind="area",
        projection=ground.projection,
        strata=strata,
        boundary=ground.boundary,
        population=population,
        excluded=excluded,
        targeted=places,
        sources=ground.sources,
        notes=(*_edge_notes(files), *ground.notes),
        boundary_assumed=files.table.boundary_assumed,
    )


def _edge_notes(files: FrameFiles) -> list[str]:
    """Say what is weak about the edge of the site."""
    table, receiver = files.table, files.position_accuracy_m
    notes = ["The boundary is ASSUMED."] if table.boundary_assumed else []
    if receiver and table.inset_m < receiver:
        notes.append(
            f"The receiver is good to {receiver:g} m and the inset is {table.inset_m:g} m: near "
            "the boundary a sample may be taken outside the site."
        )
    return notes


def _inset(boundary: BaseGeometry, out: BaseGeometry, inset_m: float) -> tuple[BaseGeometry, float]:
    """Give the site within the inset, and the area that the inset alone takes."""
    if not inset_m:
        return boundary, 0.0
    # The inset follows the boundary and its holes. Borders between strata have none, and
    # exclusions have their own buffers.
    inner, strip = parted(boundary, widened(boundary, -inset_m), "the site and its inset")
    _, strip_alone = parted(strip, out, "the inset without the exclusions")
    return inner, float(strip_alone.area)


def _net(pieces: Pieces, inner: BaseGeometry, out: BaseGeometry, table: FrameTable) -> Pieces:
    """Cut exclusions and inset out of each stratum; one that vanishes is an error by name."""
    net: Pieces = {}
    for name, piece in pieces.items():
        left = piece
        if table.inset_m:
            left, _ = parted(left, inner, f"{_called(name)} within the inset")
        _, left = parted(left, out, f"{_called(name)} without the exclusions")
        net[name] = merged(left)
    gone = [
        f"Nothing is left of {_called(name)}: of {area_in_words(pieces[name].area)} the inset "
        f"of {table.inset_m:g} m and the exclusions leave {piece.area:.2f} m². Take a smaller "
        "inset or buffer, merge the stratum with a neighbour, or leave it out."
        for name, piece in net.items()
        if piece.area < SMALLEST_STRATUM_M2
    ]
    if gone:
        raise FrameError(*gone)
    return net


def _called(name: str) -> str:
    return "the site" if name == "site" else f"stratum {name!r}"
