"""What laboratories said, and what a pilot says about spread."""

from fieldplan.lab.reader import read_lab
from fieldplan.lab.spread import read_spread

__all__ = ["read_lab", "read_spread"]
