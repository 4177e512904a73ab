"""From text to TOML tables: where the text is no TOML, each fault with its own remedy."""

import re
import tomllib
from typing import Any

from fieldplan.base.errors import CampaignError

DEEPEST = 8
"""Levels of tables and lists; the deepest campaign has 4."""

_PLACE = re.compile(r"\s*\(at (?:line (\d+), column \d+|end of document)\)$")
_MOST_FAULTS = 20
_MOST_DOTS = 500

_VALUE_REMEDIES = (
    (r"=\s*[+-]?\d+,\d+\s*$", "Numbers take a point, not a comma: write {point}."),
    (r"=\s*[+-]?\d{1,3}([ '’]\d{3})+\s*$", "Write the number without spaces between its digits."),
    (r"=\s*\d{1,2}[./]\d{1,2}[./]\d{4}", "Write dates as year-month-day, such as 2026-11-02."),
    (r"=\s*[+-]?[\d.]+\s*%", "Write a share as a number between 0 and 1: 0.10 for 10 %."),
    (
        r"=\s*[+-]?\d[\d.]*\s*[a-zA-Zµ]",
        "Write the number alone; the unit is in the key or belongs to the laboratory.",
    ),
    (r"=\s*(True|False|TRUE|FALSE|yes|no|Yes|No)\s*$", "Write true or false, in small letters."),
    (r"=\s*$", 'Write a value after the sign, or "FILL IN" where it is not known yet.'),
    (r"=\s*[^\W\d]", "Put text between straight double quotes."),
)


def parse(text: str, name: str) -> dict[str, Any]:
    """Return the tables of a TOML text.

    Parameters
    ----------
    text : str
        The whole file.
    name : str
        The file's name as messages shall give it.

    Raises
    ------
    CampaignError
        One line for each faulty line of the text, with what to do about it.

    Examples
    --------
    >>> parse("sigma = 27,5", "c.toml")
    Traceback (most recent call last):
    fieldplan.base.errors.CampaignError: c.toml:1: sigma = 27,5: expected newline or end of
    document after a statement. Numbers take a point, not a comma: write 27.5.
    """
    faults: list[str] = []
    lines = text.split("\n")
    # tomllib takes quadratic time over the parts of one dotted key.
    if any(line.split("=")[0].count(".") > _MOST_DOTS for line in lines):
        raise CampaignError(_too_deep(name))
    last = 0
    while len(faults) < _MOST_FAULTS:
        try:
            content = tomllib.loads("\n".join(lines))
        except (tomllib.TOMLDecodeError, RecursionError, ValueError) as fault:
            number, message = _explain(fault, lines)
            if number <= last:
                break
            faults.append(f"{name}:{number}: {message}")
            if number > len(lines):
                break
            last = number
            lines[number - 1] = ""
        else:
            break
    if faults:
        raise CampaignError(*faults)
    if _depth(content) > DEEPEST:
        raise CampaignError(_too_deep(name))
    return content


def _too_deep(name: str) -> str:
    """Refuse a file of nested tables without end."""
    return f"{name}:1: tables are nested more than {DEEPEST} deep. Write them flat."


def _explain(fault: Exception, lines: list[str]) -> tuple[int, str]:
    """Return the line of a fault and one sentence with its remedy."""
    if isinstance(fault, RecursionError):
        return 1, "lists or tables are nested too deep to be read. Write them flat."
    place = _PLACE.search(str(fault))
    if place is None:
        return _long_number(lines), "a number has thousands of digits. Write it shorter."
    reason = _PLACE.sub("", str(fault))
    number = int(place[1]) if place[1] else len(lines)
    line = lines[min(number, len(lines)) - 1]
    if not line.strip() and number > 1:
        number, line = number - 1, lines[number - 2]
    reason = reason[:1].lower() + reason[1:]
    return number, f"{_shown(line)}: {reason}. {_remedy(reason, line)}"


def _remedy(reason: str, line: str) -> str:
    """Say what to do about one faulty line."""
    if re.search("[“”„‟‘’‚«»]", line):
        return "The quotes are curly: type straight ones, \" or '."
    if "\\" in line and re.search(r"escape|hex value|[Ii]nvalid|backslash|'\\\\\\\\'", reason):
        return 'Write / between folders, or put the text in single quotes: a \\ in " is special.'
    if "cannot declare" in reason or "cannot mutate" in reason or "namespace" in reason:
        name = line.strip().strip("[]").strip()
        return f"Write [[{name}]] in double brackets at every table of that name, or join them."
    if "overwrite" in reason:
        return "The key stands twice: keep one of the two."
    value = line.split(" #")[0].rstrip()
    for pattern, remedy in _VALUE_REMEDIES:
        if re.search(pattern, value):
            return remedy.format(point=value.split("=")[-1].strip().replace(",", "."))
    if line.count('"') % 2 or line.count("'") % 2:
        return "Close the quotes on the same line."
    if "=" not in line and not line.lstrip().startswith("["):
        return "Write key = value, or begin the line with # to make it a comment."
    return "Write key = value, with text between straight double quotes."


def _shown(line: str) -> str:
    """Shorten a line for a message and make its control characters visible."""
    plain = "".join(c if c.isprintable() else f"\\x{ord(c):02x}" for c in line.strip())
    return plain if len(plain) <= 60 else plain[:57] + "..."


def _long_number(lines: list[str]) -> int:
    """Return the line with the longest run of digits."""
    lengths = [max(map(len, re.findall(r"\w+", line)), default=0) for line in lines]
    return lengths.index(max(lengths)) + 1


def _depth(content: object) -> int:
    """Count levels of tables and lists; iterative, since dotted keys may nest without end."""
    level, depth = [content], 0
    while level:
        depth += 1
        below: list[object] = []
        for thing in level:
            if isinstance(thing, dict):
                below.extend(thing.values())
            elif isinstance(thing, list):
                below.extend(thing)
        level = below
    return depth - 1
