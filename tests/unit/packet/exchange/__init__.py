"""Tests of the point files."""
