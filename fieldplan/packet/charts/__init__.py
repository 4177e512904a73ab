"""Charts as SVG strings; the same drawing serves page and paper."""
