"""Tests of the maps."""
