"""A result far from all others is pointed out, and still counts."""

from collections.abc import Callable

import pytest

from fieldplan.lab.model import LabTable

HEAD = "location_id,analyte,as_reported,unit,role"
Reader = Callable[..., LabTable]


def notes(read: Reader, *cells: str) -> tuple[str, ...]:
    """Read a file of these cells, a role behind a bar; give its notes."""
    parts = [cell.partition("|") for cell in cells]
    rows = [f"P{n},lead,{cell},mg/kg,{role}" for n, (cell, _, role) in enumerate(parts, start=2)]
    return read("\n".join([HEAD, *rows])).notes


def test_one_result_of_another_order_is_named_with_row_and_factor(read: Reader) -> None:
    """An exponent typed wrong decides the mean alone: 1e30 over 80 is 1.25E+28."""
    (note,) = notes(read, "40", "1e30", "55", "80")
    assert note == (
        "labs.csv: Lead of 'P3' with '1e30' (row 3) lies a factor of 1.25E+28 above the nearest of "
        "the others. Check unit and decimal point with the laboratory; it counts as it stands."
    )


def test_results_a_thousandth_of_the_others_are_named_too(read: Reader) -> None:
    """Two rows in g/kg among rows in mg/kg, under one unit."""
    (note,) = notes(read, "40", "0.05", "55", "80", "0.041", "62")
    assert "Lead of 'P3' with '0.05' (row 3) and 'P6' with '0.041' (row 6) lie" in note
    assert "a factor of 800 below the nearest" in note


def test_a_high_limit_counts_as_far_and_a_low_one_does_not(read: Reader) -> None:
    """Half of a limit of 50000 enters the mean; a limit far below the results is usual."""
    (note,) = notes(read, "40", "<50000", "55", "80")
    assert "'<50000' (row 3)" in note
    assert notes(read, "40", "<0.05", "55", "80") == ()


@pytest.mark.parametrize(
    "cells",
    [
        ("10", "30", "80", "250", "700", "2400", "9000", "60000"),
        ("10", "5000"),
        ("10", "12", "5000", "6000"),
        ("40", "55", "80", "90000|matrix spike"),
        ("<5", "<5000", "<10"),
    ],
    ids=["a long tail", "two results", "two halves", "a control", "no detects"],
)
def test_a_long_tail_halves_or_controls_are_no_slip(read: Reader, cells: tuple[str, ...]) -> None:
    """Concentrations lean; where no few stand against many, nothing tells which is wrong."""
    assert notes(read, *cells) == ()
