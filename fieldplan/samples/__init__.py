"""What is taken, under which ids, with which control samples."""

from fieldplan.samples.assign import assign

__all__ = ["assign"]
