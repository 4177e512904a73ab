"""CSV tables with places: corners of a boundary, units of a list, targeted places."""

import csv
import io
import re
from collections.abc import Iterator
from dataclasses import dataclass

import shapely

from fieldplan.base.errors import FrameError
from fieldplan.frame.columns import (
    ColumnMap,
    guesses,
    has_none,
    key_of,
    one_of,
    remedy,
    standing_for,
    taken_as,
    told,
)
from fieldplan.frame.layer import Feature, Layer, raise_all

_SEPARATORS = {",": "comma", ";": "semicolon", "\t": "tab"}
_DEGREES, _GRID = ("longitude", "latitude"), ("easting", "northing")
_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d{1,3})?")
_DECIMAL_COMMA = re.compile(r"[+-]?\d+,\d+")
_MOST_ROWS = 1_000_000


@dataclass(frozen=True)
class _Rows:
    """A table of texts: column names as they stand, and cells with the number of their row."""

    titles: tuple[str, ...]
    rows: tuple[tuple[int, tuple[str, ...]], ...]
    blank: int


def read_rows(content: bytes, name: str, *, named: ColumnMap | None = None) -> Layer:
    """Read a CSV of places: ``latitude, longitude`` in degrees or ``easting, northing``.

    Parameters
    ----------
    content : bytes
        UTF-8 with or without a mark, UTF-16 or Windows-1252; comma, semicolon or tab.
    name : str
        What messages call it.
    named : ColumnMap, optional
        Columns as the campaign file names them.

    Returns
    -------
    Layer
        A point for each row that is not blank; all cells as trimmed text, ids untouched. Without
        a CRS when the columns are easting and northing.

    Raises
    ------
    FrameError
        Not text, no such columns, or cells that are no plain decimal numbers.
    """
    text, notes = _decoded(content, name)
    rows = _table(text, name)
    titles, columns = rows.titles, tuple(map(key_of, rows.titles))
    pair, across, up = _pair(titles, name, named or ColumnMap())
    if rows.blank:
        notes = (*notes, f"{name}: {rows.blank} blank row(s) were skipped.")
    notes = (*notes, *taken_as(name, [(titles[across], pair[0]), (titles[up], pair[1])][::-1]))
    features, faults = [], []
    for number, cells in rows.rows:
        problems = [fault for at in (across, up) for fault in _cell_faults(cells[at], titles[at])]
        faults += [f"{name} row {number}: {problem}" for problem in problems]
        if not problems:
            x, y = _plain_number(cells[across]), _plain_number(cells[up])
            values = dict(zip(columns, cells, strict=True))
            features.append(Feature(f"row {number}", shapely.Point(float(x), float(y)), values))
    raise_all(faults)
    crs_from = "its columns latitude and longitude" if pair == _DEGREES else ""
    return Layer(name, "CSV", tuple(features), None, crs_from, columns, notes, titles)


def _decoded(content: bytes, name: str) -> tuple[str, tuple[str, ...]]:
    """Turn bytes into text by their mark, else as UTF-8, else as Windows-1252, which is said."""
    try:
        if content.startswith((b"\xff\xfe", b"\xfe\xff")):
            return content.decode("utf-16"), ()
        if content[1:2] == b"\0":
            return content.decode("utf-16-le"), ()
        if content[:1] == b"\0":
            return content.decode("utf-16-be"), ()
        if b"\0" not in content:
            return content.decode("utf-8-sig"), ()
    except UnicodeDecodeError:
        pass
    try:
        if b"\0" not in content:
            text = content.decode("cp1252")
            return text, (f"{name} is not UTF-8 and was read as Windows-1252; check accents.",)
    except UnicodeDecodeError:
        pass
    message = f"{name} is not a text table; save it again as CSV in UTF-8."
    raise FrameError(message)


def _table(text: str, name: str) -> _Rows:
    """Split text into a header and rows, with the separator that the header shows."""
    first, _, rest = text.partition("\n")
    marked = re.fullmatch(r"sep=(.)\s*", first.strip("\r"), re.IGNORECASE)
    separator = marked.group(1) if marked else _separator(text)
    skipped = 1 if marked else 0
    records = _records(rest if marked else text, separator, name)
    filled = [(number + skipped, cells) for number, cells in records if any(cells)]
    if not filled:
        message = f"{name} has no rows; export it again."
        raise FrameError(message)
    header = tuple(filled[0][1])
    named = [key_of(title) for title in header if title]
    raise_all(
        f"{name}: column {column!r} stands there twice; rename one."
        for column in dict.fromkeys(named)
        if named.count(column) > 1
    )
    if len(filled) == 1:
        message = f"{name} has a header and no rows below it; add the places."
        raise FrameError(message)
    raise_all(
        f"{name} row {number} has {len(cells)} cells, the header {len(header)}; a "
        f"{_SEPARATORS.get(separator, repr(separator))} inside a cell splits it (a decimal comma?)."
        " Write numbers with a point, and put such a text in quotes."
        for number, cells in filled[1:]
        if any(cells[len(header) :])
    )
    last = filled[-1][0]
    blank = last - filled[0][0] + 1 - len(filled)
    padded = tuple(
        (number, tuple((*cells, *[""] * len(header))[: len(header)]))
        for number, cells in filled[1:]
    )
    return _Rows(header, padded, blank)


def _records(text: str, separator: str, name: str) -> list[tuple[int, list[str]]]:
    """Read all records with the numbers that a spreadsheet shows."""
    rows: list[tuple[int, list[str]]] = []
    try:
        for number, cells in enumerate(_reader(text, separator), start=1):
            if number > _MOST_ROWS:
                message = f"{name} has more than {_MOST_ROWS:,} rows; is it the right file?"
                raise FrameError(message)
            rows.append((number, [" ".join(cell.split()) for cell in cells]))
    except csv.Error as fault:
        message = f"{name} row {len(rows) + 1} cannot be read as CSV ({fault}); save it again."
        raise FrameError(message) from fault
    return rows


def _reader(text: str, separator: str) -> Iterator[list[str]]:
    return csv.reader(io.StringIO(text, newline=""), delimiter=separator)


def _separator(text: str) -> str:
    """Choose the separator that splits the first filled line into most cells."""
    line = next((line for line in text.splitlines() if line.strip()), "")
    return max(_SEPARATORS, key=line.count)


def _pair(titles: tuple[str, ...], name: str, named: ColumnMap) -> tuple[tuple[str, str], int, int]:
    """Find the two columns with coordinates; degrees go first where both pairs are there."""
    typed = {
        ours: told(name, titles, ours, theirs=theirs)
        for ours, theirs in named.columns.items()
        if ours in _DEGREES + _GRID
    }
    for pair in (_DEGREES, _GRID):
        other = _GRID if pair == _DEGREES else _DEGREES
        if any(ours in typed for ours in other):
            continue
        at = [[typed[ours]] if ours in typed else standing_for(titles, ours) for ours in pair]
        if all(at):
            across, up = (
                one_of(name, titles, ours, found, table=named.table)
                for ours, found in zip(pair, at, strict=True)
            )
            return pair, across, up
    guessed = guesses(titles, _GRID)
    meant = guessed if all(guessed.values()) else {"latitude": "", "longitude": ""}
    wanted = (
        "columns 'latitude' and 'longitude' (or 'easting' and 'northing'), each coordinate in a "
        "column of its own"
    )
    raise has_none(name, titles, wanted, remedy(named.table, meant))


def _cell_faults(cell: str, column: str) -> list[str]:
    """Say what is wrong with a coordinate, with the remedy for what it looks like."""
    if _NUMBER.fullmatch(_plain_number(cell)):
        return []
    if not cell:
        return [f"{column} is empty; fill it in, or leave out the row."]
    if _DECIMAL_COMMA.fullmatch(_plain_number(cell)):
        point = cell.replace(",", ".")
        return [f"{column} {cell!r} has a decimal comma; write {point} with a point."]
    if re.search(r"[°'′\"″NSEWnsew]", cell) and any(c.isdigit() for c in cell):
        return [f"{column} {cell!r} is not in decimal degrees; write it like 52.1034 or -1.8976."]
    return [f"{column} {cell!r} is not a number; correct it."]


def _plain_number(cell: str) -> str:
    """Turn a typographic minus into the one that numbers have."""
    return cell.replace("\u2212", "-")
