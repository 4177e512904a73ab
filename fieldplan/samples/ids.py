"""Sample ids: prefix and revision, then a number that tells nothing, with its check digit."""

import re


def sample_id(prefix: str, revision: int, number: int) -> str:
    """Write the id of one jar, which no other revision of the plan gives to another.

    Parameters
    ----------
    prefix : str
        The campaign's.
    revision : int
        Of the plan, from 1.
    number : int
        As drawn, without a leading zero.

    Notes
    -----
    The check digit is that of the revision's digits followed by the number's.

    Examples
    --------
    >>> sample_id("HL", 1, 277), sample_id("HL", 12, 277)
    ('HL1-2778', 'HL12-2776')
    """
    return f"{prefix}{revision}-{number}{check_digit(f'{revision}{number}')}"


def revision_of(written: str, prefix: str) -> int | None:
    """Tell which revision of a plan gave an id, from the id alone.

    Parameters
    ----------
    written : str
        As the crew or the laboratory wrote it: case, the dash and zeros before a number are free.
    prefix : str
        The campaign's.

    Returns
    -------
    int or None
        None where it is no such id, or its check digit says that it is written wrongly.

    Examples
    --------
    >>> [revision_of(name, "HL") for name in ("HL1-2778", "hl12 02776", "HL2-2778")]
    [1, 12, None]
    """
    pattern = rf"{re.escape(prefix)}0*([1-9]\d{{0,5}})[\s_./–—-]+0*([1-9]\d{{2,11}})(\d)"
    found = re.fullmatch(pattern, written.strip(), re.IGNORECASE | re.ASCII)
    if found is None or check_digit(found[1] + found[2]) != int(found[3]):
        return None
    return int(found[1])


def check_digit(digits: str) -> int:
    """Give the digit that makes one wrong digit show itself.

    Notes
    -----
    ISO/IEC 7064, MOD 11,10: with it no two ids differ in one digit only.

    Examples
    --------
    >>> check_digit("0794")
    5
    """
    product = 10
    for digit in digits:
        product = ((product + int(digit)) % 10 or 10) * 2 % 11
    return (11 - product) % 10
