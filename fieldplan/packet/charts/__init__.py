"""Charts as figures of a sheet: an SVG string with its caption and its words."""

from fieldplan.packet.charts.interval import interval_figure
from fieldplan.packet.charts.pilot import pilot_dots
from fieldplan.packet.charts.precision import precision_curve
from fieldplan.packet.charts.site import site_figure

__all__ = ["interval_figure", "pilot_dots", "precision_curve", "site_figure"]
