"""Tests of boundaries, strata, exclusions and lists."""
