"""How locations are drawn, and what that means for the mean: one file per layout."""

from fieldplan.design.layouts import layout_named, layout_of
from fieldplan.design.locating import locate

__all__ = ["layout_named", "layout_of", "locate"]
