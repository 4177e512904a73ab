"""The population: strata with their measure, what was taken out, and for how much it speaks."""

from dataclasses import dataclass, field
from typing import Literal

from shapely.geometry.base import BaseGeometry


@dataclass(frozen=True)
class ListUnit:
    """One member of a list frame: a well, an outfall, a plot.

    Parameters
    ----------
    unit_id : str
        As given by the user; never changed.
    stratum : str
        Its stratum; ``site`` when the list has none.
    easting, northing : float
        Metres in the site's projection.
    latitude, longitude : float
        Degrees, WGS 84.
    """

    unit_id: str
    stratum: str
    easting: float
    northing: float
    latitude: float
    longitude: float


@dataclass(frozen=True)
class Branch:
    """A line that distances are measured along, whole, before anything is left out.

    Parameters
    ----------
    name : str
        Unique in its frame.
    length_m : float
    geometry : BaseGeometry
        LineString in site metres, corners in whole millimetres; distances start at its first one.
    """

    name: str
    length_m: float
    geometry: BaseGeometry


@dataclass(frozen=True)
class Reach:
    """A stretch of a branch that belongs to the population.

    Parameters
    ----------
    branch : str
    from_m, to_m : float
        Distances along the branch, to the millimetre.
    geometry : BaseGeometry
        LineString in site metres, corners in whole millimetres.
    """

    branch: str
    from_m: float
    to_m: float
    geometry: BaseGeometry

    @property
    def length_m(self) -> float:
        """Metres along it."""
        return self.to_m - self.from_m


@dataclass(frozen=True)
class Stratum:
    """A part of the population that is sampled on its own.

    Parameters
    ----------
    name : str
        ``site`` when there is only one.
    measure : float
        Net square metres of an area, metres of lines, or the number of units of a list.
    weight : float
        Share of the whole population; the weights of a frame sum to 1.
    geometry : BaseGeometry or None
        Net polygon or lines in site metres, coordinates on a millimetre grid; None for a list.
    units : tuple of ListUnit
        Members in file order; empty for an area and for lines.
    reaches : tuple of Reach
        Of lines, by branch and then by distance; empty for an area and a list.
    """

    name: str
    measure: float
    weight: float
    geometry: BaseGeometry | None = None
    units: tuple[ListUnit, ...] = ()
    reaches: tuple[Reach, ...] = ()

    @property
    def count(self) -> int | None:
        """Number of units N for a list; None for an area and for lines, which are endless."""
        return len(self.units) if self.units else None


@dataclass(frozen=True)
class ExcludedArea:
    """What one exclusion took: its polygon (buffer included), the square metres, the reason.

    Of lines it is the stretches that it took, with ``length_m``, and no area.
    """

    reason: str
    source: str
    buffer_m: float
    area_m2: float
    geometry: BaseGeometry
    length_m: float = 0.0

    @property
    def taken(self) -> float:
        """What it took, in the unit of the population."""
        return self.length_m or self.area_m2


@dataclass(frozen=True)
class TargetedPlace:
    """A place chosen by judgement; never in the mean."""

    place_id: str
    easting: float
    northing: float
    latitude: float
    longitude: float
    reason: str


@dataclass(frozen=True)
class Population:
    """Gross, taken out, net; and the sentences that say for what the mean speaks.

    Parameters
    ----------
    unit : str
        ``m²`` for an area, ``m`` for lines, ``units`` for a list.
    gross, inset_loss, net : float
        In ``unit``. ``gross - sum of exclusions - inset_loss == net``.
    share : float
        net / gross.
    sentences : tuple of str
        Ready to print, e.g. ``The mean speaks for 91.4 % of the site …`` and
        ``One n is: one location.``
    """

    unit: Literal["m²", "m", "units"]
    gross: float
    inset_loss: float
    net: float
    share: float
    sentences: tuple[str, ...]


@dataclass(frozen=True)
class SiteProjection:
    """A Lambert azimuthal equal-area plane on WGS 84, centred on the site.

    Parameters
    ----------
    latitude, longitude : float
        The centre in degrees, rounded to 0.01.
    """

    latitude: float
    longitude: float

    @property
    def definition(self) -> str:
        """The projection as a PROJ string."""
        return (
            f"+proj=laea +lat_0={self.latitude:.2f} +lon_0={self.longitude:.2f} "
            "+x_0=0 +y_0=0 +datum=WGS84 +units=m +no_defs"
        )


@dataclass(frozen=True)
class Frame:
    """The whole population as read, checked and measured.

    Parameters
    ----------
    kind : str
        ``area``, ``list`` or ``line``.
    projection : SiteProjection
        Where easting and northing are measured.
    strata : tuple of Stratum
        In the order of their names; at least one.
    boundary : BaseGeometry
        Gross site polygon in site metres; for a list the hull of its units, for maps only; for
        lines all of them, whole.
    excluded : tuple of ExcludedArea
    targeted : tuple of TargetedPlace
    population : Population
    sources : tuple of str
        Lines for the map and the sheet: file, layer, CRS as read, transform used, its accuracy.
    notes : tuple of str
        What was repaired or noticed, in sentences.
    boundary_assumed : bool
        The boundary is a circle or a sketch; stamped ASSUMED on every page.
    branches : tuple of Branch
        Of lines, in file order.
    """

    kind: Literal["area", "list", "line"]
    projection: SiteProjection
    strata: tuple[Stratum, ...]
    boundary: BaseGeometry
    population: Population
    excluded: tuple[ExcludedArea, ...] = ()
    targeted: tuple[TargetedPlace, ...] = ()
    sources: tuple[str, ...] = ()
    notes: tuple[str, ...] = field(default=())
    boundary_assumed: bool = False
    branches: tuple[Branch, ...] = ()

    def stratum(self, name: str) -> Stratum:
        """Return the stratum called ``name``; KeyError when there is none."""
        for stratum in self.strata:
            if stratum.name == name:
                return stratum
        raise KeyError(name)
