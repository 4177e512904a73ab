"""One sentence for what the chosen n buys beside its own target."""

from fieldplan.sizing.model import OtherPrecision, Size
from fieldplan.sizing.words import counted, figure, percent, typed_percent, with_unit


def other_sentence(
    found: OtherPrecision, size: Size, *, name: str, given: bool, why_not: str
) -> str:
    """Say what the same results buy for another objective or analyte.

    Parameters
    ----------
    found : OtherPrecision
        Without its sentence.
    size : Size
        The answer for the deciding objective.
    name : str
        The analyte as printed.
    given : bool
        The campaign file has a ``[[sigma]]`` for it.
    why_not : str
        Why there is no target to compare with; empty where there is one.

    Returns
    -------
    str

    Examples
    --------
    >>> from tests.factories import make_size
    >>> print(other_sentence(OtherPrecision("zinc", "mg/kg"), make_size(), name="Zinc",
    ...                      given=False, why_not=""))
    Zinc: the campaign has no [[sigma]] for it, so nobody can say what the same 7 results buy.
    """
    head = f"{name}, its other objective" if found.analyte == size.analyte else name
    results = f"the same {counted(size.needed, 'result')}"
    if found.standard_error is None:
        return f"{head}: {_unknown(given)}, so nobody can say what {results} buy."
    if found.standard_error == 0 and found.chance is None:
        return f"{head}: every unit is visited, so its mean has no error from choosing units."
    sigma = "its sigma, ASSUMED and not measured," if found.assumed else "its sigma"
    buys = f"{head}: {results} buy {_precision(found, size)} if {sigma} is right"
    return f"{buys}; {why_not or _against_target(found)}."


def _unknown(given: bool) -> str:
    if given:
        return "its [[sigma]] tables give no sigma for every stratum ('fieldplan check' says why)"
    return "the campaign has no [[sigma]] for it"


def _precision(found: OtherPrecision, size: Size) -> str:
    """Give the standard error, and the half-width where the target is one."""
    words = f"a standard error of {with_unit(figure(found.standard_error or 0.0), found.unit)}"
    if found.target_half_width is None or found.half_width is None:
        return words
    reach = with_unit(figure(found.half_width), found.unit)
    share = typed_percent(size.confidence)
    if size.interval == "two-sided":
        return f"{words} and a {share} interval of ±{reach}"
    side = "above" if size.interval == "upper-limit" else "below"
    return f"{words} and a {share} {size.interval.replace('-', ' ')} {reach} {side} the mean"


def _against_target(found: OtherPrecision) -> str:
    """Say whether that keeps the target, with what chance, and what n would."""
    if found.chance is None:
        verb = "keeps" if found.meets else "misses"
        words = (
            f"that {verb} its own target ({found.target}), and no chance can be given: nobody said "
            "how many results stand behind its sigma"
        )
    else:
        verb, joined = {
            (True, False): ("keeps", "with a chance of"),
            (True, True): ("is within", "but with a chance of only"),
        }.get((bool(found.meets), found.falls_short), ("misses", "and the chance to keep it is"))
        words = f"that {verb} its own target ({found.target}), {joined} {chance_words(found)}"
        if found.assurance is not None:
            words += f" ({typed_percent(found.assurance)} was asked for)"
    if found.falls_short and found.enough_n is None:
        words += "; no number of results that can be had would do"
    elif found.enough_n is not None:
        words += f"; for that it would take {counted(found.enough_n, 'result')}, shared out as here"
    return words


def chance_words(found: OtherPrecision) -> str:
    """Write the chance to keep the target, never rounded up to the one that was asked for.

    Examples
    --------
    >>> chance_words(OtherPrecision("zinc", "mg/kg", chance=0.796, assurance=0.8))
    'just under 80 %'
    """
    chance, asked = found.chance or 0.0, found.assurance or 0.0
    if chance < 0.0005:
        return "under 0.1 %"
    near = chance < asked and percent(chance) == percent(asked)
    return f"just under {typed_percent(asked)}" if near else percent(chance)
