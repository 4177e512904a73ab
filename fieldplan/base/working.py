"""Arithmetic that shows itself: every printed number comes from a step kept here."""

from dataclasses import dataclass


@dataclass(frozen=True)
class Quantity:
    """One input of a step.

    Parameters
    ----------
    symbol : str
        As in the formula, e.g. ``s``.
    meaning : str
        In words, e.g. ``standard deviation of single samples``.
    value : float
        Unrounded.
    unit : str
        The laboratory's unit, ``m``, ``samples`` …; empty when there is none.
    """

    symbol: str
    meaning: str
    value: float
    unit: str = ""


@dataclass(frozen=True)
class Step:
    """One line of working: what was computed, from what, and where the formula stands.

    Parameters
    ----------
    symbol, meaning : str
        What the step yields.
    formula : str
        Plain text, e.g. ``n = (s / SE)²``.
    inputs : tuple of Quantity
        All numbers that the formula uses.
    unrounded, rounded : float
        The value before and after the stated rounding (equal when nothing is rounded).
    unit : str
        Unit of the result.
    source : str
        Author, year and section; or ``common practice, no source``.
    """

    symbol: str
    meaning: str
    formula: str
    inputs: tuple[Quantity, ...]
    unrounded: float
    rounded: float
    unit: str = ""
    source: str = ""
