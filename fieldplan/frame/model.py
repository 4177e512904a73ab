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
class Stratum:
    """A part of the population that is sampled on its own.

    Parameters
    ----------
    name : str
        ``site`` when there is only one.
    measure : float
        Net square metres of an area, or the number of units of a list.
    weight : float
        Share of the whole population; the weights of a frame sum to 1.
    geometry : BaseGeometry or None
        Net polygon in site metres, coordinates on a millimetre grid; None for a list.
    units : tuple of ListUnit
        Members in file order; empty for an area.
    """

    name: str
    measure: float
    weight: float
    geometry: BaseGeometry | None = None
    units: tuple[ListUnit, ...] = ()

    @property
    def count(self) -> int | None:
        """Number of units N for a list; None for an area, whose population is endless."""
        return len(self.units) if self.units else None


@dataclass(frozen=True)
class ExcludedArea:
    """What one exclusion took: its polygon (buffer included), the square metres, the reason."""

    reason: str
    source: str
    buffer_m: float
    area_m2: float
    geometry: BaseGeometry


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
        ``m²`` for an area, ``units`` for a list.
    gross, inset_loss, net : float
        In ``unit``. ``gross - sum of exclusions - inset_loss == net``.
    share : float
        net / gross.
    sentences : tuple of str
        Ready to print, e.g. ``The mean speaks for 91.4 % of the site …`` and
        ``One n is: one location.``
    """

    unit: Literal["m²", "units"]
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
        ``area`` or ``list``.
    projection : SiteProjection
        Where easting and northing are measured.
    strata : tuple of Stratum
        In the order of their names; at least one.
    boundary : BaseGeometry
        Gross site polygon in site metres; for a list the hull of its units, for maps only.
    excluded : tuple of ExcludedArea
    targeted : tuple of TargetedPlace
    population : Population
    sources : tuple of str
        Lines for the map and the sheet: file, layer, CRS as read, transform used, its accuracy.
    notes : tuple of str
        What was repaired or noticed, in sentences.
    boundary_assumed : bool
        The boundary is a circle or a sketch; stamped ASSUMED on every page.
    """

    kind: Literal["area", "list"]
    projection: SiteProjection
    strata: tuple[Stratum, ...]
    boundary: BaseGeometry
    population: Population
    excluded: tuple[ExcludedArea, ...] = ()
    targeted: tuple[TargetedPlace, ...] = ()
    sources: tuple[str, ...] = ()
    notes: tuple[str, ...] = field(default=())
    boundary_assumed: bool = False

    def stratum(self, name: str) -> Stratum:
        """Return the stratum called ``name``; KeyError when there is none."""
        for stratum in self.strata:
            if stratum.name == name:
                return stratum
        raise KeyError(name)
