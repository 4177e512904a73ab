"""Time one answer of each question from bare numbers, without what stands beside it."""

from dataclasses import dataclass
from typing import Any

from fieldplan.sizing import size_asked
from fieldplan.sizing.asked.model import Asked
from tests.benchmarks.placement import seconds
from tests.unit.sizing.askings import asked_numbers

LEVEL = ("assume=above-level", "gray_edge=110", "alpha=0.05", "beta=0.2")
BACKGROUND = ("assume=at-background", "difference=25", "alpha=0.05", "beta=0.2")
QUESTIONS: dict[str, dict[str, Any]] = {
    "mean, standard error": {"sigma": 27.57, "standard_error": 6.0, "results": 8},
    "mean, half-width at 80 %": {
        "sigma": 58.0, "half_width": 20.0, "results": 12, "assurance": 0.8,
    },
    "mean and level, t": {
        "question": "mean-and-level", "sigma": 48.0, "results": 8, "level": 150.0,
        "one_sided": True, "keys": LEVEL,
    },
    "mean and level, signs": {
        "question": "mean-and-level", "sigma": 48.0, "results": 8, "level": 150.0,
        "one_sided": True, "keys": (*LEVEL, "test=sign"),
    },
    "mean and background, Welch": {
        "question": "mean-and-background", "sigma": 30.0, "keys": BACKGROUND,
    },
    "change": {
        "question": "change", "sigma": 20.0, "results": 8,
        "keys": ("difference=8", "alpha=0.05", "beta=0.2", "correlation=0.6"),
    },
    "share, margin": {"question": "share", "keys": ("margin=0.05", "expected=0.3")},
    "upper share by counting": {"question": "upper-share", "keys": ("share=0.95",)},
    "upper share, normal bound": {
        "question": "upper-share", "sigma": 20.0, "mean": 90.0, "level": 150.0,
        "keys": ("share=0.95", "method=normal", "power=0.8"),
    },
    "all clear": {"question": "all-clear", "keys": ("share=0.05",)},
    "all clear, list of 100": {
        "question": "all-clear", "population": 100, "keys": ("units=5",),
    },
}  # fmt: skip


@dataclass(frozen=True)
class Timed:
    """One question and the shortest time of its answer, in seconds."""

    question: str
    shortest: float


def asked_of(name: str) -> Asked:
    """Give one of the questions, ready to be answered."""
    return asked_numbers(**QUESTIONS[name])


def measure() -> list[Timed]:
    """Time every question."""
    found = []
    for name in QUESTIONS:
        asked = asked_of(name)
        found.append(Timed(name, seconds(lambda asked=asked: size_asked(asked, beside=()), 5)))
    return found
