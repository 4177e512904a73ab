"""What the results say."""

from fieldplan.estimate.answer import estimate
from fieldplan.estimate.several import estimate_all

__all__ = ["estimate", "estimate_all"]
