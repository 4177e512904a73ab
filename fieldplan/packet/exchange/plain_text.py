"""Typed text made inert: no control characters, no hidden direction, nothing a program runs."""

import re

# Embeddings, overrides and isolates reorder what follows them; the plain marks (200E, 200F) do not.
_HIDDEN_DIRECTION = re.compile("[\u202a-\u202e\u2066-\u2069]")
# What XML 1.0 (section 2.2) cannot hold, and line ends, which would break a row in two.
_UNPRINTABLE = re.compile("[\x00-\x1f\x7f-\x9f\u2028\u2029\ud800-\udfff\ufffe\uffff]")
# Full-width forms are taken for operators by spreadsheets set to East Asian languages.
_OPERATORS = "=+\\-@\uff1d\uff0b\uff0d\uff20"
_OPENS_FORMULA = re.compile(f"\\s*[{_OPERATORS}]")
# Where semicolons separate cells, a text with one inside starts a second cell there.
_INNER_FORMULA = re.compile(f"([;|])(?=\\s*[{_OPERATORS}])")
_MONTH = r"(?:jan|feb|mar|apr|may|jun|jul|aug|sep|oct|nov|dec)[a-z]*"
_TURNS_INTO_DATE = re.compile(
    rf"(?:\d+[-/.:]\d+(?:[-/.:]\d+)?(?:\s*[ap]m?)?|{_MONTH}[-/ .]?\d+|\d+[-/ .]?{_MONTH}"
    rf"(?:[-/ .]?\d+)?)",
    re.IGNORECASE,
)
_NUMBER_AT_HEART = re.compile(r"[\d.,' ]*\d[\d.,' ]*(?:e[+-]?\d+)?%?", re.IGNORECASE)
_PLAIN_INTEGER = re.compile(r"0|[1-9]\d{0,14}")


def plain(text: str) -> str:
    r"""Give text on one line without control characters and without hidden reordering.

    Parameters
    ----------
    text : str
        As typed by anybody.

    Returns
    -------
    str
        Letters of every script stay; line ends and control characters become spaces.

    Examples
    --------
    >>> plain("north\nfield\x07")
    'north field '
    >>> plain("a\u202ecod.exe")
    'acod.exe'
    """
    return _UNPRINTABLE.sub(" ", _HIDDEN_DIRECTION.sub("", text))


def spreadsheet_cell(text: str) -> str:
    """Give text that a spreadsheet shows as it was typed when it opens a CSV file.

    An apostrophe goes before what would be run as a formula or turned into a date, an exponent
    or a shorter number; whole numbers without a leading zero stay as they are.

    Parameters
    ----------
    text : str
        A text cell; numbers are never passed through here.

    Returns
    -------
    str

    Examples
    --------
    >>> spreadsheet_cell("=HYPERLINK(1)"), spreadsheet_cell("MW-12"), spreadsheet_cell("12")
    ("'=HYPERLINK(1)", 'MW-12', '12')
    >>> spreadsheet_cell("MAR-01"), spreadsheet_cell("1E5"), spreadsheet_cell("007")
    ("'MAR-01", "'1E5", "'007")
    """
    cell = _INNER_FORMULA.sub(r"\1'", plain(text))
    return f"'{cell}" if _changes_when_opened(cell) else cell


def _changes_when_opened(cell: str) -> bool:
    bare = cell.strip()
    if _OPENS_FORMULA.match(cell) or _TURNS_INTO_DATE.fullmatch(bare):
        return True
    looks_like_number = _NUMBER_AT_HEART.fullmatch(bare) is not None
    return looks_like_number and _PLAIN_INTEGER.fullmatch(cell) is None
