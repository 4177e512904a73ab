"""What the results say."""

from fieldplan.estimate.answer import estimate

__all__ = ["estimate"]
