"""Qualifiers: one list for the cell and for the column, and nothing taken for a flag by chance."""

import itertools
import string
from collections.abc import Callable

import pytest

from fieldplan.base.errors import LabError
from fieldplan.lab.model import LabTable
from fieldplan.lab.qualifiers import read_qualifier

HEAD = "location_id,analyte,as_reported,unit"
Reader = Callable[..., LabTable]
NOT_DETECTED = (
    "U", "u", "UJ", "U, J", "U J", "JU", "UB", "U*", "U1", "UQ", "(U)", "[U]", "<", "< ", "<=", "≤",
    "＜", "<RL", "< RL", "<LOD", "<LOQ", "<DL", "<MDL", "ND", "n.d.", "N/D", "nd, J", "BDL", "BQL",
    "BRL", "not detected", "Non-detect", "NONDETECT", "below reporting limit",
)  # fmt: skip


@pytest.mark.parametrize("written", NOT_DETECTED)
def test_every_spelling_of_not_detected_makes_the_number_a_limit(
    read: Reader, written: str
) -> None:
    """5 beside ``<`` in a column of its own is as little a result as ``<5`` in one cell."""
    table = read(f'{HEAD},qualifier_lab\nA,lead,5,mg/kg,"{written}"\n')
    (row,) = table.rows
    assert (row.result, row.reporting_limit, row.detected) == (None, 5.0, False)
    assert table.notes == ()


@pytest.mark.parametrize("written", ["R", "REJ", "rejected", "J R", "UR", "(R)"])
def test_every_spelling_of_rejected_leaves_the_row_out(read: Reader, written: str) -> None:
    """A result that the laboratory withdrew is in no mean."""
    table = read(f"{HEAD},qualifier_lab\nA,lead,5,mg/kg,{written}\nB,lead,7,mg/kg,\n")
    assert [row.location_id for row in table.rows] == ["B"]
    assert [row.location_id for row in table.rejected] == ["A"]
    assert table.rejected[0].detected == ("U" not in written)


@pytest.mark.parametrize("written", [">", "≥", "> ", ">UL", "greater than"])
def test_a_result_above_its_number_is_refused_in_either_place(read: Reader, written: str) -> None:
    """An upper end that nobody knows has no mean, and 500 would be too low for it."""
    with pytest.raises(LabError, match="says that the result is above the number"):
        read(f"{HEAD},qualifier_lab\nA,lead,500,mg/kg,{written}\n")


@pytest.mark.parametrize(
    "written",
    ["J", "J+", "J-", "JB", "B", "D", "E", "H", "N", "NJ", "Q", "*", "^", "=", "J, B", ""],
)
def test_flags_change_nothing_and_are_not_noted(read: Reader, written: str) -> None:
    """An estimated or flagged result is still a result."""
    table = read(f'{HEAD},qualifier_lab\nA,lead,5,mg/kg,"{written}"\n')
    assert (table.rows[0].result, table.rows[0].qualifier_lab) == (5.0, written)
    assert table.notes == ()


@pytest.mark.parametrize("written", ["X", "K", "L", "T", "NQ", "R1", "7", "M3"])
def test_a_letter_that_laboratories_use_differently_is_named_in_a_note(
    read: Reader, written: str
) -> None:
    """K may say "less than" or "biased high"; whoever has the report can look."""
    table = read(f"{HEAD},qualifier_lab\nA,lead,5,mg/kg,{written}\nB,lead,6,mg/kg,{written}\n")
    assert [row.result for row in table.rows] == [5.0, 6.0]
    assert (
        f"the qualifier '{written}' is not known here and changed nothing: row 2 and 3"
        in (table.notes[0])
    )


@pytest.mark.parametrize(
    "written", ["trace", "LT", "< 2", "under limit", "not quantified", "exceeds range", "invalid"]
)
def test_unknown_words_of_limits_are_refused(read: Reader, written: str) -> None:
    """They may turn the number into a limit, and nobody here can tell."""
    with pytest.raises(LabError, match="may change what the number means"):
        read(f"{HEAD},qualifier_lab\nA,lead,5,mg/kg,{written}\n")


def test_no_other_letters_censor_or_reject() -> None:
    """All words of one, two and three letters: only U, ND, BDL and the like censor, only R rejects.

    R is taken with U or J beside it, and in REJ; R1 or NR are marks of another meaning.
    """
    letters = string.ascii_lowercase
    words = ["".join(w) for n in (1, 2, 3) for w in itertools.product(letters, repeat=n)]
    censored = {w for w in words if read_qualifier(w).not_detected}
    assert {w for w in censored if "u" not in w} == {"nd", "bdl", "bql", "brl"}
    assert all(set(w) <= set("ujbdehnqr") for w in censored if "u" in w)
    rejected = {w for w in words if read_qualifier(w).rejected}
    assert rejected == {"r", "ur", "ru", "jr", "rj", "rej"}


@pytest.mark.parametrize(
    ("title", "cell"),
    [("<", "<"), ("", "<"), ("", "U"), ("Sign", "<"), ("Flag", "U"), ("Lab qualifiers", "UJ"),
     ("Remark", "not detected"), ("Column 7", "ND"), ("Detected", "N"), ("detect_flag", "no"),
     ("Result text", "<5"), ("Qualifier", "R"), ("op", ">")],
)  # fmt: skip
def test_a_column_that_was_not_read_may_not_contradict_the_numbers(
    read: Reader, title: str, cell: str
) -> None:
    """A ``<`` of its own is common; left unread, 5 would count as measured."""
    content = f"{HEAD},{title}\nA,lead,7,mg/kg,\nB,lead,5,mg/kg,{cell}\n"
    with pytest.raises(LabError) as caught:
        read(content)
    (line,) = caught.value.problems
    assert f"is not read, but says '{cell}' beside '5' in row 3." in line
    assert ("write < into" in line) == (cell in {"N", "no", "<5"})
    if cell in {"<", "U", "UJ"} and title:
        (row,) = read(content, columns={"qualifier_lab": title}).rows[1:]
        assert (row.result, row.reporting_limit) == (None, 5.0)


@pytest.mark.parametrize(
    ("title", "cell"),
    [("Zone", "U"), ("Zone", "U1"), ("Type", "R"), ("Flag", "J"), ("Remark", "field blank next"),
     ("Detected", "Y"), ("MDL", "<2"), ("Detection limit", "0"), ("Nondetect", "no"), ("", "")],
)  # fmt: skip
def test_other_columns_are_none_of_our_business(read: Reader, title: str, cell: str) -> None:
    """Letters under a title of another kind say nothing of the result."""
    assert read(f"{HEAD},{title}\nA,lead,5,mg/kg,{cell}\n").rows[0].result == 5.0
