"""Tests of the files that travel with the package."""
