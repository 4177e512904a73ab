"""Which column of a table is which of ours: by our name, by a usual one with a note, or as told."""

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from fieldplan.base.errors import FrameError

_CALLED = {
    "location_id": (
        "location", "loc_id", "site_id", "station", "station_id", "point", "point_id", "well",
        "well_id", "well_no", "borehole", "borehole_id", "plot", "plot_id", "outfall",
        "outfall_id", "place", "place_id",
    ),
    "latitude": ("lat", "decimal_latitude", "lattitude"),
    "longitude": ("lon", "long", "lng", "decimal_longitude", "longtitude"),
    "easting": ("east", "eastings"),
    "northing": ("north", "northings"),
}  # fmt: skip
"""Names that tables of places usually have instead of ours (common practice, no source)."""

_GUESSES = {"x": "easting", "y": "northing"}
"""Names that may be ours; only the author can say."""

_SAYS_NOTHING = {"dd", "deg", "degrees", "wgs84", "wgs", "84", "m", "metres", "meters"}

SHOWN_TITLES = 30


@dataclass(frozen=True)
class ColumnMap:
    """What the campaign file says about the columns of one file.

    Parameters
    ----------
    columns : mapping of str to str
        Our name to the file's.
    table : str
        The table of the campaign file that takes them; empty where none does.
    """

    columns: Mapping[str, str] = field(default_factory=dict)
    table: str = ""


def plain(title: str) -> str:
    """Write a column's name as ours are written: small letters, underscores, no unit.

    Parameters
    ----------
    title : str

    Examples
    --------
    >>> plain(" Well ID "), plain("Latitude (WGS 84)"), plain("LAT_DD"), plain("Screen top (m)")
    ('well_id', 'latitude', 'lat', 'screen_top')
    """
    words = re.split(r"[\W_]+", re.sub(r"[(\[].*?[)\]]", " ", title.casefold()))
    said = [word for word in words if word and word not in _SAYS_NOTHING]
    return "_".join(said or filter(None, words))


def key_of(title: str) -> str:
    """Name the values of a column: small letters, underscores for blanks, all else kept.

    Parameters
    ----------
    title : str

    Examples
    --------
    >>> key_of("Depth (m)"), key_of("Depth (ft)")
    ('depth_(m)', 'depth_(ft)')
    """
    return "_".join(title.casefold().split())


def quoted(titles: Sequence[str]) -> str:
    """List columns as they stand, each in quotes.

    Examples
    --------
    >>> quoted(["Well ID", "", "Lat"]), quoted([])
    ("'Well ID', 'Lat'", 'none')
    """
    named = [f"'{title}'" for title in titles if title]
    more = [f"and {len(named) - SHOWN_TITLES} more"] if len(named) > SHOWN_TITLES else []
    return ", ".join(named[:SHOWN_TITLES] + more) or "none"


def standing_for(titles: Sequence[str], ours: str) -> list[int]:
    """Say at which positions a column may be ours: the one of our name, else all usual ones.

    Parameters
    ----------
    titles : sequence of str
        As they stand in the file.
    ours : str

    Examples
    --------
    >>> standing_for(["Well ID", "Station", "Lat"], "location_id")
    [0, 1]
    >>> standing_for(["Well ID", "Location ID"], "location_id")
    [1]
    """
    names = [plain(title) for title in titles]
    exact = [at for at, title in enumerate(titles) if key_of(title) == ours]
    near = [at for at, name in enumerate(names) if name == ours]
    return exact or near or [at for at, name in enumerate(names) if name in _CALLED.get(ours, ())]


def told(file: str, titles: Sequence[str], ours: str, *, theirs: str) -> int:
    """Find the column that the campaign file names for one of ours.

    Parameters
    ----------
    file : str
    titles : sequence of str
    ours, theirs : str

    Raises
    ------
    FrameError
        There is none of that name, or two.
    """
    wanted = key_of(theirs)
    at = [position for position, title in enumerate(titles) if key_of(title) == wanted]
    if len(at) != 1:
        found = "two columns" if at else "no column"
        message = (
            f"{file} has {found} '{theirs}' for {ours}; its columns are {quoted(titles)}. "
            "Correct the name in columns."
        )
        raise FrameError(message)
    return at[0]


def one_of(file: str, titles: Sequence[str], ours: str, at: Sequence[int], *, table: str) -> int:
    """Return the only position; refuse several, and say how to tell which is meant.

    Parameters
    ----------
    file : str
    titles : sequence of str
    ours : str
    at : sequence of int
        At least one position.
    table : str
        The table of the campaign file that takes ``columns``; empty where none does.

    Raises
    ------
    FrameError
        Several columns could be meant.
    """
    if len(at) == 1:
        return at[0]
    could = " or ".join(f"'{titles[position]}'" for position in at)
    message = f"{file}: {ours} could be {could}. {remedy(table, {ours: titles[at[0]]})}"
    raise FrameError(message)


def has_none(file: str, titles: Sequence[str], wanted: str, remedy_words: str) -> FrameError:
    """Word a missing column: what is wanted, what there is as it stands, what to do.

    Parameters
    ----------
    file : str
    titles : sequence of str
    wanted, remedy_words : str
    """
    return FrameError(f"{file} has no {wanted}; its columns are {quoted(titles)}. {remedy_words}")


def remedy(table: str, meant: Mapping[str, str]) -> str:
    """Say how to name columns: in the campaign file where that is possible, else in the file.

    Examples
    --------
    >>> remedy("[[frame]]", {"location_id": "Well ID"})
    'Say which it is in [[frame]]: columns = { location_id = "Well ID" }.'
    >>> remedy("", {"latitude": "", "longitude": ""})
    'Rename the columns to latitude and longitude.'
    """
    several = len(meant) > 1
    if not table:
        one = "s" if several else " that is meant"
        return f"Rename the column{one} to {' and '.join(meant)}."
    inside = ", ".join(f'{ours} = "{theirs or "…"}"' for ours, theirs in meant.items())
    return f"Say which {'they are' if several else 'it is'} in {table}: columns = {{ {inside} }}."


def guesses(titles: Sequence[str], wanted: Sequence[str]) -> dict[str, str]:
    """Propose columns that may be ours, for a message; empty words where nothing comes near.

    Examples
    --------
    >>> guesses(["Well", "X", "Y"], ("easting", "northing"))
    {'easting': 'X', 'northing': 'Y'}
    """
    near = {_GUESSES.get(plain(title), ""): title for title in titles}
    return {ours: near.get(ours, "") for ours in wanted}


def taken_as(file: str, pairs: Sequence[tuple[str, str]]) -> tuple[str, ...]:
    """Note columns that were taken under another name than ours; nothing where none was.

    Parameters
    ----------
    file : str
    pairs : sequence of (str, str)
        The column as it stands, and ours.

    Examples
    --------
    >>> taken_as("wells.csv", [("Lat", "latitude"), ("Long", "longitude")])
    ("wells.csv: column 'Lat' is read as latitude, 'Long' as longitude.",)
    >>> taken_as("wells.csv", [("Latitude", "latitude"), ("Location ID", "location_id")])
    ()
    """
    other = [(title, ours) for title, ours in pairs if key_of(title) != ours]
    if not other:
        return ()
    (title, ours), *rest = other
    words = [f"column '{title}' is read as {ours}", *(f"'{t}' as {o}" for t, o in rest)]
    return (f"{file}: {', '.join(words)}.",)
