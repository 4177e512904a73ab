"""``[rules]``: what is fixed before any result is seen."""

from datetime import date
from typing import Annotated, Literal

from pydantic import Field

from fieldplan.campaign.table import Table

NonDetects = Literal[
    "bounds",
    "substitute-half",
    "kaplan-meier",
    "order-statistics",
    "lognormal-likelihood",
    "gamma-likelihood",
    "normal-likelihood",
    "by-share",
]
DeclaredShape = Literal["lognormal", "gamma", "normal"]


class Rules(Table):
    """``[rules]``: what is fixed before any result is seen."""

    non_detects: NonDetects = "bounds"
    declared_shape: DeclaredShape | None = None
    duplicates: Literal["average", "first"] = "average"
    interval: Literal["two-sided", "upper-limit", "lower-limit"] = "two-sided"
    confidence: Annotated[float, Field(gt=0.5, lt=1)] = 0.95
    mean_interval: Literal["student-t", "skew-widened"] = "student-t"
    promised_class: Literal["cv-up-to-1", "cv-up-to-2"] | None = None
    promised_for: str = ""
    single_result: Literal["refuse", "borrow-spread"] = "refuse"
    fixed_by: str = ""
    fixed_on: date | None = None
