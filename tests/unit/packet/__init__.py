"""Tests of what people hold: point files, maps, sheets."""
