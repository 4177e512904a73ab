"""Number formats of a workbook: which ones show a value as it is, and which change what is seen."""

import re

_PART = re.compile(
    r'"(?P<quoted>[^"]*)"|\\(?P<escaped>.)|_(?P<space>.)|\*(?P<fill>.)|\[(?P<bracket>[^\]]*)\]'
    r"|(?P<general>General)|(?P<sign>.)",
    re.IGNORECASE | re.DOTALL,
)
_HARMLESS_BRACKET = re.compile(
    r"\$-[0-9a-f]+|black|blue|cyan|green|magenta|red|yellow|color ?[0-9]+", re.IGNORECASE
)
_DIGITS = re.compile(
    r"\+?(?=[#0?.,]*[#0?])[#0?]*(?:,[#0?]+)*(?:\.[#0?]*)?(?:E[+-][#0?]+)?", re.IGNORECASE
)


def shows_number(number_format: str, value: float) -> bool:
    r"""Whether a format shows a number as itself: its digits, perhaps rounded, and nothing else.

    Parameters
    ----------
    number_format : str
        As the workbook has it, sections parted by semicolons.
    value : float

    Returns
    -------
    bool
        False for letters, signs and units beside the digits, scaling commas, per cent, fractions,
        conditions, and sections that show nothing.

    Notes
    -----
    Office Open XML, ISO/IEC 29500-1, 18.8.31 (from memory): one to four sections, for values
    above 0, below 0, for 0 and for text; a comma behind the last digit divides by a thousand.

    Examples
    --------
    >>> shows_number("#,##0.00", 49.6), shows_number("0.00E+00", 49.6)
    (True, True)
    >>> shows_number(r"0.0\ \U", 49.6), shows_number(";;;", 49.6), shows_number("0.0,", 49.6)
    (False, False, False)
    """
    sections = _sections(number_format)
    if value < 0 and len(sections) > 1:
        section = sections[1].replace("-", "").replace("(", "").replace(")", "")
    else:
        section = sections[2] if value == 0 and len(sections) > 2 else sections[0]
    return section in {"general", "@"} or bool(_DIGITS.fullmatch(section))


def shows_text(number_format: str) -> bool:
    """Whether a format shows a text as itself.

    Parameters
    ----------
    number_format : str

    Examples
    --------
    >>> shows_text("General"), shows_text("@"), shows_text(";;;"), shows_text('@" U"')
    (True, True, False, False)
    """
    sections = _sections(number_format)
    if len(sections) < 4 and "@" not in sections[-1]:
        return True
    return sections[-1] == "@"


def _sections(number_format: str) -> list[str]:
    """Part a format at its semicolons; spacing goes, whatever else would be shown stays."""
    sections = [""]
    for part in _PART.finditer(number_format or "General"):
        if part["sign"] == ";":
            sections.append("")
        else:
            sections[-1] += _shown(part)
    return sections


def _shown(part: re.Match[str]) -> str:
    """Give what one part of a format adds to the cell; nothing for spacing and colours."""
    if part["space"]:
        return ""
    if part["bracket"] is not None:
        return "" if _HARMLESS_BRACKET.fullmatch(part["bracket"]) else "[]"
    if part["general"]:
        return "general"
    if part["sign"]:
        return "" if part["sign"].isspace() else part["sign"]
    literal = part["quoted"] or part["escaped"] or part["fill"] or ""
    return f"'{literal}'" if literal.strip() else ""
