"""Many analytes or wells decided at once: the chance that any decision is wrong."""

import math
from collections.abc import Sequence
from typing import Literal, NamedTuple

from fieldplan.base.errors import DesignError
from fieldplan.stats.power import one_sample_n
from fieldplan.stats.risks import check_risks

Together = Literal["each-alone", "all-or-nothing"]
"""Every decision stands alone; or one claim is made, and only if every decision supports it."""


class AnyWrong(NamedTuple):
    """The chance that at least one of several decisions is wrong.

    Parameters
    ----------
    least : float
        When they all go wrong together: the largest single chance.
    independent : float
        When none knows of the others.
    most : float
        Whatever ties them together: the sum, at most 1 (Bonferroni).
    """

    least: float
    independent: float
    most: float


def chance_of_any(chances: Sequence[float]) -> AnyWrong:
    """Give the chance that at least one of several decisions is wrong, with its bounds.

    Parameters
    ----------
    chances : sequence of float
        Chance that each decision is wrong, from 0 to 1; at least one.

    Notes
    -----
    1 − Π(1 − c) for independent decisions; the largest and the sum bound it otherwise: Bonferroni,
    see Miller (1981), Simultaneous Statistical Inference, ch. 1.

    Examples
    --------
    >>> least, independent, most = chance_of_any([0.05] * 10)
    >>> least, round(independent, 3), round(most, 3)
    (0.05, 0.401, 0.5)
    """
    if not chances:
        message = "no decision was given; name the chance that each of them is wrong."
        raise DesignError(message)
    for chance in chances:
        if not 0 <= chance <= 1:
            message = f"the chance of a wrong decision is {chance!r}; it lies from 0 to 1."
            raise DesignError(message)
    if max(chances) == 1:
        return AnyWrong(1.0, 1.0, 1.0)
    independent = -math.expm1(math.fsum(math.log1p(-chance) for chance in chances))
    return AnyWrong(max(chances), independent, min(1.0, math.fsum(chances)))


def chance_for_each(overall: float, decisions: int, *, independent: bool = False) -> float:
    """Give the chance of a wrong decision that each may have, for the overall one to be kept.

    Parameters
    ----------
    overall : float
        Chance that any decision is wrong, inside (0, 1).
    decisions : int
        At least 1.
    independent : bool
        Count on decisions that know nothing of each other. Otherwise whatever ties them together.

    Notes
    -----
    A/m; for independent decisions 1 − (1 − A)^(1/m), Šidák (1967), JASA 62:626.

    Examples
    --------
    >>> chance_for_each(0.05, 10)
    0.005
    >>> round(chance_for_each(0.05, 10, independent=True), 6)
    0.005116
    """
    if decisions < 1:
        message = f"{decisions} decisions were given; there must be at least 1."
        raise DesignError(message)
    if not 0 < overall < 1:
        message = (
            f"the chance that any decision is wrong is {overall!r}; it lies between 0 and 1, "
            "e.g. 0.05."
        )
        raise DesignError(message)
    if independent:
        return -math.expm1(math.log1p(-overall) / decisions)
    return overall / decisions


def risks_for_each(
    alpha: float, beta: float, *, decisions: int, together: Together
) -> tuple[float, float]:
    """Give alpha and beta of each decision, for the overall ones to be kept.

    Parameters
    ----------
    alpha, beta : float
        Overall: of any false claim, and of missing any where all lie at the far edge.
    decisions : int
        At least 1.
    together : str
        ``each-alone``: both chances are shared out. ``all-or-nothing``: a false claim needs every
        decision, the wrong one among them, so alpha stays; only beta is shared out.

    Notes
    -----
    Sharing out: Bonferroni. All or nothing: intersection-union, Berger (1982), Technometrics
    24:295.

    Examples
    --------
    >>> risks_for_each(0.05, 0.2, decisions=4, together="each-alone")
    (0.0125, 0.05)
    >>> risks_for_each(0.05, 0.2, decisions=4, together="all-or-nothing")
    (0.05, 0.05)
    """
    check_risks(alpha, beta)
    each_beta = chance_for_each(beta, decisions)
    if together == "all-or-nothing":
        return alpha, each_beta
    return chance_for_each(alpha, decisions), each_beta


def n_for_many(
    difference: float,
    sigma: float,
    *,
    alpha: float,
    beta: float,
    decisions: int,
    together: Together = "each-alone",
) -> int:
    """Count the results of each analyte or well that keep the overall chances.

    Parameters
    ----------
    difference, sigma : float
        Width of the gray region and standard deviation of single results, of the decision with
        the smallest ratio of the two.
    alpha, beta : float
        Overall chances of the two wrong decisions.
    decisions : int
        At least 1.
    together : str
        See ``risks_for_each``.

    Examples
    --------
    >>> [n_for_many(1.0, 1.0, alpha=0.05, beta=0.2, decisions=m) for m in (1, 5, 20)]
    [8, 20, 31]
    """
    each_alpha, each_beta = risks_for_each(alpha, beta, decisions=decisions, together=together)
    return one_sample_n(difference, sigma, alpha=each_alpha, beta=each_beta)
