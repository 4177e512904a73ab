"""What a reader finds in a point file, and coordinate forms turned back into degrees."""

import re
from dataclasses import dataclass
from functools import lru_cache

import pyproj


@dataclass(frozen=True)
class ReadPoint:
    """One location as it stands in a file.

    Parameters
    ----------
    short_name, location_id : str
        As written there.
    latitude, longitude : float
        Degrees.
    """

    short_name: str
    location_id: str
    latitude: float
    longitude: float


def degrees_of_angle(text: str) -> float:
    """Turn degrees, minutes and seconds with a hemisphere letter into signed degrees.

    Examples
    --------
    >>> degrees_of_angle("001°54′00.000″ W")
    -1.9
    """
    found = re.fullmatch(r"(\d+)°(\d\d)′(\d\d\.\d+)″ ([NSEW])", text)
    if found is None:
        message = f"{text!r} is not an angle such as 52°06′00.000″ N"
        raise ValueError(message)
    angle = int(found[1]) + int(found[2]) / 60 + float(found[3]) / 3600
    return -angle if found[4] in "SW" else angle


def degrees_of_grid(zone_name: str, easting: float, northing: float) -> tuple[float, float]:
    """Turn a UTM coordinate into (latitude, longitude) from the definition of its zone.

    The zone is written out as a transverse Mercator projection (or a polar stereographic one),
    not looked up by code as the writer does.

    Examples
    --------
    >>> [round(angle, 6) for angle in degrees_of_grid("18N", 627103.1, 4484335.4)]
    [40.5, -73.5]
    """
    longitude, latitude = _grid(zone_name)(easting, northing, inverse=True)
    return float(latitude), float(longitude)


@lru_cache(maxsize=8)
def _grid(zone_name: str) -> pyproj.Proj:
    south = zone_name.endswith("S")
    if zone_name.startswith("UPS"):
        pole = -90 if south else 90
        return pyproj.Proj(
            f"+proj=stere +lat_0={pole} +k=0.994 +x_0=2000000 +y_0=2000000 +datum=WGS84"
        )
    central = int(zone_name[:-1]) * 6 - 183
    false_northing = 10_000_000 if south else 0
    return pyproj.Proj(
        f"+proj=tmerc +lon_0={central} +k=0.9996 +x_0=500000 +y_0={false_northing} +datum=WGS84"
    )
