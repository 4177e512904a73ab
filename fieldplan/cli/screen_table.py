"""Tables on a screen of eighty columns: headings break first, then cells, then rows are stacked."""

import textwrap
from collections.abc import Sequence

WIDTH = 79
INDENT = "  "
GAP = "  "


def table_lines(columns: Sequence[str], rows: Sequence[Sequence[str]]) -> list[str]:
    """Set a table: the first column flush left, the others flush right.

    Parameters
    ----------
    columns : sequence of str
        Headings.
    rows : sequence of sequence of str

    Returns
    -------
    list of str
        Lines of at most 79 columns, as long as no single word is longer.

    Examples
    --------
    >>> for line in table_lines(("where", "n"), (("meadow", "12"), ("yard", "7"))):
    ...     print(line)
      where    n
      meadow  12
      yard     7
    """
    cells = [tuple(columns), *(tuple(row) for row in rows)]
    widths = _widths(cells)
    if widths is None:
        return _stacked(columns, rows)
    lines = []
    for k, row in enumerate(cells):
        broken = [_broken(text, width) for text, width in zip(row, widths, strict=True)]
        height = max(map(len, broken))
        for pieces in broken:  # headings stand on their column, other cells begin at the top
            blank = [""] * (height - len(pieces))
            pieces[:] = blank + pieces if k == 0 else pieces + blank
        for line in zip(*broken, strict=True):
            first, *others = line
            text = GAP.join(
                [first.ljust(widths[0])]
                + [piece.rjust(width) for piece, width in zip(others, widths[1:], strict=True)]
            )
            lines.append((INDENT + text).rstrip())
    return lines


def _widths(cells: Sequence[Sequence[str]]) -> list[int] | None:
    """Give each column its room; None where words alone are wider than the screen."""
    columns = list(zip(*cells, strict=True))
    room = WIDTH - len(INDENT) - len(GAP) * (len(columns) - 1)
    wide = [max(map(len, column)) for column in columns]
    if sum(wide) <= room:
        return wide
    words = [_longest_word(column) for column in columns]
    body = [max([len(text) for text in column[1:]] + [least])
            for column, least in zip(columns, words, strict=True)]  # fmt: skip
    widths = body if sum(body) <= room else words
    return None if sum(widths) > room else _given_back(columns, widths, room - sum(widths))


def _given_back(columns: Sequence[Sequence[str]], widths: list[int], spare: int) -> list[int]:
    """Widen the columns that break into most lines, as far as that saves a line."""
    while True:
        heights = [_height(column, width) for column, width in zip(columns, widths, strict=True)]
        wider = [
            (height, next(w for w in range(width, WIDTH + 1) if _height(column, w) < height), k)
            for k, (column, width, height) in enumerate(zip(columns, widths, heights, strict=True))
            if height > 1
        ]
        fitting = [(height, width, k) for height, width, k in wider if width - widths[k] <= spare]
        if not fitting:
            return widths
        _, width, k = max(fitting)
        spare -= width - widths[k]
        widths[k] = width


def _height(column: Sequence[str], width: int) -> int:
    return max(len(_broken(text, width)) for text in column)


def _longest_word(column: Sequence[str]) -> int:
    return max((len(word) for text in column for word in text.split()), default=1)


def _broken(text: str, width: int) -> list[str]:
    return textwrap.wrap(text, width, break_long_words=False, break_on_hyphens=False) or [""]


def _stacked(columns: Sequence[str], rows: Sequence[Sequence[str]]) -> list[str]:
    """Set each row as a small list, its first cell as the heading."""
    lines = []
    for row in rows:
        lines += textwrap.wrap(row[0], WIDTH - 2, initial_indent=INDENT, subsequent_indent=INDENT)
        for name, cell in zip(columns[1:], row[1:], strict=True):
            lines += textwrap.wrap(
                f"{name}: {cell}", WIDTH, initial_indent="    ", subsequent_indent="      "
            )
    return lines
